"""The geometric throat: a reference solution, closed relations at constant gamma, balances in real gas, and its limits."""

from __future__ import annotations

import tomllib
from dataclasses import fields
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq

from cycle.arrays import Array
from cycle.constants import STANDARD_AIR
from cycle.evidence import Check, checks
from cycle.flow import heating, isentropic, rayleigh, shocks, states
from cycle.flowpath import geometric_throat as throat
from cycle.flowpath.stream import SOLVED, STATUS_CODE, Stream, status_of, stream
from cycle.gas.base import Gas
from cycle.gas.constant import ConstantGas
from cycle.gas.frozen import air_gas
from cycle.gas.fuels import FUELS
from cycle.gas.species import species_table
from tests.evidence_support import assert_met, number

R = 287.0
HYDROGEN = FUELS["hydrogen"]
TABLE = species_table(tuple(STANDARD_AIR), HYDROGEN)
CLOSED = 1e-9
"""Against closed relations: the states are solved to about 1e-12, the place of a weak shock is a few hundred times worse."""


def constant(n: int, gamma: float = 1.4) -> ConstantGas:
    return ConstantGas(np.full(n, gamma * R / (gamma - 1.0)), np.full(n, R))


def arriving(gas: Gas, mach: float, temperature: float = 450.0, pressure: float = 6e4, flow: float = 20.0) -> Stream:
    n = gas.size
    state = gas.at("tp", np.full(n, temperature), np.full(n, pressure))
    return stream(gas, state, mach * state.sound_speed, np.full(n, flow))


def air(model: str, n: int) -> Gas:
    return air_gas(TABLE, STANDARD_AIR, model, n)


def at_constant_area(three: Stream, gas: Gas, flow: Array, total: Array) -> tuple[Stream, Array]:
    """Mass, impulse and energy at constant area; subsonic."""
    flux, impulse = flow / three.area, three.state.pressure + three.flux * three.velocity
    with np.errstate(all="ignore"):
        point = heating.sonic_point(gas, impulse, flux, total)
        state, passes = heating.constant_area(gas, impulse, flux, total, np.zeros(flow.shape, np.bool_), point)
    return stream(gas, state, flux / state.density, flow), status_of(state, (~passes, "choked"))


def heated(ratio: Array | float) -> throat.Burner:
    """Total enthalpy times `ratio`, no mass."""
    return lambda three: at_constant_area(three, three.gas, three.mass_flow, three.total_enthalpy * ratio)


def unheated(three: Stream) -> tuple[Stream, Array]:
    return three, np.full(three.velocity.shape, SOLVED)


def burning(ratio: Array) -> throat.Burner:
    """Hydrogen of 300 K at right angles, all burnt."""

    def burn(three: Stream) -> tuple[Stream, Array]:
        gas = three.gas.fuelled(HYDROGEN, ratio, np.ones_like(ratio))
        fuel = HYDROGEN.total_enthalpy(np.full_like(ratio, 300.0))
        return at_constant_area(three, gas, three.mass_flow * (1.0 + ratio), (three.total_enthalpy + ratio * fuel) / (1.0 + ratio))

    return burn


def names(codes: Array, table: tuple[str, ...]) -> list[str]:
    return [table[c] for c in codes]


def modes(found: throat.Matched) -> list[str]:
    return names(found.mode, throat.MODE_NAMES)


def faults(found: throat.Matched | throat.Sized) -> list[str]:
    return names(found.fault, throat.FAULT_NAMES)


