"""The modes of a duct: their borders, their throats, and that no point's answer depends on its neighbours."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from cycle.flow.duct import modes
from cycle.flow.duct.core import find_train
from cycle.flow.duct.coupling import solve_block
from cycle.flow.duct.march import march
from cycle.flow.duct.modes import MODES, STATUSES, TRIED
from cycle.flow.duct.scan import scan_of
from cycle.flow.duct.summits import CORNER, EXIT, SMOOTH
from cycle.flow.duct.throat import candidates, throat
from tests.flow.duct_support import perfect_duct, random_ducts

NONE, SCRAMJET, TRAIN, THROAT = range(4)


def with_ratio(duct, ratio):
    """The duct of one point at many fuel ratios."""
    many = duct.take(np.zeros(len(ratio), int))
    return replace(many, ratio=np.asarray(ratio), brought=many.brought * ratio / duct.ratio)


def heated(heat, friction=0.0, x=(0.0, 1.2), ratio=(1.0, 2.4), mach=2.4, theta=3.0, length=1.0):
    """Heat J/kg of stream, one value or several."""
    heat = np.atleast_1d(np.asarray(heat, float))
    return perfect_duct(mach, x, ratio, heat=heat, friction=friction, theta=theta, length=length, n=heat.size)


KORKEGI = 1.0 + 0.3 * 2.4**2


def solved(duct, limit=KORKEGI, **options):
    return solve_block(duct, np.full(duct.size, limit), **options)


def test_more_heat_takes_the_duct_through_every_mode_in_order():
    found = solved(heated(np.linspace(1e5, 3.2e6, 40)))
    modes = found.mode
    stands = modes != NONE
    assert (np.diff(modes[stands]) >= 0).all()
    assert set(modes[stands]) == {SCRAMJET, TRAIN, THROAT}
    assert [STATUSES[s] for s in found.status[~stands]] == ["unstarted"] * int((~stands).sum())
    assert (~stands).any()


@pytest.mark.parametrize("friction", [0.0, 0.003])
def test_shock_train_and_thermal_throat_join_without_a_jump(friction):
    """p3, the exit speed and where the core fills the duct, on both sides of the border, which is first solved for."""
    heats = np.linspace(5e5, 2.2e6, 60)
    for _ in range(6):
        low = int(np.flatnonzero(np.isin(solved(heated(heats, friction)).mode, [SCRAMJET, TRAIN]))[-1])
        heats = np.linspace(heats[low], heats[low + 1], 60)
    border = heats[0]
    found = solved(heated(border * (1.0 + np.array([-1e-3, -1e-5, -1e-7, 1e-7, 1e-5, 1e-3])), friction))
    assert list(found.mode) == [TRAIN] * 3 + [THROAT] * 3
    for name, slope in (("pressure_3", 3.0), ("velocity", 3.0)):
        value = getattr(found, name)
        # across 2e-7 of heat the slope allows 6e-7; 1e-5 leaves room for the double root at the touching point
        assert value[3] == pytest.approx(value[2], rel=1e-5)
        assert value[4] == pytest.approx(value[1], rel=slope * 1e-4)
    assert found.x_fill[3] == pytest.approx(found.x_fill[2], abs=1e-4)


def test_smooth_throat_is_where_the_numerator_of_the_march_vanishes():
    """At constant gamma and without friction (1 + g M^2) dTt/Tt = 2 dA/A at Mach 1 (Shapiro (1953), ch. 8)."""
    duct = heated(1.9e6)
    found = solved(duct)
    assert MODES[found.mode[0]] == "ramjet-thermal-throat"
    assert found.throat_kind[0] == SMOOTH
    x, theta = found.x_throat[0], 3.0
    burnt_slope = theta / (1.0 + (theta - 1.0) * x) ** 2
    burnt = theta * x / (1.0 + (theta - 1.0) * x)
    heat = 1.9e6 * burnt_slope / (duct.total_enthalpy[0] + 1.9e6 * burnt)
    area = (1.4 / 1.2) / (1.0 + 1.4 / 1.2 * x)
    assert 2.4 * heat == pytest.approx(2.0 * area, rel=1e-8)


def test_a_throat_may_stand_at_a_corner_or_at_the_exit():
    corner = solved(heated(1.1e6, x=(0.0, 0.5, 1.2), ratio=(1.0, 1.0, 2.6), length=0.6), asked="thermal-throat")
    assert (corner.throat_kind[0], corner.x_throat[0]) == (CORNER, 0.5)
    exit_ = solved(heated(1.1e6, x=(0.0, 1.2), ratio=(1.0, 1.02), length=None), asked="thermal-throat")
    assert (exit_.throat_kind[0], exit_.x_throat[0]) == (EXIT, 1.2)
    for found in (corner, exit_):
        assert found.needed[0] > 0.0


@pytest.mark.parametrize(("model", "near"), [("constant-gamma", 1e-12), ("frozen", 3e-8)])
def test_a_throat_at_the_exit_leaves_the_stream_at_mach_one(model, near):
    """The state there is a double root: it must not show the root of rounding, nor depend on the batch. Frozen: the throat's own error."""
    duct, limit = random_ducts(600, model, seed=5)
    found = solve_block(duct, limit, "thermal-throat")
    at_exit = np.flatnonzero((found.mode == THROAT) & (found.throat_kind == EXIT))
    assert len(at_exit) >= 2
    assert found.velocity[at_exit] == pytest.approx(found.state.sound_speed[at_exit], rel=near)
    alone = solve_block(duct.take(at_exit), limit[at_exit], "thermal-throat")
    assert alone.velocity == pytest.approx(found.velocity[at_exit], rel=1e-12)


