"""Briefs to start from: a dozen lines, or everything with comments, around the jump that a person wants."""

from __future__ import annotations

import json
import math
import os
import tempfile
from decimal import ROUND_CEILING, ROUND_FLOOR, Decimal
from pathlib import Path

from designer.brief.units import plain
from designer.errors import Fault, InputError

APEX = {"mm": 900.0, "cm": 90.0, "dm": 9.0, "m": 0.9}
"""The apex of the plain brief in the units that have a size; 90 in any other."""
AIRTIME = 0.64
"""Seconds."""
SMALLEST_APEX, LARGEST_APEX = 1e-3, 1e6
SHORTEST, LONGEST = 0.05, 20.0


def new_brief(
    *, full: bool = False, apex: float | None = None, airtime: float | None = None, length_unit: str = "cm"
) -> str:
    """Return the text of a brief to start from, which `check` and `search` accept as it stands.

    apex is in length_unit, airtime in seconds; constants and ranges around them follow from the continuous
    formulas (gravity = 8·apex/airtime², launch speed = 4·apex/airtime), rounded to two figures. Raises
    InputError where the numbers are no jump.
    """
    faults: list[Fault] = []
    if apex is not None and not SMALLEST_APEX <= apex <= LARGEST_APEX:
        allowed = f"a height above 0, from {SMALLEST_APEX:g} to {LARGEST_APEX:.0f} in {length_unit}"
        faults.append(Fault("--apex", "", f"{apex:g}", allowed, "write a height, as in --apex 90"))
    if airtime is not None and not SHORTEST <= airtime <= LONGEST:
        words = "write seconds, as in --airtime 0.64"
        faults.append(
            Fault("--airtime", "", f"{airtime:g}", f"a time from {SHORTEST:g} to {LONGEST:g} s", words)
        )
    if not length_unit.strip() or len(length_unit) > 30 or not length_unit.isprintable():
        allowed = "the name of a length unit, up to 30 signs"
        faults.append(Fault("--length-unit", "", repr(length_unit), allowed, "write --length-unit cm"))
    if faults:
        raise InputError(*faults)
    unit = length_unit.strip()
    numbers = _numbers(
        APEX.get(unit, 90.0) if apex is None else apex, AIRTIME if airtime is None else airtime
    )
    named = "tile" if unit != "tile" else "block"
    numbers["unit"] = json.dumps(unit, ensure_ascii=False)
    numbers["named"] = named
    numbers["length_line"] = f"length = {numbers['unit']}".ljust(30)
    numbers["named_line"] = f"{named:6} = {numbers['tile']}".ljust(30)
    return (_FULL if full else _PLAIN).format(**numbers)


def save_brief(path: Path | str, text: str) -> None:
    """Write a new brief, whole or not at all; InputError where there is a file already or none can be."""
    path = Path(path)
    try:
        handle, temporary = tempfile.mkstemp(dir=path.parent, prefix=f".{path.name}.", text=True)
        try:
            with os.fdopen(handle, "w", encoding="utf-8", newline="\n") as file:
                file.write(text)
            os.chmod(temporary, 0o644)
            os.link(temporary, path)  # unlike a rename, this never replaces what is there
        finally:
            os.unlink(temporary)
    except FileExistsError:
        allowed = "a new file; there is one of this name, and it stays as it is"
        raise InputError(
            Fault(str(path), "", "", allowed, "choose another name, or delete that file")
        ) from None
    except OSError as error:
        allowed = f"a file that can be written; the system says: {error.strerror or error}"
        fix = "choose another folder, or leave FILE out to see the brief"
        raise InputError(Fault(str(path), "", "", allowed, fix)) from None


def _tidy(value: float, figures: int = 2) -> Decimal:
    """Return the nearest number with so many figures."""
    return Decimal(f"{value:.{figures - 1}e}").normalize()


def _increment(span: float) -> Decimal:
    """Return the largest of 1, 2 and 5 times a power of ten that is at most a hundredth of a span."""
    power = Decimal(1).scaleb(math.floor(math.log10(span / 100)))
    return max(power * n for n in (1, 2, 5) if float(power * n) <= span / 100 * (1 + 1e-9))


def _range(middle: float) -> str:
    """Return a range around a value, ends and increment tidy, that is a whole number of increments long."""
    every = _increment(middle)
    low = (Decimal(middle * 0.6) / every).to_integral_value(ROUND_FLOOR) * every
    high = (Decimal(middle * 1.6) / every).to_integral_value(ROUND_CEILING) * every
    return f"{{ from = {_text(low)}, to = {_text(high)}, every = {_text(every)} }}"


