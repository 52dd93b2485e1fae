"""The laws that hold for any gas, run with a gas of the test's own and against the closed constant-gamma forms.

Topic a2: air whose vibration is a harmonic oscillator (NACA Report 1135, imperfect-gas section). That gas exists only here:
it shows that the laws ask a gas for nothing but its verbs.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from cycle.arrays import Array, Codes
from cycle.constants import STANDARD_AIR
from cycle.evidence import Check
from cycle.flow import gas_shocks, heating, isentropic, rayleigh, shocks, states
from cycle.gas.base import FixedGas, inside_everywhere
from cycle.gas.constant import ConstantGas
from cycle.gas.frozen import air_gas
from cycle.gas.species import species_table
from tests.evidence_support import Solver, assert_met, number, parametrised, unmapped

R_AIR = 287.0


@dataclass(frozen=True)
class VibratingGas(FixedGas):
    """h/R = gp/(gp-1) T + Theta/(exp(Theta/T) - 1)."""

    theta: float
    gas_constant: Array
    gamma: float = 1.4
    species: tuple[str, ...] = ()

    @property
    def composition(self) -> Array:  # type: ignore[override]
        return np.empty((0, self.size))

    def caloric(self, temperature: Array) -> tuple[Array, Array, Array]:
        T, R, still = temperature, self.gas_constant, self.gamma / (self.gamma - 1.0)
        x = self.theta / T
        energy = self.theta / np.expm1(x)
        h = R * (still * T + energy)
        s = R * (still * np.log(T / 298.15) + x / np.expm1(x) - np.log(-np.expm1(-x)))
        cp = R * (still + x**2 * np.exp(x) / np.expm1(x) ** 2)
        return h, s, cp

    def range_of(self, temperature: Array) -> Codes:
        return inside_everywhere(temperature)

    def take(self, index: Codes) -> VibratingGas:
        return VibratingGas(self.theta, self.gas_constant[index], self.gamma)

    def fuelled(self, fuel, ratio, burnt):  # type: ignore[no-untyped-def]
        raise NotImplementedError


def vibrating(theta: float, n: int = 1) -> VibratingGas:
    return VibratingGas(theta, np.full(n, R_AIR))


def constant(gamma: float, n: int = 1) -> ConstantGas:
    return ConstantGas(np.full(n, R_AIR * gamma / (gamma - 1.0)), np.full(n, R_AIR))


def heats(check: Check) -> dict[str, float]:
    found = {}
    gas = vibrating(number(check, "Theta"))
    for T in (400.0, 800.0, 1500.0, 2500.0):
        state = gas.at("tp", np.array([T]), np.array([1e5]))
        found[f"gamma at {T:.0f} K"] = state.gamma_frozen[0]
        found[f"cp/cp_perf at {T:.0f} K"] = state.specific_heat[0] / (3.5 * R_AIR)
    return found


def isentrope(check: Check) -> dict[str, float]:
    """From the state at rest to Mach M: T/Tt, p/pt, rho/rhot and A/A* of any gas."""
    gas, mach = vibrating(number(check, "Theta")), np.array([number(check, "M")])
    total = gas.at("tp", np.array([number(check, "Tt")]), np.array([1e5]))
    at = states.at_mach(gas, total.enthalpy, total.entropy, mach, total)
    sonic = states.sonic(gas, total.enthalpy, total.entropy, total)
    t, p = at.temperature / total.temperature, at.pressure / total.pressure
    area = sonic.density * sonic.sound_speed / (at.density * mach * at.sound_speed)
    back = states.rest(gas, at.enthalpy + 0.5 * (mach * at.sound_speed) ** 2, at.entropy)
    assert back.pressure == pytest.approx(total.pressure, rel=1e-10)
    return {
        "T/Tt": t[0],
        "p/pt": p[0],
        "rho/rhot": (at.density / total.density)[0],
        "A/A*": area[0],
        "(T/Tt)/(T/Tt)perf": (t / isentropic.temperature_ratio(mach, 1.4))[0],
        "(p/pt)/(p/pt)perf": (p / isentropic.pressure_ratio(mach, 1.4))[0],
        "(A/A*)/(A/A*)perf": (area / isentropic.area_ratio(mach, 1.4))[0],
    }


def shock(check: Check) -> dict[str, float]:
    gas = vibrating(number(check, "Theta"))
    before = gas.at("tp", np.array([number(check, "T1")]), np.array([1e4]))
    u = number(check, "M1") * before.sound_speed
    front = gas_shocks.normal_shock(gas, before, u)
    assert front.state.good.all()
    return {
        "T2/T1": (front.state.temperature / before.temperature)[0],
        "p2/p1": (front.state.pressure / before.pressure)[0],
        "rho2/rho1": (front.state.density / before.density)[0],
        "M2": (front.velocity / front.state.sound_speed)[0],
    }


SOLVERS: dict[str, Solver] = {"imp-gamma": heats, "imp-isen": isentrope, "imp-ns": shock}


def test_every_check_of_the_topic_is_reached() -> None:
    assert unmapped("a2", SOLVERS) == set()


@parametrised("a2", SOLVERS)
def test_vibrating_air(check: Check, solver: Solver) -> None:
    assert_met(check, solver(check))


MACH = st.floats(1.05, 12.0)
GAMMA = st.floats(1.15, 1.45)


@settings(max_examples=40, deadline=None)
@given(MACH, GAMMA)
def test_normal_shock_equals_the_closed_form_at_constant_gamma(mach: float, gamma: float) -> None:
    """NACA Report 1135, eqs. 93 to 96, to what the Newton iteration leaves."""
    gas = constant(gamma)
    before = gas.at("tp", np.array([250.0]), np.array([1e4]))
    front = gas_shocks.normal_shock(gas, before, mach * before.sound_speed)
    closed = shocks.normal_shock(mach, gamma)
    assert front.state.pressure[0] / 1e4 == pytest.approx(float(closed.pressure_ratio), rel=1e-9)
    assert (front.velocity / front.state.sound_speed)[0] == pytest.approx(float(closed.mach), rel=1e-9)


@settings(max_examples=25, deadline=None)
@given(st.floats(1.5, 10.0), GAMMA, st.floats(0.05, 0.95), st.booleans())
def test_oblique_shock_equals_the_closed_form_at_constant_gamma(mach: float, gamma: float, part: float, strong: bool) -> None:
    """Weak and strong branch at a share of the detachment angle; NACA Report 1135, eq. 150."""
    gas = constant(gamma)
    before = gas.at("tp", np.array([250.0]), np.array([1e4]))
    turn = part * shocks.detachment(mach, gamma).deflection
    front = gas_shocks.oblique_shock(gas, before, mach * before.sound_speed, np.array([float(turn)]), strong)
    closed = shocks.oblique_shock(mach, turn, gamma, strong=strong)
    assert front.attached.all()
    assert front.angle[0] == pytest.approx(float(closed.wave_angle), rel=1e-7)
    assert front.state.pressure[0] / 1e4 == pytest.approx(float(closed.pressure_ratio), rel=1e-7)


def test_detached_and_subsonic_streams_have_no_oblique_shock() -> None:
    gas = constant(1.4, 3)
    before = gas.at("tp", np.full(3, 250.0), np.full(3, 1e4))
    most = float(shocks.detachment(3.0, 1.4).deflection)
    turn = np.array([most - 1e-3, most + 1e-3, 0.1])
    front = gas_shocks.oblique_shock(gas, before, np.array([3.0, 3.0, 0.8]) * before.sound_speed, turn)
    assert front.attached.tolist() == [True, False, False]
    found, angle = gas_shocks.largest_turning(gas, before, np.full(3, 3.0) * before.sound_speed)
    assert found == pytest.approx(most, abs=1e-8)
    assert angle == pytest.approx(float(shocks.detachment(3.0, 1.4).wave_angle), abs=1e-4)


@pytest.mark.parametrize(("model", "fastest"), [("frozen", 11.0), ("equilibrium", 15.0)])
def test_shock_in_real_air_conserves_and_makes_entropy(model: str, fastest: float) -> None:
    """Mass, momentum and energy across the front from the states alone, at 230 K up to the end of the data; second law."""
    mach = np.linspace(1.2, fastest, 30)
    gas = air_gas(species_table(tuple(STANDARD_AIR), None), STANDARD_AIR, model, mach.size)
    before = gas.at("tp", np.full(mach.size, 230.0), np.full(mach.size, 1200.0))
    u = mach * before.sound_speed
    front = gas_shocks.normal_shock(gas, before, u)
    assert front.state.good.all() and front.attached.all()
    flux = before.density * u
    assert front.state.density * front.velocity == pytest.approx(flux, rel=1e-10)
    assert front.state.pressure + flux * front.velocity == pytest.approx(before.pressure + flux * u, rel=1e-10)
    total = before.enthalpy + 0.5 * u**2
    assert front.state.enthalpy + 0.5 * front.velocity**2 == pytest.approx(total, rel=1e-10)
    assert np.all(front.state.entropy > before.entropy)
    perfect = shocks.normal_shock(mach, 1.4)
    hot = front.state.temperature / before.temperature
    assert np.all(hot[mach > 6.0] < perfect.temperature_ratio[mach > 6.0])  # vibration and dissociation take energy


@settings(max_examples=40, deadline=None)
@given(st.floats(0.1, 6.0).filter(lambda m: abs(m - 1.0) > 0.02), GAMMA, st.floats(0.02, 0.98))
def test_constant_area_heating_follows_the_closed_rayleigh_line(mach: float, gamma: float, part: float) -> None:
    """Heat up to a share of the choking heat; Shapiro (1953), ch. 7, both branches. Near Mach 1 the line is flat in Tt."""
    gas = constant(gamma)
    before = gas.at("tp", np.array([400.0]), np.array([5e4]))
    u = mach * before.sound_speed
    flux, impulse = before.density * u, before.pressure + before.density * u**2
    total = before.enthalpy + 0.5 * u**2
    most = total / rayleigh.total_temperature_ratio(mach, gamma)
    fast = np.array([mach > 1.0])
    after = total + part * (most - total)
    sharp = heating.sonic_point(gas, impulse, flux, most)
    assert sharp.total_enthalpy == pytest.approx(most, rel=1e-10)
    point = heating.sonic_point(gas, impulse, flux, after)
    state, passes = heating.constant_area(gas, impulse, flux, after, fast, point)
    assert passes.all() and state.good.all()
    expected = rayleigh.mach_from_total_temperature(after / most, gamma, supersonic=mach > 1.0)
    assert (flux / state.density / state.sound_speed) == pytest.approx(expected, rel=1e-7)
    beyond = most * (1.0 + 1e-9)
    _, too_much = heating.constant_area(gas, impulse, flux, beyond, fast, heating.sonic_point(gas, impulse, flux, beyond))
    assert not too_much.any()


@settings(max_examples=40, deadline=None)
@given(GAMMA, st.floats(1.01, 60.0), st.booleans())
def test_flux_state_equals_the_closed_area_relation(gamma: float, ratio: float, fast: bool) -> None:
    gas = constant(gamma)
    total = gas.at("tp", np.array([1500.0]), np.array([1e6]))
    sonic = states.sonic(gas, total.enthalpy, total.entropy, total)
    flux = sonic.density * sonic.sound_speed / ratio
    state, passes = states.at_flux(gas, total.enthalpy, total.entropy, flux, np.array([fast]), sonic)
    inverse = isentropic.supersonic_mach if fast else isentropic.subsonic_mach
    assert passes.all()
    mach = states.velocity(total.enthalpy, state) / state.sound_speed
    assert mach == pytest.approx(inverse(ratio, gamma), rel=1e-8)
    assert not states.at_flux(gas, total.enthalpy, total.entropy, flux * ratio * 1.001, np.array([fast]), sonic)[1].any()
