"""How long a search over several jumps takes, and how much memory.

    python tests/benchmarks/bench_several.py [--workers 2] [--only NAME]

Briefs made in code: four jumps at eight rates, a billion sets; five jumps of which four hang on one launch
speed; the billion with every jump stepped. Each runs in a process of its own, with its own peak of memory.
"""

from __future__ import annotations

import argparse
import resource
import subprocess
import sys
import time
from dataclasses import replace
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from designer.brief.model import Brief, Target
from designer.motion.rule import Rounding, Rule, Second
from designer.search.run import search
from designer.search.several.assign import build_several
from designer.search.several.scan import scan_several
from tests.reference.search_briefs import points
from tests.reference.several_games import EIGHT, One, among, billion, game, height
from tests.reference.several_games import time as lasts


def linked() -> Brief:
    """Return five jumps, four of which hang on walk's launch speed."""
    shared = {"gravity": points(1200.0, 2200.0, 10.0), "grain": among(0.0, 0.125, 1.0)}
    walk = {"launch_speed": points(450.0, 750.0, 5.0), "run_speed": among(300.0)}
    sprint = {"launch_speed": "walk", "run_speed": points(400.0, 700.0, 10.0)}
    armour = {
        "launch_speed": ("walk", points(0.7, 1.0, 0.02)),
        "gravity_factor": points(0.7, 1.0, 0.02),
    }
    high = (height(180.0, within=5.0), lasts(1.1, within=0.05))
    return game(
        Rule("semi-implicit", Rounding(at="end")),
        shared,
        EIGHT,
        One("walk", (height(120.0), lasts(0.76)), walk),
        One("sprint", (Target("max_gap", 10.0, aim=420.0),), sprint),
        One("armour", (height(96.0), lasts(0.74)), armour),
        One("double", high, {"launch_speed": "walk"}, second=Second(480.0)),
        One("hop", (height(84.0), lasts(0.66)), {"launch_speed": points(440.0, 680.0, 6.0)}),
    )


def stepped() -> Brief:
    """Return the billion under a carried remainder, which has no closed form."""
    brief = billion()
    return replace(brief, rule=Rule("semi-implicit", Rounding(carry=True)))


BRIEFS = {"a billion": billion, "linked": linked, "stepped": stepped}


def one(name: str, workers: int) -> None:
    brief = BRIEFS[name]()
    space = build_several(brief)
    start = time.perf_counter()
    found = scan_several(brief, space, workers=workers)
    scanned = time.perf_counter() - start
    start = time.perf_counter()
    result = search(brief, workers=workers)
    whole = time.perf_counter() - start
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
    cost = result.best.verdict.cost if result.best else float("nan")
    print(
        f"{name:<12} {space.size:>22,} {found.evaluated:>12,} {scanned:>10.2f} {whole:>10.2f} {peak:>9.0f} "
        f"{len(found.front):>6} {cost:>12.6f}",
        flush=True,
    )


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])  # type: ignore[union-attr]
    parser.add_argument("--workers", type=int, default=2)
    parser.add_argument("--only", choices=BRIEFS)
    options = parser.parse_args()
    if options.only:
        one(options.only, options.workers)
        return
    heads = f"{'scan, s':>10} {'search, s':>10} {'peak, MB':>9} {'front':>6} {'cost':>12}"
    print(f"{'brief':<12} {'sets':>22} {'measured':>12} {heads}", flush=True)
    for name in BRIEFS:
        command = [sys.executable, __file__, "--only", name, "--workers", str(options.workers)]
        subprocess.run(command, check=True)


if __name__ == "__main__":
    main()
