from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from cycle.constants import GAS_CONSTANT, STANDARD_AIR
from cycle.gas.base import FixedGas
from cycle.gas.closures import CLOSURES
from cycle.gas.constant import ConstantGas
from cycle.gas.frozen import FrozenGas, air_gas
from cycle.gas.fuels import FUELS
from cycle.gas.species import species_table
from cycle.gas.state import NOT_CONVERGED, OUT_OF_RANGE, State
from tests.gas.mixtures import duct_targets, frozen_air, reacting


def _constant(n: int) -> ConstantGas:
    return ConstantGas(np.full(n, 1004.5), np.full(n, 287.0))


GASES = {
    "constant": _constant,
    "air": frozen_air,
    "burnt": lambda n: frozen_air(n).fuelled(FUELS["hydrogen"], np.full(n, 0.02), np.ones(n)),
}


def targets_of(kind: str, state: State, mach: np.ndarray) -> tuple[np.ndarray, ...]:
    F, G, ht = duct_targets(state, mach)
    T, p, h, s, v = state.temperature, state.pressure, state.enthalpy, state.entropy, 1.0 / state.density
    table = {
        "tp": (T, p), "hp": (h, p), "sp": (s, p), "vp": (v, p), "hv": (h, v), "hs": (h, s), "ts": (T, s),
        "flux": (s, ht, G), "momentum": (F, G, ht, G), "passage": (ht, G, p),
    }  # fmt: skip
    return table[kind]


@pytest.mark.parametrize("gas_name", GASES)
@pytest.mark.parametrize("kind", CLOSURES)
@settings(deadline=None, max_examples=25)
@given(st.floats(200.0, 4000.0), st.floats(2.0, 7.0), st.one_of(st.floats(0.15, 0.95), st.floats(1.05, 5.0)))
def test_every_closure_returns_to_the_state(gas_name: str, kind: str, T: float, log_p: float, mach: float) -> None:
    gas: FixedGas = GASES[gas_name](1)
    there = gas.at("tp", T, 10.0**log_p)
    start = gas.at("tp", T * 1.02, 10.0**log_p * (0.97 if mach > 1.0 else 1.03))
    back = gas.at(kind, *targets_of(kind, there, np.array([mach])), start=start)
    assert back.good.all()
    # steps below 3e-9 end the iteration, whose error is then their square; the bound is that of the conditioning
    # of (F, G) near M = 1, where T goes as the square root of the targets' rounding
    assert back.temperature == pytest.approx(there.temperature, rel=1e-11)
    assert back.pressure == pytest.approx(there.pressure, rel=1e-11)


def test_constant_gas_is_the_textbook_one() -> None:
    gas = _constant(1)
    a, b = gas.at("tp", 300.0, 1e5), gas.at("tp", 600.0, 4e5)
    assert b.enthalpy - a.enthalpy == pytest.approx(1004.5 * 300.0, rel=1e-12)
    assert b.entropy - a.entropy == pytest.approx(1004.5 * np.log(2.0) - 287.0 * np.log(4.0), rel=1e-12)
    assert a.isentropic_exponent == pytest.approx(1004.5 / 717.5, rel=1e-12)
    assert a.sound_speed == pytest.approx(np.sqrt(1004.5 / 717.5 * 287.0 * 300.0), rel=1e-12)


def test_air_is_that_of_its_parts() -> None:
    state = frozen_air(1).at("tp", 1200.0, 2e5)
    x = state.moles[:, 0] / state.moles.sum()
    gas = frozen_air(1)
    assert dict(zip(gas.species, x, strict=True))["O2"] == pytest.approx(0.2095, rel=1e-14)
    assert state.molar_mass == pytest.approx((0.7808 * 28.014 + 0.2095 * 31.998 + 0.0097 * 39.95) / 1e3, rel=1e-12)
    assert state.density == pytest.approx(2e5 * state.molar_mass / (GAS_CONSTANT * 1200.0), rel=1e-12)


@settings(deadline=None, max_examples=50)
@given(st.sampled_from(sorted(FUELS)), st.floats(0.0, 3.0), st.floats(0.0, 1.0))
def test_complete_combustion_keeps_atoms_and_mass(name: str, phi: float, burnt: float) -> None:
    fuel = FUELS[name]
    air = frozen_air(1, name)
    ratio = phi * fuel.stoichiometric_ratio(STANDARD_AIR)
    gas = air.fuelled(fuel, np.array([ratio]), np.array([burnt]))
    table = gas.table
    # exact arithmetic up to rounding
    assert table.molar_mass @ gas.composition[:, 0] == pytest.approx(1.0, rel=1e-13)
    supplied = ratio / fuel.molar_mass * table.atoms[-1]
    expected = (table.atoms.T @ air.composition[:, 0] + supplied) / (1.0 + ratio)
    np.testing.assert_allclose(table.atoms.T @ gas.composition[:, 0], expected, rtol=1e-12, atol=1e-12)
    left = gas.composition[-1, 0] * fuel.molar_mass * (1.0 + ratio)
    assert left == pytest.approx(ratio - burnt * min(ratio, ratio / max(phi, 1e-300)), abs=1e-12)
    assert (gas.composition >= 0.0).all()


