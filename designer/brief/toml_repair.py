"""What a line that is no TOML was meant to say: a lenient reader that writes it out again as TOML."""

from __future__ import annotations

import re
import tomllib
from decimal import Decimal
from fractions import Fraction

from designer.brief.keys import LISTS, TABLES, as_target
from designer.brief.units import plain

QUOTES = "text stands in straight quotation marks"
UNIT = "a number with a unit stands in quotation marks"
COMMA = "decimals have a point, not a comma"

_TYPOGRAPHY = str.maketrans(
    dict.fromkeys("“”„‟«»″", '"') | dict.fromkeys("‘’‚′", "'") | {"−": "-", "\u00a0": " ", "\u202f": " "}
)
_TRUE, _FALSE = ("true", "yes", "on", "ja"), ("false", "no", "off", "nein")
_NUMBER = r"[+-]?(?:\d+(?:\.\d*)?|\.\d+)"
_KEY = re.compile(r"""\s*("[^"]*"|'[^']*'|[^\W\d][\w.-]*)\s*(:=|==|=>|->|=|:|(?=[\s"'\[{(]))\s*""")
_SPACED_KEY = re.compile(r"\s*([^\W\d]\w*(?: \w+)+)\s*(:=|==|=)\s*")


class Hopeless(ValueError):  # noqa: N818 (what the line is)
    """A line whose meaning cannot be told; says what is allowed, and what to do."""

    def __init__(self, allowed: str, fix: str) -> None:
        super().__init__(allowed)
        self.allowed = allowed
        self.fix = fix


def is_toml(text: str) -> bool:
    """Return whether tomllib accepts a text."""
    try:
        tomllib.loads(text)
    except (ValueError, RecursionError):
        return False
    return True


def split_comment(line: str) -> tuple[str, str]:
    """Return a line without its comment, and the comment with its # ("" where there is none)."""
    mark = ""
    for at, sign in enumerate(line):
        if mark:
            mark = "" if sign == mark and line[at - 1] != "\\" else mark
        elif sign in "\"'" and line.count(sign, at) > 1:
            mark = sign
        elif sign == "#":
            return line[:at], line[at:].strip()
    return line, ""


