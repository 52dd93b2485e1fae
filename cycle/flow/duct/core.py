"""The separated core: behind a shock train the stream fills only a part of the duct, at the uniform pressure p3.

The zone beside it carries p3 and no momentum, so p3 acts on the whole section and on the walls: F = p3 A + m u. The core
keeps m u but for friction and the fuel's impulse: d(m u - B) = -Cf (rho u^2/2) P dx. It ends where it fills the duct.
Heiser and Pratt (1994), ch. 6, for the core at constant pressure (from memory); the tangential end is this model's.
"""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.flow.duct.layout import Duct, Mixture, flat
from cycle.flow.duct.panels import chebyshev
from cycle.flow.duct.scan import Scan
from cycle.flow.duct.summits import SMOOTH, summits, window
from cycle.gas.state import State

_TURNS = 40
_POINTS = 7
_WIDTH = 0.02
_SETTLED = 1e-11


@dataclass(frozen=True, eq=False)
class Core:
    """The core at the rows (n, N) of a mixture: velocity m/s, its share of the duct's area as ln, the derivative of that
    by ln p3 at unchanged friction, wall friction a length N/m, Mach number squared; state flattened."""

    velocity: Array
    ln_share: Array
    by_pressure: Array
    friction: Array
    mach_squared: Array
    state: State


def core_at(duct: Duct, mixture: Mixture, pressure: Array, lost: Array, start: State | None) -> Core:
    """The core at p3 (N,) Pa; lost: impulse taken by friction up to each row, N (n, N)."""
    shape, m = mixture.area.shape, mixture.mass_flow
    u = np.maximum(duct.impulse - pressure * duct.entry_area + mixture.brought - lost, 1e-3 * m) / m
    h = (mixture.total_enthalpy - 0.5 * u**2).ravel()
    state = mixture.gas.at("hp", h, np.broadcast_to(pressure, shape).ravel(), start=start)
    rho = state.density.reshape(shape)
    share = np.log(m / (rho * u * mixture.area))
    v_T, v_p = state.volume_by_temperature, state.volume_by_pressure
    heat = state.specific_heat * state.temperature
    by_h = (v_T / heat).reshape(shape)
    by_p = (v_p - v_T * (1.0 - v_T) * state.pressure / (state.density * heat)).reshape(shape)
    slowing = pressure * duct.entry_area / m
    by_pressure = by_p + by_h * u * slowing + slowing / u
    friction = mixture.drag * mixture.area * rho * u**2
    return Core(u, share, by_pressure, friction, (u / state.sound_speed.reshape(shape)) ** 2, state)


def behind_handover(duct: Duct, pressure: Array) -> Array:
    """Total enthalpy behind burner entry, J/kg (N,), where the constant-gamma pair changes at the temperature of a core of p3 `pressure`
    Pa (N,); NaN: of the subsonic stream of the same impulse (normal shock, Shapiro (1953), ch. 5)."""
    assert duct.entry_heat is not None and duct.heat_capacity is not None
    own, after = duct.entry_heat, duct.heat_capacity
    total = duct.total_enthalpy + (own - after) / after * (duct.total_enthalpy - 0.5 * duct.velocity**2)
    # F/m = u + R T/u with cp T = ht - u^2/2: a quadratic whose two roots are the streams on both sides of the shock
    R = duct.pressure * duct.entry_area * duct.velocity / duct.mass_flow * own / (total - 0.5 * duct.velocity**2)
    subsonic = R / own * total / (1.0 - 0.5 * R / own) / duct.velocity
    u = duct.velocity - (pressure - duct.pressure) * duct.entry_area / duct.mass_flow
    u = np.where(np.isnan(pressure), subsonic, u)
    return after / own * (total - 0.5 * u**2) + 0.5 * u**2


@dataclass(frozen=True, eq=False)
class Train:
    """Where a core fills the duct, each (N,): pressure p3 Pa, x m, segment downstream, corner: not tangential; friction of
    the core, N; free: F - B there, N; mach: of the core there; found: there is such a pressure."""

    pressure: Array
    x: Array
    segment: Codes
    friction: Array
    free: Array
    mach: Array
    found: Flags