def test_reference_solution_r1() -> None:
    """Independent calculation: an own scalar program; each number within its stated uncertainty."""
    reference = tomllib.loads((Path(__file__).parents[1] / "cycle" / "evidence" / "flowpath" / "r1.toml").read_text(encoding="utf-8"))
    case, expected = reference["case"], reference["expected"]
    cp, f, capture = case["gas"]["cp_combustion"], case["combustor"]["fuel_air_ratio"], case["engine"]["capture_area"]
    start = {key: np.array([v["value"]]) for key, v in expected["station"]["2"].items()}
    gas = ConstantGas(np.array([cp]), np.array([case["gas"]["gas_constant"]]))
    two = stream(gas, gas.at("tp", start["temperature"], start["pressure"]), start["velocity"], start["mass_flow"])
    brought = cp * case["fuel"]["temperature"] + case["combustor"]["burnt_fraction"] * case["fuel"]["heating_value"]

    def burner(three: Stream) -> tuple[Stream, Array]:
        return at_constant_area(three, gas, three.mass_flow * (1.0 + f), (three.total_enthalpy + f * brought) / (1.0 + f))

    area_5 = np.array([case["nozzle"]["throat_area"]])
    found = throat.match_throat(two, case["combustor"]["entry_area_ratio"] * two.area, burner, area_5)
    assert expected["mode"].endswith(modes(found)[0])
    computed = {
        "terminal_shock_upstream_mach": found.shock_mach,
        "terminal_shock_area_over_capture_area": found.shock_area_ratio * two.area / capture,
        "throat_capacity_at_critical_over_mass_flow": 1.0 + found.margin,
    }
    for key, entry in expected["ramjet"].items():
        assert computed[key][0] == pytest.approx(entry["value"], abs=entry["uncertainty"]), key
    for station, moving in (("2", found.two), ("3", found.three), ("4", found.four), ("5", found.throat)):
        total = states.rest(moving.gas, moving.total_enthalpy, moving.state.entropy)
        have = {
            "pressure": moving.state.pressure, "temperature": moving.state.temperature, "velocity": moving.velocity, "mach": moving.mach,
            "density": moving.state.density, "sound_speed": moving.state.sound_speed, "mass_flow": moving.mass_flow,
            "area_over_capture_area": moving.area / capture, "stream_thrust": moving.stream_thrust,
            "total_pressure": total.pressure, "total_temperature": total.temperature,
        }  # fmt: skip
        for key, value in have.items():
            entry = expected["station"][station][key]
            # printed digits: half a unit of the twelfth
            assert value[0] == pytest.approx(entry["value"], abs=entry["uncertainty"], rel=1e-11), (station, key)


@pytest.mark.published
@pytest.mark.parametrize("check", [pytest.param(c, id=c.id) for c in checks("f") if c.id == "FAR-5.4"])
def test_normal_shock_inlet_critical_and_supercritical(check: Check) -> None:
    """Farokhi, example 5.4: the lip is station 2, the shock place is that of the sized throat."""
    two = arriving(constant(1, number(check, "gamma")), number(check, "M0"))
    wide, ratio = 2.0 * two.area, np.array([number(check, "A_shock/A_lip")])
    critical = throat.match_throat(two, wide, unheated, throat.size_throat(two, wide, unheated, "margin", np.zeros(1)).area)
    inside = throat.match_throat(two, wide, unheated, throat.size_throat(two, wide, unheated, "shock_area_ratio", ratio).area)
    assert modes(critical) == ["critical"] and modes(inside) == ["supercritical"]
    computed = {"pt2/pt0_critical": critical.recovery, "M_shock_supercritical": inside.shock_mach, "pt2/pt0_supercritical": inside.recovery}
    assert_met(check, {key: value[0] for key, value in computed.items()})


@settings(max_examples=40)
@given(
    mach=st.floats(1.2, 4.0), gamma=st.floats(1.2, 1.6), spread=st.floats(1.3, 4.0), heat=st.floats(1.0, 4.0), part=st.floats(0.02, 0.98)
)
def test_supercritical_equals_the_closed_chain(mach: float, gamma: float, spread: float, heat: float, part: float) -> None:
    """Derived here: throat area -> M4, Rayleigh line -> M3, continuity -> recovery, shock relation -> shock Mach number -> area."""
    widest = float(isentropic.supersonic_mach(isentropic.area_ratio(mach, gamma) * spread, gamma))
    ahead = mach + part * (widest - mach)
    recovery = float(shocks.normal_shock(ahead, gamma).total_pressure_ratio)
    sonic_area = spread * float(isentropic.area_ratio(mach, gamma)) * recovery  # A3 over A* behind the shock
    m3 = float(isentropic.subsonic_mach(sonic_area, gamma))
    heat = min(heat, 0.98 * float(rayleigh.largest_heat_ratio(m3, gamma)))
    m4 = float(rayleigh.mach_from_total_temperature(heat * rayleigh.total_temperature_ratio(m3, gamma), gamma, False))
    two = arriving(constant(1, gamma), mach)
    area_5 = spread * two.area / isentropic.area_ratio(m4, gamma)
    found = throat.match_throat(two, spread * two.area, heated(heat), area_5)
    assert faults(found) == ["solved"] and modes(found) == ["supercritical"]
    assert found.three.mach[0] == pytest.approx(m3, rel=1e-7)  # M4 comes back from an area that is flat at Mach 1
    assert found.recovery[0] == pytest.approx(recovery, rel=1e-7)
    assert found.shock_mach[0] == pytest.approx(ahead, rel=1e-6)
    assert found.shock_area_ratio[0] == pytest.approx(
        float(isentropic.area_ratio(ahead, gamma) / isentropic.area_ratio(mach, gamma)), rel=1e-6
    )


