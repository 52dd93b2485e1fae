from __future__ import annotations

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from cycle.flow import prandtl_meyer as pm

GAMMAS = st.floats(1.05, 1.67)


@settings(deadline=None, max_examples=50)
@given(st.floats(0.0, 0.999), GAMMAS)
def test_angle_comes_back_from_its_mach_number(fraction: float, g: float) -> None:
    nu = fraction * float(pm.largest_angle(g))
    # rounding of an angle that is the difference of two angles of order ten
    assert abs(pm.angle(pm.mach_from_angle(nu, g), g) - nu) < 2e-14


@settings(deadline=None, max_examples=50)
@given(st.floats(1.01, 10.0), st.floats(-1.0, 1.0), GAMMAS)
def test_a_turn_and_its_reverse_cancel(m: float, fraction: float, g: float) -> None:
    room = pm.largest_angle(g) - pm.angle(m, g) if fraction > 0.0 else pm.angle(m, g)
    deflection = 0.5 * fraction * float(room)
    there = pm.turn(m, deflection, g)
    back = pm.turn(there.mach, -deflection, g)
    # nu grows as (M^2-1)^(3/2), so M is known less well near Mach 1
    assert abs(back.mach - m) < 1e-10
    assert abs(back.pressure_ratio * there.pressure_ratio - 1.0) < 1e-9
    assert abs(there.pressure_ratio / (there.density_ratio * there.temperature_ratio) - 1.0) < 1e-12


@settings(deadline=None, max_examples=30)
@given(st.floats(1.1, 10.0), GAMMAS)
def test_slope_is_the_differential_relation_of_a_mach_wave(m: float, g: float) -> None:
    # d nu = (M^2-1)^(1/2) dV/V with dV/V = dM / (M [1 + (g-1)/2 M^2]); central difference, error h^2
    h = 1e-5 * m
    slope = (pm.angle(m + h, g) - pm.angle(m - h, g)) / (2.0 * h)
    exact = np.sqrt(m**2 - 1.0) / (m * (1.0 + 0.5 * (g - 1.0) * m**2))
    assert abs(slope / exact - 1.0) < 1e-7


def test_without_a_solution_there_is_no_value() -> None:
    assert np.isnan(pm.mach_from_angle([-0.1, 2.2769, np.nan], 1.4)).all()
    assert np.isnan(pm.angle(0.99, 1.4))
    assert np.isnan(pm.mach_angle(0.99))
    assert all(np.isnan(part) for part in pm.turn(2.0, np.radians(-27.0), 1.4))
    assert all(np.isnan(part) for part in pm.turn(2.0, np.radians(105.0), 1.4))
    assert pm.mach_from_angle(0.0, 1.4) == 1.0
