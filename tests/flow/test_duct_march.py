"""The attached march against the closed solutions it must contain, at constant gamma, and its own balances in any gas."""

from __future__ import annotations

import numpy as np
import pytest

from cycle.constants import STANDARD_AIR
from cycle.flow import fanno, isentropic, rayleigh
from cycle.flow.duct.line import at_velocity, sonic
from cycle.flow.duct.march import march
from cycle.flow.duct.panels import chebyshev, integral_to, radau
from cycle.flow.duct.scan import scan_of
from cycle.gas.frozen import air_gas
from cycle.gas.species import species_table
from tests.flow.duct_support import ENTRY_AREA, GAMMA, perfect_duct, random_ducts


def run(duct, panels=12, branch=1.0):
    n = duct.size
    with np.errstate(all="ignore"):
        return march(duct, np.zeros(n), duct.end, duct.impulse, np.full(n, branch), scan_of(duct), panels, graded=False)


def exit_mach(found):
    return np.sqrt(found.flow.mach_squared[-1])


def by_rk4(duct, slices, heat, theta):
    """Exit M^2 by the influence coefficients for area, total temperature and friction (Shapiro (1953), table 8.2) and the
    classical Runge-Kutta method: an independent integration of the same one-dimensional flow."""
    g, end = GAMMA, duct.end[0]

    def slope(x, m2):
        here = duct.mixture(np.zeros((1, 1), int), np.full((1, 1), x))
        rise = heat * theta / (1.0 + (theta - 1.0) * x / end) ** 2 / end
        psi = 1.0 + 0.5 * (g - 1.0) * m2
        area = -2.0 * here.slope[0, 0] / here.area[0, 0]
        added = (1.0 + g * m2) * rise / here.total_enthalpy[0, 0]
        friction = g * m2 * 2.0 * here.drag[0, 0]
        return m2 * psi / (1.0 - m2) * (area + added + friction)

    m2 = duct.velocity[0] ** 2 / duct.gas.at("tp", np.array([600.0]), np.array([5e4])).sound_speed[0] ** 2
    h = end / slices
    for i in range(slices):
        x = i * h
        k1 = slope(x, m2)
        k2 = slope(x + h / 2, m2 + h / 2 * k1)
        k3 = slope(x + h / 2, m2 + h / 2 * k2)
        k4 = slope(x + h, m2 + h * k3)
        m2 += h / 6 * (k1 + 2 * k2 + 2 * k3 + k4)
    return np.sqrt(m2)


@pytest.mark.parametrize("mach", [1.5, 3.0, 6.0])
def test_area_change_is_isentropic(mach):
    found = run(perfect_duct(mach, [0.0, 0.6, 1.0], [1.0, 1.5, 2.0]))
    expected = isentropic.supersonic_mach(2.0 * isentropic.area_ratio(mach, GAMMA), GAMMA)
    # 1e-8: twelve panels of order 7; the worst measured is 6e-10
    assert exit_mach(found)[0] == pytest.approx(float(expected), rel=1e-8)


def test_subsonic_branch_of_an_area_change():
    found = run(perfect_duct(0.4, [0.0, 1.0], [1.0, 1.6]), branch=-1.0)
    expected = isentropic.subsonic_mach(1.6 * isentropic.area_ratio(0.4, GAMMA), GAMMA)
    assert exit_mach(found)[0] == pytest.approx(float(expected), rel=1e-8)


@pytest.mark.parametrize(("mach", "branch"), [(3.0, 1.0), (0.3, -1.0)])
def test_heat_at_constant_area_is_the_rayleigh_line(mach, branch):
    duct = perfect_duct(mach, [0.0, 1.0], [1.0, 1.0], heat=3e5)
    found = run(duct, branch=branch)
    ratio = 1.0 + 3e5 / duct.total_enthalpy[0]
    expected = rayleigh.mach_from_total_temperature(rayleigh.total_temperature_ratio(mach, GAMMA) * ratio, GAMMA, supersonic=mach > 1.0)
    # the impulse is conserved exactly, so only rounding is left
    assert exit_mach(found)[0] == pytest.approx(float(expected), rel=1e-11)