@settings(max_examples=20)
@given(mach=st.floats(1.1, 4.0), gamma=st.floats(1.2, 1.6), part=st.floats(0.05, 0.99))
def test_subcritical_without_heat_passes_what_the_area_rule_says(mach: float, gamma: float, part: float) -> None:
    """Derived here: at fixed recovery the flow of a choked throat is proportional to its area."""
    two = arriving(constant(1, gamma), mach)
    critical = throat.size_throat(two, 2.0 * two.area, unheated, "margin", np.zeros(1))
    found = throat.match_throat(two, 2.0 * two.area, unheated, part * critical.area)
    assert modes(found) == ["subcritical"]
    assert found.captured_fraction[0] == pytest.approx(part, rel=CLOSED)
    assert found.margin[0] == pytest.approx(part - 1.0, rel=CLOSED)
    assert found.recovery[0] == pytest.approx(float(shocks.normal_shock(mach, gamma).total_pressure_ratio), rel=CLOSED)


@pytest.mark.parametrize("model", ["frozen", "equilibrium"])
@pytest.mark.parametrize(("mach", "temperature"), [(1.3, 450.0), (2.5, 900.0)])
def test_balances_hold_in_real_gas_super_and_subcritical(model: str, mach: float, temperature: float) -> None:
    n = 12
    gas = air(model, n)
    two = arriving(gas, mach, temperature)
    ratio = np.linspace(0.004, 0.014, n)
    area_3 = 2.8 * two.area
    area_5 = throat.size_throat(two, area_3, burning(np.full(n, 0.009)), "margin", np.zeros(n)).area
    found = throat.match_throat(two, area_3, burning(ratio), area_5)
    assert set(faults(found)) == {"solved"}
    assert set(modes(found)) == {"supercritical", "subcritical"}
    ahead, behind, three, four, five = found.ahead, found.behind, found.three, found.four, found.throat
    # states are solved to about 1e-11; three balances in a row
    np.testing.assert_allclose(behind.flux, ahead.flux, rtol=1e-10)
    np.testing.assert_allclose(
        behind.state.pressure + behind.flux * behind.velocity, ahead.state.pressure + ahead.flux * ahead.velocity, rtol=1e-10
    )
    scale = two.velocity**2
    for moving in (found.two, ahead, behind, three):
        np.testing.assert_allclose((moving.total_enthalpy - two.total_enthalpy) / scale, 0.0, atol=1e-10)
    np.testing.assert_allclose(three.area, area_3, rtol=1e-10)
    np.testing.assert_allclose(four.area, area_3, rtol=1e-10)
    np.testing.assert_allclose(five.area, area_5, rtol=1e-9)
    np.testing.assert_allclose(found.two.area, two.area, rtol=1e-10)
    np.testing.assert_allclose(five.mach, 1.0, atol=1e-9)
    np.testing.assert_allclose(four.stream_thrust, three.stream_thrust, rtol=1e-10)
    np.testing.assert_allclose(three.mass_flow, found.captured_fraction * two.mass_flow, rtol=1e-12)
    np.testing.assert_allclose(five.mass_flow, three.mass_flow * (1.0 + ratio), rtol=1e-12)
    np.testing.assert_allclose(found.spilled_flow, two.mass_flow - three.mass_flow, atol=1e-9)


