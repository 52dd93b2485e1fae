from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from cycle.constants import STANDARD_AIR
from cycle.gas.closures import CLOSURES
from cycle.gas.equilibrium import EquilibriumGas, carbon_activity
from cycle.gas.frozen import air_gas
from cycle.gas.fuels import FUELS
from cycle.gas.newton import POOL
from cycle.gas.species import species_table
from cycle.gas.state import EXTRAPOLATED, NOT_CONVERGED, OUT_OF_RANGE, State
from tests.gas.mixtures import broad, duct_targets, reacting
from tests.gas.test_frozen import targets_of

UNBRANCHED = [kind for kind, closure in CLOSURES.items() if not closure.branched]


def fields(state: State) -> np.ndarray:
    """The figures of a state that a stream hands on, one row each."""
    return np.array([state.temperature, state.pressure, state.enthalpy, state.entropy, 1.0 / state.density, state.sound_speed])


@pytest.mark.parametrize("fuel", FUELS)
@pytest.mark.parametrize("kind", UNBRANCHED)
def test_no_failures_over_the_broad_range(fuel: str, kind: str) -> None:
    gas, T, p = broad(fuel, 600, seed=11)
    there = gas.at("tp", T, p)
    assert there.good.all()
    targets = targets_of(kind, there, np.ones(T.size))
    back = gas.at(kind, *targets)
    assert back.good.all()
    # the error left by the last step is below 1e-14 of the total moles; near 200 K a mole carries up to 100 RT
    np.testing.assert_allclose(back.temperature, T, rtol=1e-10)
    np.testing.assert_allclose(back.pressure, p, rtol=1e-10)


@pytest.mark.parametrize("fuel", ["hydrogen", "ethylene", "jp-10"])
def test_closures_hold(fuel: str) -> None:
    gas, T, p = broad(fuel, 600, seed=12)
    there = gas.at("tp", T, p)
    scale_h = np.maximum(np.abs(there.enthalpy), there.pressure / there.density)
    for kind in UNBRANCHED:
        back = gas.at(kind, *targets_of(kind, there, np.ones(T.size)))
        named = dict(zip(CLOSURES[kind].targets, targets_of(kind, there, np.ones(T.size)), strict=True))
        # the audit of a walk asks 1e-9; two orders are kept in hand
        if "enthalpy" in named:
            assert np.max(np.abs(back.enthalpy - named["enthalpy"]) / scale_h) < 1e-11, kind
        if "entropy" in named:
            np.testing.assert_allclose(back.entropy, named["entropy"], rtol=1e-11)
        if "volume" in named:
            np.testing.assert_allclose(1.0 / back.density, named["volume"], rtol=1e-11)


@pytest.mark.parametrize("fuel", ["hydrogen", "ethylene"])
@pytest.mark.parametrize("kind", ["flux", "momentum"])
@pytest.mark.parametrize("machs", [(1.1, 4.0), (0.15, 0.9)])
def test_duct_closures_stay_on_the_branch_of_their_start(fuel: str, kind: str, machs: tuple[float, float]) -> None:
    rng = np.random.default_rng(13)
    n = 500
    gas = reacting(fuel, rng.uniform(0.1, 1.5, n))
    there = gas.at("tp", rng.uniform(1000.0, 3500.0, n), 10.0 ** rng.uniform(4.0, 6.5, n))
    mach = rng.uniform(*machs, n)
    F, G, ht = duct_targets(there, mach)
    start = gas.at("tp", there.temperature * rng.uniform(0.95, 1.05, n), there.pressure * rng.uniform(0.95, 1.05, n))
    found = gas.at(kind, *targets_of(kind, there, mach), start=start)
    same_side = (G / (start.density * start.sound_speed) > 1.0) == (mach > 1.0)
    assert same_side.mean() > 0.95
    assert found.good[same_side].all()
    u = G / found.density
    wanted = {"flux": found.entropy / there.entropy - 1.0, "momentum": (found.pressure + G * u) / F - 1.0}[kind]
    energy = (found.enthalpy + 0.5 * u * u - ht) / np.maximum(np.abs(ht), 1e6)
    good = found.good
    assert np.max(np.abs(wanted[good])) < 1e-11
    assert np.max(np.abs(energy[good])) < 1e-11
    np.testing.assert_allclose(found.temperature[same_side], there.temperature[same_side], rtol=1e-7)


