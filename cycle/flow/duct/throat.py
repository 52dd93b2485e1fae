"""The thermal throat: where along the duct the flow is critical, found without marching.

The attached flow is critical where F(u) stands at its minimum F* and the balance holds there too:
d(F* - B)/dx = p* A' - m u* k. The left side less the right falls through zero from + to - inside a smooth segment (a
saddle of the march: Shapiro (1953), ch. 8), or jumps across it where the area, the burning or the fuel has a break.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.flow.duct.layout import Duct, Mixture
from cycle.flow.duct.line import Sonic, sonic
from cycle.flow.duct.panels import chebyshev
from cycle.flow.duct.scan import Scan
from cycle.flow.duct.summits import SMOOTH, Summits, summits, window

CANDIDATES = 4
_POINTS = 7
_WIDE, _WIDTH = 0.06, 0.02
"""Width of the windows in which a throat is looked for and refined, over the duct's length."""

_TURNS = 5


@dataclass(frozen=True, eq=False)
class Throat:
    """A candidate for the critical section of N points: x m, segment downstream of it, kind (see `summits`), there;
    sonic state: velocity m/s, pressure Pa, free: F* - B, N; area m2; mass_flow kg/s; each (N,)."""

    x: Array
    segment: Codes
    kind: Codes
    there: Flags
    velocity: Array
    pressure: Array
    free: Array
    area: Array
    mass_flow: Array


def excess(mixture: Mixture, slope: Array, at: Sonic) -> Array:
    """d(F* - B)/dx - (p* A' - m u* k), N/m, from the slope of F* - B; positive: the stream nears Mach 1."""
    return slope - at.pressure * mixture.slope + mixture.mass_flow * at.velocity * mixture.drag


def candidates(duct: Duct, scan: Scan) -> Summits:
    """Places where the flow may be critical, the most demanding first.

    The curve is F* - B less what walls add along the sonic line; its highest summit asks the most impulse of the entry.
    """
    grid, at = scan.grid, scan.sonic
    free = at.impulse - scan.mixture.brought
    slope = excess(scan.mixture, grid.derivative(free), at)
    demand = free - grid.running(at.pressure * scan.mixture.slope - scan.mixture.mass_flow * at.velocity * scan.mixture.drag)
    return summits(grid, demand, slope, duct.impulse, CANDIDATES)


def throat(duct: Duct, scan: Scan, found: Summits, rank: int) -> Throat:
    """The candidate of a rank, refined: sonic states on a small window about it, the root of their polynomial's excess. A smooth one
    about which the excess does not fall through zero is none."""
    segment, kind = found.segment[rank], found.kind[rank]
    x, smooth = found.x[rank], found.kind[rank] == SMOOTH
    rule = chebyshev(_POINTS)
    width = np.where(smooth, _WIDE, _WIDTH) * duct.end
    for _ in range(_TURNS):
        places, size = window(duct.edges, segment, x, width, rule.nodes)
        segments = np.broadcast_to(segment, places.shape)
        mixture = duct.mixture(segments, places)
        guess = scan.sonic_at(segments, places)[1]
        at = sonic(mixture, scan.near(segments, places), guess)
        slope = np.tensordot(rule.derivative, at.impulse - mixture.brought, axes=1) / size
        root = rule.fall(excess(mixture, slope, at))
        outside = smooth & ((root <= 0.0) | (root >= 1.0))
        x = np.where(smooth, places[0] + root * size, x)
        again = outside | smooth & (width > _WIDTH * duct.end)
        if not again.any():
            break
        width = np.where(outside, width, _WIDTH * duct.end)
    part = np.clip((x - places[0]) / size, 0.0, 1.0)
    impulse, u = rule.at(at.impulse, part), rule.at(at.velocity, part)
    here = duct.mixture(segment[None], x[None])
    area, flow = here.area[0], here.mass_flow[0]
    there = found.there[rank] & at.good.all(0) & ~outside
    return Throat(x, segment, kind, there, u, (impulse - flow * u) / area, impulse - here.brought[0], area, flow)
