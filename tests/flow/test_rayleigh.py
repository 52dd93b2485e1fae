from __future__ import annotations

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from cycle.flow import isentropic, rayleigh

GAMMAS = st.floats(1.05, 1.67)
MACHS = st.floats(0.01, 20.0)


@settings(deadline=None, max_examples=50)
@given(MACHS, GAMMAS)
def test_mass_and_impulse_are_kept_along_the_line(m: float, g: float) -> None:
    p, t, v = rayleigh.pressure_ratio(m, g), rayleigh.temperature_ratio(m, g), rayleigh.velocity_ratio(m, g)
    assert abs(p / t * v - 1.0) < 1e-12
    assert abs(p * (1.0 + g * m**2) / (1.0 + g) - 1.0) < 1e-12
    assert abs(m * np.sqrt(t) / v - 1.0) < 1e-12


@settings(deadline=None, max_examples=50)
@given(MACHS, GAMMAS)
def test_total_ratios_are_the_isentropic_rest_of_the_static_ones(m: float, g: float) -> None:
    rest = isentropic.temperature_ratio(m, g), isentropic.pressure_ratio(m, g)
    sonic = isentropic.critical_ratios(g)
    t = rayleigh.temperature_ratio(m, g) / rest[0] * sonic.temperature
    p = rayleigh.pressure_ratio(m, g) / rest[1] * sonic.pressure
    assert abs(rayleigh.total_temperature_ratio(m, g) / t - 1.0) < 1e-12
    assert abs(rayleigh.total_pressure_ratio(m, g) / p - 1.0) < 1e-11


@settings(deadline=None, max_examples=50)
@given(MACHS, GAMMAS)
def test_entropy_rises_with_heat_up_to_the_sonic_point(m: float, g: float) -> None:
    nearer = m + 0.1 * (1.0 - m)
    assert rayleigh.total_temperature_ratio(nearer, g) >= rayleigh.total_temperature_ratio(m, g)
    assert rayleigh.entropy_difference(m, g) <= rayleigh.entropy_difference(nearer, g) <= 1e-15
    # Gibbs at constant area: s from total temperature and total pressure is the same entropy
    total = g / (g - 1.0) * np.log(rayleigh.total_temperature_ratio(m, g)) - np.log(rayleigh.total_pressure_ratio(m, g))
    assert abs(total - rayleigh.entropy_difference(m, g)) < 1e-11


@settings(deadline=None, max_examples=50)
@given(MACHS, GAMMAS)
def test_mach_number_comes_back_from_every_ratio(m: float, g: float) -> None:
    # each ratio is stationary somewhere (Tt at 1, T at the hottest point) or flat at high Mach number: M^2 grows the rounding
    loss = 1e-13 * (1.0 + m**2)
    assert abs(rayleigh.mach_from_pressure(rayleigh.pressure_ratio(m, g), g) / m - 1.0) < loss + 1e-13 / m**2
    tau = rayleigh.total_temperature_ratio(m, g)
    back = rayleigh.mach_from_total_temperature(tau, g, supersonic=m > 1.0)
    assert abs(back / m - 1.0) < loss + min(1e-13 / abs(m - 1.0) if m != 1.0 else 1.0, 1e-7) * 10.0
    hottest = float(rayleigh.hottest_point(g).mach)
    back = rayleigh.mach_from_temperature(rayleigh.temperature_ratio(m, g), g, beyond_hottest=m > hottest)
    assert abs(back / m - 1.0) < loss + min(1e-13 / abs(m - hottest) if m != hottest else 1.0, 1e-7) * 10.0


@settings(deadline=None, max_examples=30)
@given(GAMMAS)
def test_hottest_point_is_the_largest_temperature(g: float) -> None:
    hottest = rayleigh.hottest_point(g)
    around = rayleigh.temperature_ratio(hottest.mach * np.array([0.99, 1.01]), g)
    assert np.all(around < hottest.temperature_ratio)


def test_without_a_solution_there_is_no_value() -> None:
    # above 1 the stream is choked; at or below the hypersonic limit no supersonic stream has the ratio
    limit = float(rayleigh.hypersonic_total_temperature_ratio(1.4))
    assert np.isnan(rayleigh.mach_from_total_temperature([1.0001, -0.1, np.nan], 1.4, supersonic=False)).all()
    assert np.isnan(rayleigh.mach_from_total_temperature([1.0001, limit, 0.9 * limit, np.nan], 1.4, supersonic=True)).all()
    assert np.isnan(rayleigh.mach_from_pressure([0.0, 2.5], 1.4)).all()
    assert np.isnan(rayleigh.mach_from_temperature([0.0, 1.03], 1.4, beyond_hottest=True)).all()
    assert rayleigh.largest_heat_ratio(0.0, 1.4) == np.inf
    assert rayleigh.mach_from_total_temperature(1.0, 1.4, supersonic=True) == 1.0
