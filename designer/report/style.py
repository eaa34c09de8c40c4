"""The one place for colours, dashes, markers, fonts and sizes of every picture.

The six candidate colours were found by a random search that maximises the smallest distance (CIE 1976
L*a*b*) between any two of them and today's grey, seen normally and through the protan, deutan and tritan
matrices of Machado, Oliveira & Fernandes (IEEE Trans. Vis. Comput. Graph. 15(6), 2009), with lightness held
to steps of about 8 so that grey print keeps them apart. A test repeats that measurement. Every
colour comes with a dash and a marker as the second cue.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

INK = "#1b1b1f"
"""Text and axes."""
QUIET = "#5c5c66"
"""Secondary text; contrast with white above 6 : 1."""
FAINT = "#e3e3e8"
"""Grid lines."""
PAPER = "#ffffff"
TODAY = "#b4b4b8"
"""The set in the build now: a light, wide line under the others."""
TODAY_TEXT = "#6a6a70"
SOLID = "#3d3d45"
"""Ground and things to be reached."""
BREACH = "#f2b632"
"""Where a demand is broken; always with hatching as the second cue."""
BREACH_TEXT = "#7a4f00"
OUTSIDE = "#f6f6f8"
"""Rates beyond the supported ones."""
GOOD = "#eef3ee"
"""The region where everything is within tolerance."""

LEDGE_DASH = {"reach": (0, (1, 0)), "cross": (0, (1, 0)), "stay-out": (0, (6, 2.5))}
"""Must-make features are solid lines, stay-out features dashed ones."""

PALE = 0.35
"""Opacity of what is shown but does not count."""
HATCH = "//////"

SIZE_WIDE = (9.6, 5.4)
"""Inches, 16 : 9."""
DPI = 200
"""Twice the usual 100, so that a projector or a print stays sharp."""

FONT = 10.5
FONT_SMALL = 9.0
FONT_TITLE = 13.0
FONT_PANEL = 11.0
LABEL_WIDTH = 30
"""Characters after which a name is cut in a picture."""
TITLE_WIDTH = 76
"""Characters after which a title breaks."""
FOOT_WIDTH = 124
"""Characters after which a remark under a picture breaks."""
HEAD_WIDTH = 15
"""Characters that fit over one narrow panel of a row of them."""
TITLE_WIDTH_SMALL = 52
"""The same over one panel among several."""


@dataclass(frozen=True, slots=True)
class Look:
    """How one set of constants is drawn."""

    colour: str
    text_colour: str
    dash: tuple[float, tuple[float, ...]] | str
    marker: str
    width: float


TODAY_LOOK = Look(TODAY, TODAY_TEXT, "solid", "D", 3.6)

CANDIDATE_LOOKS = (
    Look("#2e1b89", "#2e1b89", "solid", "o", 2.2),
    Look("#f81008", "#d30c06", (0, (7, 2)), "s", 2.0),
    Look("#1a9ede", "#0f76a8", (0, (3.5, 1.4)), "^", 2.0),
    Look("#8d062e", "#8d062e", (0, (9, 2, 2, 2)), "v", 2.0),
    Look("#8c23fa", "#8c23fa", (0, (1.4, 1.2)), "P", 2.0),
    Look("#803c75", "#803c75", (0, (5, 1.5, 1.2, 1.5, 1.2, 1.5)), "X", 2.0),
)

BROUGHT_LOOKS = (
    Look("#5c5c66", "#5c5c66", (0, (4, 1.2, 1.2, 1.2)), "<", 1.8),
    Look("#3d3d45", "#3d3d45", (0, (2, 2)), ">", 1.8),
    Look("#77777f", "#65656d", (0, (10, 3)), "h", 1.8),
)
"""Sets that people bring ([[sets]]): greys, since only proposals have a colour."""

RC: dict[Any, Any] = {
    "font.family": ["DejaVu Sans"],
    "font.size": FONT,
    "text.color": INK,
    "text.parse_math": False,
    "axes.edgecolor": QUIET,
    "axes.labelcolor": INK,
    "axes.titlesize": FONT_TITLE,
    "axes.titleweight": "bold",
    "axes.titlelocation": "left",
    "axes.titlepad": 12.0,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "axes.axisbelow": True,
    "axes.unicode_minus": True,
    "axes.formatter.use_mathtext": False,
    "xtick.color": QUIET,
    "ytick.color": QUIET,
    "xtick.labelcolor": INK,
    "ytick.labelcolor": INK,
    "hatch.linewidth": 0.8,
    "hatch.color": BREACH_TEXT,
    "figure.facecolor": PAPER,
    "savefig.facecolor": PAPER,
    "figure.dpi": 100,
    "svg.hashsalt": "leapwright",
    "svg.fonttype": "path",
    "path.simplify": False,
}
"""Matplotlib settings for every picture; used through rc_context, so nobody else's settings change."""


def candidate_look(index: int) -> Look:
    """Return how the candidate of the shortlist with this index (0 for A) is drawn."""
    return CANDIDATE_LOOKS[index % len(CANDIDATE_LOOKS)]


def brought_look(index: int) -> Look:
    """Return how a set that somebody brought is drawn."""
    return BROUGHT_LOOKS[index % len(BROUGHT_LOOKS)]


def shorten(name: str, width: int = LABEL_WIDTH) -> str:
    """Return a name that fits a label, cut with an ellipsis where it is longer."""
    clean = " ".join(name.split())
    return clean if len(clean) <= width else clean[: width - 1].rstrip() + "…"


TERMINAL = {"off": "bold red", "quiet": "dim", "head": "bold", "best": "bold cyan"}
"""Styles of text on a terminal; never the only cue: what is off also has a "!"."""
