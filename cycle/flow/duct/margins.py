"""How far a duct is from each border between its modes, as smooth numbers that pass through zero at the border.

They are taken at the critical section: how much impulse the attached flow has there beyond the least, how much momentum
the separated core, and what the critical flow asks of the entry.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from cycle.arrays import Array
from cycle.flow.duct.layout import Duct
from cycle.flow.duct.march import march, spot
from cycle.flow.duct.modes import PANELS
from cycle.flow.duct.reattach import throat_lacks
from cycle.flow.duct.scan import scan_of
from cycle.flow.duct.summits import SMOOTH
from cycle.flow.duct.throat import candidates, throat


@dataclass(frozen=True, eq=False)
class Margins:
    """Each (N,), over the impulse of station 2 (separation: over the limit); positive is safe, NaN unknown.

    attached: to choking of the attached march, NaN where it chokes; separation: of its highest pressure from the limit; train: to the core
    turning subsonic where it fills the duct; start: to unstart.
    """

    attached: Array
    separation: Array
    train: Array
    start: Array


def margins(duct: Duct, separation: Array, panels: int = PANELS) -> Margins:
    """Margins of N ducts, each with one critical section (the most demanding); separation: pressure ratio over p2 that
    separates, (N,)."""
    with np.errstate(all="ignore"):
        return _margins(duct, separation, max(panels, duct.grades.shape[0] - 1))


def _margins(duct: Duct, separation: Array, count: int) -> Margins:
    n, scan = duct.size, scan_of(duct)
    at = throat(duct, scan, candidates(duct, scan), 0)
    short = throat_lacks(duct, scan, at)
    needed = np.full(n, np.nan)
    for graded in (False, True):
        w = np.flatnonzero(at.there & ((at.kind != SMOOTH) == graded))
        if w.size:
            up = march(duct.take(w), at.x[w], np.zeros(w.size), at.free[w], np.full(w.size, -1.0), scan.take(w), count, graded)
            needed[w] = np.where(up.passes, up.free[-1], np.nan)
    run = march(duct, np.zeros(n), duct.end, duct.impulse, np.ones(n), scan, count, graded=False)
    x, segment = run.place_of_highest_pressure()
    peak = np.maximum(spot(duct, segment, x, run.free_at(x), np.ones(n), scan)[1].pressure[0], run.flow.pressure.max(0))
    room = np.where(at.there, run.free_at(at.x) - at.free, np.nan)
    attached, separation_margin = room / duct.impulse, 1.0 - peak / (separation * duct.pressure)
    attached, peak_margin = np.where(run.passes, attached, np.nan), np.where(run.passes, separation_margin, np.nan)
    return Margins(attached, peak_margin, -short / duct.impulse, 1.0 - needed / duct.impulse)