def test_the_critical_rayleigh_duct_needs_what_the_closed_line_says():
    """Constant area, throat at the exit: the impulse needed at the entry is F* of the Rayleigh line. 1e-9: exact balance."""
    duct = heated(8e5, x=(0.0, 1.0), ratio=(1.0, 1.0))
    found = solved(duct, asked="thermal-throat")
    ht = duct.total_enthalpy[0] + 8e5
    sonic_speed = np.sqrt(2.0 * 0.4 / 2.4 * ht)
    assert found.needed[0] == pytest.approx(duct.mass_flow[0] * sonic_speed * (1.0 + 1.0 / 1.4), rel=1e-9)


def test_forced_modes():
    duct = heated(np.array([1e5, 1.15e6, 1.9e6]))
    supersonic = solved(duct, asked="supersonic")
    assert supersonic.mode[0] == SCRAMJET
    assert STATUSES[supersonic.status[2]] == "choked"
    throat = solved(duct, asked="thermal-throat")
    assert STATUSES[throat.status[0]] == "mode-refused"
    assert throat.mode[2] == THROAT
    beyond = solved(duct, limit=1.0001)
    assert TRIED[beyond.attached[1]] == "separates"
    assert beyond.mode[1] == TRAIN


def test_a_train_that_would_also_stand_is_reported():
    duct = heated(np.array([1.15e6]))
    found = solved(duct, limit=1e3, second=True)
    assert found.mode[0] == SCRAMJET
    assert TRIED[found.train[0]] == "stands"


def test_the_core_just_fills_the_duct():
    """Nowhere along the separated zone is the core larger than the duct, and somewhere it is as large; the lower root."""
    duct, _ = random_ducts(60, "constant-gamma", seed=8)
    with np.errstate(all="ignore"):
        scan = scan_of(duct, 30)
        train = find_train(duct, scan)
    w = np.flatnonzero(train.found)
    assert w.size > 20
    cut, fine = duct.take(w), scan.take(w)
    from cycle.flow.duct.core import core_at

    with np.errstate(all="ignore"):
        for factor, filled in ((1.0, True), (1.0 - 1e-4, False)):
            lost = np.zeros(fine.segment.shape)
            for _ in range(6):
                core = core_at(cut, fine.mixture, factor * train.pressure[w], lost, None)
                lost = fine.grid.running(core.friction) if cut.friction.any() else lost
            top = core.ln_share.max(0)
            # 1e-4: the largest of 180 points, not the maximum itself
            assert (np.abs(top) < 1e-4).all() if filled else (top > 0.0).all()


