from __future__ import annotations

import fluids
import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from cycle.flow import isentropic as isen

GAMMAS = st.floats(1.05, 1.67)


def test_agrees_with_the_stagnation_functions_of_fluids() -> None:
    m, g, r, t, p = 2.3, 1.33, 287.0, 250.0, 3.0e4
    total = fluids.T_stagnation_ideal(t, m * np.sqrt(g * r * t), g * r / (g - 1.0))
    assert abs(t / total / isen.temperature_ratio(m, g) - 1.0) < 1e-13  # rounding
    assert abs(p / fluids.P_stagnation(p, t, total, g) / isen.pressure_ratio(m, g) - 1.0) < 1e-12
    critical = isen.critical_ratios(g)
    assert abs(fluids.T_critical_flow(t, g) / t - critical.temperature) < 1e-14
    assert abs(fluids.P_critical_flow(p, g) / p - critical.pressure) < 1e-14


@settings(deadline=None, max_examples=50)
@given(st.floats(1.0, 1e5), GAMMAS)
def test_both_branches_of_the_area_ratio_come_back(area: float, g: float) -> None:
    slow, fast = isen.subsonic_mach(area, g), isen.supersonic_mach(area, g)
    assert 0.0 < slow <= 1.0 <= fast
    # A/A* is known to rounding times the exponents of the relation, up to 20 for gamma 1.05
    assert abs(isen.area_ratio(slow, g) / area - 1.0) < 1e-13
    assert abs(isen.area_ratio(fast, g) / area - 1.0) < 1e-13


@settings(deadline=None, max_examples=50)
@given(st.floats(0.01, 30.0), GAMMAS)
def test_mach_number_comes_back_from_the_pressure_ratio(m: float, g: float) -> None:
    # at low Mach numbers p/pt is near one and keeps M^2 to 1e-16 only
    assert abs(isen.mach_from_pressure_ratio(isen.pressure_ratio(m, g), g) - m) < 1e-13 * (m + 1.0 / m)


@settings(deadline=None, max_examples=50)
@given(st.floats(0.01, 20.0), GAMMAS)
def test_mass_flow_is_conserved_between_a_section_and_its_throat(m: float, g: float) -> None:
    through = isen.mass_flow_parameter(m, g) * isen.area_ratio(m, g)
    assert abs(through / isen.mass_flow_parameter(1.0, g) - 1.0) < 1e-12


@settings(deadline=None, max_examples=50)
@given(st.floats(0.01, 20.0), GAMMAS)
def test_ratios_obey_the_gas_law_and_constant_entropy(m: float, g: float) -> None:
    p, t, rho = isen.pressure_ratio(m, g), isen.temperature_ratio(m, g), isen.density_ratio(m, g)
    assert abs(p / (rho * t) - 1.0) < 1e-12
    assert abs(p / rho**g - 1.0) < 1e-11
    # momentum: q = rho V^2 / 2 with V/a* and a*^2 = gamma R T*
    speed_square = isen.critical_velocity_ratio(m, g) ** 2 * g * isen.critical_ratios(g).temperature
    assert abs(0.5 * rho * speed_square / isen.dynamic_pressure_ratio(m, g) - 1.0) < 1e-12


def test_without_a_solution_there_is_no_value() -> None:
    assert np.isnan(isen.subsonic_mach([0.999, -1.0, np.nan, np.inf], 1.4)).all()
    assert np.isnan(isen.supersonic_mach([0.999, -1.0, np.nan, np.inf], 1.4)).all()
    assert np.isnan(isen.mach_from_pressure_ratio([0.0, -1.0, 1.1], 1.4)).all()
    assert np.isnan(isen.temperature_ratio([-1.0, np.nan], 1.4)).all()
    assert np.isnan(isen.area_ratio(2.0, [1.0, 0.9])).all()
    assert isen.area_ratio(0.0, 1.4) == np.inf
    assert isen.supersonic_mach(1.0, 1.4) == 1.0 == isen.subsonic_mach(1.0, 1.4)
    assert isen.supersonic_mach(np.full((2, 3), 2.0), np.full(3, 1.3)).shape == (2, 3)
