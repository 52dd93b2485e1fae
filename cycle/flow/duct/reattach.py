"""Where the separated core of a thermally choked duct meets the attached subsonic flow upstream of the throat.

There the wall pressure is p3 and the core's momentum is that of the attached flow: m u = F2 - p3 A2 + B - core friction. What the
attached flow has beyond the core at its own pressure is `lacking`. Along the subsonic branch d(lacking)/dx = -(A - A2) dp/dx but for
friction, so it is least where the pressure is highest. Behind that place it may rise through zero: there the core fills the duct, and
the flow upstream of it does not matter. Where it is nowhere negative the critical flow asks for more impulse than arrives.
"""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.flow.duct.core import FRICTION_TURNS, core_at, core_friction, friction_turn, unlost
from cycle.flow.duct.layout import Duct
from cycle.flow.duct.march import Branch, spot
from cycle.flow.duct.scan import Scan
from cycle.flow.duct.throat import Throat

_TURNS = 48
_SETTLED = 1e-11
_STILL = 1e-12
"""Momentum that the core's friction moves in a round, over the impulse, at which it stands still."""
_SURE = 0.1
"""The same, over the momentum lacking, at which a place is judged."""
_SPARE = 1e-6
"""Room beside the bracket, over its length: the friction still moved while its ends were judged."""
_SECANTS = 10
"""Turns after which the bracket is halved: it closes on a place where the momentum jumps."""
_NEAR = 1e-8
"""Momentum lacking, over the impulse, below which there is no jump and the secant has the last turns."""
_ROOM, _OVER = 1e-6, 1e-6
"""Place ahead of the filling, over the duct's length, from which a core is looked at, and its area over the duct's, less 1, at which it is
too large."""
_PLANE = 1e-9
"""Distance from a plane in which fuel enters, over the duct's length, that is none."""
_BORDER = 1e-6
"""Momentum, over the impulse, that the critical flow's may fall short of the core's by rounding."""
_TOO_MUCH = 1e-6
"""The same beyond the core's, above which the place lies upstream of the throat."""


@dataclass(frozen=True, eq=False)
class Fill:
    """Each (N,): x m, p3 Pa, friction of the core so far N, whether the place was found, and whether the core is larger than the duct
    somewhere ahead of it."""

    x: Array
    pressure: Array
    friction: Array
    found: Flags
    over: Flags


def lacking(duct: Duct, momentum: Array, pressure: Array, brought: Array, friction: Array) -> Array:
    """Momentum the attached flow has beyond that of a core at its pressure, N, any shape (..., N); negative: the core is
    the faster."""
    return momentum - (duct.impulse - pressure * duct.entry_area + brought - friction)


@dataclass(frozen=True, eq=False)
class Miss:
    """Momentum lacking along a subsonic branch, from its upstream end to the throat: x m and bare N, (R, N), without the core's friction,
    which only adds to it; inf where there is no flow. reached: the upstream end, m; low: place of the least one with friction, m, least:
    its value, N; ends: it falls still at the upstream end; each (N,)."""

    x: Array
    bare: Array
    reached: Array
    low: Array
    least: Array
    ends: Flags

    def take(self, index: Codes) -> Miss:
        """Of the chosen points."""
        return Miss(*(getattr(self, f.name)[..., index] for f in fields(self)))

    @property
    def rises(self) -> Flags:
        """Rows ahead of which it rises through zero, (R - 1, N)."""
        rises: Flags = (self.bare[1:] >= 0.0) & (self.bare[:-1] < 0.0) & np.isfinite(self.bare[1:])
        return rises


def miss_along(duct: Duct, scan: Scan, up: Branch) -> Miss:
    """What lacks along the branch `up`, marched upstream from the throat; the core's friction is that at the pressure where least lacks."""
    m, flow, columns = up.mixture, up.flow, np.arange(duct.size)
    there, x = up.on_the_way[::-1], up.x[::-1]
    bare = lacking(duct, m.mass_flow * flow.u, flow.pressure, m.brought, np.zeros(duct.size))[::-1]
    miss = np.where(there, bare, np.inf)
    row = miss.argmin(0)
    if duct.friction.any():
        taken = core_friction(duct, scan, flow.pressure[::-1][row, columns], 1e-9).rows
        miss = miss + scan.grid.interpolated(taken, *scan.grid.locate(up.segment, up.x))[::-1]
        row = miss.argmin(0)
    low, least = _lowest(x, miss, row, m.ratio[::-1])
    first = there.argmax(0)
    reached = x[first, columns]
    return Miss(x, np.where(there, bare, np.inf), reached, low, least, (row == first) & (least >= 0.0) & (reached > 0.0))


