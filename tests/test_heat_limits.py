"""The heat at which the modes of a duct end agrees with the solution on both of its sides; a fuel sweep has no gap without a name."""

from __future__ import annotations

import numpy as np
import pytest

import cycle
from tests.dual_mode_rigs import dual_mode_rig
from tests.random_flowpath import loaded

RIG = """
format = 1
title = "A dual-mode rig, invented"
[entry]
station = "2"
mach = 2.6
pressure = "50 kPa"
temperature = 650.0
area = 0.02
[gas]
model = "constant-gamma"
cp_compression = 1100.0
[isolator]
length = 1.0
momentum_thickness = 0.0004
[fuel]
heating_value = 120e6
temperature = 300.0
[combustor]
process = "duct"
fuel_air_ratio = 0.01
friction_coefficient = 0.002
[[combustor.area]]
x = 0.0
area_ratio = 1.0
[[combustor.area]]
x = 0.15
area_ratio = 1.0
[[combustor.area]]
x = 1.0
area_ratio = 2.2
[[combustor.injector]]
x = 0.05
"""
POINTS = 200
HEAT = "combustor.fuel_air_ratio"
STAND = {"attached": ("scramjet",), "train": ("scramjet", "scramjet-shock-train")}


def batch() -> dict[str, np.ndarray]:
    rng = np.random.default_rng(31)
    draw = rng.uniform
    return {
        "entry.mach": draw(2.0, 4.2, POINTS), "entry.temperature": draw(450.0, 900.0, POINTS),
        "combustor.area.3.area_ratio": draw(1.3, 3.2, POINTS), "combustor.injector.1.x": draw(0.0, 0.5, POINTS),
        "combustor.burning_theta": draw(1.5, 10.0, POINTS), "isolator.length": draw(0.2, 2.0, POINTS), HEAT: draw(0.002, 0.03, POINTS),
    }  # fmt: skip


def modes(walk: cycle.Walk) -> np.ndarray:
    """The mode of every rig's duct, "none" where it has none."""
    figures = next((p.figures for p in walk.processes if p.name == "isolator"), {})
    found = np.full(walk.size, "none", dtype=object)
    for key, value in figures.items():
        if key.startswith("mode_"):
            found[(value == 1.0) & (walk.status == "solved")] = key.removeprefix("mode_")
    return found


def test_limits_of_a_batch_are_those_of_the_solution_to_a_thousandth() -> None:
    """200 ducts: a thousandth below its limit a mode stands, a thousandth above it does not, or the other way about where the limit is
    met from below; the cause is that of the point beyond."""
    case, given = cycle.loads(RIG), batch()
    walk = cycle.solve(case, given)
    limits, causes = walk.heat_limits, walk.heat_limit_causes
    assert set(limits) == {"attached", "train", "unstart"}
    counted = 0
    for name, limit in limits.items():
        known = np.isfinite(limit) & (limit > 0.0)
        counted += int(known.sum())
        cut = {key: values[known] for key, values in given.items()}
        below, beyond = (cycle.solve(case, cut | {HEAT: limit[known] * (1.0 + side)}) for side in (-1e-3, 1e-3))
        stands = [modes(w) != "none" if name == "unstart" else np.isin(modes(w), STAND[name]) for w in (below, beyond)]
        assert stands[0].all(), name
        assert not stands[1].any(), name
        if name == "unstart":
            # an interval in which no mode is consistent may be narrower than a thousandth
            named = causes[name][known] != "no-mode"
            assert set(causes[name][known][named]) == {"impulse", "isolator-length"}
            assert set(beyond.status) <= {"no-mode", "unstarted"} and (beyond.status[named] == "unstarted").mean() > 0.9
    assert counted > 400
    assert {"separation", "choking"} <= set(causes["attached"])
    assert {"impulse", "isolator-length"} <= set(causes["unstart"])


def test_a_solution_stands_on_the_right_side_of_its_limits() -> None:
    """No solution beside a limit that contradicts it, and the twin outside of the batch has the same limits."""
    case, given = cycle.loads(RIG), batch()
    walk = cycle.solve(case, given)
    limits, found = walk.heat_limits, modes(walk)
    solved = found != "none"
    assert (given[HEAT][solved] <= limits["unstart"][solved]).all()
    assert (given[HEAT][~solved] >= limits["unstart"][~solved]).all()
    attached = found == "scramjet"
    assert (given[HEAT][attached] <= limits["attached"][attached]).all()
    for point in (0, 77, 150):
        twin = cycle.solve(case.replace({key: float(values[point]) for key, values in given.items()}))
        for name, value in twin.heat_limits.items():
            assert value == pytest.approx(limits[name][point], rel=1e-7), (point, name)


def test_the_largest_heat_of_a_duct_stands_among_its_limits() -> None:
    walk = cycle.solve(cycle.loads(RIG))
    assert modes(cycle.solve(cycle.loads(RIG), {HEAT: np.array([0.01])}))[0] == "scramjet"
    row = next(limit for limit in walk.limits if limit.key == "unstart_heat")
    assert row.allowed == walk.heat_limits["unstart"] and row.margin == pytest.approx(1.0 - 0.01 / row.allowed, rel=1e-12)
    unstarted = cycle.solve(cycle.loads(RIG).replace({HEAT: 0.04}))
    margins = {limit.key: limit.margin for limit in unstarted.limits}
    assert unstarted.status == "unstarted" and margins["unstart_heat"] < 0.0
    assert min(margins["unstart"], margins["isolator_length"] if np.isfinite(margins["isolator_length"]) else 1.0) < 0.0


@pytest.mark.parametrize("block", range(4))
def test_a_fuel_sweep_has_no_gap_without_a_name(block: int) -> None:
    """200 steps of 20 ducts of all gases: between two heats with a mode there is none without one but where no mode is consistent."""
    for seed in range(5 * block, 5 * block + 5):
        case = loaded(dual_mode_rig(seed))
        heat = next(key for key in ("combustor.fuel_air_ratio", "combustor.equivalence_ratio") if case.value(key) is not None)
        values = float(case.value(heat)) * np.linspace(0.3, 1.7, 200)
        walk = cycle.solve(case, {heat: values})
        solved = np.flatnonzero(walk.status == "solved")
        inside = np.arange(200)[solved[0] : solved[-1] + 1] if solved.size else np.array([], int)
        gap = set(walk.status[np.setdiff1d(inside, solved)])
        assert gap <= {"no-mode"}, (seed, gap)
        assert set(walk.status) <= {"solved", "no-mode", "unstarted"}, seed
