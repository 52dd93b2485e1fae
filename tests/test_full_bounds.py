"""A fixed part of the random cases over the full bounds; by hand many more, see `tests.full_bounds`."""

from __future__ import annotations

from collections import Counter

import pytest
from jsonschema import Draft202012Validator

from cycle.case import json_schema
from cycle.case.case import build
from cycle.errors import CaseError
from cycle.inputs import INPUTS
from cycle.quantities import STATUSES
from cycle.result import solve
from tests.full_bounds import full_case, judge, number

SEEDS = range(256, 330)


@pytest.mark.parametrize("low", range(SEEDS.start, SEEDS.stop, 10))
def test_every_case_is_solved_or_says_why(low: int) -> None:
    for seed in range(low, low + 10):
        status, _, _, wrong = judge(seed)
        assert not wrong, (seed, status, wrong)


def test_the_family_reaches_the_ends_of_the_bounds_and_many_statuses() -> None:
    """What the family draws is what the JSON Schema allows, ends included."""
    validator = Draft202012Validator(json_schema())
    statuses, at_an_end = Counter[str](), set[str]()
    bounds = {i.key: i for i in INPUTS if i.kind == "number"}
    for seed in range(600):
        case, _ = full_case(seed)
        for key, value in case.numbers.items():
            entry = bounds.get(key)
            if entry is not None and key in case.given and value in (entry.lower, entry.upper, entry.below):
                at_an_end.add(key)
        if seed % 20 == 0:
            assert not list(validator.iter_errors({"format": 1, **case.tables()}))
            statuses[judge(seed)[0]] += 1
    assert len(at_an_end) > 0.6 * len(bounds), sorted(set(bounds) - at_an_end)
    assert len(statuses) >= 8 and set(statuses) <= set(STATUSES)


@pytest.mark.parametrize("value", [0.0, 5e-324, 1e-300, 3e-11])
def test_what_is_next_to_nothing_counts_as_nothing(value: float) -> None:
    """Such values are below what rounding leaves of the others: they are refused like 0, which they are as good as."""
    document = {
        "format": 1, "flight": {"mach": value, "altitude": 20e3}, "gas": {"model": "constant-gamma"},
        "inlet": {"total_pressure_recovery": 1.0, "exit_mach": 0.3}, "fuel": {"name": "kerosene"},
        "combustor": {"equivalence_ratio": 0.1}, "nozzle": {"ideal": True},
    }  # fmt: skip
    with pytest.raises(CaseError) as caught:
        build(document, "next to nothing")
    line = str(caught.value)
    assert "flight.mach: out of bounds" in line and "allowed above 0, at most 30" in line
    assert ("which counts as 0" in line) == (value > 0.0)


def test_numbers_are_drawn_within_their_bounds() -> None:
    import numpy as np

    from cycle.case.rules import outside

    rng = np.random.default_rng(1)
    for entry in (i for i in INPUTS if i.kind == "number"):
        drawn = [number(rng, entry) for _ in range(60)]
        beyond = [x for x in drawn if outside(entry, x)]
        assert all(0.0 <= x <= (entry.over or 0.0) for x in beyond), entry.key  # the ends that count as 0 are refused, and drawn again
        assert len(set(drawn)) > 8 or entry.whole


def test_a_duct_that_expands_below_the_data_is_out_of_range() -> None:
    """A rig that enters at 150 K and widens ahead of its fuel: it was "not converged: a defect of the program"."""
    case, _ = full_case(20522)
    assert case.numbers["entry.temperature"] == 150.0 and case.numbers["combustor.area.1.area_ratio"] > 1.4
    assert judge(20522)[0] == "out-of-range"


@pytest.mark.parametrize(("seed", "temperature"), [(50130, 1403.7820786279115), (50137, 1285.9856150567284)])
def test_the_thrust_potential_closes_in_hot_ambient_air(seed: int, temperature: float) -> None:
    """Air of 1300 to 1400 K is off equilibrium as stated: what it gains on the way there was in no row."""
    case, _ = full_case(seed)
    assert case.numbers["flight.temperature"] == temperature
    walk = solve(case)
    assert walk.potentials[0].key == "freestream" and not judge(seed)[3]
    assert [r.key for r in solve(case.replace({"flight.temperature": 300.0})).potentials][:1] != ["freestream"]