def _text(number: Decimal | float) -> str:
    """Return a number without an exponent."""
    return (
        format(number.normalize(), "f")
        if isinstance(number, Decimal)
        else format(Decimal(plain(number)), "f")
    )


def _numbers(apex: float, airtime: float) -> dict[str, str]:
    """Return every number of a brief around one jump, as text."""
    gravity, launch_speed = 8 * apex / airtime**2, 4 * apex / airtime
    run_speed = float(_tidy(3.5 * apex / airtime))
    gap = run_speed * airtime
    grain = 2.0 ** math.floor(math.log2(launch_speed / 400))
    values: dict[str, Decimal | float] = {
        "gravity": _tidy(gravity),
        "launch_speed": _tidy(launch_speed),
        "run_speed": run_speed,
        "terminal_speed": _tidy(3 * launch_speed),
        "grain": grain,
        "fine_grain": grain / 8,
        "apex": apex,
        "apex_within": _tidy(apex * 0.02, 1),
        "airtime": airtime,
        "airtime_within": _tidy(airtime * 0.03, 1),
        "gap_bound": _tidy(gap * 0.9),
        "gap_within": _tidy(gap * 0.03, 1),
        "reach": _tidy(apex * 0.87),
        "stay_out": _tidy(apex * 1.15, 3),
        "margin": _tidy(apex * 0.02, 1),
        "width": _tidy(gap * 0.75),
        "tile": _tidy(apex * 0.6, 1),
        "landing_speed": _tidy(launch_speed * 1.1),
        "landing_within": _tidy(launch_speed * 0.02, 1),
        "heavier": _tidy(gravity * 1.2),
        "block_height": _tidy(apex * 0.4),
        "block_length": _tidy(gap * 0.4),
        "ceiling": _tidy(apex * 3),
        "body": _tidy(apex * 1.5),
        "faster": _tidy(run_speed * 1.5),
        "second": _tidy(launch_speed * 0.8),
    }
    texts = {name: _text(value) for name, value in values.items()}
    return texts | {"gravity_range": _range(gravity), "launch_speed_range": _range(launch_speed)}


_PLAIN = """\
title  = "A jump"
units  = {{ length = {unit} }}
loop   = {{ steps = "each-frame", aim_at = "60 Hz" }}  # or steps = "fixed", and a step in today
rule   = {{ integrator = "semi-implicit" }}            # velocity first, then position
rates  = {{ supported = ["60 Hz", "90 Hz", "120 Hz", "144 Hz", "240 Hz"] }}
today  = {{ gravity = {gravity}, launch_speed = {launch_speed} }}
[search]
gravity      = {gravity_range}
launch_speed = {launch_speed_range}
[targets]
apex    = {{ aim = {apex}, within = {apex_within} }}
airtime = {{ aim = {airtime}, within = {airtime_within} }}
"""

