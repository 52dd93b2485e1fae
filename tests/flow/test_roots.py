from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from cycle.arrays import Array
from cycle.flow import roots


@settings(deadline=None, max_examples=50)
@given(st.lists(st.floats(-50.0, 50.0), min_size=1, max_size=20))
def test_newton_and_bracket_find_the_same_known_roots(wanted: list[float]) -> None:
    target = np.array(wanted)

    def cubic(x: Array) -> tuple[Array, Array]:
        shifted = x - target
        return shifted**3 + shifted, 3.0 * shifted**2 + 1.0

    np.testing.assert_allclose(roots.newton(cubic, -60.0, 60.0 + 0.0 * target, 59.0), target, atol=1e-13)
    found = roots.bracketed(lambda x: cubic(x)[0], np.full(target.shape, -60.0), np.full(target.shape, 61.0), 1e-14)
    np.testing.assert_allclose(found, target, atol=1e-12)


def test_newton_survives_a_slope_that_throws_it_out() -> None:
    # atan throws plain Newton steps further out each time when it starts beyond 1.39
    found = roots.newton(lambda x: (np.arctan(x - 3.0), 1.0 / (1.0 + (x - 3.0) ** 2)), -1e3, np.array([1e3]), 900.0)
    np.testing.assert_allclose(found, 3.0, rtol=1e-14)


def test_points_without_a_root_are_nan_and_leave_the_others_alone() -> None:
    shift = np.array([1.0, np.nan, 4.0])
    found = roots.newton(lambda x: (x - shift, np.ones(x.shape)), np.zeros(3), np.full(3, 5.0), np.full(3, 2.0))
    np.testing.assert_allclose(found, [1.0, np.nan, 4.0])
    offset = np.array([-1.0, 1.0, np.nan])
    found = roots.bracketed(lambda x: x**2 + offset, np.zeros(3), np.full(3, 2.0), 1e-14)
    np.testing.assert_allclose(found, [1.0, np.nan, np.nan], rtol=1e-13)


def test_peak_is_found_to_the_asked_width() -> None:
    place = np.array([0.1, 0.5, 0.93])
    found = roots.peak(lambda x: -((x - place) ** 2), np.zeros(3), np.ones(3), 1e-6)
    np.testing.assert_allclose(found, place, atol=1e-6)
    assert np.isnan(roots.peak(lambda x: x, np.nan, 1.0, 1e-3))


def test_scanned_peak_is_the_vertex_of_the_last_parabola() -> None:
    """The third derivative is what the last parabola leaves out; NaN beside the peak, and an end that is the highest, are no obstacle."""
    place = np.array([0.1, 0.37, 0.99])

    def hump(x: Array, at: Array) -> Array:
        return (x - place[at]) ** 3 - 2.0 * (x - place[at]) ** 2

    found = roots.scanned_peak(hump, np.zeros(3), np.ones(3))
    np.testing.assert_allclose(found, place, atol=3e-5)
    cut = roots.scanned_peak(lambda x, at: np.where(x > 0.5, np.nan, x), np.zeros(1), np.ones(1))
    assert 0.49 < cut[0] <= 0.5
    assert roots.scanned_peak(lambda x, at: x, np.zeros(1), np.ones(1))[0] == 1.0


def test_known_ends_a_first_place_and_enough_save_calls_and_keep_the_root() -> None:
    calls: list[Array] = []

    def f(x: Array) -> Array:
        calls.append(x)
        return np.expm1(x - 0.3)

    low, high = np.zeros(1), np.ones(1)
    plain = roots.bracketed(f, low, high, 1e-14)
    many = len(calls)
    ends = f(low), f(high)
    calls.clear()
    helped = roots.bracketed(f, low, high, 1e-14, first=np.array([0.31]), ends=ends, enough=1e-13)
    assert len(calls) <= many - 3
    assert helped == pytest.approx(plain, abs=1e-12) and plain[0] == pytest.approx(0.3, abs=1e-14)
    outside = roots.bracketed(f, low, high, 1e-14, first=np.array([2.0]))
    assert outside == pytest.approx(plain, abs=1e-14)
    wall = roots.bracketed(lambda x: np.where(x > 0.5, np.inf, x - 0.3), low, high, 1e-14)
    assert wall[0] == pytest.approx(0.3, abs=1e-14)