@settings(deadline=None, max_examples=40)
@given(
    st.sampled_from(sorted(FUELS)), st.floats(0.0, 3.0), st.floats(200.0, 6000.0), st.floats(2.0, 7.0),
    st.lists(st.sampled_from(UNBRANCHED), min_size=2, max_size=4),
)  # fmt: skip
def test_a_tour_of_closures_comes_home(fuel: str, phi: float, T: float, log_p: float, tour: list[str]) -> None:
    gas = reacting(fuel, np.array([phi]))
    home = state = gas.at("tp", T, 10.0**log_p)
    for kind in tour:
        state = gas.at(kind, *targets_of(kind, state, np.ones(1)))
        assert state.good.all()
    # each solve may add 1e-11 to h or s; (h, s) turns that into p where s depends weakly on it
    np.testing.assert_allclose(state.temperature, home.temperature, rtol=1e-9)
    np.testing.assert_allclose(state.pressure, home.pressure, rtol=1e-8)


@pytest.mark.parametrize("fuel", FUELS)
def test_atoms_are_conserved(fuel: str) -> None:
    gas, T, p = broad(fuel, 600, seed=14)
    table, state = gas.table, gas.at("tp", T, p)
    given_atoms = table.atoms[: table.basis].T @ gas.basis + table.atoms[table.reacting :].T @ gas.inert
    # rounding in sums of about 100 mol/kg
    np.testing.assert_allclose(table.atoms.T @ state.moles, given_atoms, rtol=1e-11, atol=1e-11)
    np.testing.assert_allclose(table.molar_mass @ state.moles, 1.0, rtol=1e-12)
    np.testing.assert_allclose(state.moles.sum(0) * state.molar_mass, 1.0, rtol=1e-12)


@pytest.mark.parametrize("fuel", ["hydrogen", "kerosene"])
def test_derivatives_against_differences(fuel: str) -> None:
    gas, T, p = broad(fuel, 300, seed=15)
    T = np.clip(T, 201.0, 5999.0)
    # a difference across the joint of the polynomials, where cp has a kink, is none
    T = np.where(np.abs(T - 1000.0) < 2.0, 990.0, T)
    state, d = gas.at("tp", T, p), 1e-4
    hot, cold = gas.at("tp", T * np.exp(d), p), gas.at("tp", T * np.exp(-d), p)
    high, low = gas.at("tp", T, p * np.exp(d)), gas.at("tp", T, p * np.exp(-d))
    fast, slow = gas.at("sp", state.entropy, p * np.exp(d)), gas.at("sp", state.entropy, p * np.exp(-d))
    # central differences: (1e-4)^2 times third derivatives that reach 1e3 where equilibrium shifts steeply
    bound = {"rtol": 3e-5, "atol": 1e-6}
    np.testing.assert_allclose(state.specific_heat, (hot.enthalpy - cold.enthalpy) / (hot.temperature - cold.temperature), **bound)
    np.testing.assert_allclose(state.volume_by_temperature, np.log(cold.density / hot.density) / (2 * d), **bound)
    np.testing.assert_allclose(state.volume_by_pressure, np.log(low.density / high.density) / (2 * d), **bound)
    exponent = 2 * d / np.log(fast.density / slow.density)
    np.testing.assert_allclose(state.isentropic_exponent, exponent, **bound)
    np.testing.assert_allclose(state.sound_speed, np.sqrt(exponent * p / state.density), **bound)


def test_frozen_gamma_is_that_of_the_frozen_gas() -> None:
    gas, T, p = broad("ethylene", 100, seed=16)
    state = gas.at("tp", T, p)
    frozen = gas.frozen(state).at("tp", T, p)
    np.testing.assert_allclose(state.gamma_frozen, frozen.isentropic_exponent, rtol=1e-10)
    np.testing.assert_allclose(frozen.enthalpy, state.enthalpy, rtol=1e-10, atol=1e-4)
    np.testing.assert_allclose(frozen.entropy, state.entropy, rtol=1e-10)


