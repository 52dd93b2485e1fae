"""Random flowpaths end in audited walks or named statuses; fuel sweeps are smooth."""

from __future__ import annotations

import re
from pathlib import Path

import numpy as np
import pytest

import cycle
from cycle.quantities import STATUSES
from tests.random_flowpath import judge, loaded, random_flowpath

CASES = 60
BLOCKS = 6
"""The cases are judged in blocks, to be shared out among the test processes."""


@pytest.mark.parametrize("block", range(BLOCKS))
def test_random_flowpath_ends_in_an_audited_walk_or_a_named_status(block: int) -> None:
    """Audit at 1e-9, no blank figure, accounts that close, the twin in a batch at 1e-9; at least half of each block is solved."""
    seeds = range(block * CASES // BLOCKS, (block + 1) * CASES // BLOCKS)
    found = {seed: judge(seed) for seed in seeds}
    wrong = {seed: words for seed, (_, _, words) in found.items() if words}
    assert not wrong, wrong
    statuses = [status for status, _, _ in found.values()]
    assert set(statuses) <= set(STATUSES)
    assert statuses.count("solved") >= len(seeds) // 2


@pytest.mark.parametrize("seed", [33682, 34063, 34850, 37530, 41201])
def test_hard_ducts_of_large_runs_are_solved(seed: int) -> None:
    """Heat to the wall near the border of two modes; a throat in the exit plane; a core whose friction settles slowly."""
    status, _, words = judge(seed)
    assert (status, words) == ("solved", [])


@pytest.mark.parametrize("seed", [25548])
def test_mode_that_its_own_wall_heat_refutes_gives_way(seed: int) -> None:
    """Attached, the wall takes less and the flow separates; with a shock train it takes more and the flow would attach."""
    status, _, words = judge(seed)
    assert (status, words) == ("solved", [])
    figures = next(p.figures for p in cycle.solve(loaded(random_flowpath(seed))).processes if p.name == "isolator")
    assert figures["mode_scramjet-shock-train"] == 1.0
    assert abs(figures["separation_margin"]) < 5e-3


SWEPT: dict[str, dict[str, float | str]] = {
    "hydrogen, fast": {"flight.mach": 7.0, "inlet.contraction_ratio": 12.0},
    "hydrogen": {"flight.mach": 5.5, "inlet.contraction_ratio": 7.0},
    "ethylene": {"flight.mach": 5.0, "fuel.name": "ethylene"},
}
MOST_CHANGES = 5
"""Attached, shock train, thermal throat, unstarted, and one interval in which no mode is consistent: the place of filling jumps there."""
SMOOTH = 0.003
"""Relative change of the specific impulse from one point to the next, 0.002 in equivalence ratio apart."""


def swept_case(changes: dict[str, float | str]) -> cycle.Case:
    tables = {
        "format": 1, "title": "fuel sweep, invented", "flight": {"mach": 7.0, "dynamic_pressure": 5e4}, "gas": {"model": "equilibrium"},
        "inlet": {"kinetic_energy_efficiency": 0.97, "contraction_ratio": 6.0}, "fuel": {"name": "hydrogen"},
        "combustor": {
            "process": "duct", "equivalence_ratio": 0.3, "burnt_fraction": 0.9, "friction_coefficient": 0.002,
            "area": [{"x": 0.0, "area_ratio": 1.0}, {"x": 0.3, "area_ratio": 1.1}, {"x": 1.3, "area_ratio": 2.2}],
            "injector": [{"x": 0.1, "share": 0.6}, {"x": 0.5, "share": 0.4}],
        },
        "nozzle": {"exit_area_over_capture": 1.5}, "engine": {"capture_area": 0.3},
    }  # fmt: skip
    return loaded(tables).replace(changes)


@pytest.mark.parametrize("changes", SWEPT.values(), ids=SWEPT)
def test_fuel_sweep_is_smooth_but_where_the_mode_changes(changes: dict[str, float | str]) -> None:
    """The discretisation must not show: a step of 0.002 changes the impulse by the slope of the curve, here 0.11 % at most."""
    walk = cycle.solve(swept_case(changes), {"combustor.equivalence_ratio": np.arange(0.4, 1.26, 0.002)})
    changed = walk.mode[1:] != walk.mode[:-1]
    impulse = walk.performance.specific_impulse
    steps = np.abs(np.diff(impulse) / impulse[:-1])[~changed & (walk.status[1:] == "solved")]
    assert 1 <= changed.sum() <= MOST_CHANGES, list(dict.fromkeys(walk.mode))
    assert steps.size > 300 and steps.max() < SMOOTH
    assert np.array_equal(np.isfinite(impulse), walk.status == "solved")


def test_every_point_close_to_unstart_finds_where_its_core_fills_the_duct() -> None:
    """The search closes by secants on the last digits, too: halving from its tenth turn on would leave one point in ten open."""
    case = cycle.load(Path(__file__).parents[1] / "cases" / "tidegate.toml").replace({"isolator.momentum_thickness": None})
    unstart = cycle.solve(case).heat_limits["unstart"]
    walk = cycle.solve(case, {"combustor.equivalence_ratio": unstart * (1.0 - np.linspace(1e-9, 3e-4, 60))})
    assert set(walk.status) == {"solved"}


def test_a_point_without_a_consistent_mode_says_the_interval() -> None:
    """Both ends of the interval of the fuel sweep in which the place where the core fills the duct jumps."""
    case = swept_case(SWEPT["hydrogen"]).replace({"combustor.equivalence_ratio": 1.1})
    walk = cycle.solve(case)
    assert walk.status == "no-mode"
    low = walk.heat_limits["unstart"]
    sentence = re.search(r"equivalence ratio 1\.1, at most ([0-9.]+) or at least ([0-9.]+): no mode", walk.reason)
    assert sentence is not None and float(sentence[1]) == pytest.approx(low, rel=1e-3)
    high = float(sentence[2])
    assert 1.08 < low < 1.1 < high < 1.12
    ends = cycle.solve(case, {"combustor.equivalence_ratio": np.array([low * 0.999, low * 1.001, high * 0.998, high * 1.001])})
    assert list(ends.status) == ["solved", "no-mode", "no-mode", "solved"]
