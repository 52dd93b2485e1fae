"""Runs the checks of `cycle.evidence`: one test a check, its id in the test's name, its source in the message."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping

import pytest

from cycle.evidence import Check, checks

Solver = Callable[[Check], Mapping[str, float]]

_TO_SI = {"deg": math.pi / 180.0}
_SLACK = 1.0 + 1e-9  # a printed half unit is itself a rounded number


def number(check: Check, key: str) -> float:
    """An input of a check as a number; angles in radians."""
    given = check.inputs[key]
    assert not isinstance(given.value, str), f"{check.id}: {key} is text"
    return float(given.value) * _TO_SI.get(given.unit, 1.0)


def numbers(check: Check, key: str) -> list[float]:
    """An input that lists several numbers, separated by commas; angles in radians."""
    given = check.inputs[key]
    return [float(part) * _TO_SI.get(given.unit, 1.0) for part in str(given.value).split(",")]


def solver_of(check: Check, solvers: Mapping[str, Solver]) -> Solver | None:
    """The solver whose key is the longest beginning of the check's id."""
    fitting = [prefix for prefix in solvers if check.id.startswith(prefix)]
    return solvers[max(fitting, key=len)] if fitting else None


def unmapped(topic: str, solvers: Mapping[str, Solver]) -> set[str]:
    """Ids of a topic that no solver takes."""
    return {check.id for check in checks(topic) if solver_of(check, solvers) is None}


def parametrised(topic: str, solvers: Mapping[str, Solver]) -> pytest.MarkDecorator:
    """Parametrise `check, solver` over a topic; checks of class "memory" get the marker of that name."""
    return pytest.mark.parametrize(
        ("check", "solver"),
        [
            pytest.param(check, solver, id=check.id, marks=_mark(check))
            for check in checks(topic)
            for solver in [solver_of(check, solvers)]
            if solver is not None
        ],
    )


def _mark(check: Check) -> pytest.MarkDecorator:
    return pytest.mark.memory if check.founded == "memory" else pytest.mark.published


def assert_met(check: Check, computed: Mapping[str, float]) -> None:
    """Every expected value of the check is computed, and within its tolerance; angles come in radians."""
    missing = set(check.expected) - set(computed)
    assert not missing, f"{check.id}: nothing computed for {sorted(missing)}"
    for key, expected in check.expected.items():
        found = float(computed[key]) / _TO_SI.get(expected.unit, 1.0)
        # the program evaluates NASA polynomials, for which some checks state an allowance of their own
        allowed = expected.polynomial_tolerance or expected.tolerance
        assert abs(found - expected.value) <= allowed * _SLACK, (
            f"{check.id}: {key} = {found:.10g} {expected.unit}, expected {expected.value:.10g} "
            f"within {allowed:.3g} ({check.tolerance_basis}); source: {check.source}"
        )
