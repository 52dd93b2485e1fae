"""Ducts as cases: a rig that enters at the burner, a burning law of each injector, both sides of an injection, the grid of the core."""

from __future__ import annotations

import numpy as np
import pytest

import cycle

RIG = """
format = 1
title = "A rig's duct, invented"
[entry]
station = "{station}"
mach = 2.4
pressure = "60 kPa"
temperature = 900.0
area = 0.01
[gas]
model = "{model}"
[fuel]
name = "hydrogen"
[combustor]
process = "duct"
equivalence_ratio = {phi}
friction_coefficient = {friction}
[[combustor.area]]
x = 0.0
area_ratio = 1.0
[[combustor.area]]
x = 0.8
area_ratio = 2.0
[[combustor.injector]]
x = 0.05
share = 0.5
{theta}
[[combustor.injector]]
x = 0.4
share = 0.5
"""


def rig(station: str = "3", model: str = "equilibrium", phi: float = 0.2, friction: float = 0.0, theta: str = "") -> cycle.Case:
    return cycle.loads(RIG.format(station=station, model=model, phi=phi, friction=friction, theta=theta))


@pytest.mark.parametrize("model", ["frozen", "equilibrium"])
def test_a_rig_that_enters_at_the_burner_is_one_at_the_isolator_while_the_flow_is_attached(model: str) -> None:
    three, two = (cycle.solve(rig(station, model)) for station in ("3", "2"))
    assert three.status == two.status == "solved"
    assert "2" not in three.station and three.audit.ok
    for key in ("pressure", "temperature", "velocity", "stream_thrust"):
        assert three.station["4"][key] == pytest.approx(two.station["4"][key], rel=1e-12)
    assert cycle.solve(rig("3", model).replace({"combustor.slices": 96})).audit.ok


def test_without_an_isolator_no_shock_train_has_a_place() -> None:
    """What separates the flow of a rig at 2 unstarts the one at 3, and its largest heat is that at which the attached flow ends."""
    heats = np.linspace(0.1, 0.9, 9)
    three, two = (cycle.solve(rig(s), {"combustor.equivalence_ratio": heats}) for s in ("3", "2"))
    isolator = next(p.figures for p in two.processes if p.name == "isolator")
    attached = isolator["mode_scramjet"] == 1.0
    assert set(three.status[attached]) == {"solved"}
    assert set(three.status[~attached]) == {"unstarted"} and (~attached).sum() >= 3
    alone = cycle.solve(rig("3"))
    assert alone.heat_limits["unstart"] == pytest.approx(alone.heat_limits["attached"], rel=1e-7)
    assert alone.heat_limits["attached"] == pytest.approx(cycle.solve(rig("2")).heat_limits["attached"], rel=1e-7)
    assert alone.heat_limit_causes["unstart"] == "isolator-length"


def test_each_injector_may_burn_by_a_law_of_its_own() -> None:
    one = cycle.solve(rig(theta="theta = 8.0"))
    both = cycle.solve(rig().replace({"combustor.burning_theta": 8.0}))
    plain, same = cycle.solve(rig()), cycle.solve(rig(theta="theta = 4.0"))
    pressure = [walk.profile["pressure"].max() for walk in (plain, one, both)]
    assert pressure[0] < pressure[1] <= pressure[2] * (1.0 + 1e-12)
    assert same.station["4"].pressure == pytest.approx(plain.station["4"].pressure, rel=1e-14)
    # the burnt part at the second injector, of the fuel so far, is that of the law of the first: 8 X/(1 + 7 X), X of its own length
    rows = one.profile
    ahead = np.flatnonzero(rows["x"] <= 0.4)[-2:]
    part = (0.4 - 0.05) / (0.8 - 0.05)
    assert rows["burnt"][ahead].max() == pytest.approx(8.0 * part / (1.0 + 7.0 * part), rel=1e-12)


@pytest.mark.parametrize("phi", [0.2, 0.45, 0.6])
def test_an_injection_inside_the_duct_has_a_row_on_either_side(phi: float) -> None:
    """At constant area mass and total enthalpy jump, and the impulse by nothing (normal injection): p A + m u is one on both sides."""
    walk = cycle.solve(rig("2", phi=phi))
    assert walk.status == "solved"
    rows = {name: np.asarray(values) for name, values in walk.profile.items()}
    m0 = walk.station["2"].mass_flow
    planes = [x for x in (0.05, 0.4) if x > next(p for p in walk.processes if p.name == "burner").figures["reattachment_x"] + 1e-9]
    assert planes
    for x in planes:
        at = np.flatnonzero(np.abs(rows["x"] - x) < 1e-12)
        assert at.size == 2
        assert rows["ratio"][at[0]] < rows["ratio"][at[1]]
        impulse = rows["pressure"][at] * rows["area"][at] + m0 * (1.0 + rows["ratio"][at]) * rows["velocity"][at]
        assert impulse[0] == pytest.approx(impulse[1], rel=1e-9)


