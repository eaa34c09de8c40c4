"""Invented briefs, verdicts and results for tests of what is shown: consistent, and nobody's game."""

from __future__ import annotations

from dataclasses import replace

from designer.brief.model import (
    Brief,
    Choice,
    Gap,
    JumpBrief,
    Ledge,
    Loop,
    NamedSet,
    Rate,
    Rates,
    Target,
)
from designer.motion.measures import MEASURES
from designer.motion.rule import Constants, FrameTime, Integrator, LandingTest, Rule
from designer.objective.verdict import FeatureVerdict, JumpVerdict, RateRow, TargetVerdict, Verdict, Worst
from designer.search.result import Candidate, Certificate, Clash, RunnerUp, SearchResult

RATES = (60, 72, 90, 120, 144, 240)
TODAY = Constants(gravity=1600, launch_speed=620, grain=1, run_speed=540)
LONG = "the very long name of a ledger"  # 30 characters


def rates(hz: tuple[int, ...] = RATES, watched: tuple[int, ...] = (500,)) -> Rates:
    def rate(value: int, supported: bool) -> Rate:
        return Rate(f"{value} Hz", (1000 // value) / 1000, supported)

    return Rates(tuple(rate(v, True) for v in hz), tuple(rate(v, False) for v in watched))


def courier(**changes: object) -> Brief:
    """The rooftop courier of the sample briefs, as plain values."""
    supported = rates()
    brief = Brief(
        name="night-market-courier",
        title="Night-market courier",
        length_unit="cm",
        loop=Loop.EACH_FRAME,
        rule=Rule(Integrator.SEMI_IMPLICIT, frame_time=FrameTime.WHOLE_MS_DOWN),
        rates=supported,
        aim_at=supported.supported[0],
        today=TODAY,
        search={
            "gravity": Choice(tuple(float(g) for g in range(800, 3201, 10)), text="800 to 3200 by 10"),
            "launch_speed": Choice(tuple(float(v) for v in range(300, 1001, 5)), text="300 to 1000 by 5"),
            "grain": Choice((0.0, 0.125, 1.0), text="0, 0.125 or 1"),
            "run_speed": Choice((540.0,), text="540"),
            "fall_factor": Choice((1.0,), text="1"),
            "terminal_speed": Choice((float("inf"),), text="none"),
        },
        base=TODAY,
        jumps=(
            JumpBrief(
                targets=(
                    Target("apex", 2.0, aim=120.0),
                    Target("airtime", 0.02, aim=0.76),
                    Target("max_gap", 10.0, at_least=400.0),
                )
            ),
        ),
        ledges=(
            Ledge("awning", 110.0, "reach", margin=2.0),
            Ledge("billboard", 124.0, "stay-out", margin=1.0),
        ),
        gaps=(Gap("alley", 380.0, "cross", far_level=-40.0, margin=5.0),),
    )
    return replace(brief, **changes)  # type: ignore[arg-type]


def row(brief: Brief, constants: Constants, rate: Rate, wobble: float) -> RateRow:
    """One rate by the continuous formulas of a throw, a little off so that rates differ."""
    apex = constants.launch_speed**2 / (2 * constants.gravity) + wobble
    airtime = 2 * constants.launch_speed / constants.gravity + wobble / 1000
    reach = constants.run_speed * airtime
    values: dict[str, float | None] = dict.fromkeys(MEASURES, 0.0) | {
        "apex": apex,
        "apex_time": airtime / 2,
        "airtime": airtime,
        "landing_speed": constants.launch_speed,
        "max_gap": reach,
        "sure_gap": max(0.0, reach - constants.run_speed * rate.step),
        "step_top": apex,
        "steps": float(round(airtime / rate.step)),
        "effective_gravity": constants.gravity,
        "flip_margin": 4.5 if constants.grain else None,
    }
    return RateRow(rate.name, rate.step, rate.supported, "lands", values)


def verdict(
    brief: Brief,
    constants: Constants,
    mark: str = "k3f9",
    ledge_spares: tuple[float, ...] = (3.2, 0.4),
    failing: tuple[tuple[str, ...], ...] = ((), ()),
) -> Verdict:
    """A verdict whose parts agree: deviations from the rows, spares and failing bands as given."""
    supported = [row(brief, constants, rate, 0.1 * i) for i, rate in enumerate(brief.rates.supported)]
    watched = [row(brief, constants, rate, -1.0) for rate in brief.rates.watched]
    nominal = row(brief, constants, brief.nominal(constants), 0.0)

    def spread(name: str) -> float:
        values = [r.measures[name] or 0.0 for r in supported]
        return max(values) - min(values)

    targets = []
    for target in brief.jumps[0].targets:
        value = nominal.measures[target.measure] or 0.0
        want = target.aim if target.aim is not None else target.at_least or target.at_most or 0.0
        off = (value - want) / target.within
        off = off if target.aim is not None else min(0.0, off)
        targets.append(TargetVerdict(target, value, off, spread(target.measure)))
    jump = JumpVerdict(
        name="jump",
        constants=constants,
        rates=(*supported, *watched),
        nominal=nominal,
        spreads={name: spread(name) for name in ("apex", "airtime", "max_gap")},
        targets=tuple(targets),
    )
    worst = max(targets, key=lambda t: abs(t.deviation or 0.0), default=None)
    miss = (sum((t.deviation or 0.0) ** 2 for t in targets) / max(1, len(targets))) ** 0.5
    uneven = (sum(((t.spread or 0.0) / t.target.within) ** 2 for t in targets) / max(1, len(targets))) ** 0.5
    features = [
        FeatureVerdict(f.name, f.by, f.must, spare >= 0, spare, "144 Hz", bands)
        for f, spare, bands in zip(brief.ledges, ledge_spares, failing, strict=True)
    ]
    short = -sum(min(0.0, f.spare or 0.0) for f in features)
    return Verdict(
        constants=constants,
        mark=mark,
        jumps=(jump,),
        miss=miss,
        rate_spread=uneven,
        cost=miss + uneven,
        worst=None if worst is None else Worst(abs(worst.deviation or 0.0), "jump", worst.target.measure),
        violation=short,
        feasible=short == 0.0,
        ledges=tuple(features),
        gaps=tuple(FeatureVerdict(g.name, g.by, g.must, True, 21.5, "60 Hz", ()) for g in brief.gaps),
        flags=(),
        extras={},
    )


def stuck(brief: Brief, constants: Constants) -> Verdict:
    """A verdict on a jump that never lands: nothing has a number."""
    base = verdict(brief, constants)
    nothing: dict[str, float | None] = dict.fromkeys(MEASURES)
    rows = tuple(replace(r, status="never-slows", measures=nothing) for r in base.jumps[0].rates)
    jump = replace(
        base.jumps[0],
        rates=rows,
        nominal=replace(rows[0]),
        spreads=dict.fromkeys(base.jumps[0].spreads),
        targets=tuple(TargetVerdict(t.target, None, None, None) for t in base.jumps[0].targets),
    )
    lost = [
        replace(f, holds=False, spare=None, worst_rate=None, failing=("20–1000 Hz",)) for f in base.ledges
    ]
    gaps = [replace(f, holds=False, spare=None, worst_rate=None, failing=("20–1000 Hz",)) for f in base.gaps]
    return replace(
        base,
        jumps=(jump,),
        miss=None,
        rate_spread=None,
        cost=None,
        worst=None,
        violation=None,
        feasible=False,
        ledges=tuple(lost),
        gaps=tuple(gaps),
        flags=("never lands at 60 Hz",),
    )


PROPOSED = (
    Constants(gravity=1620, launch_speed=635, grain=0.125, run_speed=540),
    Constants(gravity=1580, launch_speed=625, grain=0.125, run_speed=540),
    Constants(gravity=1640, launch_speed=640, grain=0.125, run_speed=540),
    Constants(gravity=1460, launch_speed=595, grain=1, run_speed=540),
    Constants(gravity=1700, launch_speed=650, grain=0, run_speed=540),
    Constants(gravity=1750, launch_speed=660, grain=0, run_speed=540),
)
REASONS = (
    "lowest cost of the grid",
    "steadiest over the rates among those on target",
    "shortest airtime, nearly as good",
    "best that changes numbers only",
    "different: higher gravity and launch_speed within 10 % of the best cost, without any rounding at all",
    "different: highest gravity",
)


def result(brief: Brief, count: int = 3, *, with_sets: bool = False) -> SearchResult:
    """A search's result with `count` candidates."""
    today = verdict(brief, TODAY, "a1b2", (1.6, -3.7), ((), ("201–250 Hz", "334–360 Hz")))
    shortlist = tuple(
        Candidate(
            "ABCDEF"[i], REASONS[i], "numbers" if c.grain == 1 else "code", verdict(brief, c, f"m{i}x{i}")
        )
        for i, c in enumerate(PROPOSED[:count])
    )
    sets = tuple(
        Candidate(s.name, "brought along", "code", verdict(brief, s.constants, "br0t")) for s in brief.sets
    )
    return SearchResult(
        best=shortlist[0],
        nearest=None,
        today=Candidate("today", "the set in the build now", "none", today),
        sets=sets if with_sets else (),
        shortlist=shortlist,
        front=shortlist,
        certificate=Certificate(
            "grid", "enumerated", 101_943, 101_943, True, "0" * 16, RunnerUp(PROPOSED[1], 0.9, 0.0)
        ),
        evaluations=101_943,
        seed=0,
        method="scan",
        notes=("Every point of the grid was measured.",),
        clashes=(),
    )


def clashing(brief: Brief) -> SearchResult:
    """A search that found nothing feasible."""
    near = verdict(brief, PROPOSED[0], "n0ne", (-1.0, -0.5), (("20–1000 Hz",), ("201–250 Hz",)))
    text = "at least 120.0 and at most 119.0 cannot both hold: short by 1.0, about 4.8 over the rates"
    clash = Clash(
        ("reach awning: apex at least 120.0", "stay out of billboard: apex at most 119.0"), 1.0, 4.8, text
    )
    return replace(
        result(brief, 1),
        best=None,
        nearest=Candidate(None, "nearest to feasible", "code", near),
        shortlist=(),
        front=(),
        certificate=None,
        clashes=(clash,),
    )


def bring(brief: Brief, *names: str) -> Brief:
    """The brief with sets that people bring along."""
    return replace(brief, sets=tuple(NamedSet(name, PROPOSED[i]) for i, name in enumerate(names)))


def robot() -> Brief:
    """A fixed loop whose step is searched, with no rates listed: each set counts at its own."""
    return Brief(
        name="robot",
        title="Robot",
        length_unit="m",
        loop=Loop.FIXED,
        rule=Rule(Integrator.SEMI_IMPLICIT, landing_test=LandingTest.END_OF_STEP),
        rates=Rates(()),
        today=robot_sets()[0],
        base=robot_sets()[0],
        search={
            "gravity": Choice(tuple(15.0 + 0.5 * i for i in range(51)), text="15 to 40 by 0.5"),
            "launch_speed": Choice(tuple(5.0 + 0.25 * i for i in range(37)), text="5 to 14 by 0.25"),
            "step": Choice((0.01, 1 / 60, 0.02), text='"20 ms", "60 Hz" or "10 ms"'),
        },
        jumps=(JumpBrief(targets=(Target("apex", 0.05, aim=1.6), Target("airtime", 0.02, aim=0.7))),),
        ledges=(Ledge("belt", 1.5, "reach"), Ledge("press", 1.75, "stay-out")),
        gaps=(Gap("pit", 3.2, "cross"),),
    )


def robot_sets() -> tuple[Constants, ...]:
    """Today at 20 ms, then proposals at 60 Hz and at 10 ms."""
    rest = {"run_speed": 5.0, "terminal_speed": 12.0}
    return (
        Constants(gravity=25, launch_speed=9, step=0.02, **rest),
        Constants(gravity=27, launch_speed=9.5, step=1 / 60, **rest),
        Constants(gravity=24, launch_speed=8.75, step=0.01, **rest),
    )
