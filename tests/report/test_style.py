"""The palette: kept apart for colour-blind eyes, in grey print, and by a second cue."""

from __future__ import annotations

import itertools

import numpy as np
import pytest

from designer.report import style

# Machado, Oliveira & Fernandes, IEEE Trans. Vis. Comput. Graph. 15(6), 2009, severity 1.0, on linear RGB.
VISION = {
    "normal": np.eye(3),
    "protan": np.array(
        [
            [0.152286, 1.052583, -0.204868],
            [0.114503, 0.786281, 0.099216],
            [-0.003882, -0.048116, 1.051998],
        ]
    ),
    "deutan": np.array(
        [
            [0.367322, 0.860646, -0.227968],
            [0.280085, 0.672501, 0.047413],
            [-0.011820, 0.042940, 0.968881],
        ]
    ),
    "tritan": np.array(
        [
            [1.255528, -0.076749, -0.178779],
            [-0.078411, 0.930809, 0.147602],
            [0.004733, 0.691367, 0.303900],
        ]
    ),
}
# sRGB to CIE XYZ (D65): IEC 61966-2-1.
TO_XYZ = np.array(
    [[0.4124564, 0.3575761, 0.1804375], [0.2126729, 0.7151522, 0.0721750], [0.0193339, 0.1191920, 0.9503041]]
)
WHITE = np.array([0.95047, 1.0, 1.08883])
EVERY = [look.colour for look in style.CANDIDATE_LOOKS] + [style.TODAY]


def linear(colour: str) -> np.ndarray:
    c = np.array([int(colour[i : i + 2], 16) / 255 for i in (1, 3, 5)])
    return np.where(c <= 0.04045, c / 12.92, ((c + 0.055) / 1.055) ** 2.4)


def lab(rgb: np.ndarray) -> np.ndarray:
    """CIE 1976 L*a*b* of linear RGB."""
    x = TO_XYZ @ rgb / WHITE
    f = np.where(x > (6 / 29) ** 3, np.cbrt(x), x / (3 * (6 / 29) ** 2) + 4 / 29)
    return np.array([116 * f[1] - 16, 500 * (f[0] - f[1]), 200 * (f[1] - f[2])])


def seen(colour: str, vision: str) -> np.ndarray:
    return lab(np.clip(VISION[vision] @ linear(colour), 0.0, 1.0))


def contrast(colour: str, paper: str = style.PAPER) -> float:
    """WCAG 2 contrast ratio."""
    light, dark = sorted((float((TO_XYZ @ linear(c))[1]) for c in (colour, paper)), reverse=True)
    return (light + 0.05) / (dark + 0.05)


def test_the_reference_itself() -> None:
    assert contrast("#000000") == pytest.approx(21.0, abs=0.01)
    assert lab(linear("#ffffff")) == pytest.approx([100.0, 0.0, 0.0], abs=0.02)
    # Red and green, far apart to most eyes, come near each other in deutan sight.
    apart = np.linalg.norm(seen("#cc4040", "normal") - seen("#808000", "normal"))
    assert np.linalg.norm(seen("#cc4040", "deutan") - seen("#808000", "deutan")) < apart / 1.5


@pytest.mark.parametrize("vision", VISION)
def test_every_two_colours_differ_in_every_vision(vision: str) -> None:
    for one, other in itertools.combinations(EVERY, 2):
        assert np.linalg.norm(seen(one, vision) - seen(other, vision)) > 20.0, (one, other)


def test_grey_print_keeps_them_apart() -> None:
    lightness = sorted(seen(colour, "normal")[0] for colour in EVERY)
    assert min(b - a for a, b in itertools.pairwise(lightness)) > 5.0


def test_lines_and_text_stand_out_from_paper() -> None:
    for look in style.CANDIDATE_LOOKS:
        # Non-text contrast of WCAG 2.2 (1.4.11) is 3 : 1; text (1.4.3) 4.5 : 1.
        assert contrast(look.colour) > 2.8
        assert contrast(look.text_colour) > 4.5
    for colour in (style.INK, style.QUIET, style.TODAY_TEXT, style.BREACH_TEXT):
        assert contrast(colour) > 4.5


def test_dash_and_marker_tell_them_apart_without_colour() -> None:
    looks = [style.TODAY_LOOK, *style.CANDIDATE_LOOKS]
    assert len({look.marker for look in looks}) == len(looks)
    assert len({str(look.dash) for look in style.CANDIDATE_LOOKS}) == len(style.CANDIDATE_LOOKS)


def test_long_names_are_cut() -> None:
    assert style.shorten("x" * 30) == "x" * 30
    assert style.shorten("x" * 31) == "x" * 29 + "…"
    assert style.shorten("two\nlines ") == "two lines"