@pytest.mark.parametrize("model", ["frozen", "equilibrium"])
def test_entropy_rises_across_the_shock_and_nowhere_else_before_the_burner(model: str) -> None:
    two = arriving(air(model, 9), 2.2, 700.0)
    wide, ratio = 2.0 * two.area, np.full(9, 0.01)
    area_5 = throat.size_throat(two, wide, burning(ratio), "shock_area_ratio", np.linspace(1.0, 1.5, 9)).area
    found = throat.match_throat(two, wide, burning(ratio), area_5)
    s = [m.state.entropy for m in (two, found.ahead, found.behind, found.three, found.four, found.throat)]
    np.testing.assert_allclose(s[1], s[0], atol=1e-6)  # J/(kg K), of about 8000
    assert np.all(s[2] - s[1] > 50.0)  # Mach 2.2 and more: over half of R
    np.testing.assert_allclose(s[3], s[2], atol=1e-6)
    assert np.all(s[4] > s[3])
    np.testing.assert_allclose(s[5], s[4], atol=1e-6)


@pytest.mark.parametrize("model", ["frozen", "equilibrium"])
def test_sizing_and_matching_are_inverse(model: str) -> None:
    n = 7
    two = arriving(air(model, n), 1.7)
    wide, burner = 3.0 * two.area, burning(np.full(n, 0.012))
    places = np.linspace(1.01, 1.5, n)
    by_place = throat.match_throat(two, wide, burner, throat.size_throat(two, wide, burner, "shock_area_ratio", places).area)
    np.testing.assert_allclose(by_place.shock_area_ratio, places, rtol=1e-8)
    margins = np.linspace(-0.4, 0.1, n)
    by_margin = throat.match_throat(two, wide, burner, throat.size_throat(two, wide, burner, "margin", margins).area)
    np.testing.assert_allclose(by_margin.margin, margins, atol=1e-9)
    assert set(modes(by_margin)[:5]) == {"subcritical"} and modes(by_margin)[-1] == "supercritical"


def test_critical_point_is_continuous() -> None:
    """Capture, recovery, p3 and p5 from either side of A5 = A5 critical meet; what is left is of first order in the distance."""
    delta = np.array([-1e-3, -1e-5, -1e-7, 0.0, 1e-7, 1e-5, 1e-3])
    two = arriving(air("equilibrium", 7), 1.8)
    wide, burner = 2.0 * two.area, burning(np.full(7, 0.01))
    found = throat.match_throat(two, wide, burner, throat.size_throat(two, wide, burner, "margin", delta).area)
    assert modes(found) == ["subcritical"] * 3 + ["critical"] + ["supercritical"] * 3
    for value in (found.captured_fraction, found.recovery, found.three.state.pressure, found.throat.state.pressure, found.shock_mach):
        assert np.all(np.abs(value / value[3] - 1.0) <= 5.0 * np.abs(delta) + 1e-9)
    assert np.all(np.diff(found.captured_fraction) >= 0.0) and np.all(np.diff(found.recovery) <= 1e-12)


def test_margin_falls_with_heat_through_choking_of_the_burner() -> None:
    """Nearly no room for heat: past some heat the burner chokes at full flow; the margin goes on without a step."""
    n = 161
    two = arriving(constant(n), 1.3)
    heat = np.linspace(1.0, 6.0, n)
    wide = 1.4 * two.area
    found = throat.match_throat(two, wide, heated(heat), 0.8 * wide)
    behind = shocks.normal_shock(1.3, 1.4)
    m3 = isentropic.subsonic_mach(1.4 * isentropic.area_ratio(behind.mach, 1.4), 1.4)
    chokes = heat > rayleigh.largest_heat_ratio(m3, 1.4)
    assert 20 < chokes.sum() < n - 20
    steps = np.diff(found.margin)
    assert np.all(steps <= 1e-12)
    assert np.all(np.abs(steps) < 0.06)  # 1/32 in heat: the margin's slope is at most about 1.3
    assert np.all(found.margin[chokes] < 0.0)
    solved = np.array(faults(found)) == "solved"
    assert np.array_equal(found.margin[solved] < 0.0, found.captured_fraction[solved] < 1.0)
    np.testing.assert_allclose(found.four.mach[solved], float(isentropic.subsonic_mach(1.25, 1.4)), rtol=1e-8)