class _Search:
    """Root in ln p3 of the largest ln(core area / area), which falls and then rises with p3 and is convex: Newton from the
    left, kept between a pressure that is too low and one beyond the smaller root. There is none where the tangents at
    both cross above zero."""

    def __init__(self, duct: Duct) -> None:
        nothing = np.full(duct.size, np.nan)
        self.low = np.stack([np.log(duct.pressure), nothing, nothing])
        self.high = np.stack([np.log(duct.impulse / duct.entry_area), nothing, nothing])
        self.at = self.low[0].copy()
        self.done = np.zeros(duct.size, np.bool_)
        self.none = np.zeros(duct.size, np.bool_)

    def step(self, points: Codes, miss: Array, slope: Array) -> None:
        """One step of the points from the value and slope at `at`; finished ones stay."""
        at, done = self.at[points], self.done[points]
        short = (miss > 0.0) & (slope < 0.0)
        here = np.stack([at, miss, slope])
        tops = np.where(short, here, self.low[:, points]), np.where(short, self.high[:, points], here)
        none = ~done & (_bound(*tops) > 1e-10)
        low, high = tops[0][0], tops[1][0]
        aimed = at - miss / slope
        new = np.where((slope < 0.0) & (aimed > low) & (aimed < high), aimed, 0.5 * (low + high))
        settled = (np.abs(miss) < _SETTLED) | (high - low < _SETTLED) | none
        self.at[points] = np.where(done | settled, at, new)
        self.low[:, points], self.high[:, points] = tops
        self.none[points] |= none
        self.done[points] = done | settled


def _bound(low: Array, high: Array) -> Array:
    """A value a convex curve nowhere falls below, from its places, values and slopes (3, N) at two places; NaN where the
    second slope is not known or falls."""
    (a, f, s), (b, g, t) = low, high
    with np.errstate(invalid="ignore", divide="ignore"):
        cross = (g - f + s * a - t * b) / (s - t)
        return np.where(t >= 0.0, f + s * (cross - a), np.nan)


def find_train(duct: Duct, scan: Scan) -> Train:
    """The smallest pressure above p2 at which the core just fills the duct, max over x of core area/A = 1."""
    n, rows = duct.size, scan.segment.shape[0]
    search, lost = _Search(duct), np.zeros((rows, n))
    x, segment, smooth = np.zeros(n), np.zeros(n, np.int64), np.zeros(n, np.bool_)
    live, part, cut, state = np.arange(n), duct, scan, scan.sonic.state
    for _ in range(_TURNS):
        grid = cut.grid
        core = core_at(part, cut.mixture, np.exp(search.at[live]), lost[:, live], state)
        state = core.state
        if part.friction.any():
            lost[:, live] = grid.running(core.friction)
        top = summits(grid, core.ln_share, grid.derivative(core.ln_share), np.ones(live.size), 1)
        x[live], segment[live], smooth[live] = top.x[0], top.segment[0], top.kind[0] == SMOOTH
        at = grid.locate(top.segment, top.x)
        search.step(live, grid.interpolated(core.ln_share, *at)[0], grid.interpolated(core.by_pressure, *at)[0])
        left = np.flatnonzero(~search.done[live])
        if not left.size:
            break
        if left.size < 0.7 * live.size:
            state = state.take(flat(rows, live.size, left))
            live, part, cut = live[left], part.take(left), cut.take(left)
    some = np.flatnonzero(~search.none)
    if not some.size:
        return _nowhere(n)
    part, cut = (duct, scan) if some.size == n else (duct.take(some), scan.take(some))
    found = _confirmed(part, cut, search.at[some], x[some], segment[some], smooth[some], lost[:, some])
    return found if some.size == n else _spread(found, some, n)


_OVER = 1e-7
"""Core area over the duct's, less 1, at which a core is too large."""

_PLACES, _AGAIN = 3, 3


def _confirmed(duct: Duct, scan: Scan, ln_p: Array, x: Array, segment: Codes, smooth: Flags, lost: Array) -> Train:
    """Polish, then look at the whole core: where it is larger than the duct elsewhere, that is the place where it fills it."""
    found = _polished(duct, scan, ln_p, x, segment, smooth, lost)
    for _ in range(_AGAIN):
        # near Mach 1 the core's friction settles slowly
        w = np.flatnonzero(~found.found & np.isfinite(found.pressure))
        if not w.size:
            break
        last = np.log(found.pressure[w]), found.x[w], found.segment[w], smooth[w], lost[:, w]
        _replace(found, w, _polished(duct.take(w), scan.take(w), *last))
    for _ in range(_PLACES):
        w = np.flatnonzero(found.found)
        if not w.size:
            break
        part, cut = duct.take(w), scan.take(w)
        core = core_at(part, cut.mixture, found.pressure[w], core_friction(part, cut, found.pressure[w]).rows, None)
        top = summits(cut.grid, core.ln_share, cut.grid.derivative(core.ln_share), np.ones(w.size), 1)
        over = (core.ln_share.max(0) > _OVER) & (np.abs(top.x[0] - found.x[w]) > _WIDTH * part.end)
        if not over.any():
            break
        v, tops = w[over], (top.x[0][over], top.segment[0][over], top.kind[0][over] == SMOOTH)
        _replace(found, v, _polished(duct.take(v), scan.take(v), np.log(found.pressure[v]), *tops, lost[:, v]))
    return found