def _lowest(x: Array, y: Array, row: Codes, ratio: Array) -> tuple[Array, Array]:
    """Place and value of the least y (R, N) by a parabola about its row (N,); the row itself at an end or where the fuel `ratio` jumps."""
    columns, middle = np.arange(row.size), np.clip(row, 1, len(x) - 2)
    (x0, x1, x2), (y0, y1, y2) = (tuple(v[middle + k, columns] for k in (-1, 0, 1)) for v in (x, y))
    left, right = (y1 - y0) / (x1 - x0), (y2 - y1) / (x2 - x1)
    bend = (right - left) / (x2 - x0)
    place = 0.5 * (x0 + x1) - left / (2.0 * bend)
    value = y1 + (place - x1) * (left + bend * (place - x0))
    same = ratio[middle - 1, columns] == ratio[middle + 1, columns]
    inside = same & (middle == row) & (bend > 0.0) & (place > x0) & (place < x2) & (value <= y1)
    return np.where(inside, place, x[row, columns]), np.where(inside, value, y[row, columns])


PLACES = 3
"""Places of reattachment that are looked at, from the entry."""


def reattachment(duct: Duct, scan: Scan, up: Branch, at: Throat, along: Miss) -> Fill:
    """Follow the subsonic branch `up` from its upstream end: the first place where the core has no more momentum than the attached flow,
    having had more, and nowhere ahead of it fills more than the duct."""
    found = _at_rise(duct, scan, up, at, along, along.rises)
    for rank in range(1, PLACES):
        w = np.flatnonzero(~(found.found & ~found.over) & (along.rises.sum(0) > rank))
        if not w.size:
            break
        cut, own = along.take(w), duct.take(w)
        later = cut.rises & (cut.rises.cumsum(0) > rank)
        part = _at_rise(own, scan.take(w), up.take(w), Throat(*(getattr(at, f.name)[w] for f in fields(Throat))), cut, later)
        for f in fields(Fill):
            getattr(found, f.name)[w] = getattr(part, f.name)
    return found


def _at_rise(duct: Duct, scan: Scan, up: Branch, at: Throat, along: Miss, rises: Flags) -> Fill:
    """The first of these places. Where there is none, the throat itself, if the core has no more momentum than the critical flow there:
    so close to the border to the shock train the march cannot tell."""
    columns, x = np.arange(duct.size), along.x
    row = np.where(rises.any(0), rises.argmax(0) + 1, np.clip((x < along.low).sum(0), 1, len(x) - 1))
    # between two rows the least may dip below zero unseen
    low = np.where(rises.any(0), x[row - 1, columns], along.low)
    f_low = np.where(rises.any(0), along.bare[row - 1, columns], along.least)
    high, f_high = x[row, columns], along.bare[row, columns]
    rise = np.where(f_high > f_low, f_high - f_low, np.inf)
    known = (f_low < 0.0) & (f_high >= 0.0) & np.isfinite(f_high)
    high = np.where(known, high, up.x[0])
    guess = np.where(known, low + (high - low) * np.clip(-f_low / rise, 0.0, 1.0), up.x[0])
    # friction of the core only brings the place nearer to the entry
    first = np.where((duct.friction > 0.0) & (along.low < low), along.low, low)
    found = _bracketed(duct, scan, up, first, high, guess, np.where(known, rise / (high - low), np.nan))
    if found.found.all():
        return found
    lacks = throat_lacks(duct, scan, at) / duct.impulse
    border = ~found.found & (lacks > -_BORDER) & (lacks < _TOO_MUCH)
    ends = (at.x, at.pressure, found.friction, border, np.zeros_like(border))
    return Fill(*(np.where(border, end, getattr(found, f.name)) for f, end in zip(fields(Fill), ends, strict=True)))


def throat_lacks(duct: Duct, scan: Scan, at: Throat, settled: float = 1e-12) -> Array:
    """`lacking` of the critical flow at the throat, N (N,): its sign is the border between shock train and thermal throat.

    settled: see `core_friction`.
    """
    momentum = at.mass_flow * at.velocity
    friction = core_friction(duct, scan, at.pressure, settled).at(scan, at.segment, at.x)
    return lacking(duct, momentum, at.pressure, momentum + at.pressure * at.area - at.free, friction)


