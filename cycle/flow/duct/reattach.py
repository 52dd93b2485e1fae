"""Where the separated core of a thermally choked duct meets the attached subsonic flow upstream of the throat.

There the wall pressure is p3 and the core's momentum is that of the attached flow: m u = F2 - p3 A2 + B - core friction.
"""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.flow.duct.core import FRICTION_TURNS, core_friction, friction_turn, unlost
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
_BORDER = 1e-8
"""Momentum, over the impulse, that the critical flow's may fall short of the core's by rounding."""
_TOO_MUCH = 1e-6
"""The same beyond the core's, above which the place lies upstream of the throat."""


@dataclass(frozen=True, eq=False)
class Fill:
    """Each (N,): x m, its segment, p3 Pa, velocity m/s and Mach number squared of the attached flow there, friction of the
    core so far N, and whether the place was found."""

    x: Array
    segment: Codes
    pressure: Array
    velocity: Array
    mach_squared: Array
    friction: Array
    found: Flags


def lacking(duct: Duct, momentum: Array, pressure: Array, brought: Array, friction: Array) -> Array:
    """Momentum the attached flow has beyond that of a core at its pressure, N, any shape (..., N); negative: the core is
    the faster."""
    return momentum - (duct.impulse - pressure * duct.entry_area + brought - friction)


def reattachment(duct: Duct, scan: Scan, up: Branch, at: Throat) -> Fill:
    """Follow the subsonic branch `up`, marched upstream from the throat, from the entry: the first place where the core
    has no more momentum than the attached flow. Where there is none, the throat itself, if the core has no more momentum
    than the critical flow there: so close to the border to the shock train the march cannot tell."""
    m, flow = up.mixture, up.flow
    miss = lacking(duct, m.mass_flow * flow.u, flow.pressure, m.brought, np.zeros(duct.size))[::-1]
    columns, x = np.arange(duct.size), up.x[::-1]
    above = (miss[1:] >= 0.0) & (miss[:-1] < 0.0)
    row = np.where(above.any(0), above.argmax(0) + 1, x.shape[0] - 1)
    low, high = x[row - 1, columns], x[row, columns]
    f_low, f_high = miss[row - 1, columns], miss[row, columns]
    rise = np.where(f_high > f_low, f_high - f_low, np.inf)
    part = np.clip(-f_low / rise, 0.0, 1.0)
    guess = np.where(above.any(0), low + (high - low) * part, up.x[0])
    # Friction of the core only brings the place nearer to the entry.
    first = np.where(duct.friction > 0.0, x[0], low)
    found = _bracketed(duct, scan, up, first, high, guess, np.where(above.any(0), rise / (high - low), np.nan))
    if found.found.all():
        return found
    lacks = throat_lacks(duct, scan, at) / duct.impulse
    border = ~found.found & (lacks > -_BORDER) & (lacks < _TOO_MUCH)
    ends = (at.x, at.segment, at.pressure, at.velocity, np.ones_like(x[0]), found.friction, border)
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
    throat, done = up.x[0], np.zeros(x.shape, np.bool_)
    before, flow, lost = None, None, unlost(scan)
    for turn in range(_TURNS):
        segment = (duct.edges[1:-1] < x).sum(0)
        mixture, flow, solved = spot(duct, segment, x, up.free_at(x), np.full(x.shape, -1.0), scan, flow)
        u, p, square = flow.u[0], flow.pressure[0], flow.mach_squared[0]
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
        new = np.where(inside, np.clip(secant, 0.0, throat), 0.5 * (low + high))
        done |= ~wide | ((np.abs(new - x) < _SETTLED * duct.end) & (moved < _STILL * duct.impulse))
        if done.all():
            break
        before, x = np.stack([x, miss]), np.where(done, x, new)
    return Fill(x, segment, p, u, square, friction, done & solved & ((x < throat) | (miss >= 0.0)))