def test_holding_margin_turns_negative_exactly_where_no_shock_holds() -> None:
    n = 60
    two = arriving(constant(n), 1.6)
    found = throat.match_throat(two, 1.8 * two.area, heated(1.2), np.linspace(0.5, 1.79, n) * two.area)
    large = np.array(faults(found)) == "throat-too-large"
    assert 3 < large.sum() < n - 3
    assert np.array_equal(large, found.holding_margin < 0.0)
    assert np.all(np.diff(found.holding_margin) < 0.0) and np.all(np.diff(found.margin) > 0.0)
    # the last place of the shock before that is the burner entry
    edge = np.flatnonzero(large)[0] - 1
    assert 1.5 < found.shock_area_ratio[edge] <= 1.8


def test_stated_diffuser_loss_multiplies_the_recovery() -> None:
    two = arriving(air("equilibrium", 3), 1.9, 600.0)
    wide, loss, burner = 2.0 * two.area, np.array([1.0, 0.95, 0.8]), burning(np.full(3, 0.008))
    sized = throat.size_throat(two, wide, burner, "shock_area_ratio", np.full(3, 1.2), loss)
    found = throat.match_throat(two, wide, burner, sized.area, loss)
    np.testing.assert_allclose(found.shock_area_ratio, 1.2, rtol=1e-8)
    np.testing.assert_allclose(found.recovery / found.recovery[0], loss, rtol=1e-8)


FAULTY = {
    # M2, A3/A2, heat, A5/A2
    "not-supersonic": (0.9, 2.0, 1.5, 1.0),
    "diffuser-narrows": (1.6, 0.9, 1.5, 0.5),
    "throat-too-large": (1.6, 2.0, 1.0, 1.9),
    "throat-too-small": (1.6, 2.0, 1.5, 0.01),
    "choked": (1.6, 2.0, 3.0, 2.1),
}


def test_each_fault_is_named_and_blank_and_leaves_the_others_alone() -> None:
    rows = np.array([*FAULTY.values(), (1.6, 2.0, 1.5, 1.25)])
    gas = constant(len(rows))
    state = gas.at("tp", np.full(len(rows), 450.0), np.full(len(rows), 6e4))
    two = stream(gas, state, rows[:, 0] * state.sound_speed, np.full(len(rows), 20.0))
    found = throat.match_throat(two, rows[:, 1] * two.area, heated(rows[:, 2]), rows[:, 3] * two.area)
    assert faults(found) == [*FAULTY, "solved"]
    assert modes(found) == ["none"] * len(FAULTY) + ["supercritical"]
    bad = found.fault > 0
    for value in (found.shock_mach, found.recovery, found.captured_fraction, found.three.velocity, found.throat.state.pressure):
        assert np.array_equal(np.isnan(value), bad)
    last = np.array([len(rows) - 1])
    alone = throat.match_throat(two.take(last), rows[last, 1] * two.area[last], heated(rows[last, 2]), rows[last, 3] * two.area[last])
    np.testing.assert_allclose(alone.shock_mach, found.shock_mach[last], rtol=1e-10)


def test_a_burner_without_solution_and_a_nan_stream_are_named() -> None:
    two = arriving(constant(2), 1.6)
    refused = STATUS_CODE["stalled"]
    found = throat.match_throat(two, 2.0 * two.area, lambda s: (s, np.array([SOLVED, refused])), 1.2 * two.area)
    assert faults(found) == ["solved", "burner"] and found.burner_status[1] == refused
    gone = stream(two.gas, two.state, np.array([np.nan, two.velocity[1]]), two.mass_flow)
    found = throat.match_throat(gone, 2.0 * two.area, unheated, 1.2 * two.area)
    assert faults(found) == ["not-supersonic", "solved"]
    assert np.isnan(found.three.state.pressure[0])


def test_sizing_refuses_a_shock_outside_the_diffuser() -> None:
    two = arriving(constant(3), 1.6)
    sized = throat.size_throat(two, 2.0 * two.area, unheated, "shock_area_ratio", np.array([0.9, 1.5, 2.1]))
    assert faults(sized) == ["shock-outside", "solved", "shock-outside"]
    assert np.array_equal(np.isnan(sized.area), [True, False, True])
    with pytest.raises(KeyError):
        throat.size_throat(two, 2.0 * two.area, unheated, "length", np.ones(3))