def test_rich_complete_products_use_all_oxygen_and_leave_fuel() -> None:
    gas = reacting("methane", np.array([0.5, 1.0, 2.0]))
    dead = gas.complete()
    table, composition = dead.table, dead.composition
    np.testing.assert_allclose(table.atoms.T @ composition, (table.atoms[: table.basis].T @ gas.basis) + (
        table.atoms[table.reacting :].T @ gas.inert), rtol=1e-12)  # fmt: skip
    np.testing.assert_allclose(composition[table.index["O2"], 1:], 0.0, atol=1e-12)
    assert composition[-1, 0] == 0.0
    assert composition[-1, 2] > 0.1 * composition[table.index["CO2"], 2]
    hot = gas.at("tp", 2500.0, 1e5)
    again = gas.frozen(hot).complete()
    np.testing.assert_allclose(again.composition, composition, rtol=1e-9, atol=1e-11)


def test_dead_state_without_oxygen_or_fuel_is_not_a_number() -> None:
    table = species_table(("N2", "O2", "H2O", "H2"))
    lean, rich = {"N2": 0.7, "O2": 0.2, "H2": 0.1}, {"N2": 0.7, "O2": 0.01, "H2": 0.29}
    assert np.isfinite(air_gas(table, lean, "frozen", 1).complete().composition).all()
    state = air_gas(table, rich, "frozen", 1).complete().at("tp", 300.0, 1e5)
    assert state.range.tolist() == [NOT_CONVERGED]


def test_fuel_must_be_the_tables() -> None:
    with pytest.raises(ValueError, match="without the fuel methane"):
        frozen_air(1).fuelled(FUELS["methane"], np.array([0.02]), np.ones(1))


def test_reacting_and_frozen_are_inverse_in_atoms() -> None:
    air = frozen_air(3).fuelled(FUELS["hydrogen"], np.array([0.0, 0.01, 0.05]), np.full(3, 0.8))
    back = air.reacting().frozen(air.reacting().at("tp", 3000.0, 1e5))
    assert isinstance(back, FrozenGas)
    np.testing.assert_allclose(back.table.atoms.T @ back.composition, air.table.atoms.T @ air.composition, rtol=1e-11, atol=1e-12)
    np.testing.assert_array_equal(back.composition[-1], air.composition[-1])


def test_points_do_not_depend_on_their_batch() -> None:
    rng = np.random.default_rng(4)
    n = 40
    air = frozen_air(n).fuelled(FUELS["hydrogen"], rng.uniform(0.0, 0.03, n), np.ones(n))
    h, p = rng.uniform(-2e5, 4e6, n), 10.0 ** rng.uniform(3.0, 6.0, n)
    whole = air.at("hp", h, p)
    for i in range(n):
        one = air.take(np.array([i])).at("hp", h[[i]], p[[i]])
        assert one.temperature[0] == pytest.approx(whole.temperature[i], rel=1e-14)


def test_impossible_points_are_flagged_and_leave_the_rest_alone() -> None:
    gas = frozen_air(5)
    good = gas.at("tp", 1500.0, 1e5)
    h = np.array([good.enthalpy[0], np.nan, 1e9, -1e9, good.enthalpy[0]])
    state = gas.at("hp", h, np.array([1e5, 1e5, 1e5, 1e5, np.nan]))
    assert state.good.tolist() == [True, False, False, False, False]
    assert state.temperature[0] == pytest.approx(1500.0, rel=1e-12)
    assert set(state.range[1:]) <= {OUT_OF_RANGE, NOT_CONVERGED}


def test_a_choked_burner_has_no_state() -> None:
    gas = frozen_air(1)
    before = gas.at("tp", 1200.0, 1e5)
    F, G, ht = duct_targets(before, np.array([1.3]))
    assert not gas.at("momentum", F, G, 3.0 * ht, G, start=before).good.any()


def test_branch_needs_a_start() -> None:
    with pytest.raises(ValueError, match="two branches"):
        frozen_air(1).at("flux", 7e3, 1e6, 100.0)
