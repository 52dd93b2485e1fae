from __future__ import annotations

from collections.abc import Mapping

import ambiance
import fluids
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from cycle import atmosphere as atm
from cycle.evidence import Check
from tests.evidence_support import Solver, assert_met, number, parametrised, unmapped


def _air(check: Check) -> Mapping[str, float]:
    altitude = number(check, "z") if "z" in check.inputs else float(atm.geometric_altitude(number(check, "H")))
    air = atm.atmosphere(altitude)
    # the tables quote the molecular-scale temperature at 86 km; it is the kinetic one up to 80 km
    scale = atm.molecular_scale_temperature(altitude)
    sound = np.sqrt(1.4 * air.pressure / air.density)
    return {"T": float(scale), "p": float(air.pressure), "rho": float(air.density), "a": float(sound)}


SOLVERS: dict[str, Solver] = {"z-": _air, "H-": _air}


@parametrised("c", SOLVERS)
def test_us_standard_atmosphere_1976(check: Check, solver: Solver) -> None:
    assert_met(check, solver(check))


def test_no_atmosphere_check_is_left_out() -> None:
    assert unmapped("c", SOLVERS) == set()


@pytest.mark.published
def test_kinetic_temperature_at_86_km() -> None:
    # U.S. Standard Atmosphere 1976, table 1: 186.87 K at 86 km (186.946 K times M/M0 = 0.999579)
    assert abs(float(atm.atmosphere(86000.0).temperature) - 186.87) <= 0.005


def test_molar_mass_falls_ever_faster_from_80_km() -> None:
    # lighter gases take over steadily: a slip in one row of the table would show as a kink backwards
    z = np.arange(79500.0, 86001.0, 500.0)
    ratio = atm.atmosphere(z).temperature / atm.molecular_scale_temperature(z)
    assert ratio[0] == ratio[1] == 1.0
    assert np.all(np.diff(ratio, n=2) < 1e-12)


def test_agrees_with_the_icao_layers_of_ambiance() -> None:
    z = np.linspace(0.0, 80000.0, 81)
    other, air = ambiance.Atmosphere(z), atm.atmosphere(z)
    # ICAO 7488 uses R = 287.05287 J/(kg K), 3e-7 from ours, and base pressures rounded to six digits
    np.testing.assert_allclose(air.temperature, other.temperature, rtol=1e-9)
    np.testing.assert_allclose(air.pressure, other.pressure, rtol=2e-5)
    np.testing.assert_allclose(air.density, other.density, rtol=2e-5)


def test_agrees_with_the_1976_layers_of_fluids() -> None:
    z = np.linspace(0.0, 79000.0, 40)
    other = [fluids.ATMOSPHERE_1976(float(altitude)) for altitude in z]
    air = atm.atmosphere(z)
    # that library rounds the gas constant of air and its layer pressures to about five digits
    np.testing.assert_allclose(air.temperature, [o.T for o in other], rtol=1e-6)
    np.testing.assert_allclose(air.pressure, [o.P for o in other], rtol=5e-5)
    np.testing.assert_allclose(air.density, [o.rho for o in other], rtol=5e-5)


@settings(deadline=None, max_examples=50)
@given(st.floats(20.0, 85900.0))
def test_pressure_is_hydrostatic(z: float) -> None:
    step = 10.0
    below, above = atm.atmosphere([z - step, z + step]).pressure
    gravity = 9.80665 * (atm.EARTH_RADIUS / (atm.EARTH_RADIUS + z)) ** 2
    density = float(atm.atmosphere(z).density)
    # central difference over 20 m: (20 m / 5 km)^2 / 24, and a kink of the lapse rate inside the interval
    assert abs((below - above) / (2.0 * step) / (density * gravity) - 1.0) < 2e-4


@settings(deadline=None, max_examples=50)
@given(st.floats(0.0, 86000.0))
def test_altitude_of_pressure_inverts_the_layers(z: float) -> None:
    back = float(atm.altitude_of_pressure(atm.atmosphere(z).pressure))
    assert abs(back - z) < 1e-8  # rounding of a pressure, 1e-16 of a 7 km scale height, grown by the exponent


def test_offset_keeps_the_pressure_and_scales_the_density() -> None:
    plain, warm = atm.atmosphere([0.0, 30000.0]), atm.atmosphere([0.0, 30000.0], temperature_offset=20.0)
    np.testing.assert_array_equal(warm.pressure, plain.pressure)
    np.testing.assert_allclose(warm.temperature, plain.temperature + 20.0, rtol=1e-15)
    np.testing.assert_allclose(warm.density * warm.temperature, plain.density * plain.temperature, rtol=1e-14)


def test_outside_the_range_there_is_no_value() -> None:
    air = atm.atmosphere([-1.0, 86000.1, np.nan, 1000.0])
    for part in air:
        np.testing.assert_array_equal(np.isnan(part), [True, True, True, False])
    assert np.isnan(atm.atmosphere(20000.0, temperature_offset=-300.0).temperature)
    np.testing.assert_array_equal(np.isnan(atm.altitude_of_pressure([0.0, 0.3, 101326.0, np.nan, 5e4])), [True] * 4 + [False])


def test_shapes_broadcast() -> None:
    air = atm.atmosphere(np.zeros((3, 1)), np.zeros(2))
    assert all(part.shape == (3, 2) for part in air)
    assert atm.altitude_of_pressure(np.full((2, 2), 1e4)).shape == (2, 2)
