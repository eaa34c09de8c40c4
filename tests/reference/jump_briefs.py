"""A brief with several jumps, in which the tests change one thing at a time."""

HEAD = """\
title = "Yard of jumps"

[units]
length = "cm"
tile = 64

[loop]
steps = "each-frame"
aim_at = "60 Hz"

[rule]
integrator = "semi-implicit"
frame_time = "whole-ms-down"

[today]
gravity = 1600
launch_speed = 620
run_speed = 540

[search]
gravity = { from = 800, to = 3200, every = 10 }
grain = { among = [0, 1] }

[rates]
supported = ["60 Hz", "120 Hz"]
"""

JUMPS = """
[jumps.walk]
search = { launch_speed = "free", run_speed = 300 }
targets = { apex = { aim = "1.875 tile", within = 2 }, airtime = { aim = 0.76, within = 0.02 } }

[jumps.sprint]
like = "walk"
search = { run_speed = 540 }
targets = { max_gap = { at_least = 400, within = 10 } }

[jumps.armour]
like = "walk"
weight = 0.5
search.launch_speed = { of = "walk", times = { from = 0.7, to = 0.95, every = 0.05 } }
search.gravity_factor = { among = [0.8, 1] }

[jumps.double]
like = "walk"
second = { launch_speed = 520, when = "apex", how = "set" }
"""

FEATURES = """
[[ledges]]
name = "crate"
height = 97
must = "reach"
by = ["walk", "sprint"]

[[ledges]]
name = "crane"
height = 112
must = "stay-out"

[[gaps]]
name = "rails"
width = 300
far_level = -30
must = "cross"
margin = 5
by = ["sprint"]
"""

YARD = HEAD + JUMPS + FEATURES


def yard(*changes: tuple[str, str]) -> str:
    """Return the brief with each first text, which must be there, replaced by the second."""
    text = YARD
    for old, new in changes:
        assert old in text, old
        text = text.replace(old, new, 1)
    return text