@pytest.mark.parametrize("model", ["constant-gamma", "frozen", "equilibrium"])
def test_forces_are_the_difference_of_stream_thrust(model):
    """The integral of wall pressure and friction, from the states, against the change of p A + m u."""
    duct, limit = random_ducts(60, model, seed=9)
    found = solve_block(duct, limit)
    w = np.flatnonzero(found.mode != NONE)
    assert set(found.mode[w]) >= {SCRAMJET, TRAIN}
    last = np.full((1, duct.size), duct.edges.shape[0] - 2)
    mass = duct.mixture(last, duct.end[None])
    thrust = found.state.pressure * mass.area[0] + mass.mass_flow[0] * found.velocity
    force = found.wall_force - found.friction + duct.brought[-1]
    assert ((thrust - duct.impulse - force) / duct.impulse)[w] == pytest.approx(np.zeros(w.size), abs=1e-9)


@pytest.mark.parametrize(("model", "fuel"), [("constant-gamma", "hydrogen"), ("frozen", "methane"), ("equilibrium", "jp-10")])
def test_no_answer_depends_on_the_batch(model, fuel):
    duct, limit = random_ducts(45, model, fuel, seed=10)
    whole = solve_block(duct, limit)
    some = np.arange(3, 45, 7)
    part = solve_block(duct.take(some), limit[some])
    assert (part.mode == whole.mode[some]).all()
    assert (part.status == whole.status[some]).all()
    for name in ("velocity", "pressure_3", "x_fill", "x_throat", "needed", "peak"):
        assert getattr(part, name) == pytest.approx(getattr(whole, name)[some], rel=1e-9, nan_ok=True)


@pytest.mark.parametrize("model", ["constant-gamma", "frozen", "equilibrium"])
def test_a_hopeless_neighbour_changes_nothing(model):
    """A point without numbers, one without fuel and one with far too much beside good ones."""
    duct, limit = random_ducts(12, model, seed=12)
    ratio = duct.ratio.copy()
    ratio[[2, 5, 8]] = np.nan, 0.0, 0.4
    odd = replace(duct, ratio=ratio, brought=duct.brought * ratio / duct.ratio)
    found, alone = solve_block(odd, limit), solve_block(duct, limit)
    assert STATUSES[found.status[2]] == "not-converged"
    assert found.mode[5] == SCRAMJET
    assert found.mode[8] == NONE
    rest = np.setdiff1d(np.arange(12), [2, 5, 8])
    assert (found.mode[rest] == alone.mode[rest]).all()
    assert found.velocity[rest] == pytest.approx(alone.velocity[rest], rel=1e-9, nan_ok=True)


@pytest.mark.parametrize(("model", "fuel"), [("frozen", "methane"), ("equilibrium", "hydrogen")])
def test_every_point_ends_in_a_mode_or_a_reason_and_refining_keeps_it(model, fuel):
    duct, limit = random_ducts(60, model, fuel, seed=11)
    found, fine = solve_block(duct, limit), solve_block(duct, limit, panels=24)
    assert not np.isin(found.status, [STATUSES.index("not-converged")]).any()
    assert (found.mode == fine.mode).all()
    # the bar of the default grid
    assert np.nanmax(np.abs(found.velocity / fine.velocity - 1.0)) < 2e-5
    unsolved = found.mode == NONE
    assert np.isnan(found.velocity[unsolved]).all()
    assert np.isnan(found.pressure_3[unsolved]).all()


def test_two_critical_sections_without_a_continuous_flow_have_no_mode():
    """Fuel staged so far apart that the stream behind a shock train chokes again: no mode is consistent, and it says so."""
    duct, limit = random_ducts(300, "frozen", "methane", seed=77)
    found = solve_block(duct, limit)
    without = (found.mode == NONE) & (found.status == STATUSES.index("no-mode"))
    assert without.any()
    assert "chokes" in {TRIED[t] for t in found.train[without]} <= {"chokes", "no such pressure"}
    assert {TRIED[t] for t in found.throat[without]} <= {"chokes", "no core meets it"}


