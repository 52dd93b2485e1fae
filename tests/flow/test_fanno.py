from __future__ import annotations

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from cycle.flow import fanno, isentropic

GAMMAS = st.floats(1.05, 1.67)
MACHS = st.floats(0.01, 20.0)


@settings(deadline=None, max_examples=50)
@given(MACHS, GAMMAS)
def test_mass_and_total_enthalpy_are_kept_along_the_line(m: float, g: float) -> None:
    p, t, v = fanno.pressure_ratio(m, g), fanno.temperature_ratio(m, g), fanno.velocity_ratio(m, g)
    assert abs(p / t * v - 1.0) < 1e-12
    assert abs(t / isentropic.temperature_ratio(m, g) * isentropic.critical_ratios(g).temperature - 1.0) < 1e-12
    assert abs(p * (1.0 + g * m**2) / (1.0 + g) / fanno.impulse_ratio(m, g) - 1.0) < 1e-12


@settings(deadline=None, max_examples=50)
@given(st.floats(0.05, 10.0).filter(lambda m: abs(m - 1.0) > 0.01), GAMMAS)
def test_friction_takes_the_impulse_it_should(m: float, g: float) -> None:
    # dF = -(4 f dx/D) (g/2) p M^2 A; central differences in M, error h^2
    h = 1e-5 * m
    length = fanno.longest_duct(m - h, g) - fanno.longest_duct(m + h, g)
    impulse = (1.0 + g) * (fanno.impulse_ratio(m + h, g) - fanno.impulse_ratio(m - h, g))
    assert abs(-impulse / (0.5 * g * fanno.pressure_ratio(m, g) * m**2 * length) - 1.0) < 1e-6


@settings(deadline=None, max_examples=50)
@given(MACHS, GAMMAS)
def test_entropy_rises_with_friction_up_to_the_sonic_point(m: float, g: float) -> None:
    nearer = m + 0.1 * (1.0 - m)
    assert fanno.longest_duct(nearer, g) <= fanno.longest_duct(m, g)
    assert fanno.entropy_difference(m, g) <= fanno.entropy_difference(nearer, g) <= 1e-15
    # s from T and p is the same entropy
    static = g / (g - 1.0) * np.log(fanno.temperature_ratio(m, g)) - np.log(fanno.pressure_ratio(m, g))
    assert abs(static - fanno.entropy_difference(m, g)) < 1e-11


@settings(deadline=None, max_examples=50)
@given(MACHS, GAMMAS)
def test_mach_number_comes_back_from_every_ratio(m: float, g: float) -> None:
    # T/T* is flat at rest, p/p* at high M, length and total pressure are stationary at Mach 1
    loss = 1e-12 * (1.0 + m**2 + m**-2.0)
    assert abs(fanno.mach_from_temperature(fanno.temperature_ratio(m, g), g) / m - 1.0) < loss
    assert abs(fanno.mach_from_pressure(fanno.pressure_ratio(m, g), g) / m - 1.0) < loss
    near_sonic = min(1e-13 / abs(m - 1.0) if m != 1.0 else 1.0, 1e-7) * 10.0
    back = fanno.mach_from_length(fanno.longest_duct(m, g), g, supersonic=m > 1.0)
    assert abs(back / m - 1.0) < loss + near_sonic
    back = fanno.mach_from_total_pressure(fanno.total_pressure_ratio(m, g), g, supersonic=m > 1.0)
    assert abs(back / m - 1.0) < loss + near_sonic


def test_without_a_solution_there_is_no_value() -> None:
    limit = float(fanno.hypersonic_longest_duct(1.4))
    assert np.isnan(fanno.mach_from_length([limit, 2.0 * limit, -1.0, np.nan], 1.4, supersonic=True)).all()
    assert np.isnan(fanno.mach_from_length([-1.0, np.nan, np.inf], 1.4, supersonic=False)).all()
    assert np.isnan(fanno.mach_from_temperature([0.0, 1.21], 1.4)).all()
    assert np.isnan(fanno.mach_from_pressure([0.0, -1.0], 1.4)).all()
    assert np.isnan(fanno.mach_from_total_pressure(0.99, 1.4, supersonic=True))
    assert fanno.longest_duct(0.0, 1.4) == np.inf
    assert fanno.mach_from_length(0.0, 1.4, supersonic=True) == 1.0 == fanno.mach_from_length(0.0, 1.4, supersonic=False)
