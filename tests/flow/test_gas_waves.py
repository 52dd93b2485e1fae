"""Isentropic turning, cones and inlet limits in any gas: against the closed constant-gamma laws, the published checks, and
independent integrations in real air."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import quad, solve_ivp

from cycle.arrays import Array
from cycle.constants import STANDARD_AIR
from cycle.evidence import Check
from cycle.flow import cone, gas_cone, gas_limits, gas_waves, limits, prandtl_meyer, shocks, states
from cycle.gas.base import Gas
from cycle.gas.constant import ConstantGas
from cycle.gas.frozen import air_gas
from cycle.gas.species import species_table
from cycle.gas.state import State
from tests.evidence_support import Solver, assert_met, number, parametrised

R_AIR = 287.0
MACH, GAMMA = st.floats(1.5, 12.0), st.floats(1.15, 1.45)
REAL = ("frozen", "equilibrium")


def constant(gamma: float, n: int = 1) -> ConstantGas:
    return ConstantGas(np.full(n, R_AIR * gamma / (gamma - 1.0)), np.full(n, R_AIR))


def real(model: str, n: int) -> Gas:
    return air_gas(species_table(tuple(STANDARD_AIR), None), STANDARD_AIR, model, n)


def flowing(gas: Gas, mach: Array | float, temperature: float = 226.0) -> tuple[State, Array]:
    before = gas.at("tp", np.full(gas.size, temperature), np.full(gas.size, 1200.0))
    return before, mach * before.sound_speed


# isentropic turning


@settings(max_examples=40, deadline=None)
@given(MACH, GAMMA, st.floats(0.02, 0.98))
def test_isentropic_compression_equals_the_closed_law(mach: float, gamma: float, part: float) -> None:
    """NACA Report 1135, eq. 171c, to what the Gauss rule and the state solve leave."""
    gas = constant(gamma)
    before, u = flowing(gas, mach)
    nu = prandtl_meyer.angle(mach, gamma)
    assert gas_waves.prandtl_meyer_angle(gas, before, u)[0] == pytest.approx(float(nu), rel=1e-9)
    turn = part * float(nu)
    turned = gas_waves.isentropic_turn(gas, before, u, np.array([turn]))
    closed = prandtl_meyer.turn(mach, -turn, gamma)
    assert turned.possible.all()
    assert turned.state.pressure[0] / 1200.0 == pytest.approx(float(closed.pressure_ratio), rel=1e-8)
    assert turned.state.entropy == pytest.approx(before.entropy, rel=1e-12)


@pytest.mark.parametrize("model", REAL)
def test_prandtl_meyer_angle_of_real_air_equals_an_adaptive_quadrature(model: str) -> None:
    """Over the speed from sonic, dnu = (M^2-1)^(1/2) dV/V, with a state solve at each point; quad asks for 1e-9."""
    gas = real(model, 1)
    before, u = flowing(gas, 8.0)
    total = before.enthalpy + 0.5 * u**2
    critical = states.sonic(gas, total, before.entropy, before)

    def integrand(root: float) -> float:
        # V = V* + root^2 takes the square-root start away
        speed = critical.sound_speed + root**2
        state = gas.at("hs", total - 0.5 * speed**2, before.entropy, start=before)
        return float((np.sqrt(np.maximum((speed / state.sound_speed) ** 2 - 1.0, 0.0)) / speed)[0] * 2.0 * root)

    nu, _ = quad(integrand, 0.0, float(np.sqrt(u - critical.sound_speed)[0]), epsabs=1e-9, limit=200)
    assert gas_waves.prandtl_meyer_angle(gas, before, u)[0] == pytest.approx(nu, abs=1e-8)


def test_turning_past_sonic_or_below_it_is_not_possible() -> None:
    gas = constant(1.4, 4)
    mach = np.array([3.0, 3.0, 0.8, 3.0])
    before, u = flowing(gas, mach)
    nu = float(prandtl_meyer.angle(3.0, 1.4))
    turned = gas_waves.isentropic_turn(gas, before, u, np.array([nu - 1e-4, nu + 1e-4, 0.1, 0.0]))
    assert turned.possible.tolist() == [True, False, False, True]
    assert turned.state.pressure[3] == pytest.approx(1200.0)
    assert np.isnan(gas_waves.prandtl_meyer_angle(gas, before, u)[2])


@settings(max_examples=20, deadline=None)
@given(st.floats(2.0, 10.0), GAMMA, st.floats(0.02, 0.98))
def test_shock_of_wave_equals_the_closed_law(mach: float, gamma: float, part: float) -> None:
    gas = constant(gamma)
    before, u = flowing(gas, mach)
    mu = float(prandtl_meyer.mach_angle(mach))
    wave = mu + part * (0.5 * np.pi - mu)
    turned, front = gas_waves.shock_of_wave(gas, before, u, np.array([wave]))
    closed = shocks.shock_of_wave(mach, wave, gamma)
    assert turned[0] == pytest.approx(float(closed.deflection), rel=1e-8)
    assert (front.velocity / front.state.sound_speed)[0] == pytest.approx(float(closed.mach), rel=1e-9)
    assert np.isnan(gas_waves.shock_of_wave(gas, before, u, np.array([0.99 * mu]))[0][0])


# cones


def _cone(check: Check) -> Mapping[str, float]:
    m, g = number(check, "M1"), number(check, "gamma")
    gas = constant(g)
    before, u = flowing(gas, m)
    flow = gas_cone.cone_flow(gas, before, u, np.array([number(check, "cone_half_angle")]))
    p = (flow.surface.pressure / before.pressure)[0]
    behind = states.rest(gas, before.enthalpy + 0.5 * u**2, flow.surface.entropy)
    ahead = states.rest(gas, before.enthalpy + 0.5 * u**2, before.entropy)
    return {
        "beta": flow.front.angle[0],
        "pc/p1": p,
        "rhoc/rho1": (flow.surface.density / before.density)[0],
        "Mc": (flow.surface_velocity / flow.surface.sound_speed)[0],
        "pt2/pt1": (behind.pressure / ahead.pressure)[0],
        "Cp_c": (p - 1.0) / (0.5 * g * m**2),
    }


@parametrised("d", {"cone-": _cone})
def test_published_cones_through_the_any_gas_law(check: Check, solver: Solver) -> None:
    assert_met(check, solver(check))


@settings(max_examples=25, deadline=None)
@given(st.floats(1.6, 12.0), GAMMA, st.floats(5.0, 30.0))
def test_cone_equals_the_constant_gamma_cone(mach: float, gamma: float, degrees: float) -> None:
    """The same equations and steps; the sound speed comes from states instead of a closed form."""
    gas = constant(gamma)
    before, u = flowing(gas, mach)
    flow = gas_cone.cone_flow(gas, before, u, np.radians([degrees]))
    closed = cone.cone_flow(mach, np.radians(degrees), gamma)
    assert flow.attached[0] == np.isfinite(closed.wave_angle)
    if flow.attached[0]:
        assert flow.front.angle[0] == pytest.approx(float(closed.wave_angle), rel=1e-7)
        # in a weak conical shock the surface pressure reacts strongly to the angle
        assert flow.surface.pressure[0] / 1200.0 == pytest.approx(float(closed.surface_pressure_ratio), rel=1e-6)


@pytest.mark.parametrize(("model", "mach", "degrees"), [("frozen", 6.0, 20.0), ("equilibrium", 12.0, 30.0)])
def test_real_cone_equals_an_adaptive_march_with_a_state_solve_at_each_step(model: str, mach: float, degrees: float) -> None:
    gas = real(model, 1)
    before, u0 = flowing(gas, mach)
    flow = gas_cone.cone_flow(gas, before, u0, np.radians([degrees]))
    beta, total, s = flow.front.angle[0], before.enthalpy + 0.5 * u0**2, flow.front.state.entropy

    def slope(theta: float, now: Array) -> list[float]:
        u, v = now
        a2 = float(gas.at("hs", total - 0.5 * (u**2 + v**2), s, start=flow.front.state).sound_speed[0]) ** 2
        return [v, (u * v**2 - a2 * (2.0 * u + v / np.tan(theta))) / (a2 - v**2)]

    def surface(_: float, now: Array) -> float:
        return float(now[1])

    surface.terminal = True  # type: ignore[attr-defined]
    inward = beta - flow.shock_deflection[0]
    begin = [flow.front.velocity[0] * np.cos(inward), -flow.front.velocity[0] * np.sin(inward)]
    run = solve_ivp(slope, (beta, 0.05), begin, events=surface, rtol=1e-9, atol=1e-7, method="DOP853")
    assert run.t_events[0][0] == pytest.approx(np.radians(degrees), abs=2e-7)
    assert run.y_events[0][0][0] == pytest.approx(flow.surface_velocity[0], rel=1e-7)
    assert flow.surface.entropy == pytest.approx(s, rel=1e-10)
    # heat capacity that grows with temperature takes the shock closer to the cone
    assert beta < float(cone.cone_flow(mach, np.radians(degrees), 1.4).wave_angle)


@pytest.mark.parametrize("model", REAL)
def test_largest_cone_is_attached_and_a_larger_one_is_not(model: str) -> None:
    mach = np.array([2.0, 5.0, 10.0])
    gas = real(model, 3)
    before, u = flowing(gas, mach)
    most = gas_cone.largest_half_angle(gas, before, u)
    # the peak is known to 1e-3 of its range, which is 1e-6 in the half angle
    assert gas_cone.cone_flow(gas, before, u, most - 1e-5).attached.all()
    assert not gas_cone.cone_flow(gas, before, u, most + 1e-5).attached.any()
    assert np.all(most > cone.detachment(mach, 1.4).deflection)


def test_cone_without_a_solution_is_flagged() -> None:
    gas = constant(1.4, 4)
    before, u = flowing(gas, np.array([2.0, 2.0, 0.8, 2.0]))
    flow = gas_cone.cone_flow(gas, before, u, np.radians([60.0, 0.9, 10.0, 10.0]))
    assert flow.attached.tolist() == [False, False, False, True]
    assert np.isnan(flow.front.angle[:3]).all() and np.isnan(flow.shock_deflection[:3]).all()


# limits


def _contraction(check: Check) -> Mapping[str, float]:
    gas = constant(number(check, "gamma"))
    before, u = flowing(gas, number(check, "M_i"))
    starting = gas_limits.starting_contraction_limit(gas, before, u)[0]
    return {
        "CR_Kantrowitz": starting,
        "CR_isentropic": gas_limits.isentropic_contraction_limit(gas, before, u)[0],
        "Ath/Ai_Kantrowitz": 1.0 / starting,
    }


def _equal_strength(check: Check) -> Mapping[str, float]:
    """Total turn of the published optimum in, its ramp angles out."""
    m, g, count = number(check, "M0"), number(check, "gamma"), int(number(check, "oblique_shocks"))
    thetas = [np.radians(check.expected[f"theta{k + 1}"].value) for k in range(count)]
    gas = constant(g)
    before, u = flowing(gas, m)
    found = gas_limits.equal_strength_turns(gas, before, u, np.array([sum(thetas)]), count)
    recovery, mach = 1.0, m
    for turn in found.turns[:, 0]:
        shock = shocks.oblique_shock(mach, turn, g)
        recovery, mach = recovery * float(shock.total_pressure_ratio), float(shock.mach)
    return {f"theta{k + 1}": turn for k, turn in enumerate(found.turns[:, 0])} | {
        "pt_recovery_max": recovery * float(shocks.normal_shock(mach, g).total_pressure_ratio),
        "M_n_each_oblique": found.normal_mach[0],
        "M_before_normal_shock": mach,
    }


LIMITS = {f"kantrowitz-M{m}": _contraction for m in ("2.0", "3.0", "4.0", "6.0", "10.0")} | {"oswatitsch": _equal_strength}


@parametrised("f", LIMITS)
def test_published_limits_through_the_any_gas_laws(check: Check, solver: Solver) -> None:
    assert_met(check, solver(check))


@pytest.mark.parametrize("model", REAL)
def test_limits_of_real_air(model: str) -> None:
    """Below Mach 2 cold air has constant heat capacity to 2e-3; at any speed a start needs a larger throat than a started stream."""
    mach = np.linspace(1.2, 9.0, 12)
    gas = real(model, mach.size)
    before, u = flowing(gas, mach)
    starts, passes = gas_limits.starting_contraction_limit(gas, before, u), gas_limits.isentropic_contraction_limit(gas, before, u)
    assert starts[:2] == pytest.approx(limits.starting_contraction_limit(mach[:2], 1.4), rel=2e-3)
    assert np.all(starts < passes) and np.all(np.diff(starts) > 0.0) and np.all(starts > 1.0)
    slow = gas_limits.starting_contraction_limit(gas, before, 0.9 * before.sound_speed)
    assert np.isnan(slow).all()


@settings(max_examples=15, deadline=None)
@given(st.floats(2.5, 10.0), st.floats(0.05, 0.35), st.integers(1, 4), st.sampled_from(REAL))
def test_equal_strength_ramps_are_equally_strong(mach: float, total: float, count: int, model: str) -> None:
    gas = real(model, 1)
    state, u = flowing(gas, mach)
    found = gas_limits.equal_strength_turns(gas, state, u, np.array([total]), count)
    if np.isnan(found.normal_mach[0]):
        # one shock can turn least; the closed detachment angle tells how much, real air a little more
        assert total > 0.9 * float(shocks.detachment(mach, 1.4).deflection)
        return
    assert found.turns.sum(0) == pytest.approx(total, rel=1e-8)
    for turn in found.turns:
        wave = np.arcsin(found.normal_mach * state.sound_speed / u)
        turned, front = gas_waves.shock_of_wave(gas, state, u, wave)
        assert turned == pytest.approx(turn, rel=1e-8)
        state, u = front.state, front.velocity