class Repair:
    """One statement put right: `line` is TOML, `words` say what had to be changed."""

    def __init__(self, text: str, length_unit: str, table: str) -> None:
        self.words: list[str] = []
        self._unit = length_unit
        self._section = table
        self._key = ""
        lines = text.split("\n")
        body, comments = self._joined(lines)
        self._all = body
        self._text = body
        self._at = 0
        statement = self._statement()
        self.corrected = statement or comments
        """The line put right, without its comment."""
        self.line = f"{statement} {comments}".strip()
        if not self.words or not is_toml(self.line):
            raise Hopeless(
                "one key = value a line, text in quotation marks, tables as [name] alone on a line",
                f"write the line as TOML, or put # before it; close to it would be: {self.line[:80]}",
            )

    def say(self, words: str) -> None:
        """Note what had to be changed, once."""
        if words not in self.words:
            self.words.append(words)

    def _joined(self, lines: list[str]) -> tuple[str, str]:
        """Return the statement on one line without comments, and its comments."""
        bodies: list[str] = []
        comments: list[str] = []
        for raw in lines:
            line = raw.translate(_TYPOGRAPHY)
            if line != raw and split_comment(raw)[0] != split_comment(line)[0]:
                self.say("quotation marks, minus signs and spaces are the plain ones of the keyboard")
            body, comment = split_comment(line)
            slashes = re.search(
                r"(?<!:)//|/\*|^\s*;", re.sub(r"\"[^\"]*\"|'[^']*'", lambda m: "x" * len(m[0]), body)
            )
            if slashes:
                self.say("comments begin with #")
                comment = (
                    "# " + (body[slashes.start() :].strip().strip("/*;").strip() + f" {comment}").strip()
                )
                body = body[: slashes.start()]
            if body.strip():
                if bodies and bodies[-1][-1] not in ",{[(=" and body.strip()[0] not in ",}])":
                    bodies[-1] += ","
                bodies.append(body.strip())
            comments += [comment] if comment else []
        if len(bodies) > 1 and "{" in "".join(bodies):
            self.say("a table in braces { … } stands on one line")
        return " ".join(bodies), " ".join(comments)

    def _statement(self) -> str:
        text = self._text.strip()
        if not text:
            return ""
        if text[0] == "[" or text.rstrip(":") in TABLES + LISTS:
            return self._header(text)
        key, self._at = self._read_key(0)
        self._key = key
        if self._text[self._at :].strip().startswith(("=", ":")):
            raise Hopeless("one equals sign between key and value", f"write {key} = and the value")
        value = self._value("")
        if self._section == "targets" and value[0] not in "{[":
            self.say("a target is a wish with its tolerance")
            value = as_target(value.strip("\"'"))
        rest = self._text[self._at :].strip()
        if rest.strip(";,."):
            self.say("nothing but a comment stands after a value")
            return f"{key} = {value}  # {rest.strip(';, ')}"
        if rest:
            self.say("a line ends with its value, without a semicolon or comma")
        return f"{key} = {value}"

    def _header(self, text: str) -> str:
        match = re.fullmatch(r"(\[*)\s*([\w.\- ]+?)\s*(\]*)\s*[:;,]?", text)
        if match is None:
            after = re.fullmatch(r"(\[+[\w.\- ]+\]+)\s*(\S.*)", text)
            if after:
                raise Hopeless(
                    "a table's name alone on its line", f"write {after[1]}, and {after[2]} on the next line"
                )
            raise Hopeless(
                "a table's name in square brackets, as in [search]", "write the name of the table alone"
            )
        name = match[2]
        double = name in LISTS or len(match[1]) > 1
        self.say(
            f"a table's name stands {'in double square brackets' if double else 'in square brackets'}, alone"
        )
        return f"[[{name}]]" if double else f"[{name}]"

    def _read_key(self, start: int) -> tuple[str, int]:
        """Return the key at a position as TOML, and where its value begins."""
        spaced = _SPACED_KEY.match(self._text, start)
        match = _KEY.match(self._text, start)
        if spaced is not None and (match is None or match[2] != "="):
            self.say("a key is one word, with _ instead of spaces")
            return spaced[1].replace(" ", "_"), spaced.end()
        if match is None:
            raise Hopeless("a key, an equals sign and a value", "write the line as key = value")
        key = match[1]
        if match[2] != "=":
            between = f"not {match[2]}" if match[2] else "which is missing"
            self.say(f"one equals sign stands between key and value, {between}")
        if key[0] not in "\"'" and not key.replace(".", "").isascii():
            self.say("keys of a brief are written in plain letters")
            key = f'"{key}"'
        return key, match.end()

    def _skip(self) -> str:
        """Go past spaces; return the next sign, "" at the end."""
        while self._at < len(self._text) and self._text[self._at].isspace():
            self._at += 1
        return self._text[self._at] if self._at < len(self._text) else ""

    def _value(self, closers: str) -> str:
        sign = self._skip()
        if sign and sign in "\"'":
            return self._string(sign, closers)
        if sign and sign in "[(":
            return self._list("]" if sign == "[" else ")")
        if sign == "{":
            return self._table()
        return self._atom(closers)

    def _string(self, mark: str, closers: str) -> str:
        start = self._at
        while self._text.startswith(mark, self._at):
            self._at += 1
        if self._at - start == 2:
            return '""'
        inside = self._at
        end = self._text.find(mark, inside)
        if end < 0:
            self.say("text ends with the quotation mark that it began with")
            stop = re.compile(f"[{re.escape(closers)}]" if closers else r"$").search(self._text, inside)
            self._at = stop.start() if stop else len(self._text)
            return _quoted(self._text[inside : self._at].rstrip(" ;'\""))
        self._at = end
        while self._text.startswith(mark, self._at):
            self._at += 1
        text = self._text[inside:end]
        if is_toml(f"x = {mark}{text}{mark}"):
            return f"{mark}{text}{mark}"
        self.say("a backslash is written twice, or the text stands in single quotation marks")
        return _quoted(text)

    def _list(self, closer: str) -> str:
        self._at += 1
        if closer == ")":
            self.say("lists stand in square brackets")
        items: list[str] = []
        while True:
            sign = self._skip()
            if sign in ("", closer):
                if not sign:
                    self.say("a list ends with ]")
                self._at += 1
                return f"[{', '.join(items)}]"
            if sign in ",;":
                self._at += 1
            elif sign == "}":
                raise Hopeless("brackets that match", "close [ with ] and { with }")
            else:
                items.append(self._value(",;" + closer))

    def _table(self) -> str:
        self._at += 1
        pairs: list[str] = []
        separated = True
        while True:
            sign = self._skip()
            if sign in ("", "}"):
                if not sign:
                    self.say("a table in braces ends with }")
                self._at += 1
                if not separated or not pairs:
                    return f"{{ {', '.join(pairs)} }}"
                self.say("no comma stands before the closing brace")
                return f"{{ {', '.join(pairs)} }}"
            if sign in ",;":
                self._at += 1
                separated = True
                if sign == ";":
                    self.say("commas separate the keys of a table in braces")
                continue
            if not separated:
                self.say("commas separate the keys of a table in braces")
            self._key, self._at = self._read_key(self._at)
            pairs.append(f"{self._key} = {self._value(',;}')}")
            separated = False

    def _atom(self, closers: str) -> str:
        """Return a bare value as TOML; inside brackets it ends at the next of the closers."""
        end = re.compile(f"[{re.escape(closers)}]" if closers else r"[;]|,\s*$").search(self._text, self._at)
        stop = end.start() if end else len(self._text)
        if "}" in closers:
            comma = re.compile(r"[+-]?\d+,\d+(?=\s*([,;}%]|$|[A-Za-z]))").match(self._text, self._at)
            following = re.compile(r"\s+[\w]+\s*[=:]").search(self._text, self._at, stop)
            if comma:
                stop = max(stop, comma.end())
                more = re.compile(r"[,;}]").search(self._text, comma.end())
                stop = more.start() if more else len(self._text)
            elif following:
                stop = following.start()
        atom = self._text[self._at : stop].strip()
        self._at = stop
        if not atom:
            raise Hopeless("a value after the equals sign", f"write {self._key} = and the value")
        return self._mended(atom)

    def _mended(self, atom: str) -> str:
        if is_toml(f"x = {atom}"):
            return atom
        lower = atom.lower()
        if lower in _TRUE + _FALSE:
            self.say("yes and no are written true and false, in small letters")
            return "true" if lower in _TRUE else "false"
        if lower in ("none", "null", "nil"):
            self.say(QUOTES)
            return '"none"'
        if lower.strip("+-") in ("infinity", "inf", "nan"):
            raise Hopeless("an ordinary number", "write a number; inf and nan have no use in a brief")
        for mend in (self._wish, self._range, self._decimal_comma, self._odd_number, self._with_unit):
            mended = mend(atom)
            if mended:
                return mended
        if not re.match(r"[^\W\d]", atom) or "=" in atom:
            raise Hopeless(
                "a number, text in quotation marks, true or false, a list or a table", "write one of these"
            )
        self.say(QUOTES)
        return _quoted(atom)

    def _wish(self, atom: str) -> str:
        match = re.fullmatch(rf"({_NUMBER})\s*(?:±|\+/?-)\s*({_NUMBER})", atom)
        if match is None:
            return ""
        self.say("a wish and its tolerance are written as aim and within")
        return f"{{ aim = {match[1]}, within = {match[2]} }}"

    def _range(self, atom: str) -> str:
        found = re.fullmatch(
            rf"(\d+(?:\.\d+)?)\s*(?:\.\.+|–|to|bis|-)\s*(\d+(?:\.\d+)?)(?:\s*(?:by|step)\s*({_NUMBER}))?",
            atom,
        )
        if found is None:
            return ""
        self.say("a range is written with from, to and every")
        by = f", every = {found[3]}" if found[3] else ""
        return f"{{ from = {found[1]}, to = {found[2]}{by} }}"

    def _decimal_comma(self, atom: str) -> str:
        match = re.fullmatch(r"([+-]?)(\d+),(\d+)(\D*)", atom)
        if match is None:
            return ""
        sign, whole, part, rest = match.groups()
        if len(part) == 3 and whole != "0" and len(whole) <= 3:
            self.say(f"a number has no comma: {whole}{part} (or, as a decimal, {whole}.{part})")
            return f"{sign}{whole}{part}" if not rest.strip() else self._mended(f"{sign}{whole}{part}{rest}")
        self.say(COMMA)
        return self._mended(f"{sign}{whole}.{part}{rest}")

    def _odd_number(self, atom: str) -> str:
        """Mend .5, 5., 007, 1 600, 1'600 and 1/60."""
        if re.fullmatch(r"[+-]?\d{1,3}(?:[ '’]\d{3})+", atom):
            self.say("a number is written without spaces or marks between its figures")
            return re.sub(r"[ '’]", "", atom)
        ratio = re.fullmatch(r"(\d+)\s*/\s*(\d+)", atom)
        if ratio and int(ratio[2]):
            self.say("a value is a number, not a calculation")
            if ratio[1] == "1" and self._key in ("step", "aim_at", "from", "to"):
                return f'"{ratio[2]} Hz"'
            return plain(Fraction(int(ratio[1]), int(ratio[2])))
        if re.fullmatch(_NUMBER, atom):
            self.say("a number has figures before and after its point, and no zeros in front")
            return format(Decimal(atom), "f")
        return ""

    def _with_unit(self, atom: str) -> str:
        match = re.fullmatch(rf"({_NUMBER})\s*([^\d\s,;:=\"'\[\]{{}}][^,;:=\"'\[\]{{}}]*)", atom)
        if match is None:
            return ""
        figures, unit = match[1], match[2].strip()
        figures = figures if is_toml(f"x = {figures}") else format(Decimal(figures), "f")
        if unit == "%":
            return self._percent(figures)
        if unit in ("s", "sec", "seconds") and self._key not in ("step", "aim_at"):
            self.say("times are in seconds: the number stands without its unit")
            return figures
        own = self._unit and re.fullmatch(rf"{re.escape(self._unit)}\s*(/\s*s\s*(\^?2|²|/\s*s)?)?", unit)
        if own:
            self.say(f"lengths are in {self._unit} already: the number stands without its unit")
            return figures
        self.say(UNIT)
        unit = {"hz": "Hz", "fps": "Hz", "msec": "ms"}.get(unit.lower(), unit)
        return f'"{figures} {unit}"'

    def _percent(self, figures: str) -> str:
        self.say("a percent sign is not known: write the number in the measure's own unit")
        wish = re.search(rf"(?:aim|at_least|at_most)\s*[=:]+\s*({_NUMBER})", self._all)
        whole = Fraction(Decimal(wish[1])) if wish and self._key == "within" else Fraction(1)
        return plain(Fraction(Decimal(figures)) / 100 * whole)


def _quoted(text: str) -> str:
    """Return a text as a TOML string."""
    if "\\" not in text and '"' not in text:
        return f'"{text}"'
    if "'" not in text:
        return f"'{text}'"
    return '"' + text.replace("\\", "\\\\").replace('"', '\\"') + '"'
