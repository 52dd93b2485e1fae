"""A walk whose nozzle the ambient pressure holds back: closed relations, no jump at the limit, balances, and where no shock has a place."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

import cycle
from cycle import limits
from cycle.arrays import Array
from cycle.flow import isentropic, shocks
from cycle.flow.roots import bracketed
from cycle.flowpath import back_pressure, expansion
from cycle.flowpath.stream import Stream
from tests.test_expansion import burnt, constant, moving, total_pressure
from tests.test_walk import CASES

TEXT = (CASES / "sandbar.toml").read_text(encoding="utf-8").replace('divergence_angle = "9 deg"\ndivergence_shape = "conical"\n', "")
SHIFTING = 'chemistry = "shifting"\n'
TEXTBOOK = TEXT.replace('"equilibrium"', '"constant-gamma"').replace(SHIFTING, "")

GASES = {
    "constant gamma": TEXTBOOK,
    "frozen": TEXT.replace('"equilibrium"', '"frozen"').replace(SHIFTING, ""),
    "shifting": TEXT,
    "frozen after 5": TEXT.replace(SHIFTING, 'chemistry = "frozen-after"\nfreeze_station = "5"\n'),
    "frozen after Mach 2": TEXT.replace(SHIFTING, 'chemistry = "frozen-after"\nfreeze_mach = 2.0\n'),
}


def solved(text: str, **changes: Any) -> cycle.Walk:
    return cycle.solve(cycle.loads(text, "held back"), {key.replace("__", "."): value for key, value in changes.items()})


def shock_limit(walk: cycle.Walk) -> Any:
    return next(row for row in walk.limits if row.key == "nozzle_shock")


def limiting_area(text: str) -> float:
    """Exit area ratio with the shock in the exit plane, by halving of the limit; its figure is the full-flowing nozzle's throughout."""
    low, high = 20.0, 120.0
    for _ in range(12):
        grid = np.linspace(low, high, 9)
        margin = shock_limit(solved(text, nozzle__exit_area_ratio=grid)).margin
        last = int(np.flatnonzero(margin > 0.0)[-1])
        low, high = grid[last], grid[last + 1]
    return 0.5 * (low + high)


@pytest.mark.published
@pytest.mark.parametrize(("exit_area_ratio", "stands"), [(2.4, False), (30.0, False), (60.0, True), (120.0, True)])
def test_shock_in_the_nozzle_is_over_its_limit(exit_area_ratio: float, stands: bool) -> None:
    """Pressure ratio over a normal shock in the exit plane: NACA Report 1135 (1953), eq. 93, at constant gamma; of the full-flowing
    nozzle, whether a shock stands inside or not."""
    walk = solved(TEXTBOOK.replace("velocity_coefficient = 0.98", ""), nozzle__exit_area_ratio=exit_area_ratio)
    throat, gamma = walk.station["5"], walk.station["5"].isentropic_exponent
    mach = isentropic.supersonic_mach(exit_area_ratio, gamma)
    behind = throat.total_pressure * isentropic.pressure_ratio(mach, gamma) * (1.0 + 2.0 * gamma / (gamma + 1.0) * (mach**2 - 1.0))
    row = shock_limit(walk)
    assert row.actual == pytest.approx(walk.station["0"].pressure / behind, rel=1e-9)
    assert (limits.state_of(row.margin) == "over") == stands == (walk.station["10"].mach < 1.0)


