from __future__ import annotations

import numpy as np
import pytest

from cycle.gas.closures import CLOSURES
from cycle.gas.constant import ConstantGas
from cycle.gas.fuels import FUELS
from cycle.gas.referee import burner, deviation, recompute
from cycle.gas.state import NOT_CONVERGED
from tests.gas.mixtures import broad, duct_targets, frozen_air, reacting
from tests.gas.test_frozen import targets_of

# the agreement asked of the equilibrium solver: T 1e-4 K, mole fractions 1e-8, sound speed 1e-6 of its value
T_BOUND, X_BOUND, A_BOUND = 1e-4, 1e-8, 1e-6


@pytest.mark.parametrize("fuel", FUELS)
@pytest.mark.parametrize("kind", CLOSURES)
def test_cantera_finds_the_state_of_every_closure(fuel: str, kind: str) -> None:
    gas, T, p = broad(fuel, 80, seed=21)
    there = gas.at("tp", T, p)
    mach = np.full(T.size, 1.7)
    start = gas.at("tp", np.minimum(T * 1.01, 6000.0), p * 0.99)
    state = gas.at(kind, *targets_of(kind, there, mach), start=start if CLOSURES[kind].branched else None)
    assert state.good.all()
    by = "sp" if kind in ("sp", "flux") else "hp"
    found = deviation(gas, state, by)
    assert found.left_out == 0
    assert found.temperature < T_BOUND
    assert found.mole_fraction < X_BOUND
    assert found.sound_speed < A_BOUND


def test_frozen_states_against_cantera() -> None:
    rng = np.random.default_rng(22)
    n = 100
    gas = frozen_air(n, "kerosene").fuelled(FUELS["kerosene"], rng.uniform(0.0, 0.1, n), rng.uniform(0.0, 1.0, n))
    state = gas.at("tp", rng.uniform(200.0, 6000.0, n), 10.0 ** rng.uniform(2.0, 7.0, n))
    for kind in ("hp", "sp"):
        found = deviation(gas, state, kind)
        # Cantera stops its own search for T at about 1e-9 of T
        assert found.temperature < 2e-5
        assert found.mole_fraction < 1e-13
        assert found.sound_speed < 1e-8
        assert (found.compared, found.left_out) == (n, 0)


@pytest.mark.parametrize("machs", [(1.1, 3.0), (0.2, 0.9)])
def test_burner_solved_by_cantera_alone(machs: tuple[float, float]) -> None:
    rng = np.random.default_rng(23)
    n = 8
    gas = reacting("ethylene", rng.uniform(0.2, 1.2, n))
    state = gas.at("tp", rng.uniform(1500.0, 3200.0, n), 10.0 ** rng.uniform(4.5, 6.0, n))
    F, G, ht = duct_targets(state, rng.uniform(*machs, n))
    found = np.array([burner(gas, state, i, F[i], G[i], ht[i]) for i in range(n)])
    # the bracket closes on p to 1e-13, and T follows from an equilibrium to 1e-12
    np.testing.assert_allclose(found[:, 0], state.temperature, atol=T_BOUND)
    np.testing.assert_allclose(found[:, 1], state.pressure, rtol=1e-7)
    np.testing.assert_allclose(found[:, 2], G / state.density, rtol=1e-7)


def test_a_choked_burner_has_no_root_for_cantera_either() -> None:
    gas = reacting("hydrogen", np.array([1.0]))
    state = gas.at("tp", 1200.0, 1e5)
    F, G, ht = duct_targets(state, np.array([1.2]))
    assert np.isnan(burner(gas, state, 0, F[0], G[0], ht[0] + 5e6)).all()


def test_a_wrong_state_is_seen() -> None:
    gas = reacting("hydrogen", np.array([0.8, 0.8]))
    state = gas.at("tp", np.array([2400.0, 2400.0]), 1e5)
    state.temperature[1] += 1e-2
    state.moles[3, 1] *= 1.0 + 1e-5
    found = deviation(gas, state)
    assert found.temperature == pytest.approx(1e-2, rel=5e-2)
    assert found.mole_fraction > 1e-8


def test_points_without_a_state_are_left_out() -> None:
    gas = reacting("hydrogen", np.array([0.8, 0.8, 0.8]))
    state = gas.at("tp", np.array([2400.0, 180.0, 2000.0]), 1e5).flagged(np.array([False, False, True]), NOT_CONVERGED)
    found = deviation(gas, state)
    assert (found.compared, found.left_out) == (1, 2)
    assert np.isnan(recompute(gas, state).temperature).tolist() == [False, True, True]
    assert recompute(gas, state, points=np.array([0])).temperature == pytest.approx(2400.0, abs=T_BOUND)


def test_only_gases_with_species_are_judged() -> None:
    gas = ConstantGas(np.full(1, 1004.5), np.full(1, 287.0))
    with pytest.raises(TypeError, match="frozen and equilibrium"):
        recompute(gas, gas.at("tp", 300.0, 1e5))
