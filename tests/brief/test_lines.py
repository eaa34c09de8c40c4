"""Where keys stand: every key that tomllib finds has its line and its text."""

import tomllib
from collections.abc import Iterator
from decimal import Decimal

import pytest
from hypothesis import given
from hypothesis import strategies as st

from designer.brief.lines import Path, Places
from tests.reference.crate_yard import BASE

TRICKY = '''\
# a comment with = and [brackets]
title = "a # b = [c]"  # not the end
'single quoted' = 'C:\\path'
"dotted . key" = 1
a.b . "c" = { x = 1, y = [1, { z = "}" }], "k\\"ey" = "]" }   # after
long = """
several = lines
[table]""" # end
also = \'\'\'
x = 1\'\'\'\'\'
when = 2031-01-01 12:00:00
list = [
  1, # one
  [2, 3],

  "four",
]
empty = [ ]
none = { }

[ spaced . out ]
key=1
[[many]]
n = 1
[many.sub]
deep = true
[[many]]
n = 2
[[many.inner]]
q = -inf
[[many.inner]]
q = 0x1F
'''


def paths(value: object, at: Path = ()) -> Iterator[tuple[Path, object]]:
    """Yield every key and list element below a value."""
    items = value.items() if isinstance(value, dict) else enumerate(value) if isinstance(value, list) else ()
    for key, inner in items:
        yield (*at, key), inner
        yield from paths(inner, (*at, key))


@pytest.mark.parametrize("text", [BASE, TRICKY, "", "a = 1"])
def test_every_key_of_tomllib_has_a_spot(text: str) -> None:
    raw = tomllib.loads(text)
    assert set(Places(text).spots) == {path for path, _ in paths(raw)}


@pytest.mark.parametrize("text", [BASE, TRICKY])
def test_a_spot_holds_the_value_as_written(text: str) -> None:
    places = Places(text)
    lines = text.split("\n")
    for path, value in paths(tomllib.loads(text)):
        spot = places.find(path)
        assert spot is not None
        if spot.text and path[-1] != "when":
            assert tomllib.loads(f"x = {spot.text}")["x"] == value
            assert spot.text.split("\n")[0] in lines[spot.line - 1]


def test_lines_of_a_few() -> None:
    places = Places(TRICKY)
    lines = TRICKY.split("\n")
    expected: dict[Path, str] = {
        ("list", 2): '"four"',
        ("many", 1): "[[many]]",
        ("many", 1, "inner", 1, "q"): "0x1F",
        ("spaced", "out", "key"): "key=1",
        ("a", "b", "c", "y", 1, "z"): "a.b",
    }
    for path, marker in expected.items():
        spot = places.find(path)
        assert spot is not None
        assert marker in lines[spot.line - 1]
    assert places.find(("nowhere",)) is None
    nearest = places.nearest(("many", 0, "missing"))
    assert nearest is not None
    assert lines[nearest.line - 1] == "[[many]]"


NAMES = st.text("abcxyz-_", min_size=1, max_size=4)
SCALARS = st.one_of(
    st.integers(-99, 99).map(str),
    st.booleans().map(lambda b: str(b).lower()),
    st.sampled_from(["1.5", '"]"', "'#'"]),
)


def _inline(values: st.SearchStrategy[str]) -> st.SearchStrategy[str]:
    lists = st.lists(values, max_size=3).map(lambda items: f"[{', '.join(items)}]")
    tables = st.dictionaries(NAMES, values, max_size=3).map(
        lambda items: "{ " + ", ".join(f"{key} = {value}" for key, value in items.items()) + " }"
    )
    return st.one_of(lists, tables)


@given(
    st.dictionaries(
        NAMES, st.dictionaries(NAMES, st.recursive(SCALARS, _inline, max_leaves=6), max_size=4), max_size=4
    )
)
def test_generated_documents(tables: dict[str, dict[str, str]]) -> None:
    text = "\n\n".join(
        f"[{name}]  # {name}\n" + "\n".join(f"{key} = {value}" for key, value in table.items())
        for name, table in tables.items()
    )
    raw = tomllib.loads(text, parse_float=Decimal)
    assert set(Places(text).spots) == {path for path, _ in paths(raw)}