_FULL = """\
# A brief: what the build does, what it has today, what may change and what is wanted.
# Lines that begin with # are comments. Take out what your game has no use for.

title = "A jump, with everything that a brief can say"
# with   = "studio.toml"      # what a team shares: read first; this file's keys win, lists of tables join
# levels = "roofs.csv"        # a level list, whose rows count as ledges and gaps; the first names columns:
#   name,must,height,width,far_level,margin,by,room
#   crate,reach,{reach},,,{margin},,yard
#   ditch,cross,,{width},0,{margin},walk;run,yard
#   must: reach, cross or stay-out; a height or a width; by: jumps with ; between; others are kept and shown

[units]
{length_line}# the unit of every plain number that is a length; speeds are per second
time   = "s"
{named_line}# any other name is a length: height = "1.5 {named}" is then a length anywhere

[loop]                        # who decides how long a step is
steps  = "each-frame"         # each drawn frame is one step | "fixed": the constants' own step, always
aim_at = "60 Hz"              # each-frame only: the rate at which aims are judged

[rule]                        # how the build advances one step; `leapwright check` reads it back
integrator     = "semi-implicit"   # velocity first | "explicit": position first | "average" of both
rounding       = {{ mode = "nearest-even", at = "end", carry = false }}  # how velocity snaps to its grain
#                modes: nearest-even, nearest-away, nearest-up, toward-zero, down, up
#                at = "end": the move uses the velocity before rounding | "before-move": the rounded one
position       = {{ grain = 0, mode = "nearest-even" }}  # 0: position is not rounded
frame_time     = "exact"           # 1/rate | "whole-ms-down" | "whole-ms-nearest"
landing_test   = "swept"           # where the path crosses the ground | "end-of-step"
launch_gravity = true              # gravity acts in the launch step already
contact_tolerance = 1e-6           # how close to the ground counts as touching it

[today]                       # what the build has now
gravity      = {gravity}
launch_speed = {launch_speed}
# step       = "8 ms"         # fixed loops only; "125 Hz" too
grain        = 0              # the multiple that velocity snaps to; 0: none
run_speed    = {run_speed}
fall_factor  = 1              # gravity times this on the way down
terminal_speed = "none"       # the fastest fall, or "none"
step_up      = 0              # how far above the apex a ledge may be and still be stepped onto
edge_allowance = 0            # what the edges of a gap add to its reach

[search]                      # what may change: a value, a range, a list, or "free" (bounds from the targets)
gravity      = {gravity_range}
launch_speed = {launch_speed_range}
run_speed    = {run_speed}
fall_factor  = {{ among = [1, 1.1] }}
terminal_speed = {{ among = ["none", {terminal_speed}] }}
# grain      = {{ among = [0, {fine_grain}, {grain}] }}   # where velocity is stored in coarse units

[targets]                     # within: the tolerance, in the measure's own unit; weight: 1 where not said
apex    = {{ aim = {apex}, within = {apex_within}, weight = 1 }}
airtime = {{ aim = {airtime}, within = {airtime_within} }}
max_gap = {{ at_least = {gap_bound}, within = {gap_within} }}        # bounds are judged at the worst rate
# landing_speed = {{ at_most = {landing_speed}, within = {landing_within} }}
# also: apex_time, sure_gap, step_top, steps, effective_gravity, time_near_apex, flip_margin

[rates]                       # where the same constants must hold
supported = ["60 Hz", "72 Hz", "90 Hz", "120 Hz", "144 Hz", "240 Hz"]
#         or {{ from = "30 Hz", to = "144 Hz" }}: each whole Hz between
watched   = ["30 Hz", "500 Hz"]    # shown, never scored
spread_weight = 1.0                # what differences between the rates count

[[ledges]]                    # as many of these as there are ledges
name   = "crate"
height = {reach}
must   = "reach"              # or "stay-out"
margin = {margin}

[[ledges]]
name   = "balcony"
height = {stay_out}
must   = "stay-out"
margin = {margin}

[[gaps]]
name      = "ditch"
width     = {width}
far_level = 0                 # height of the far side over the take-off
must      = "cross"           # or "stay-out"
margin    = {margin}

[[blocks]]                    # what is high and long: the jump must be above its height for its length
name   = "barrel"
height = {block_height}
length = {block_length}
must   = "clear"              # or "stay-out"
margin = {margin}

[[ceilings]]                  # what the top of the body must stay under
name   = "beam"
height = {ceiling}
body_height = {body}          # how far the top of the body is above what the apex measures
must   = "stay-under"
margin = {margin}

[[sets]]                      # sets that people bring along; what is not named is today's
name         = "heavier"
gravity      = {heavier}
launch_speed = {launch_speed}

# Several jumps of one game share gravity, step and grain. Then [targets] moves into them, and ledges, gaps
# and blocks say which jumps must: by = ["walk"]. Each jump names what is its own; the rest is [search]'s.
#
# [jumps.walk]
# search  = {{ launch_speed = {launch_speed_range} }}
# targets = {{ apex = {{ aim = {apex}, within = {apex_within} }} }}
# today   = {{ launch_speed = {launch_speed} }}     # what the build has now for this jump
#
# [jumps.run]
# like    = "walk"            # each constant that is not named here is walk's, whatever it becomes
# search  = {{ run_speed = {faster} }}
# targets = {{ max_gap = {{ at_least = {gap_bound}, within = {gap_within} }} }}
# weight  = 0.5               # of its targets beside those of other jumps; 1 where not said
#
# [jumps.armour]
# like    = "walk"
# search  = {{ launch_speed = {{ of = "walk", times = {{ among = [0.85, 0.9] }} }}, gravity_factor = 0.9 }}
#           a link: walk's launch speed times a factor (without times: the same); times = 0.85 too, or a range
#
# [jumps.double]
# like    = "walk"
# second  = {{ launch_speed = {second}, when = "apex", how = "set" }}   # in the air; "0.3 s" | how = "add"
#
# A set then says what is one jump's in braces: walk = {{ launch_speed = {launch_speed} }}
"""
