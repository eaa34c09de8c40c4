"""Worked examples of free flight from two open textbooks, as numbers.

Sources: OpenStax, University Physics volume 1 ("UP") and College Physics 2e ("CP"); g = 9.80 m/s² unless
said. `printed` is what the book prints, read in the stored public text of the books; the other numbers are
the same quantities computed to full precision, good to 1e-6. Where the book chains rounded intermediates,
the last printed figure may differ: the full number is the check. Lengths in metres, times in seconds.
"""

from __future__ import annotations

import math
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Example:
    """One flight from height 0; what the source does not give is None."""

    source: str
    printed: str
    launch_speed: float
    gravity: float = 9.80
    level: float = 0.0
    apex: float | None = None
    rise_time: float | None = None
    airtime: float | None = None
    landing_velocity: float | None = None
    run_speed: float = 0.0
    distance: float | None = None
    """Horizontal, over the airtime."""


def _up(speed: float, degrees: float) -> float:
    return speed * math.sin(math.radians(degrees))


def _along(speed: float, degrees: float) -> float:
    return speed * math.cos(math.radians(degrees))


EXAMPLES = (
    Example(
        "UP 3.5, thrown down at 4.9 from 98 m",
        "4.0 s; -44.1 m/s",
        -4.9,
        level=-98.0,
        apex=0.0,
        airtime=4.0,
        landing_velocity=-44.1,
    ),
    Example(
        "UP 3.5, ball caught after 5.0 s",
        "24.5 m/s; 30.6 m; 2.5 s",
        24.5,
        apex=30.625,
        rise_time=2.5,
        airtime=5.0,
        landing_velocity=-24.5,
    ),
    Example("UP 3.5, dropped 30.0 m", "2.47 s", 0.0, level=-30.0, apex=0.0, airtime=2.474358),
    Example(
        "UP 3.5, booster up at 200 m/s, at 1000 m",
        "2040.8 m; 142.8 m/s",
        200.0,
        level=1000.0,
        apex=2040.816327,
        landing_velocity=-142.828569,
    ),
    Example(
        "UP 3.5, diver",
        "0.82 m; 7.16 m/s",
        4.0,
        level=-1.80,
        apex=0.816327,
        airtime=1.138878,
        landing_velocity=-7.161006,
    ),
    Example("UP 3.5, clears 2.50 m", "7.0 m/s", 7.0, apex=2.5, airtime=1.428571),
    Example("UP 3.5, from 2.20 m down to 1.80 m", "2.28 s", 11.0, level=1.80 - 2.20, airtime=2.280691),
    Example(
        "UP 4.3, 70.0 m/s at 75.0 degrees",
        "67.6 m/s; 233 m; 6.90 s",
        _up(70.0, 75.0),
        apex=233.253175,
        rise_time=6.899470,
    ),
    Example(
        "UP 4.3, thrown level, drop 100.0 m", "vy 44.3 m/s", 0.0, level=-100.0, landing_velocity=-44.271887
    ),
    Example(
        "UP 4.3, 30 m/s at 45 degrees, lands 10 m higher",
        "3.79 s; -15.9 m/s",
        _up(30.0, 45.0),
        level=10.0,
        airtime=3.790876,
        landing_velocity=-15.937377,
    ),
    Example(
        "UP 4.3, range 90 m at 30 degrees",
        "31.9 m/s",
        _up(31.913099, 30.0),
        run_speed=_along(31.913099, 30.0),
        distance=90.0,
    ),
    Example(
        "UP 4.3, range 90 m at 70 degrees",
        "37.0 m/s",
        _up(37.042522, 70.0),
        run_speed=_along(37.042522, 70.0),
        distance=90.0,
    ),
    Example(
        "UP 4.3, 15 m/s at 45 degrees, g 3.7",
        "60.8 m",
        _up(15.0, 45.0),
        gravity=3.7,
        run_speed=_along(15.0, 45.0),
        distance=60.810811,
    ),
    Example(
        "UP 4.3, 15 m/s at 45 degrees, g 9.8/6",
        "137.8 m",
        _up(15.0, 45.0),
        gravity=9.8 / 6.0,
        run_speed=_along(15.0, 45.0),
        distance=137.755102,
    ),
    Example("CP 2.7, 1.0000 m in 0.45173 s", "g 9.8010", 0.0, gravity=9.801039, level=-1.0, airtime=0.45173),
    Example("CP 2.7, up at 13.0 m/s", "8.62 m; 2.65 s", 13.0, apex=8.622449, airtime=2.653061),
    Example(
        "CP 2.7, up at 10 m/s from 300 m",
        "305 m; 8.91 s",
        10.0,
        level=-300.0,
        apex=305.102041 - 300.0,
        airtime=8.911271,
    ),
    Example(
        "CP 3.4, 25.0 m/s at 35.0 degrees, lands 20.0 m lower",
        "3.96 s",
        _up(25.0, 35.0),
        level=-20.0,
        airtime=3.957720,
    ),
    Example(
        "CP 3.4, 24.77 m from 2.10 m up at 38.0 degrees",
        "15.0 m/s",
        _up(15.022891, 38.0),
        level=-2.10,
        run_speed=_along(15.022891, 38.0),
        distance=24.77,
    ),
)

HEIGHTS = ((1.0, 8.10), (2.0, 6.40), (3.0, -5.10))
"""CP 2.7: time and height of what is thrown up at 13.0 m/s; printed, and exact."""
