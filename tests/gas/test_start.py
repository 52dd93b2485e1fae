"""First guesses of the equilibrium iteration: close enough to save steps, and never what decides an answer."""

from __future__ import annotations

import numpy as np
import pytest

from cycle.constants import GAS_CONSTANT, REFERENCE_PRESSURE
from cycle.gas.closures import CLOSURES
from cycle.gas.kernel import kernel_of
from cycle.gas.start import ABSENT, Guess, dissociated
from tests.gas.mixtures import duct_targets, reacting


@pytest.mark.parametrize("fuel", ["hydrogen", "ethylene"])
def test_first_temperature_is_exact_where_cold_and_close_where_it_dissociates(fuel: str) -> None:
    rng = np.random.default_rng(31)
    n = 400
    gas = reacting(fuel, rng.uniform(0.1, 0.95, n))
    T, p = rng.uniform(250.0, 3500.0, n), 10.0 ** rng.uniform(4.0, 6.5, n)
    there = gas.at("tp", T, p)
    guess = Guess(kernel_of(gas.table), gas.basis, gas.inert)
    frozen, _ = guess.temperature(guess.layout.h, there.enthalpy / GAS_CONSTANT)
    found, _ = dissociated(frozen, np.log(p / REFERENCE_PRESSURE))
    # the parabola through nodes 8 % apart in T is of third order; little dissociates below 1100 K
    np.testing.assert_allclose(found[T < 1100.0], T[T < 1100.0], rtol=2e-4)
    assert np.sqrt(np.mean((found / T - 1.0) ** 2)) < 0.02


def test_slope_of_the_dissociated_temperature_is_its_derivative() -> None:
    """Central difference; its error is of the order of the step squared, 1e-6, over the width of the onset."""
    T, ln_p = np.linspace(1700.0, 4500.0, 29), 1.5
    high, low = dissociated(T + 0.1, ln_p)[0], dissociated(T - 0.1, ln_p)[0]
    np.testing.assert_allclose(dissociated(T, ln_p)[1], (high - low) / 0.2, rtol=1e-5)


@pytest.mark.parametrize("fuel", ["hydrogen", "ethylene"])
@pytest.mark.parametrize("machs", [(1.5, 4.0), (0.15, 0.6)])
def test_guess_behind_heat_addition_lies_near_the_state_on_its_branch(fuel: str, machs: tuple[float, float]) -> None:
    rng = np.random.default_rng(32)
    n = 300
    gas = reacting(fuel, rng.uniform(0.1, 1.0, n))
    there = gas.at("tp", rng.uniform(1200.0, 3000.0, n), 10.0 ** rng.uniform(4.0, 6.5, n))
    mach = rng.uniform(*machs, n)
    F, G, ht = duct_targets(there, mach)
    guess, distance = gas.guess_heated(F, G, ht, mach > 1.0)
    assert np.median(np.abs(guess.temperature / there.temperature - 1.0)) < 0.02
    assert np.max(np.abs(guess.temperature / there.temperature - 1.0)) < 0.15
    expected = ((mach**2 - 1.0) / (1.0 + there.isentropic_exponent * mach**2)) ** 2
    # a hot, thin stream dissociates beyond the fit: the distance then only has to be of the right size
    assert np.median(np.abs(distance / expected - 1.0)) < 0.1
    np.testing.assert_allclose(distance, expected, atol=0.2)
    found = gas.at("momentum", F, G, ht, G, start=guess)
    assert found.good.all()
    np.testing.assert_allclose(found.temperature, there.temperature, rtol=1e-9)


@pytest.mark.parametrize("fuel", ["hydrogen", "ethylene"])
def test_leaving_out_absent_species_changes_no_state(fuel: str) -> None:
    """Air in a table made for a fuel, by the table of its own species and by the whole one; the rest is rounding."""
    rng = np.random.default_rng(33)
    n = 100
    air = reacting(fuel, np.zeros(n))
    T, p = rng.uniform(200.0, 4000.0, n), 10.0 ** rng.uniform(3.0, 6.5, n)
    there = air.at("tp", T, p)
    for kind in ("tp", "hp", "sp", "hs"):
        by_name = {"temperature": T, "pressure": p, "enthalpy": there.enthalpy, "entropy": there.entropy}
        targets = [by_name[name] for name in CLOSURES[kind].targets]
        whole, part = air.state_of(air.solve(kind, *targets)), air.at(kind, *targets)
        for name in ("temperature", "pressure", "entropy", "sound_speed", "specific_heat", "molar_mass"):
            np.testing.assert_allclose(getattr(part, name), getattr(whole, name), rtol=1e-10, err_msg=f"{kind} {name}")
        np.testing.assert_allclose(part.moles, whole.moles, rtol=1e-8, atol=1e-11)
        assert part.moles.shape == (len(air.table.names), n)
        assert part.potentials is not None
        assert np.all(part.potentials[air.table.index["H2O"]] == ABSENT)


def test_a_start_from_air_serves_once_fuel_is_added_and_the_other_way() -> None:
    """The state has the rows of the whole table whichever species were iterated."""
    n = 20
    phi = np.linspace(0.2, 1.0, n)
    air, burnt = reacting("ethylene", np.zeros(n)), reacting("ethylene", phi)
    T, p = np.full(n, 2200.0), np.full(n, 1e5)
    cold_air, cold_burnt = air.at("tp", T, p), burnt.at("tp", T, p)
    np.testing.assert_allclose(burnt.at("tp", T, p, start=cold_air).moles, cold_burnt.moles, rtol=1e-9, atol=1e-13)
    np.testing.assert_allclose(air.at("tp", T, p, start=cold_burnt).moles, cold_air.moles, rtol=1e-9, atol=1e-13)