def _bracketed(duct: Duct, scan: Scan, up: Branch, low: Array, high: Array, x: Array, slope: Array) -> Fill:
    """Secant in x inside a bracket, on the march's own F - B with the state there solved. The core's friction settles only so
    far that the place can be judged. What lacks may jump where fuel enters: the bracket then closes on that place."""
    done = np.zeros(x.shape, np.bool_)
    before, flow, lost = None, None, unlost(scan)
    for turn in range(_TURNS):
        segment = (duct.edges[1:-1] < x).sum(0)
        mixture, flow, solved = spot(duct, segment, x, up.free_at(x), np.full(x.shape, -1.0), scan, flow)
        u, p = flow.u[0], flow.pressure[0]
        for _ in range(FRICTION_TURNS):
            lost, moved = friction_turn(duct, scan, p, lost)
            friction = lost.at(scan, segment, x)
            miss = lacking(duct, mixture.mass_flow[0] * u, p, mixture.brought[0], friction)
            if (done | (moved < _SURE * np.abs(miss)) | (moved < _STILL * duct.impulse)).all():
                break
        sure = np.abs(miss) > moved
        low, high = np.where(sure & (miss < 0.0), x, low), np.where(sure & (miss >= 0.0), x, high)
        step = miss / slope if before is None else miss * (x - before[0]) / (miss - before[1])
        wide = high - low > _SETTLED * duct.end
        probe = np.where(miss < 0.0, np.minimum(x + 1e-3 * duct.end, high), np.maximum(x - 1e-3 * duct.end, low))
        secant = np.where(np.isfinite(step), x - step, probe)
        spare = _SPARE * (high - low)
        closes = (turn < _SECANTS) | (np.abs(miss) < _NEAR * duct.impulse)
        inside = (secant >= low - spare) & (secant <= high + spare) & closes
        new = np.where(inside, np.clip(secant, 0.0, up.x[0]), 0.5 * (low + high))
        done |= ~wide | ((np.abs(new - x) < _SETTLED * duct.end) & (moved < _STILL * duct.impulse))
        if done.all():
            break
        before, x = np.stack([x, miss]), np.where(done, x, new)
    found = done & solved & ((x < up.x[0]) | (miss >= 0.0))
    near = (np.abs(duct.edges - x) < _PLANE * duct.end)[1:-1] & (np.diff(duct.injected, axis=0) > 0.0)
    off = np.abs(miss) > _NEAR * duct.impulse
    jumps = np.flatnonzero(found & off & near.any(0))
    found &= ~off
    if jumps.size:
        cut, own, part = duct.take(jumps), scan.take(jumps), up.take(jumps)
        p[jumps], friction[jumps], found[jumps] = _at_plane(cut, own, part, near.argmax(0)[jumps])
    core = core_at(duct, scan.mixture, p, lost.rows, lost.state)
    ahead = scan.grid.x < x - _ROOM * duct.end
    largest = np.where(ahead, core.ln_share, -1.0).max(0)
    return Fill(x, p, friction, found, largest > _OVER)


def _at_plane(duct: Duct, scan: Scan, up: Branch, plane: Codes) -> tuple[Array, Array, Flags]:
    """p3 Pa and friction of the core N where it fills the duct in the plane in which fuel enters, and whether it does.

    The attached flow behind the plane has the impulse F - B = F2 + p3 (A - A2) - friction; p3 lies between its pressures on both sides of
    the plane. plane: which inner edge, (N,). Regula falsi, halving in turn.
    """
    x = duct.edges[plane + 1, np.arange(plane.size)]
    free, rise = up.free_at(x), duct.area_at(plane[None], x[None])[0] - duct.entry_area
    slow = np.full(x.shape, -1.0)
    low, high = (spot(duct, plane + side, x, free, slow, scan)[1].pressure[0] for side in (0, 1))

    def over(pressure: Array) -> tuple[Array, Array]:
        taken = core_friction(duct, scan, pressure).at(scan, plane, x)
        return free - duct.impulse - pressure * rise + taken, taken

    (f_low, _), (f_high, friction) = over(low), over(high)
    between: Flags = f_low * f_high <= 0.0
    p = high
    for turn in range(_TURNS):
        p = 0.5 * (low + high) if turn % 2 else low - f_low * (high - low) / (f_high - f_low)
        p = np.where(np.isfinite(p), p, low)
        miss, friction = over(p)
        first = miss * f_low > 0.0
        low, f_low = np.where(first, p, low), np.where(first, miss, f_low)
        high, f_high = np.where(first, high, p), np.where(first, f_high, miss)
        if (~between | (np.abs(high - low) < _SETTLED * p) | (np.abs(miss) < _STILL * duct.impulse)).all():
            break
    return p, friction, between