@pytest.mark.parametrize("fuel", ["hydrogen", "ethylene"])
def test_points_do_not_depend_on_their_batch(fuel: str) -> None:
    gas, T, p = broad(fuel, POOL + 500, seed=17)
    state = gas.at("tp", T, p)
    whole = gas.at("hp", state.enthalpy, p)
    chosen = np.random.default_rng(18).permutation(gas.size)[:60]
    alone = [gas.take(np.array([i])).at("hp", state.enthalpy[[i]], p[[i]]) for i in chosen]
    singles = np.concatenate([fields(one) for one in alone], axis=1)
    # one point goes through LAPACK, a batch through elimination: rounding differs, and stiff states carry it on
    np.testing.assert_allclose(singles, fields(whole)[:, chosen], rtol=1e-10)
    moles = np.concatenate([one.moles for one in alone], axis=1)
    np.testing.assert_allclose(moles, whole.moles[:, chosen], rtol=0.0, atol=1e-10 * 100.0)
    part = gas.take(chosen).at("hp", state.enthalpy[chosen], p[chosen])
    np.testing.assert_allclose(fields(part), fields(whole)[:, chosen], rtol=1e-10)


def test_cold_neighbours_change_nothing() -> None:
    gas = reacting("hydrogen", np.array([0.5, 0.5, 0.5]))
    mixed = gas.at("tp", np.array([180.0, 2200.0, 155.0]), 1e5)
    alone = gas.take(np.array([1])).at("tp", 2200.0, 1e5)
    assert mixed.range.tolist() == [EXTRAPOLATED, 0, EXTRAPOLATED]
    np.testing.assert_allclose(fields(mixed)[:, [1]], fields(alone), rtol=1e-13)


def test_a_warm_start_gives_the_same_answer() -> None:
    gas, T, p = broad("methane", 500, seed=19)
    start = gas.at("tp", np.clip(T * 1.05, 200.0, 6000.0), p * 0.9)
    there = gas.at("tp", T, p)
    warm = gas.at("hp", there.enthalpy, p, start=start)
    assert warm.good.all()
    np.testing.assert_allclose(warm.temperature, T, rtol=1e-10)


def test_a_start_without_the_fuel_serves_a_fuelled_gas() -> None:
    phi = np.array([0.0, 0.3, 1.0, 2.5])
    air, fuelled = reacting("ethylene", np.zeros(4)), reacting("ethylene", phi)
    start = air.at("tp", 1500.0, 2e5)
    there = fuelled.at("tp", 2400.0, 1e5)
    assert fuelled.at("hp", there.enthalpy, 1e5, start=start).temperature == pytest.approx(2400.0, rel=1e-10)
    assert air.at("tp", 1500.0, 2e5, start=there).good.all()


def test_a_hopeless_start_is_dropped() -> None:
    gas = reacting("methane", np.array([2.0]))
    there = gas.at("tp", 300.0, 1e5)
    start = gas.at("tp", 5900.0, 1e7)
    bad = replace(start, moles=start.moles * np.nan)
    assert gas.at("hp", there.enthalpy, 1e5, start=bad).temperature == pytest.approx(300.0, rel=1e-10)


def test_air_without_fuel() -> None:
    table = species_table(tuple(STANDARD_AIR))
    air = air_gas(table, STANDARD_AIR, "equilibrium", 3)
    T = np.array([300.0, 2500.0, 5500.0])
    state = air.at("tp", T, 1e5)
    with_absent_hydrogen = reacting("hydrogen", np.zeros(3)).at("tp", T, 1e5)
    with_absent_carbon = reacting("jp-10", np.zeros(3)).at("tp", T, 1e5)
    for other in (with_absent_hydrogen, with_absent_carbon):
        np.testing.assert_allclose(fields(other), fields(state), rtol=1e-11)


def test_unburnt_fuel_shares_the_pressure_but_does_not_react() -> None:
    half = reacting("hydrogen", np.array([1.0]), np.array([0.5]))
    state = half.at("tp", 2200.0, 1e5)
    unburnt = state.moles[-1] / state.moles.sum(0)
    assert state.moles[-1] == pytest.approx(half.inert[-1], rel=1e-15)
    # the reacting part is in equilibrium at its own partial pressure
    alone = EquilibriumGas(half.table, half.basis / (1.0 - half.inert[-1] * half.table.molar_mass[-1]), np.vstack([
        half.inert[:-1] / (1.0 - half.inert[-1] * half.table.molar_mass[-1]), np.zeros(1)]))  # fmt: skip
    other = alone.at("tp", 2200.0, 1e5 * (1.0 - unburnt))
    np.testing.assert_allclose(
        other.moles[:-1] / other.moles[:-1].sum(0), state.moles[:-1] / state.moles[:-1].sum(0), rtol=1e-9, atol=1e-30
    )