def test_friction_on_the_separated_core_refines_with_the_slices() -> None:
    """The exit Mach number behind a shock train: four times the slices differ from eight times by less than 1e-8, the default by 1e-6."""
    cases = [rig("2", "frozen", 0.6, 0.004).replace({"combustor.slices": n, "combustor.burning_theta": 10.0}) for n in (48, 192, 384)]
    coarse, fine, finest = (cycle.solve(case) for case in cases)
    isolator = next(p.figures for p in coarse.processes if p.name == "isolator")
    assert isolator["mode_scramjet-shock-train"] == 1.0
    exit_ = [walk.station["4"].mach for walk in (coarse, fine, finest)]
    assert exit_[1] == pytest.approx(exit_[2], rel=1e-8)
    assert exit_[0] == pytest.approx(exit_[2], rel=1e-6)


PAIRS = """
format = 1
title = "Two pairs, invented"
[entry]
station = "2"
mach = 2.6
pressure = "50 kPa"
temperature = 600.0
area = 0.02
[gas]
model = "constant-gamma"
cp_compression = 1004.5
cp_combustion = 1180.0
cp_expansion = 1250.0
fuel_energy = "mass-only"
[fuel]
heating_value = 120e6
[combustor]
process = "duct"
fuel_air_ratio = 0.01
[[combustor.area]]
x = 0.0
area_ratio = 1.0
[[combustor.area]]
x = 1.0
area_ratio = 2.2
[[combustor.injector]]
x = 0.05
"""


def test_the_pair_of_compression_changes_at_burner_entry() -> None:
    """Up to 3 the stream keeps cp of the compression, whatever the mode; there p, T and u are kept. Every step of the fuel is audited, the
    limits go by the Mach number shown at 2, and the modes change as with one pair: each once."""
    ratio = np.linspace(0.004, 0.03, 60)
    walk = cycle.solve(cycle.loads(PAIRS), {"combustor.fuel_air_ratio": ratio})
    solved = walk.status == "solved"
    isolator = next(p.figures for p in walk.processes if p.name == "isolator")
    names = ("scramjet", "scramjet-shock-train", "ramjet-thermal-throat")
    modes = np.array([isolator[f"mode_{name}"] == 1.0 for name in names])[:, solved]
    assert modes.any(1).all() and set(walk.status) == {"solved", "unstarted"}
    assert (np.diff(modes.argmax(0)) >= 0).all() and (np.diff(solved.astype(int)) <= 0).all()
    assert walk.audit.ok, walk.audit.worst
    two, three = walk.station["2"], walk.station["3"]
    assert isolator["separation_limit"] == pytest.approx(1.0 + 0.3 * 2.6**2, rel=1e-12)
    # cp T + u^2/2 of the compression pair, p A + m u: what a frictionless isolator keeps
    for at in (two, three):
        rest = 1004.5 * at.temperature + 0.5 * at.velocity**2
        assert rest[solved] == pytest.approx(two.total_enthalpy[solved], rel=1e-12)
    assert [p.name for p in walk.processes[:3]] == ["isolator", "gas change", "burner"]
    assert [(p.start, p.end) for p in walk.processes[:3]] == [("2", "3"), ("3", "3"), ("3", "4")]
    # energy behind the hand-over, of the combustion pair at the temperature of 3: the burner adds f q and nothing else
    behind = 1180.0 * three.temperature + 0.5 * three.velocity**2
    four = walk.station["4"]
    after = (1.0 + ratio) * (1180.0 * four.temperature + 0.5 * four.velocity**2)
    assert after[solved] == pytest.approx((behind + ratio * 120e6)[solved], rel=1e-10)
    impulse = np.abs(np.diff(four.stream_thrust[solved], 2)) / four.stream_thrust[solved][1:-1]
    assert np.sort(impulse)[-3:].max() < 2e-2 and np.median(impulse) < 1e-4


def test_with_one_pair_nothing_is_handed_over() -> None:
    one = cycle.loads(PAIRS).replace({"gas.cp_combustion": 1004.5})
    walk = cycle.solve(one)
    assert [p.name for p in walk.processes[:2]] == ["isolator", "burner"]
    assert walk.audit.ok
