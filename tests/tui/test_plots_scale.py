"""Axes of plots: ticks that are round, lie in the range, contain the data and say exactly what they are."""

from __future__ import annotations

import math
from decimal import Decimal
from itertools import pairwise

import pytest
from hypothesis import assume, example, given
from hypothesis import strategies as st

from tui.plots.chart import Axis
from tui.plots.scale import LARGEST, LEAST, drawable, heading, scale_of

FINITE = st.floats(-LARGEST, LARGEST).map(drawable)
POSITIVE = st.floats(LEAST, LARGEST)
MOST = st.integers(2, 20)


def exact(text: str, power: int) -> Decimal:
    return Decimal(text).scaleb(power)


@given(st.lists(FINITE, min_size=1, max_size=4), MOST, st.booleans())
@example([1.0, 1.0 + 2e-16], 5, False)
@example([101325.0, 101325.4], 6, False)
@example([-LARGEST, LARGEST], 9, True)
@example([LEAST, LEAST * (1.0 + 1e-8)], 9, True)
def test_even_ticks_are_round_and_their_labels_are_the_ticks(values: list[float], most: int, tight: bool) -> None:
    scale = scale_of(Axis("x"), values, most, tight)
    labels = [exact(t.text, scale.power) for t in scale.ticks]
    assert [float(label) for label in labels] == [t.value for t in scale.ticks]
    steps = {b - a for a, b in pairwise(labels)}
    assert len(steps) == 1
    step = steps.pop()
    assert step.normalize().as_tuple().digits in {(1,), (2,), (5,)}
    assert all(label % step == 0 for label in labels) or max(abs(v) for v in labels) / step > 10**20


@given(st.lists(FINITE, min_size=1, max_size=4), MOST, st.booleans())
def test_an_even_axis_contains_its_data_and_its_ticks(values: list[float], most: int, tight: bool) -> None:
    scale = scale_of(Axis("x"), values, most, tight)
    slack = 1e-8 * (scale.high - scale.low)
    assert scale.low - slack <= min(values) and max(values) <= scale.high + slack
    assert all(scale.low - slack <= t.value <= scale.high + slack for t in scale.ticks)
    assert 2 <= len(scale.ticks) <= max(3, most)
    if not tight:
        assert (scale.low, scale.high) == (scale.ticks[0].value, scale.ticks[-1].value)


@given(st.lists(POSITIVE, min_size=1, max_size=4), MOST, st.booleans())
@example([1.0, 3.9], 8, True)
@example([1.01, 4.04], 2, True)
@example([2e-5, 7e11], 6, False)
def test_a_log_axis_contains_its_data_and_labels_its_ticks(values: list[float], most: int, tight: bool) -> None:
    scale = scale_of(Axis("x", log=True), values, most, tight)
    assert scale.log and scale.low > 0.0
    assert scale.low <= min(values) * (1.0 + 1e-8) and max(values) <= scale.high * (1.0 + 1e-8)
    assert [float(exact(t.text, scale.power)) for t in scale.ticks] == [t.value for t in scale.ticks]
    assert all(scale.low * (1.0 - 1e-8) <= t.value <= scale.high * (1.0 + 1e-8) for t in scale.ticks)
    assert len(scale.ticks) >= 2 and all(a.value < b.value for a, b in pairwise(scale.ticks))


@given(st.lists(POSITIVE, min_size=2, max_size=4), st.integers(2, 12))
def test_wide_log_axes_are_labelled_at_equal_numbers_of_decades(values: list[float], most: int) -> None:
    assume(max(values) / min(values) > 10.0 ** (3 * most))
    scale = scale_of(Axis("x", log=True), values, most)
    powers = [Decimal(t.text).adjusted() for t in scale.ticks]
    assert len({b - a for a, b in pairwise(powers)}) == 1
    assert all(set(Decimal(t.text).normalize().as_tuple().digits) == {1} for t in scale.ticks)


def test_decades_are_ticked_at_their_numbers_too() -> None:
    scale = scale_of(Axis("p", log=True), (0.5, 300.0), 6)
    assert [t.text for t in scale.ticks] == ["1", "10", "100"]
    assert {2.0, 5.0, 9.0, 20.0, 90.0} <= set(scale.fewer(100))
    assert scale.fewer(3) == (1.0, 10.0, 100.0) and scale.fewer(1) == ()


@given(FINITE, FINITE, FINITE)
def test_places_keep_the_order_of_values(a: float, b: float, c: float) -> None:
    low, middle, high = sorted((a, b, c))
    scale = scale_of(Axis("x"), (low, high), 6)
    assert 0.0 <= scale.share(low) <= scale.share(middle) <= scale.share(high) <= 1.0


@pytest.mark.parametrize(
    ("values", "power", "texts", "words"),
    [
        ((0.0, 3.2e6), 6, ["0", "1", "2", "3", "4"], "thrust, in 10^6 N"),
        ((0.0, 9.3e-5), -6, ["0", "20", "40", "60", "80", "100"], "thrust, in 10^-6 N"),
        ((0.0, 0.5), 0, ["0.0", "0.1", "0.2", "0.3", "0.4", "0.5"], "thrust, N"),
    ],
)
def test_a_common_power_of_ten_stands_in_the_heading(values: tuple[float, ...], power: int, texts: list[str], words: str) -> None:
    axis = Axis("thrust", "N")
    scale = scale_of(axis, values, 6)
    assert (scale.power, [t.text for t in scale.ticks], heading(axis, scale.power)) == (power, texts, words)


def test_an_axis_reaches_what_it_has_to_include() -> None:
    assert scale_of(Axis("x", include=(0.0,)), (3.0, 4.0), 6).low == 0.0
    assert scale_of(Axis("x", log=True, include=(0.0, 0.01)), (3.0, 4.0), 6).low == 0.01


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf, 1e301])
def test_what_cannot_be_drawn_is_a_gap(value: float) -> None:
    assert math.isnan(drawable(value))
