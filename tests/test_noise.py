"""Noise is not a value: the rule by its properties, and no figure of a solution below its own error."""

from __future__ import annotations

import json
import math
import re
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import cycle
from cycle import noise
from cycle.case import Case
from cycle.quantities import OUTPUT
from cycle.record import record
from tests.case_files import SHIPPED, case_file
from tests.random_cases import random_case, written
from tui import figures, session
from tui.influence import change
from tui.session import Session, loaded, with_figures
from tui.tables import as_text
from tui.text import walk_blocks
from tui.views import numbers, went

VALUES = st.floats(-1e12, 1e12, allow_subnormal=False)
NAMES = sorted(file.stem for file in SHIPPED.glob("*.toml"))


@given(st.lists(VALUES, min_size=1, max_size=8))
def test_a_row_stays_or_is_nothing_beside_the_largest_of_its_account(values: list[float]) -> None:
    most = max(map(abs, values))
    for value, shown in zip(values, noise.rows(values), strict=True):
        assert shown == (value if abs(value) > noise.FIGURE * most else 0.0)
    assert max(map(abs, noise.rows(values))) == most


@given(st.lists(VALUES, min_size=1, max_size=8), st.sampled_from([2.0**k for k in (-20, -3, 5, 30)]))
def test_the_rule_knows_no_unit_and_settles_once(values: list[float], factor: float) -> None:
    once = noise.rows(values)
    assert noise.rows(once) == once
    assert noise.rows([factor * v for v in values]) == [factor * v for v in once]
    assert noise.rows([-v for v in values]) == [-v for v in once]


@given(VALUES, VALUES)
def test_a_change_is_antisymmetric_and_nothing_for_equals(a: float, b: float) -> None:
    assert noise.change(a, b) == -noise.change(b, a)
    assert noise.change(a, a) == 0.0
    assert noise.change(a, b) in (a - b, 0.0)


@given(st.floats(1e-6, 1e12), st.floats(-0.9e-9, 0.9e-9))
def test_a_change_below_the_error_is_nothing_everywhere(value: float, off: float) -> None:
    moved = value * (1.0 + off)
    assert noise.change(moved, value) == 0.0
    assert numbers.difference("thrust", moved, value, "si") == "+0"
    assert numbers.percent(moved, value) == "+0"
    assert change(moved - value, OUTPUT["thrust"], value, "si") == "0"


def test_what_is_no_number_stays_so_and_arrays_are_settled_point_by_point() -> None:
    nan = math.nan
    assert math.isnan(noise.settled(nan, 1.0)) and noise.settled(1e-30, nan) == 1e-30 and noise.settled(5.0, math.inf) == 5.0
    assert noise.largest([nan, -3.0]) == 3.0 and noise.largest([]) == 0.0
    first, second = noise.rows([np.array([1.0, 1e-12, nan]), np.array([1e-12, 1.0, 2.0])])
    assert first[:2].tolist() == [1.0, 0.0] and math.isnan(first[2])
    assert second.tolist() == [0.0, 1.0, 2.0]


def assert_without_noise(walk: cycle.Walk) -> None:
    """No row of an account, no potential and no entropy rise other than 0 below its error."""
    for account in (walk.losses, walk.potentials, walk.exergy):
        values = [float(r.value) for r in account]
        most = max(map(abs, values), default=0.0)
        assert [v for v in values if v and abs(v) <= noise.FIGURE * most] == []
    thrust = max(s.stream_thrust for s in walk.station.values() if s.has_value)
    entropy = max(s.entropy for s in walk.station.values() if s.has_value)
    found = [(float(s.thrust_potential), thrust) for s in walk.station.values()]
    found += [(float(p.figures.get("thrust_potential_change", math.nan)), thrust) for p in walk.processes]
    found += [(float(p.figures["entropy_rise"]), 0.1 * entropy) for p in walk.processes]
    assert [(v, scale) for v, scale in found if v and abs(v) <= noise.FIGURE * scale] == []


@pytest.mark.parametrize("name", NAMES)
def test_no_shipped_case_gives_noise_as_a_value(name: str) -> None:
    walk = cycle.solve(cycle.load(case_file(name)))
    assert_without_noise(walk)
    data: dict[str, Any] = json.loads(json.dumps(record(walk)))
    assert data["stations"].get("0", {}).get("thrust_potential") in (0.0, None)
    said = as_text(walk_blocks(walk, "si", False)).split("\nAudit")[0]
    # the error of a march is itself the figure
    assert [row for row in said.splitlines() if re.search(r"\de-1\d", row) and "error of the march" not in row] == []


@settings(max_examples=25, deadline=None)
@given(st.integers(0, 10**6))
def test_no_random_case_gives_noise_as_a_value(seed: int) -> None:
    walk = cycle.solve(cycle.loads(written(random_case(seed)), str(seed)))
    if walk.status == "solved":
        assert_without_noise(walk)


def walked(case: Case, before: Session | None = None) -> Session:
    now = session.edited(before, case, "said otherwise") if before is not None else loaded(Session("x"), case, None)
    return with_figures(now, now.generation, figures.assess(figures.solve(case)))


@pytest.mark.parametrize("account", went.ACCOUNTS, ids=lambda a: a.key)
def test_a_case_said_otherwise_has_accounts_without_a_change(account: went.Account) -> None:
    """The Mach number rounded otherwise: rows of an account move by less than their error, and none is shown to move."""
    case = cycle.load(case_file("plain"))
    first = walked(case)
    assert first.figures is not None
    again = walked(case.replace({"flight.mach": case.value("flight.mach") * (1.0 + 1e-12)}), first)
    raw = [a.value - b.value for a, b in zip(account.rows(again.figures), account.rows(first.figures), strict=True)]
    assert any(raw)
    assert [b.change for b in went.bars(again, account)] == [0.0] * len(went.bars(again, account))
    rows = went.table_csv(again, account).splitlines()[1:]
    assert {row.rsplit(",", 1)[1] for row in rows} == {"0.0"}