def _replace(whole: Train, index: Codes, part: Train) -> None:
    for f in fields(Train):
        getattr(whole, f.name)[index] = getattr(part, f.name)


def _nowhere(n: int) -> Train:
    p, x, friction, free, mach = np.full((5, n), np.nan)
    return Train(p, x, np.zeros(n, np.int64), friction, free, mach, np.zeros(n, np.bool_))


def _spread(found: Train, index: Codes, n: int) -> Train:
    """The trains of the points `index` among n points; the others have none."""
    whole = _nowhere(n)
    _replace(whole, index, found)
    return whole


def _polished(duct: Duct, scan: Scan, ln_p: Array, x: Array, segment: Codes, smooth: Flags, lost: Array) -> Train:
    """Place and pressure by a few points about the place, where the grid's polynomials are not good enough."""
    rule = chebyshev(_POINTS)
    grid, state, rows = scan.grid, None, scan.sonic.state
    width = _WIDTH * duct.end
    done = np.zeros(duct.size, np.bool_)
    for _ in range(8):
        places, size = window(duct.edges, segment, x, width, rule.nodes)
        segments = np.broadcast_to(segment, places.shape)
        mixture = duct.mixture(segments, places)
        if duct.friction.any():
            whole = core_at(duct, scan.mixture, np.exp(ln_p), lost, rows)
            lost, rows = grid.running(whole.friction), whole.state
        taken = grid.interpolated(lost, *grid.locate(segments, places))
        if state is None:
            state = scan.near(segments, places)
        core = core_at(duct, mixture, np.exp(ln_p), taken, state)
        state = core.state
        slope = np.tensordot(rule.derivative, core.ln_share, axes=1)
        new = np.where(smooth, places[0] + rule.fall(slope) * size, x)
        part = np.clip((new - places[0]) / size, 0.0, 1.0)
        miss, by = rule.at(core.ln_share, part), rule.at(core.by_pressure, part)
        step = np.where(done, 0.0, np.clip(-miss / by, -0.05, 0.05))
        moved = np.abs(new - x) / duct.end
        x = np.where(done, x, new)
        done |= (np.abs(step) < 1e-12) & (moved < 1e-9)
        if done.all():
            break
        ln_p = ln_p + step
    p = np.exp(ln_p)
    here = duct.mixture(segment[None], x[None])
    friction = rule.at(taken, part)
    free = duct.impulse + p * (here.area[0] - duct.entry_area) - friction
    mach = np.sqrt(rule.at(core.mach_squared, part))
    found = (np.abs(miss) < 1e-8) & (ln_p > np.log(duct.pressure)) & core.state.good.reshape(places.shape).all(0)
    return Train(p, x, segment, friction, free, mach, found)


@dataclass(frozen=True, eq=False)
class Lost:
    """Impulse that friction has taken from a core up to each row of a scan, N (P n, N), and the core's states there."""

    rows: Array
    state: State

    def take(self, index: Codes) -> Lost:
        """Of the chosen points."""
        return Lost(self.rows[:, index], self.state.take(flat(len(self.rows), self.rows.shape[1], index)))

    def at(self, scan: Scan, segment: Codes, x: Array) -> Array:
        """N, at x (N,) m in a segment."""
        total: Array = scan.grid.interpolated(self.rows, *scan.grid.locate(segment[None], x[None]))[0]
        return total


def unlost(scan: Scan) -> Lost:
    """A core without friction."""
    return Lost(np.zeros(scan.segment.shape), scan.sonic.state)


def core_friction(duct: Duct, scan: Scan, pressure: Array, settled: float = 1e-12) -> Lost:
    """What friction takes from a core at p3 (N,) Pa along the whole duct; settled: change over the impulse of station 2 at which it
    stands still."""
    lost = unlost(scan)
    if not duct.friction.any():
        return lost
    for _ in range(FRICTION_TURNS):
        lost, change = friction_turn(duct, scan, pressure, lost)
        if (change < settled * duct.impulse).all():
            break
    return lost


def friction_turn(duct: Duct, scan: Scan, pressure: Array, near: Lost) -> tuple[Lost, Array]:
    """One round of the core's friction at p3 (N,) Pa, which gains about two digits, and the most that it moved, N (N,)."""
    if not duct.friction.any():
        return near, np.zeros(pressure.shape)
    core = core_at(duct, scan.mixture, pressure, near.rows, near.state)
    lost = Lost(scan.grid.running(core.friction), core.state)
    return lost, np.abs(lost.rows - near.rows).max(0)


FRICTION_TURNS = 12
"""Rounds in which the core's friction settles."""
