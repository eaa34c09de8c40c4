"""Rules and launches at random, crowded where implementations differ: ties, whole grains, short flights."""

from __future__ import annotations

import math
import random

from designer.motion.rule import Integrator, LandingTest, Mode, Place, PositionRounding, Rounding, Rule
from tests.reference.twin import TwinRule

GRAINS = (0.0, 2.0**-8, 0.125, 0.25, 0.5, 1.0, 1.0, 1.0, 2.0, 5.0, 0.1, 0.3, 1 / 3)
POSITION_GRAINS = (0.0, 0.0, 0.0, 2.0**-8, 0.125, 0.1, 0.01)


def random_rule(dice: random.Random) -> Rule:
    return Rule(
        dice.choice(list(Integrator)),
        Rounding(dice.choice(list(Mode)), dice.choice(list(Place)), dice.random() < 0.3),
        landing_test=dice.choice(list(LandingTest)),
        launch_gravity=dice.random() < 0.7,
        contact_tolerance=dice.choice([1e-6, 1e-6, 0.0, 0.25]),
        position=PositionRounding(dice.choice(POSITION_GRAINS), dice.choice(list(Mode))),
    )


def random_launch(dice: random.Random) -> tuple[float, ...]:
    """Draw a short flight: about two to eighty steps if nothing were rounded."""
    grain = dice.choice(GRAINS)
    step = dice.choice([0.033, 0.05, 0.1, 1 / 30, 1 / 16, dice.uniform(0.03, 0.1)])
    if dice.random() < 0.05:
        step = dice.choice([0.001, 0.004, 0.016, 1 / 60, 1 / 128])
    loss = grain or 10.0
    kind = dice.random()
    if kind < 0.4:
        gravity = float(dice.randrange(50, 2000, 5))
    elif kind < 0.6:
        gravity = (dice.randrange(0, 12) + 0.5) * loss / step  # a tie, or next to one
    elif kind < 0.8:
        gravity = dice.randrange(1, 12) * loss / step  # whole grains, or next to it
    else:
        gravity = dice.uniform(100.0, 2000.0)
    speed = gravity * step * dice.uniform(0.5, 40.0)
    if grain and dice.random() < 0.6:
        speed = (math.floor(speed / grain) + 1) * grain
    fall_factor = dice.choice([1.0, 1.0, 1.5, 0.5, 2.25, dice.uniform(0.5, 3.0)])
    terminal = math.inf if dice.random() < 0.6 else speed * dice.uniform(0.1, 1.5)
    return gravity, speed, step, grain, fall_factor, terminal


def words_of(rule: Rule) -> TwinRule:
    """Return the rule in the words of a brief."""
    return TwinRule(
        integrator=rule.integrator.value,
        mode=rule.rounding.mode.value,
        at=rule.rounding.at.value,
        carry=rule.rounding.carry,
        landing_test=rule.landing_test.value,
        launch_gravity=rule.launch_gravity,
        contact_tolerance=rule.contact_tolerance,
        position_grain=rule.position.grain,
        position_mode=rule.position.mode.value,
    )
