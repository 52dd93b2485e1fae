"""A stored walk that somebody changed by hand is compared or refused, and never breaks the command."""

from __future__ import annotations

import copy
import json
from collections.abc import Iterator
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import cycle
from cycle.compare import Side, compare
from cycle.errors import CaseError
from cycle.record import read_stored, stored
from tests.tui.command_support import DUCT, QUICK
from tui.comparing import comparison_blocks, percent, share_blocks
from tui.tables import as_text, columns

KEPT = stored(cycle.solve(cycle.loads(DUCT, "duct")), "1.2.3")

VALUES = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats(allow_nan=False, allow_infinity=False) | st.text(max_size=20),
    lambda inner: st.lists(inner, max_size=2) | st.dictionaries(st.text(max_size=5), inner, max_size=2),
    max_leaves=4,
)


def places(data: Any, way: tuple[Any, ...] = ()) -> Iterator[tuple[Any, ...]]:
    """The way to every entry of nested data."""
    entries = data.items() if isinstance(data, dict) else enumerate(data) if isinstance(data, list) else ()
    for key, value in entries:
        yield (*way, key)
        yield from places(value, (*way, key))


PLACES = [way for way in places(KEPT) if way[1:2] != ("profile",) or len(way) == 2]  # a profile is not compared


@settings(deadline=None, max_examples=50)
@given(st.sampled_from(PLACES), VALUES, st.booleans())
def test_any_change_is_compared_or_refused(way: tuple[Any, ...], value: Any, drop: bool) -> None:
    data = copy.deepcopy(KEPT)
    table: Any = data
    for step in way[:-1]:
        table = table[step]
    if drop:
        del table[way[-1]]
    else:
        table[way[-1]] = value
    try:
        (back,) = read_stored(json.dumps(data).encode(), "odd.json")
    except CaseError as error:
        assert str(error).startswith("odd.json: ")
        return
    sides = [Side(s.name, s.walk, s.version, s.species_data) for s in (back, *read_stored(json.dumps(KEPT).encode(), "kept.json"))]
    for line in as_text(comparison_blocks(compare(sides), "us")).splitlines():
        assert columns(line) <= 80


LEAN = stored(cycle.solve(cycle.loads(QUICK, "lean")), "1.2.3")
RICH = Side(
    "rich", stored(cycle.solve(cycle.loads(QUICK.replace("fuel_air_ratio = 0.010", "fuel_air_ratio = 0.012"))), "1")["walk"], "1", "a"
)
INSIDE = [way for way in places(LEAN) if way[:2] == ("walk", "case") and len(way) > 3]


@settings(deadline=None, max_examples=60)
@given(st.sampled_from(INSIDE), VALUES)
def test_a_changed_case_is_shared_out_or_said_to_be_none(way: tuple[Any, ...], value: Any) -> None:
    data = copy.deepcopy(LEAN)
    table: Any = data
    for step in way[:-1]:
        table = table[step]
    table[way[-1]] = value
    try:
        (back,) = read_stored(json.dumps(data).encode(), "odd.json")
    except CaseError:
        return
    text = as_text(share_blocks([Side(back.name, back.walk, back.version, back.species_data), RICH], "si"))
    assert "Not assessed: " in text or "in all" in text
    assert max(map(columns, text.splitlines())) <= 80


@pytest.mark.parametrize(
    ("change", "text"), [(0.1234, "+12.3"), (-1.0, "-100"), (0.0, "0"), (1e-7, "0"), (float("nan"), "-"), (2e-5, "+0.002")]
)
def test_changes_in_percent(change: float, text: str) -> None:
    assert percent(change) == text