@pytest.mark.parametrize(("mach", "branch"), [(3.0, 1.0), (0.3, -1.0)])
def test_friction_at_constant_area_is_the_fanno_line(mach, branch):
    found = run(perfect_duct(mach, [0.0, 1.0], [1.0, 1.0], friction=0.004), branch=branch)
    used = 4.0 * 0.004 * 1.0 / (2.0 * np.sqrt(ENTRY_AREA / np.pi))
    expected = fanno.mach_from_length(fanno.longest_duct(mach, GAMMA) - used, GAMMA, supersonic=mach > 1.0)
    assert exit_mach(found)[0] == pytest.approx(float(expected), rel=1e-8)


def test_area_heat_and_friction_together_are_the_influence_coefficients():
    duct = perfect_duct(3.0, [0.0, 1.0], [1.0, 1.8], heat=5e5, friction=0.003)
    # 2e-9: the independent integration with 400 slices of order 4
    assert exit_mach(run(duct))[0] == pytest.approx(by_rk4(duct, 400, 5e5, 3.0), rel=2e-9)


def test_measured_order_of_convergence():
    """Of the exit Mach number in the number of panels, one smooth segment with heat, friction and area change: the Radau
    points promise 7; asked for is 3.5."""
    duct = perfect_duct(3.0, [0.0, 1.0], [1.0, 1.8], heat=5e5, friction=0.003)
    exact = exit_mach(run(duct, 48))[0]
    errors = [abs(exit_mach(run(duct, panels))[0] - exact) for panels in (1, 2, 4)]
    orders = np.log2(np.array(errors[:-1]) / errors[1:])
    assert (orders > 3.5).all(), orders


def test_rules_integrate_polynomials_exactly():
    for graded in (False, True):
        rule = radau(graded)
        x = rule.places
        for power in range(2):
            whole = rule.integral[-1] @ x**power
            assert whole == pytest.approx(1.0 / (power + 1), rel=1e-13)
        assert integral_to(rule, np.array([1.0])).T[0] == pytest.approx(rule.integral[-1], rel=1e-10)
    points = chebyshev(6)
    assert points.derivative @ points.nodes**4 == pytest.approx(4 * points.nodes**3, abs=1e-12)
    assert points.integral @ points.nodes**4 == pytest.approx(points.nodes**5 / 5, abs=1e-14)


@pytest.mark.parametrize("model", ["constant-gamma", "frozen", "equilibrium"])
def test_enthalpy_and_volume_give_back_a_state(model):
    """The closure of the energy line; 1e-11: what Newton leaves."""
    n = 6
    if model == "constant-gamma":
        gas = perfect_duct(2.0, [0.0, 1.0], [1.0, 1.0], n=n).gas
    else:
        gas = air_gas(species_table(tuple(STANDARD_AIR), None), STANDARD_AIR, model, n)
    first = gas.at("tp", np.linspace(300.0, 3000.0, n), np.geomspace(1e3, 1e6, n))
    again = gas.at("hv", first.enthalpy, 1.0 / first.density)
    assert again.good.all()
    assert again.temperature == pytest.approx(first.temperature, rel=1e-11)
    assert again.pressure == pytest.approx(first.pressure, rel=1e-11)


@pytest.mark.parametrize("model", ["constant-gamma", "frozen", "equilibrium"])
def test_slope_of_the_impulse_and_its_minimum(model):
    """The analytic dF/du against a difference (1e-5: its own error), and F* below F on both sides."""
    duct, _ = random_ducts(8, model, seed=3)
    scan = scan_of(duct)
    mixture, u = scan.mixture, scan.sonic.velocity
    with np.errstate(all="ignore"):
        for factor in (0.6, 1.4):
            here, d = factor * u, 1e-4 * u
            model_here = at_velocity(mixture, here, scan.sonic.state).model(mixture.mass_flow)
            slope = model_here.c1 - model_here.c2 / here**2
            after, before = (at_velocity(mixture, here + s * d, scan.sonic.state).impulse for s in (1.0, -1.0))
            assert slope == pytest.approx((after - before) / (2.0 * d), rel=1e-5)
            assert (after > scan.sonic.impulse).all()


