from __future__ import annotations

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from cycle.flow import prandtl_meyer as pm
from cycle.flow import shocks

GAMMAS = st.floats(1.05, 1.67)
MACHS = st.floats(1.001, 30.0)
FRACTIONS = st.floats(1e-6, 0.999999)


@settings(deadline=None, max_examples=50)
@given(MACHS, GAMMAS)
def test_normal_shock_keeps_mass_momentum_energy_and_raises_entropy(m: float, g: float) -> None:
    shock = shocks.normal_shock(m, g)
    speed = shock.mach / m * np.sqrt(shock.temperature_ratio)  # u2/u1
    assert abs(shock.density_ratio * speed - 1.0) < 1e-12
    impulse = shock.pressure_ratio * (1.0 + g * shock.mach**2)
    assert abs(impulse / (1.0 + g * m**2) - 1.0) < 1e-12
    total = shock.temperature_ratio * (1.0 + 0.5 * (g - 1.0) * shock.mach**2)
    assert abs(total / (1.0 + 0.5 * (g - 1.0) * m**2) - 1.0) < 1e-12
    assert shock.total_pressure_ratio < 1.0
    # with the total temperature kept, ds/R = -ln(pt2/pt1) = g/(g-1) ln(T2/T1) - ln(p2/p1)
    entropy = g / (g - 1.0) * np.log(shock.temperature_ratio) - np.log(shock.pressure_ratio)
    assert abs(entropy + np.log(shock.total_pressure_ratio)) < 1e-11 * g / (g - 1.0)


@settings(deadline=None, max_examples=50)
@given(MACHS, GAMMAS)
def test_mach_number_ahead_comes_back(m: float, g: float) -> None:
    # M2 hardly depends on M1 at high Mach numbers: rounding grows with M1^2
    back = shocks.mach_ahead(shocks.normal_shock(m, g).mach, g)
    assert abs(back / m - 1.0) < 1e-14 * (1.0 + m**2) * g / (g - 1.0)


@settings(deadline=None, max_examples=50)
@given(MACHS, GAMMAS, FRACTIONS)
def test_wave_angles_of_both_solutions_give_the_deflection_back(m: float, g: float, fraction: float) -> None:
    theta = fraction * float(shocks.detachment(m, g).deflection)
    weak, strong = shocks.oblique_shock(m, theta, g), shocks.oblique_shock(m, theta, g, strong=True)
    # the deflection of a given wave is rounded like an angle of order one
    assert abs(weak.deflection - theta) < 1e-14
    assert abs(strong.deflection - theta) < 1e-14
    limit = shocks.detachment(m, g).wave_angle
    assert pm.mach_angle(m) <= weak.wave_angle <= limit + 1e-7
    assert limit - 1e-7 <= strong.wave_angle <= 0.5 * np.pi


@settings(deadline=None, max_examples=50)
@given(st.floats(1.05, 30.0), GAMMAS, st.floats(0.01, 0.99))
def test_oblique_shock_keeps_the_balances_along_and_across_the_wave(m: float, g: float, fraction: float) -> None:
    shock = shocks.oblique_shock(m, fraction * float(shocks.detachment(m, g).deflection), g)
    after = shock.wave_angle - shock.deflection
    speed = shock.mach / m * np.sqrt(shock.temperature_ratio)
    normal, along = speed * np.sin(after) / np.sin(shock.wave_angle), speed * np.cos(after) / np.cos(shock.wave_angle)
    assert abs(shock.density_ratio * normal - 1.0) < 1e-11
    assert abs(along - 1.0) < 1e-11
    assert shock.total_pressure_ratio < 1.0


@settings(deadline=None, max_examples=30)
@given(st.floats(1.05, 20.0), GAMMAS)
def test_detachment_is_the_largest_deflection_of_any_wave(m: float, g: float) -> None:
    limit = shocks.detachment(m, g)
    waves = np.linspace(float(pm.mach_angle(m)), 0.5 * np.pi, 2001)
    turned = shocks.deflection_of_wave(m, waves, g)
    assert np.max(turned) <= limit.deflection + 1e-14
    # the peak is flat: half a grid step of 4e-4 rad costs its square
    assert limit.deflection - np.max(turned) < 1e-5


def test_limits_of_the_oblique_shock() -> None:
    m = np.array([1.5, 3.0, 8.0])
    weak, strong = shocks.oblique_shock(m, 0.0, 1.4), shocks.oblique_shock(m, 0.0, 1.4, strong=True)
    np.testing.assert_allclose(weak.wave_angle, pm.mach_angle(m), rtol=1e-14)
    np.testing.assert_allclose(weak.mach, m, rtol=1e-14)
    np.testing.assert_allclose(strong[2:], shocks.normal_shock(m, 1.4), rtol=1e-14)
    # a small deflection keeps its digits: linear theory dp/p = g M^2 theta / (M^2-1)^(1/2), next term theta^2
    small = shocks.oblique_shock(m, 1e-6, 1.4)
    linear = 1.4 * m**2 / np.sqrt(m**2 - 1.0) * 1e-6
    np.testing.assert_allclose(small.pressure_ratio - 1.0, linear, rtol=1e-4)


def test_detached_and_subsonic_points_have_no_value() -> None:
    m = np.array([2.0, 2.0, 2.0, 0.9, np.nan])
    theta = np.radians([22.9, 23.0, -1.0, 5.0, 5.0])
    for strong in (False, True):
        shock = shocks.oblique_shock(m, theta, 1.4, strong=strong)
        for part in shock:
            np.testing.assert_array_equal(np.isnan(part), [False, True, True, True, True])
    assert all(np.isnan(part) for part in shocks.normal_shock(0.99, 1.4))
    assert all(np.isnan(part) for part in shocks.detachment(0.99, 1.4))
    assert np.isnan(shocks.deflection_of_wave(2.0, np.radians([29.0, 91.0]), 1.4)).all()
    assert np.isnan(shocks.mach_ahead([0.3, 1.1], 1.4)).all()
    assert shocks.oblique_shock(np.full((4, 1), 3.0), np.full(3, 0.1), 1.4).mach.shape == (4, 3)