@settings(max_examples=25)
@given(mach=st.floats(1.05, 4.0), gamma=st.floats(1.2, 1.6), spilled=st.floats(0.0, 0.9))
def test_spill_drag_of_a_normal_shock_inlet(mach: float, gamma: float, spilled: float) -> None:
    """Derived here for an open-nosed inlet (station 2 is the flight stream): the speed left after the shock by the closed relations;
    and not above the additive drag of the momentum balance of the captured stream, of which the lip gives part back."""
    flight = arriving(constant(1, gamma), mach)
    critical = throat.size_throat(flight, 2.0 * flight.area, unheated, "margin", np.zeros(1))
    found = throat.match_throat(flight, 2.0 * flight.area, unheated, (1.0 - spilled) * critical.area)
    drag = throat.spill_drag(flight, found.behind, found.spilled_flow)[0]
    left = isentropic.pressure_ratio(mach, gamma) / shocks.normal_shock(mach, gamma).total_pressure_ratio
    out = isentropic.mach_from_pressure_ratio(left, gamma)
    speed = flight.velocity[0] * out / mach * np.sqrt(isentropic.temperature_ratio(out, gamma) / isentropic.temperature_ratio(mach, gamma))
    expected = found.spilled_flow[0] * (flight.velocity[0] - speed)
    assert drag == pytest.approx(float(expected), rel=1e-7, abs=1e-9 * flight.stream_thrust[0])
    captured = found.three.mass_flow[0]
    additive = captured * (found.two.velocity[0] - flight.velocity[0]) if spilled else 0.0
    additive += (found.two.state.pressure[0] - flight.state.pressure[0]) * flight.area[0] if spilled else 0.0
    assert -1e-9 * flight.stream_thrust[0] <= drag <= additive + 1e-6 * flight.stream_thrust[0]


def test_shock_place_by_an_independent_search() -> None:
    """Equilibrium air: the same chain written point by point with a scalar root finder on the shock's area."""
    two = arriving(air("equilibrium", 1), 2.4, 1100.0)
    wide, burner = 2.2 * two.area, burning(np.array([0.011]))
    target = throat.size_throat(two, wide, burner, "margin", np.array([0.06])).area
    found = throat.match_throat(two, wide, burner, target)

    def excess(ratio: float) -> float:
        return float((throat.size_throat(two, wide, burner, "shock_area_ratio", np.array([ratio])).area - target)[0])

    assert found.shock_area_ratio[0] == pytest.approx(brentq(excess, 1.0, 2.0, xtol=1e-12), rel=1e-8)


def test_every_stream_of_a_faulty_point_is_blank() -> None:
    two = arriving(constant(1), 0.8)
    found = throat.match_throat(two, 2.0 * two.area, unheated, two.area)
    moving = [getattr(found, f.name) for f in fields(found) if isinstance(getattr(found, f.name), Stream)]
    assert len(moving) == 6
    assert all(np.isnan(m.state.pressure[0]) and not m.state.good[0] for m in moving)


@pytest.mark.parametrize("model", ["frozen", "equilibrium"])
def test_a_broad_sample_meets_its_areas_or_says_why(model: str) -> None:
    """Every point is solved, or has a fault that is the engine's and not the program's; margins and modes agree in sign."""
    n, rng = 300, np.random.default_rng(3)
    gas = air(model, n)
    state = gas.at("tp", rng.uniform(250.0, 1500.0, n), 10.0 ** rng.uniform(3.5, 6.0, n))
    two = stream(gas, state, rng.uniform(1.001, 4.0, n) * state.sound_speed, np.full(n, 20.0))
    area_3 = rng.uniform(1.0, 5.0, n) * two.area
    area_5 = rng.uniform(0.05, 1.05, n) * area_3
    found = throat.match_throat(two, area_3, burning(rng.uniform(0.0, 1.5, n) * 0.029), area_5)
    assert not {"not-converged", "burner"} & set(faults(found))
    solved = found.fault == 0
    assert solved.sum() > 0.6 * n
    np.testing.assert_allclose(found.throat.area[solved], area_5[solved], rtol=1e-10)
    np.testing.assert_allclose(found.three.area[solved], area_3[solved], rtol=1e-9)
    assert np.array_equal(found.margin[solved] >= 0.0, found.captured_fraction[solved] == 1.0)
    assert np.array_equal(solved, found.mode > 0)