def test_sonic_states_are_at_mach_one():
    duct, _ = random_ducts(8, "equilibrium", seed=4)
    scan = scan_of(duct)
    at = sonic(scan.mixture, scan.sonic.state, scan.sonic.velocity)
    with np.errstate(all="ignore"):
        there = at_velocity(scan.mixture, at.velocity, at.state)
    # F* is stationary: its error is of the second order in that of the velocity, and less after the correction
    assert there.mach_squared == pytest.approx(np.ones(there.u.shape), abs=1e-7)
    assert there.impulse == pytest.approx(at.impulse, rel=1e-10)
    # one round from a first guess: of the third order, to choose by, not to answer with
    assert scan.sonic.impulse == pytest.approx(at.impulse, rel=1e-5)


@pytest.mark.parametrize("model", ["constant-gamma", "frozen", "equilibrium"])
def test_a_march_keeps_mass_energy_and_momentum(model):
    duct, _ = random_ducts(40, model, seed=5)
    found = run(duct)
    w = np.flatnonzero(found.passes)
    assert w.size > 10
    m, flow = found.mixture, found.flow
    state = flow.state
    shape = flow.u.shape
    with np.errstate(all="ignore"):
        mass = state.density.reshape(shape) * flow.u * m.area / m.mass_flow
        energy = (state.enthalpy.reshape(shape) + 0.5 * flow.u**2 - m.total_enthalpy) / flow.u**2
        force = found.integrated(found.wall_force) - found.integrated(found.friction)
        momentum = (found.free[-1] - duct.impulse - force) / duct.impulse
    assert mass[:, w] == pytest.approx(np.ones((shape[0], w.size)), rel=1e-9)
    assert np.abs(energy[:, w]).max() < 1e-9
    assert np.abs(momentum[w]).max() < 1e-9


def test_the_error_estimate_covers_what_refining_changes():
    """Over random ducts, within a factor 10 and a floor of rounding; and the default grid meets 2e-5 in the impulse."""
    duct, _ = random_ducts(60, "constant-gamma", seed=6)
    found, fine = run(duct), run(duct, 48)
    w = found.passes & fine.passes
    change = np.abs(found.flow.impulse[-1] / fine.flow.impulse[-1] - 1.0)[w]
    assert change.max() < 2e-5
    assert (change < 10.0 * found.error()[w] + 1e-11).all()


def test_a_march_up_and_down_again_returns():
    duct, _ = random_ducts(40, "frozen", seed=7)
    found = run(duct, 24)
    w = np.flatnonzero(found.passes & (found.flow.mach_squared.min(0) > 1.3))
    cut = duct.take(w)
    with np.errstate(all="ignore"):
        back = march(cut, cut.end, np.zeros(w.size), found.free[-1, w], np.ones(w.size), scan_of(cut), 24, graded=False)
    assert back.passes.all()
    # 1e-5: both marches' own errors on steep burning laws
    assert back.free[-1] == pytest.approx(cut.impulse, rel=1e-5)


def test_rectangular_perimeter_counts_four_walls():
    duct = perfect_duct(3.0, [0.0, 1.0], [1.0, 1.0], friction=0.004, section="rectangular", width=np.array([0.5]))
    m = duct.mixture(np.zeros((1, 1), int), np.zeros((1, 1)))
    assert m.drag[0, 0] * 2.0 * m.area[0, 0] / 0.004 == pytest.approx(2.0 * (0.5 + ENTRY_AREA / 0.5), rel=1e-14)


@pytest.mark.parametrize(
    ("x", "ratio", "word"),
    [([0.1, 1.0], [1.0, 2.0], "rise strictly"), ([0.0, 1.0, 1.0], [1.0, 2.0, 2.0], "rise strictly"), ([0.0, 1.0], [1.0, 0.0], "positive")],
)
def test_bad_area_laws_are_refused(x, ratio, word):
    with pytest.raises(ValueError, match=word):
        perfect_duct(3.0, x, ratio)