def test_impossible_points_are_flagged_and_leave_the_rest_alone() -> None:
    gas = reacting("hydrogen", np.full(6, 0.7))
    good = gas.at("tp", 2300.0, 1e5)
    h = np.array([good.enthalpy[0], np.nan, 5e8, -5e8, good.enthalpy[0], good.enthalpy[0]])
    p = np.array([1e5, 1e5, 1e5, 1e5, np.nan, -1e5])
    state = gas.at("hp", h, p)
    assert state.good.tolist() == [True, False, False, False, False, False]
    assert state.temperature[0] == pytest.approx(2300.0, rel=1e-11)
    assert set(state.range[1:]) <= {OUT_OF_RANGE, NOT_CONVERGED}


def test_beyond_the_data_is_never_good() -> None:
    gas = reacting("hydrogen", np.full(3, 0.7))
    state = gas.at("tp", np.array([6500.0, 140.0, 6000.0]), 1e5)
    assert state.range.tolist() == [OUT_OF_RANGE, OUT_OF_RANGE, 0]
    hot = gas.at("tp", 6000.0, 1e5)
    assert not gas.at("hp", hot.enthalpy + 1e6, 1e5).good.any()


def test_far_beyond_the_data_a_state_is_finite_and_flagged() -> None:
    gas = reacting("hydrogen", np.full(2, 0.7))
    state = gas.at("tp", np.array([1.3e4, 1.3e4]), 1e5)
    back = gas.at("hp", state.enthalpy, 1e5)
    assert np.isfinite(back.sound_speed).all()
    assert back.temperature == pytest.approx(1.3e4, rel=1e-10)
    assert set(back.range) == {OUT_OF_RANGE}


def test_a_choked_burner_has_no_state() -> None:
    gas = reacting("hydrogen", np.array([1.0]))
    before = gas.at("tp", 1200.0, 1e5)
    F, G, ht = duct_targets(before, np.array([1.2]))
    assert not gas.at("momentum", F, G, ht + 5e6, G, start=before).good.any()


@pytest.mark.parametrize("phi", [0.5, 2.0, 3.0])
def test_carbon_activity_against_cantera(phi: float) -> None:
    import cantera as ct

    gas = reacting("jp-10", np.array([phi]))
    state = gas.at("tp", 1200.0, 1e5)
    graphite = {s.name: s for s in ct.Species.list_from_file("nasa_condensed.yaml")}["C(gr)"].thermo
    listed = {s.name: s.thermo for s in ct.Species.list_from_file("nasa_gas.yaml") if s.name in ("CO", "O2")}
    # through another reaction than the program's: CO -> C + O2 / 2, in a gas of its own equilibrium
    g = {name: t.h(1200.0) - 1200.0 * t.s(1200.0) for name, t in {**listed, "C(gr)": graphite}.items()}
    x = dict(zip(gas.species, state.moles[:, 0] / state.moles.sum(), strict=True))
    ln_a = np.log(x["CO"]) - 0.5 * np.log(x["O2"]) - (g["C(gr)"] + 0.5 * g["O2"] - g["CO"]) / (ct.gas_constant * 1200.0)
    # the shift that makes the polynomials continuous is worth 1e-8 RT
    assert np.log(carbon_activity(gas.table, state)) == pytest.approx(ln_a, abs=1e-6)


def test_carbon_activity_without_carbon_or_potentials() -> None:
    gas = reacting("hydrogen", np.array([2.0]))
    state = gas.at("tp", 1200.0, 1e5)
    assert carbon_activity(gas.table, state).tolist() == [0.0]
    assert np.isnan(carbon_activity(gas.table, gas.frozen(state).at("tp", 1200.0, 1e5))).all()


def test_empty_batch() -> None:
    assert reacting("hydrogen", np.zeros(0)).at("hp", np.zeros(0), np.zeros(0)).good.shape == (0,)
