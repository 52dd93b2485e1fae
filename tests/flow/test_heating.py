"""Heat addition at constant area with real gas: the direct way and the way by the sonic point are one answer."""

from __future__ import annotations

import numpy as np
import pytest

from cycle.flow import heating
from tests.gas.mixtures import duct_targets, frozen_air, reacting


@pytest.mark.parametrize("fuel", ["hydrogen", "ethylene"])
@pytest.mark.parametrize("machs", [(1.02, 4.0), (0.1, 0.98)])
def test_the_direct_way_finds_what_the_sonic_point_leads_to(fuel: str, machs: tuple[float, float]) -> None:
    """Streams of known state from near Mach 1 to far from it; near it T follows sqrt(rounding) of the total enthalpy."""
    rng = np.random.default_rng(41)
    n = 300
    gas = reacting(fuel, rng.uniform(0.1, 1.0, n))
    there = gas.at("tp", rng.uniform(1200.0, 3000.0, n), 10.0 ** rng.uniform(4.0, 6.5, n))
    mach = rng.uniform(*machs, n)
    F, G, ht = duct_targets(there, mach)
    fast = mach > 1.0
    found = heating.heated(gas, F, G, ht, fast)
    assert found.passes.all()
    assert found.state.good.all()
    np.testing.assert_allclose(found.state.temperature, there.temperature, rtol=1e-7)
    point = heating.sonic_point(gas, F, G, ht)
    state, passes = heating.constant_area(gas, F, G, ht, fast, point)
    both = passes & state.good
    assert both.mean() > 0.9  # the sonic point of a slow stream can lie beyond the data
    np.testing.assert_allclose(found.state.pressure[both], state.pressure[both], rtol=1e-7)


def test_too_much_heat_chokes_and_leaves_its_neighbours_alone() -> None:
    rng = np.random.default_rng(42)
    n = 200
    gas = reacting("hydrogen", rng.uniform(0.1, 0.8, n))
    there = gas.at("tp", rng.uniform(1200.0, 2600.0, n), 10.0 ** rng.uniform(4.5, 6.0, n))
    F, G, ht = duct_targets(there, rng.uniform(1.1, 3.0, n))
    fast = np.ones(n, np.bool_)
    most = heating.sonic_point(gas, F, G, ht).total_enthalpy
    too_much = rng.random(n) < 0.4
    asked = np.where(too_much, most + rng.uniform(1e-4, 0.5, n) * np.abs(most), ht)
    found = heating.heated(gas, F, G, asked, fast)
    np.testing.assert_array_equal(found.passes, ~too_much)
    assert found.known.all()
    np.testing.assert_allclose(found.state.temperature[~too_much], there.temperature[~too_much], rtol=1e-7)
    alone = heating.heated(gas.take(~too_much), F[~too_much], G[~too_much], ht[~too_much], fast[~too_much])
    np.testing.assert_allclose(alone.state.pressure, found.state.pressure[~too_much], rtol=1e-10)


def test_a_gas_of_fixed_composition_goes_by_its_sonic_point() -> None:
    gas = frozen_air(3)
    there = gas.at("tp", np.array([900.0, 1400.0, 1800.0]), np.full(3, 1e5))
    mach = np.array([0.3, 1.5, 3.0])
    F, G, ht = duct_targets(there, mach)
    assert gas.guess_heated(F, G, ht, mach > 1.0) is None
    found = heating.heated(gas, F, G, ht, mach > 1.0)
    assert found.passes.all()
    np.testing.assert_allclose(found.state.temperature, there.temperature, rtol=1e-9)