@pytest.mark.published
@pytest.mark.parametrize("coefficient", [1.0, 0.97])
@pytest.mark.parametrize("out", [0.36, 0.2])
def test_exit_behind_a_shock_inside_equals_the_closed_chain(out: float, coefficient: float) -> None:
    """NACA Report 1135 (1953), eq. 44, 80, 99: the exit Mach number and ambient pressure say the total pressure behind the shock,
    that the shock's Mach number and the area ratio, which lets the shock stand ahead of the exit. A loss ahead of the shock moves it
    and leaves the exit as it is."""
    text = TEXTBOOK.replace("velocity_coefficient = 0.98", f"velocity_coefficient = {coefficient}")
    free, throat = (solved(text).station[name] for name in ("0", "5"))
    g = throat.isentropic_exponent
    recovery = free.pressure / throat.total_pressure / float(isentropic.pressure_ratio(out, g))
    ratio = float(isentropic.area_ratio(out, g)) / recovery
    mach = float(
        bracketed(lambda m: shocks.normal_shock(m, g).total_pressure_ratio - recovery, np.array([1.1]), np.array([20.0]), 1e-12)[0]
    )
    assert isentropic.area_ratio(mach, g) < ratio
    walk = solved(text, nozzle__exit_area_ratio=ratio)
    exit_ = walk.station["10"]
    assert walk.status == "solved"
    assert exit_.mach == pytest.approx(out, rel=1e-10)
    assert exit_.pressure == pytest.approx(free.pressure, rel=1e-12)
    assert exit_.total_pressure == pytest.approx(throat.total_pressure * recovery, rel=1e-10)
    assert exit_.temperature == pytest.approx(throat.total_temperature * isentropic.temperature_ratio(out, g), rel=1e-10)
    wanted = exit_.mass_flow * exit_.velocity - free.mass_flow * free.velocity
    assert walk.performance.thrust == pytest.approx(wanted, rel=1e-10)
    row, figures = shock_limit(walk), next(p.figures for p in walk.processes if p.name == "nozzle")
    assert limits.state_of(row.margin) == "over"
    assert row.actual == pytest.approx(free.pressure / figures["exit_shock_pressure"], rel=1e-12)
    full = next(r for r in walk.limits if r.key == "nozzle_separation")
    assert full.actual == pytest.approx(figures["full_flow_pressure"] / free.pressure, rel=1e-12) and full.actual < 0.1


@pytest.mark.parametrize("gas", GASES)
def test_thrust_is_continuous_where_the_shock_enters(gas: str) -> None:
    """Across the exit plane the shock keeps the stream thrust: just behind the limit the exit is subsonic and the thrust the same."""
    at = limiting_area(GASES[gas])
    inside = solved(GASES[gas], nozzle__exit_area_ratio=at * np.array([1.0 - 1e-6, 1.0 + 1e-6]))
    assert list(inside.status) == ["solved"] * 2
    assert inside.station["10"].mach[0] > 3.0 and inside.station["10"].mach[1] < 0.6
    thrust, whole = inside.performance.thrust, inside.station["10"].stream_thrust
    # twice the millionth of the area, at the slope of the stream thrust with the area and no more
    assert abs(thrust[1] - thrust[0]) < 1e-5 * whole[0]


@pytest.mark.parametrize("gas", GASES)
def test_walk_with_a_shock_inside_balances_and_is_itself_in_a_batch(gas: str) -> None:
    areas = np.array([2.4, 30.0, 55.0, 70.0, 90.0])
    batch = solved(GASES[gas], nozzle__exit_area_ratio=areas)
    assert list(batch.status) == ["solved"] * 5 and batch.audit.ok
    assert np.array_equal(batch.station["10"].mach < 1.0, areas > 50.0)
    assert np.array_equal(shock_limit(batch).margin < 0.0, areas > 50.0)
    # a loss ahead of a shock inside moves it, so entropy goes with the area alone
    assert np.all(np.diff(batch.station["10"].entropy) > 0.0)
    assert np.all(np.diff(batch.performance.thrust[1:]) < 0.0)
    for i in (1, 3):
        one = solved(GASES[gas], nozzle__exit_area_ratio=float(areas[i]))
        assert one.audit.ok
        for key in ("pressure", "temperature", "velocity", "entropy", "area", "sound_speed", "stream_thrust"):
            assert one.station["10"][key] == pytest.approx(batch.station["10"][key][i], rel=1e-10), key
        assert one.performance.thrust == pytest.approx(batch.performance.thrust[i], rel=1e-10)
        for rows, total in ((one.losses[1:], one.losses[0]), (one.potentials[:-1], one.potentials[-1]), (one.exergy[1:], one.exergy[0])):
            assert sum(r.value for r in rows) == pytest.approx(total.value, abs=1e-9 * sum(abs(r.value) for r in rows))