@pytest.mark.parametrize("model", ["constant-gamma", "frozen", "equilibrium"])
def test_what_is_found_does_not_move_with_the_density_of_the_scan(model, monkeypatch):
    """Modes and exits with three times the panels in which critical sections and cores are looked for. 1e-6: the core's friction."""
    duct, limit = random_ducts(400 if model != "equilibrium" else 100, model, seed=21)
    found = solve_block(duct, limit)
    monkeypatch.setattr(modes, "SCANNED", 3 * modes.SCANNED)
    dense = solve_block(duct, limit)
    assert (found.mode == dense.mode).all()
    assert (found.status == dense.status).all()
    assert dense.velocity == pytest.approx(found.velocity, rel=1e-6, nan_ok=True)
    assert dense.x_throat == pytest.approx(found.x_throat, abs=1e-6, nan_ok=True)


def test_a_branch_that_chokes_upstream_of_the_reattachment_is_no_matter():
    """Ahead of the place where the core fills the duct the flow is separated: what an attached one would do there is nothing to it.
    The exit's impulse has no jump and no gap over the heat."""
    heat = np.linspace(1.0e6, 2.0e6, 200)
    duct = perfect_duct(
        2.0, [0.0, 0.15, 0.5, 0.8, 1.2], [1.0, 1.0, 1.8, 2.2, 3.3], heat=heat, theta=3.0, length=0.7, place=0.35, n=heat.size
    )
    found = solve_block(duct, np.full(heat.size, 1.0 + 0.3 * 2.0**2))
    through = found.mode == THROAT
    assert through.sum() > 40
    assert (found.mode != NONE).all()
    with np.errstate(all="ignore"):
        scan = scan_of(duct)
        at = throat(duct, scan, candidates(duct, scan), 0)
        up = march(duct, at.x, np.zeros(heat.size), at.free, -np.ones(heat.size), scan, 12, graded=True)
    assert (up.chokes & through).sum() > 20
    exit_ = found.state.pressure * duct.area_at(np.full((1, heat.size), len(duct.edges) - 2), duct.end[None])[0]
    exit_ = exit_ + duct.mass_flow * found.velocity
    assert (np.abs(np.diff(exit_, 2)) < 1e-3 * exit_[1:-1]).all()


@settings(max_examples=25, deadline=None)
@given(heat=st.floats(1e5, 2.6e6), mach=st.floats(2.0, 4.0), opening=st.floats(1.5, 3.0), scale=st.floats(0.1, 10.0))
def test_scale_does_not_matter(heat, mach, opening, scale):
    """Length, area and pressure scaled: the same mode, Mach number and place over length (frictionless, constant gamma)."""
    one = perfect_duct(mach, [0.0, 1.2], [1.0, opening], heat=heat, length=1.0)
    other = perfect_duct(mach, [0.0, 1.2 * scale], [1.0, opening], heat=heat, length=scale)
    a, b = (solved(d, 1.0 + 0.3 * mach**2) for d in (one, other))
    assert a.mode[0] == b.mode[0]
    assert a.velocity == pytest.approx(b.velocity, rel=1e-7, nan_ok=True)
    assert a.x_fill * scale == pytest.approx(b.x_fill, rel=1e-5, nan_ok=True)


def test_a_cold_wall_takes_heat_and_a_hot_one_gives_it():
    duct = heated(np.full(3, 9e5), friction=0.002)
    cooled = solved(replace(duct, wall_temperature=np.array([400.0, 1500.0, 3000.0])))
    assert (cooled.mode == SCRAMJET).all()
    lost = cooled.lost_heat[-1]
    assert lost[0] > lost[1] > lost[2]
    assert lost[2] < 0.0
    # m ht at the exit is what arrived, plus the heat, less what the wall took
    ht = cooled.state.enthalpy + 0.5 * cooled.velocity**2
    assert duct.mass_flow * (ht - duct.total_enthalpy - 9e5) == pytest.approx(-lost, rel=1e-7)
    warm = solved(replace(heated(9e5, friction=0.002), wall_temperature=np.array([1500.0])))
    assert warm.velocity[0] == pytest.approx(cooled.velocity[1], rel=1e-9)


def test_a_stated_share_of_the_heat_is_lost():
    duct = heated(1e6)
    lost = solved(replace(duct, lost_heat=np.array([1e5])))
    less = solved(heated(9e5))
    assert lost.velocity == pytest.approx(less.velocity, rel=1e-12)
