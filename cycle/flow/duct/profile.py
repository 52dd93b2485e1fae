"""The flow along a duct by rows of x, from the marches that a mode is made of."""

from __future__ import annotations

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.flow.duct.layout import Duct, Mixture
from cycle.flow.duct.line import OnLine
from cycle.flow.duct.march import Branch, spot
from cycle.flow.duct.scan import Scan
from cycle.flow.duct.solution import PROFILE


def profile_of(duct: Duct, scan: Scan, index: Codes, good: Flags, runs: list[tuple[Branch, bool]]) -> dict[str, Array]:
    """Rows of `PROFILE` of the good ones of some points, (R, n): of two at one x the upstream side stands first.

    duct: of the points; scan: of the whole block, where they are `index` (N,); good: (N,). runs: the marches and whether each goes
    downstream. A plane in which fuel enters has a row on either side.
    """
    ahead, along, behind = list[Array](), list[Array](), list[Array]()
    for run, down in runs:
        rows = _columns(run.x, run.mixture, run.flow)[:, :, good]
        along.append(rows if down else rows[:, ::-1])
        (behind if down else ahead).extend(_beside_planes(duct, scan, index, good, run, down))
    return dict(zip(PROFILE, np.concatenate([*ahead, *along, *behind], axis=1), strict=True))


def _columns(x: Array, m: Mixture, flow: OnLine) -> Array:
    """The columns of the profile, (columns, R, N)."""
    temperature = flow.state.temperature.reshape(x.shape)
    return np.array([x, flow.pressure, temperature, flow.u, np.sqrt(flow.mach_squared), m.area, m.area, m.burnt, m.ratio])


def _beside_planes(duct: Duct, scan: Scan, index: Codes, good: Flags, run: Branch, down: bool) -> list[Array]:
    """A row (columns, 1, n) for each plane inside a march in which fuel enters: the side that the march does not have as a row."""
    low, high = np.minimum(run.x[0], run.x[-1]), np.maximum(run.x[0], run.x[-1])
    enters = np.diff(duct.injected, axis=0) > 0.0
    found = []
    for k in np.flatnonzero(enters.any(1)):
        x = duct.edges[k + 1]
        w = np.flatnonzero(good & enters[k] & (x > low) & (x < high))
        if not w.size:
            continue
        segment = np.full(w.size, k + 1 if down else k)
        side = np.full(w.size, 1.0 if down else -1.0)
        mixture, flow, known = spot(duct.take(w), segment, x[w], run.take(w).free_at(x[w]), side, scan.take(index[w]))
        rows = np.full((len(PROFILE), 1, good.size), np.nan)
        rows[:, :, w] = np.where(known, _columns(x[None, w], mixture, flow), np.nan)
        found.append(rows[:, :, good])
    return found
