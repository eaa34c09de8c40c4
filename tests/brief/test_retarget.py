"""Other targets in a brief's own text, in every way that TOML has to write one."""

import tomllib

import pytest

from designer.brief.model import Target
from designer.brief.retarget import stands, with_aims

WANTED = Target("apex", within=0.5, aim=118.78848, weight=2.0)

TEXTS = {
    "a line": "[targets]\napex    = { aim = 120, within = 2, weight = 2 } # high\nsteps = { aim = 1 }\n",
    "a table": "[targets.apex] # high\naim = 120\nwithin = 2\nweight = 2\n[targets.airtime]\naim = 1\n",
    "a bound in a table": "[targets.apex]\nat_least = 3\nwithin = 2\nweight = 2\n[rates]\nat_least = 3\n",
    "two bounds in a table": "[targets.apex]\nwithin = 2 \nat_most=9 # no\nat_least = 3\nweight = 2\n",
    "dotted keys": "[targets]\napex.at_least = 3\napex.at_most = 9\napex.within = 3\napex.weight = 2\n",
    "one line": "targets = { airtime = {aim=120,within=2}, apex = {aim=120,within=2,weight=2} }\n",
    "a quoted key": '[targets]\n"apex" = { aim = 1, within = 2, weight = 2 }\n',
    "a name in a name": "[targets]\nmy-apex = { aim = 1 }\napex={ aim = 1, within = 2, weight = 2 }\n",
    "several lines": "[targets]\napex = { aim = 1, within = '2 \\d', weight = 2 }\n[x]\napex = { aim = 1 }\n",
}


@pytest.mark.parametrize("text", TEXTS.values(), ids=list(TEXTS))
def test_only_the_target_changes(text: str) -> None:
    before, after = tomllib.loads(text), tomllib.loads(with_aims(text, {("targets", "apex"): WANTED}))
    assert after["targets"].pop("apex") == {"aim": 118.78848, "within": 0.5, "weight": 2}
    del before["targets"]["apex"]
    assert after == before


def test_comments_and_the_rest_of_the_text_stay() -> None:
    text = TEXTS["a line"]
    changed = with_aims(text, {("targets", "apex"): WANTED}).split("\n")
    assert changed[1] == "apex    = { aim = 118.78848, within = 0.5, weight = 2 } # high"
    assert changed[:1] + changed[2:] == text.split("\n")[:1] + text.split("\n")[2:]


def test_a_jump_of_several() -> None:
    text = (
        "[jumps.walk]\ntargets = { apex = { aim = 120, within = 2 } }\n"
        "[jumps.hop]\ntargets = { apex = { aim = 120, within = 2 } }\n"
    )
    path = ("jumps", "hop", "targets", "apex")
    after = tomllib.loads(with_aims(text, {path: Target("apex", within=2.0, aim=60.0)}))["jumps"]
    assert after["walk"]["targets"]["apex"] == {"aim": 120, "within": 2}
    assert after["hop"]["targets"]["apex"] == {"aim": 60, "within": 2}


def test_numbers_come_back_as_they_were() -> None:
    value = 0.1 + 0.2
    text = with_aims(TEXTS["a line"], {("targets", "apex"): Target("apex", within=1 / 3, aim=value)})
    apex = tomllib.loads(text)["targets"]["apex"]
    assert (apex["aim"], apex["within"]) == (value, 1 / 3)


def test_tells_whether_a_text_has_a_target() -> None:
    assert stands(TEXTS["dotted keys"], ("targets", "apex"))
    assert not stands(TEXTS["dotted keys"], ("targets", "airtime"))