def test_a_throat_that_cannot_choke_against_the_ambient_pressure_has_a_status_and_no_thrust() -> None:
    """Slow flight at little recovery: the critical pressure of the throat lies below the ambient, so no shock has a place."""
    slow = TEXTBOOK.replace("mach = 3.0", "mach = 0.5").replace("exit_mach = 0.22", "exit_mach = 0.15")
    walk = solved(slow, nozzle__exit_area_ratio=1.3, combustor__equivalence_ratio=0.1)
    throat = walk.station["5"]
    assert throat.pressure < walk.station["0"].pressure
    assert walk.status == "back-pressured" and walk.failed_process == "nozzle" and "lower ambient pressure" in walk.reason
    assert "10" not in walk.station and np.isnan(walk.performance.thrust)
    twin = solved(slow, nozzle__exit_area_ratio=np.array([1.3, 1.3]), combustor__equivalence_ratio=0.1)
    assert list(twin.status) == ["back-pressured"] * 2


def full_flow(entering: Stream, area: Array) -> Stream:
    return expansion.moved(entering, expansion.widened(entering, area)[0])


@pytest.mark.parametrize("gas", ["constant gamma", "equilibrium"])
@pytest.mark.parametrize("mach", [1.0, 1.8])
def test_exit_is_that_of_the_shock_found_by_its_place(gas: str, mach: float) -> None:
    """`against_back_pressure` looks for the shock between entry and exit; the walk finds the exit without it. Both also say
    alike where the shock has no place: unchoked, or expelled."""
    n = 12
    entering = moving({"constant gamma": constant, "equilibrium": burnt}[gas](n), mach, 2500.0, 2e5)
    area, back = 3.0 * entering.area, np.linspace(0.1, 0.99, n) * total_pressure(entering)
    held = back_pressure.held_back(entering, full_flow(entering, area), back)
    found = back_pressure.against_back_pressure(entering, area, back)
    inside = found.regime == back_pressure.REGIME_CODE["shock-in-nozzle"]
    gone = (found.regime == back_pressure.REGIME_CODE["unchoked"]) | (found.fault > 0)
    assert inside.sum() >= 2 and gone.sum() >= 1
    assert np.array_equal(held.shocked, inside | gone) and np.array_equal(held.expelled, gone)
    for key in ("pressure", "temperature", "entropy", "density"):
        got, wanted = (getattr(s.state, key)[inside] for s in (held.stream, found.exit))
        np.testing.assert_allclose(got, wanted, rtol=1e-9, err_msg=key)
    np.testing.assert_allclose(held.stream.velocity[inside], found.exit.velocity[inside], rtol=1e-8)


def test_shock_ahead_of_the_freezing_plane_leaves_the_composition_following() -> None:
    """The plane lies at Mach 2.2: while the shock has a place behind it, its composition is kept; a shock further ahead leaves a hot slow
    stream, which follows to the exit."""
    n = 30
    entering = moving(burnt(n), 1.0, 2900.0, 2e5)
    area = 6.0 * entering.area
    back = np.linspace(0.24, 0.8, n) * total_pressure(entering)
    frozen = expansion.frozen_after(entering, "mach", np.full(n, 2.2), "area", area)
    held = back_pressure.held_back(frozen.plane, frozen.exit, back, entering)
    kept = np.all(np.abs(held.stream.state.moles - frozen.plane.state.moles) < 1e-9, axis=0)
    assert held.shocked.all() and not held.expelled.any()
    assert 3 < kept.sum() < n - 3 and np.array_equal(kept, np.arange(n) < kept.sum())
    follows = back_pressure.held_back(entering, full_flow(entering, area), back)
    late = ~kept
    np.testing.assert_allclose(held.stream.state.moles[:, late], follows.stream.state.moles[:, late], atol=1e-8)
    np.testing.assert_allclose(held.stream.state.temperature[late], follows.stream.state.temperature[late], rtol=1e-9)
    np.testing.assert_allclose(held.stream.state.pressure, back, rtol=1e-12)
    np.testing.assert_allclose(held.stream.total_enthalpy, entering.total_enthalpy, atol=1e-9 * entering.velocity[0] ** 2)
    np.testing.assert_allclose(held.stream.area, area, rtol=1e-9)
