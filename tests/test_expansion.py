"""Nozzle extensions: freezing on the way, internal and external part, back pressure; closed relations, and balances in real gas."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from cycle.arrays import Array
from cycle.constants import STANDARD_AIR
from cycle.evidence import Check, checks
from cycle.flow import isentropic, shocks, states
from cycle.flowpath import back_pressure, expansion
from cycle.flowpath.back_pressure import REGIME_CODE
from cycle.flowpath.expansion import ISENTROPIC, Line
from cycle.flowpath.stream import Stream, stream
from cycle.gas.base import Gas
from cycle.gas.constant import ConstantGas
from cycle.gas.frozen import air_gas
from cycle.gas.fuels import FUELS
from cycle.gas.species import species_table
from cycle.gas.state import State
from tests.evidence_support import assert_met, number

R = 287.0
HYDROGEN = FUELS["hydrogen"]


def constant(n: int, gamma: float = 1.4) -> ConstantGas:
    return ConstantGas(np.full(n, gamma * R / (gamma - 1.0)), np.full(n, R))


def moving(gas: Gas, mach: float, temperature: float, pressure: float, flow: float = 10.0) -> Stream:
    state = gas.at("tp", np.full(gas.size, temperature), np.full(gas.size, pressure))
    return stream(gas, state, mach * state.sound_speed, np.full(gas.size, flow))


def burnt(n: int, phi: float = 1.0) -> Gas:
    table = species_table(tuple(STANDARD_AIR), HYDROGEN)
    ratio = np.full(n, phi * float(HYDROGEN.stoichiometric_ratio(STANDARD_AIR)))
    return air_gas(table, STANDARD_AIR, "equilibrium", n).fuelled(HYDROGEN, ratio, np.ones(n))


def total_pressure(given_stream: Stream) -> Array:
    return states.rest(given_stream.gas, given_stream.total_enthalpy, given_stream.state.entropy).pressure


def regimes(found: back_pressure.Backed) -> list[str]:
    return ["-" if c < 0 else back_pressure.REGIME_NAMES[c] for c in found.regime]


def faults(codes: Array) -> list[str]:
    return [expansion.FAULT_NAMES[c] for c in codes]


@settings(max_examples=40)
@given(gamma=st.floats(1.2, 1.66), place=st.floats(1.02, 6.0), spread=st.floats(1.01, 4.0))
def test_shock_in_a_nozzle_equals_the_closed_chain(gamma: float, place: float, spread: float) -> None:
    """Derived here: shock Mach number from its area, exit Mach number from A9/A* behind the shock, back pressure from both."""
    mach = float(isentropic.supersonic_mach(place, gamma))
    recovery = float(shocks.normal_shock(mach, gamma).total_pressure_ratio)
    out = float(isentropic.subsonic_mach(place * spread * recovery, gamma))
    throat = moving(constant(1, gamma), 1.0, 900.0, 2e5)
    pt = total_pressure(throat)
    back = pt * recovery * isentropic.pressure_ratio(out, gamma)
    found = back_pressure.against_back_pressure(throat, place * spread * throat.area, back)
    assert regimes(found) == ["shock-in-nozzle"]
    # a weak shock's place is known to the third root of the precision of its loss
    loose = 1e-8 if mach > 1.3 else 1e-5
    assert found.shock_mach[0] == pytest.approx(mach, rel=loose)
    assert found.shock_area_ratio[0] == pytest.approx(place, rel=loose)
    assert found.recovery[0] == pytest.approx(recovery, rel=1e-9)
    assert found.exit.mach[0] == pytest.approx(out, rel=1e-8)
    assert found.exit.area[0] == pytest.approx(place * spread * throat.area[0], rel=1e-10)


@pytest.mark.parametrize("gamma", [1.25, 1.4])
def test_regimes_follow_in_order_and_meet_at_their_borders(gamma: float) -> None:
    """The four border pressures by the closed relations at A9/A5 = 3; a hundred-millionth to either side is another regime."""
    area = 3.0
    fast, slow = isentropic.supersonic_mach(area, gamma), isentropic.subsonic_mach(area, gamma)
    full = float(isentropic.pressure_ratio(fast, gamma))
    border = [float(isentropic.pressure_ratio(slow, gamma)), full * float(shocks.normal_shock(fast, gamma).pressure_ratio), full]
    above, below = 1.0 + 1e-8, 1.0 - 1e-8
    back = np.array(
        [
            1.0001,
            0.999,
            border[0] * above,
            border[0] * below,
            border[1] * above,
            border[1],
            border[1] * below,
            border[2] * above,
            border[2],
            0.01,
        ]
    )
    throat = moving(constant(back.size, gamma), 1.0, 900.0, 2e5)
    found = back_pressure.against_back_pressure(throat, area * throat.area, back * total_pressure(throat))
    assert regimes(found) == [
        "-", "unchoked", "unchoked", "shock-in-nozzle", "shock-in-nozzle", "shock-at-exit", "over-expanded", "over-expanded",
        "fully-expanded", "under-expanded",
    ]  # fmt: skip
    assert faults(found.fault)[0] == "no-flow"
    inside = found.regime == REGIME_CODE["shock-in-nozzle"]
    np.testing.assert_allclose(found.shock_area_ratio[inside], [1.0, area], rtol=0.05, atol=1e-6)
    assert found.shock_area_ratio[4] == pytest.approx(area, rel=1e-6)
    meets = (found.regime >= 0) & (found.regime <= REGIME_CODE["shock-at-exit"])
    np.testing.assert_allclose(found.exit.state.pressure[meets], (back * total_pressure(throat))[meets], rtol=1e-8)
    assert found.passed[2] == pytest.approx(1.0, abs=1e-6) and found.passed[1] < 0.5
    assert np.array_equal(found.shock_margin[1:] < 0.0, [True] * 4 + [found.shock_margin[5] < 0.0] + [False] * 4)
    np.testing.assert_allclose(found.exit.state.pressure[6:], full * total_pressure(throat)[6:], rtol=1e-9)


def test_shock_in_a_real_nozzle_balances_and_moves_downstream_as_the_back_pressure_falls() -> None:
    n = 14
    gas = burnt(n)
    rest = gas.at("tp", np.full(n, 2700.0), np.full(n, 4e5))
    critical = states.sonic(gas, rest.enthalpy, rest.entropy, rest)
    throat = stream(gas, critical, states.velocity(rest.enthalpy, critical), np.full(n, 10.0))
    back = np.linspace(0.95, 0.5, n) * 4e5
    found = back_pressure.against_back_pressure(throat, 2.4 * throat.area, back)
    assert set(regimes(found)) == {"shock-in-nozzle"}
    assert np.all(np.diff(found.shock_area_ratio) > 0.0) and np.all(np.diff(found.recovery) < 0.0)
    assert np.all(found.behind.state.entropy > throat.state.entropy)
    flux = throat.mass_flow / (found.shock_area_ratio * throat.area)
    ahead, fits = expansion.widened(throat, found.shock_area_ratio * throat.area)
    assert fits.all()
    u = states.velocity(throat.total_enthalpy, ahead)
    # states to about 1e-11, and the flux of a slightly supersonic stream to a hundred times that
    np.testing.assert_allclose(found.behind.flux, flux, rtol=1e-9)
    np.testing.assert_allclose(found.behind.state.pressure + flux * found.behind.velocity, ahead.pressure + flux * u, rtol=1e-9)
    np.testing.assert_allclose(found.exit.total_enthalpy, throat.total_enthalpy, atol=1e-9 * throat.velocity[0] ** 2)
    np.testing.assert_allclose(found.exit.state.pressure, back, rtol=1e-9)
    np.testing.assert_allclose(found.exit.area, 2.4 * throat.area, rtol=1e-9)
    np.testing.assert_allclose(found.exit.state.entropy, found.behind.state.entropy, atol=1e-6)


def test_supersonic_entry_expels_the_shock_instead_of_running_unchoked() -> None:
    entering = moving(constant(3), 2.0, 900.0, 1e5)
    found = back_pressure.against_back_pressure(entering, 2.0 * entering.area, np.array([7.5e5, 4e5, 1e5]))
    assert [*faults(found.fault)] == ["shock-expelled", "solved", "solved"]
    assert regimes(found) == ["-", "shock-in-nozzle", "over-expanded"]
    assert np.isnan(found.exit.velocity[0]) and np.isnan(found.passed[0])


def test_separation_margin_is_the_rule_on_the_exit_pressure() -> None:
    throat = moving(constant(2), 1.0, 900.0, 2e5)
    attached = expansion.widened(throat, 5.0 * throat.area)[0].pressure
    found = back_pressure.against_back_pressure(throat, 5.0 * throat.area, attached / np.array([0.39, 0.41]))
    assert regimes(found) == ["over-expanded"] * 2
    np.testing.assert_allclose(found.separation_margin, np.array([0.39, 0.41]) / 0.4 - 1.0, rtol=1e-9)
    moved = back_pressure.against_back_pressure(throat, 5.0 * throat.area, attached / np.array([0.39, 0.41]), threshold=0.3)
    assert np.all(moved.separation_margin > 0.0)


@settings(max_examples=25)
@given(gamma=st.floats(1.2, 1.66), mach=st.floats(0.05, 0.95), fall=st.floats(0.0, 0.99))
def test_convergent_nozzle_equals_the_closed_relations(gamma: float, mach: float, fall: float) -> None:
    entering = moving(constant(1, gamma), mach, 900.0, 2e5)
    pt = 2e5 / isentropic.pressure_ratio(mach, gamma)
    back = 2e5 * (1.0 - fall)
    out = min(1.0, float(isentropic.mach_from_pressure_ratio(back / pt, gamma)))
    found = expansion.convergent(entering, np.array([back]))
    assert faults(found.fault) == ["solved"]
    assert found.exit.mach[0] == pytest.approx(out, rel=1e-9)
    narrow = float(isentropic.area_ratio(out, gamma) / isentropic.area_ratio(mach, gamma))
    assert found.exit.area[0] == pytest.approx(narrow * entering.area[0], rel=1e-9)
    assert bool(found.choked[0]) == (found.margin[0] >= 0.0) == (out == 1.0)


def test_convergent_nozzle_names_what_does_not_fit() -> None:
    slow, fast = moving(constant(2), 0.5, 900.0, 2e5), moving(constant(2), 1.5, 900.0, 2e5)
    assert faults(expansion.convergent(slow, np.array([2.1e5, 1e5])).fault) == ["no-flow", "solved"]
    found = expansion.convergent(fast, np.array([2.1e5, 1e5]))
    assert faults(found.fault) == ["supersonic"] * 2 and np.isnan(found.exit.velocity).all()


@pytest.mark.published
@pytest.mark.parametrize("check", [pytest.param(c, id=c.id) for c in checks("h") if c.id.startswith("expansion-")])
def test_frozen_at_the_entry_and_never_frozen(check: Check) -> None:
    """NIST-JANAF expansions: frozen after Mach 0 is frozen at 4, after an infinite Mach number shifting."""
    air = {"O2": 1.0, "N2": 3.76}
    fuel = FUELS[{"H2": "hydrogen", "C2H4": "ethylene"}[str(check.inputs["fuel"].value)]]
    ratio = np.full(2, number(check, "phi") * float(fuel.stoichiometric_ratio(air)))
    gas = air_gas(species_table(tuple(air), fuel), air, "equilibrium", 2).fuelled(fuel, ratio, np.ones(2))
    state = gas.at("tp", np.full(2, number(check, "T4")), np.full(2, number(check, "p4")))
    entering = stream(gas, state, np.full(2, number(check, "u4")), np.ones(2))
    found = expansion.frozen_after(entering, "mach", np.array([0.0, np.inf]), "pressure", state.pressure / number(check, "p4/p"))
    assert faults(found.fault) == ["solved"] * 2
    computed = {"W4": state.molar_mass[0] * 1e3}
    for i, name in enumerate(("frozen", "shifting")):
        computed[f"T_{name}"] = found.exit.state.temperature[i]
        computed[f"u_{name}"] = found.exit.velocity[i]
        computed[f"A/A4_{name}"] = (found.exit.area / entering.area)[i]
        computed[f"W_{name}"] = found.exit.state.molar_mass[i] * 1e3
    assert_met(check, computed)


@pytest.mark.parametrize("by", ["mach", "area_ratio"])
def test_later_freezing_lies_between_and_rises_to_shifting(by: str) -> None:
    n = 20
    entering = moving(burnt(n), 1.2, 2800.0, 1e5)
    value = {"mach": np.linspace(1.0, 3.5, n), "area_ratio": np.linspace(0.9, 20.0, n)}[by]
    end = np.full(n, 5e3)
    found = expansion.frozen_after(entering, by, value, "pressure", end)
    assert faults(found.fault) == ["solved"] * n
    kept = expansion.frozen_after(entering, by, np.zeros(n), "pressure", end).exit
    follows = entering.gas.at("sp", entering.state.entropy, end)
    u = found.exit.velocity
    slack = 1e-9 * u[0]
    assert u[0] == pytest.approx(kept.velocity[0], rel=1e-11)
    assert u[-1] == pytest.approx(states.velocity(entering.total_enthalpy, follows)[0], rel=1e-11)
    assert found.exit.state.temperature[-1] == pytest.approx(follows.temperature[0], rel=1e-10)
    assert np.all(np.diff(u) >= -slack) and u[-1] > u[0] + 10.0
    assert not found.before_exit[-1] and found.before_exit[0]
    np.testing.assert_allclose(found.plane.total_enthalpy, entering.total_enthalpy, atol=1e-9 * u[0] ** 2)
    # the entropy is that of the entry up to the plane, and of the plane in the kept gas from there on
    np.testing.assert_allclose(found.plane.state.entropy, entering.state.entropy, atol=1e-6)
    np.testing.assert_allclose(found.exit.state.entropy, entering.state.entropy, atol=1e-6)


def test_freezing_plane_lies_where_it_was_asked_for() -> None:
    entering = moving(burnt(3), 1.0, 2800.0, 1e5)
    asked = np.array([1.3, 2.0, 2.4])
    by_mach = expansion.frozen_after(entering, "mach", asked, "area", 12.0 * entering.area)
    follows = entering.gas.at("sp", entering.state.entropy, by_mach.plane.state.pressure)
    np.testing.assert_allclose(states.velocity(entering.total_enthalpy, follows) / follows.sound_speed, asked, rtol=1e-9)
    by_area = expansion.frozen_after(entering, "area_ratio", by_mach.plane.area / entering.area, "area", 12.0 * entering.area)
    np.testing.assert_allclose(by_area.plane.state.pressure, by_mach.plane.state.pressure, rtol=1e-9)
    np.testing.assert_allclose(by_area.exit.area, 12.0 * entering.area, rtol=1e-9)
    np.testing.assert_allclose(by_mach.exit.state.moles, by_mach.plane.state.moles, rtol=1e-12)


def test_constant_gamma_does_not_notice_freezing() -> None:
    entering = moving(constant(3), 1.5, 900.0, 1e5)
    end = 4.0 * entering.area
    found = expansion.frozen_after(entering, "mach", np.array([0.0, 2.0, np.inf]), "area", end)
    np.testing.assert_allclose(found.exit.state.pressure, expansion.widened(entering, end)[0].pressure, rtol=1e-10)


def test_freezing_names_what_does_not_fit() -> None:
    slow, fast = moving(constant(1), 0.5, 900.0, 1e5), moving(constant(1), 1.5, 900.0, 1e5)
    two = np.full(1, 2.0)
    assert faults(expansion.frozen_after(slow, "area_ratio", two, "pressure", np.full(1, 1e4)).fault) == ["subsonic"]
    assert faults(expansion.frozen_after(slow, "mach", two, "area", slow.area).fault) == ["subsonic"]
    assert faults(expansion.frozen_after(slow, "mach", two, "pressure", np.full(1, 1e4)).fault) == ["solved"]
    assert faults(expansion.frozen_after(fast, "mach", two, "area", 0.9 * fast.area).fault) == ["upstream"]
    assert faults(expansion.frozen_after(fast, "mach", two, "pressure", np.full(1, 2e5)).fault) == ["upstream"]
    with pytest.raises(KeyError):
        expansion.frozen_after(fast, "length", two, "pressure", np.full(1, 1e4))


def slowed_line(coefficient: float) -> Line:
    """u = c u_s at the same pressure, counted from the total state; to an area by a scan-free fixed point, enough for a test."""

    def at_pressure(entering: Stream, pressure: Array) -> State:
        ideal = ISENTROPIC.at_pressure(entering, pressure)
        h = entering.total_enthalpy - coefficient**2 * (entering.total_enthalpy - ideal.enthalpy)
        return entering.gas.at("hp", h, pressure)

    def at_area(entering: Stream, area: Array) -> tuple[State, Array]:
        state, fits = ISENTROPIC.at_area(entering, area)
        for _ in range(200):
            flux = state.density * states.velocity(entering.total_enthalpy, state)
            state = at_pressure(entering, state.pressure * entering.mass_flow / area / flux)
        return state, fits

    return Line(at_pressure, at_area)


@pytest.mark.parametrize("gas", [lambda n: constant(n), lambda n: burnt(n)], ids=["constant gamma", "equilibrium"])
def test_two_lossless_parts_are_one_expansion(gas: Callable[[int], Gas]) -> None:
    entering = moving(gas(2), 1.3, 2500.0, 1e5)
    to_pressure = expansion.two_part(entering, 2.0 * entering.area, "pressure", np.full(2, 4e3))
    whole = entering.gas.at("sp", entering.state.entropy, np.full(2, 4e3))
    np.testing.assert_allclose(to_pressure.nine.area, 2.0 * entering.area, rtol=1e-10)
    np.testing.assert_allclose(to_pressure.ten.state.temperature, whole.temperature, rtol=1e-10)
    to_area = expansion.two_part(entering, 2.0 * entering.area, "area", to_pressure.ten.area)
    np.testing.assert_allclose(to_area.ten.state.pressure, 4e3, rtol=1e-9)
    for part in (to_pressure.nine, to_pressure.ten, to_area.ten):
        np.testing.assert_allclose(part.mass_flow, entering.mass_flow, rtol=1e-12)
        np.testing.assert_allclose(part.total_enthalpy, entering.total_enthalpy, atol=1e-9 * part.velocity[0] ** 2)


def test_the_loss_covers_the_inside_or_the_whole_drop() -> None:
    """Derived here at constant gamma: u10^2 = c^2 u_s^2(p10) on one line; else the entropy made inside is all there is."""
    c, entering = 0.96, moving(constant(1), 1.2, 1500.0, 1e5)
    line, back = slowed_line(c), np.full(1, 5e3)
    inside = expansion.two_part(entering, 3.0 * entering.area, "pressure", back, line)
    whole = expansion.two_part(entering, 3.0 * entering.area, "pressure", back, line, outside=None)
    ideal = states.velocity(entering.total_enthalpy, entering.gas.at("sp", entering.state.entropy, back))
    assert whole.ten.velocity[0] == pytest.approx(c * ideal[0], rel=1e-10)
    np.testing.assert_allclose(whole.nine.state.pressure, inside.nine.state.pressure, rtol=1e-12)
    assert inside.nine.area[0] == pytest.approx(3.0 * entering.area[0], rel=1e-9)
    assert inside.ten.state.entropy[0] == pytest.approx(inside.nine.state.entropy[0], abs=1e-6)
    assert entering.state.entropy[0] < inside.ten.state.entropy[0] < whole.ten.state.entropy[0]
    assert whole.ten.velocity[0] < inside.ten.velocity[0] < ideal[0]


def test_over_expanded_internal_nozzle_ends_the_expansion() -> None:
    entering = moving(constant(3), 1.2, 1500.0, 1e5)
    full = expansion.widened(entering, 3.0 * entering.area)[0].pressure
    found = expansion.two_part(entering, 3.0 * entering.area, "pressure", full * np.array([0.5, 1.0, 2.0]))
    assert faults(found.fault) == ["solved"] * 3
    assert np.array_equal(found.over_expanded, [False, False, True])
    np.testing.assert_allclose(found.ten.state.pressure / full, [0.5, 1.0, 1.0], rtol=1e-10)


def test_two_parts_name_what_does_not_fit_and_leave_no_number() -> None:
    entering = moving(constant(3), 1.2, 1500.0, 1e5)
    ratio_9, ratio_10 = np.array([0.8, 3.0, 3.0]), np.array([4.0, 2.0, 4.0])
    found = expansion.two_part(entering, ratio_9 * entering.area, "area", ratio_10 * entering.area)
    assert faults(found.fault) == ["upstream", "exit-shrinks", "solved"]
    for value in (found.nine.velocity, found.ten.state.pressure, found.ten.mass_flow):
        assert np.array_equal(np.isnan(value), [True, True, False])
    slow = moving(constant(1), 0.7, 1500.0, 1e5)
    assert faults(expansion.two_part(slow, 2.0 * slow.area, "pressure", np.full(1, 1e4)).fault) == ["subsonic"]


def test_nan_stays_with_its_point() -> None:
    entering = moving(burnt(2), 1.0, 2500.0, 1e5)
    lost = Stream(entering.gas, entering.state, np.array([np.nan, entering.velocity[1]]), entering.mass_flow, entering.axial_factor)
    outside = np.full(2, 1e4)
    back = back_pressure.against_back_pressure(lost, 2.0 * entering.area, outside)
    parts = expansion.two_part(lost, 2.0 * entering.area, "pressure", outside)
    frozen = expansion.frozen_after(lost, "mach", np.full(2, 1.5), "pressure", outside)
    for moved, fault in ((back.exit, back.fault), (parts.ten, parts.fault), (frozen.exit, frozen.fault)):
        assert np.array_equal(fault > 0, [True, False])
        assert np.array_equal(np.isnan(moved.state.pressure), [True, False])


def test_a_passage_that_does_not_widen_hands_the_throat_on() -> None:
    """At Mach 1 and the entry's own area nothing is left to solve: exactly the entry, frozen or not, in one part or two."""
    gas = burnt(1)
    rest = gas.at("tp", np.full(1, 2700.0), np.full(1, 4e5))
    critical = states.sonic(gas, rest.enthalpy, rest.entropy, rest)
    throat = stream(gas, critical, states.velocity(rest.enthalpy, critical), np.full(1, 10.0))
    parts = expansion.two_part(throat, throat.area, "area", throat.area)
    frozen = expansion.frozen_after(throat, "area_ratio", np.full(1, 0.9), "pressure", np.full(1, 1e4))
    back = back_pressure.against_back_pressure(throat, throat.area, np.full(1, 1e4))
    assert not parts.fault.any() and not frozen.fault.any() and regimes(back) == ["under-expanded"]
    for state in (parts.nine.state, parts.ten.state, back.exit.state):
        assert state.pressure[0] == critical.pressure[0]
    np.testing.assert_allclose(frozen.plane.state.moles, critical.moles, rtol=1e-13)
