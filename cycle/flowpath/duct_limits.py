"""How much heat a duct takes: the fuel ratio at which each of its modes ends, found with the same decision as a solution itself.

Each point has its own limits. From the ratio of the case the nearest end of each mode is looked for: above it where the mode stands
there, below it where it does not. A scan brackets the end, and the bracket closes on what the decision says at both of its ends; a
margin that is known at both and changes sign only tells where to look first.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from cycle.arrays import Array, Codes
from cycle.flow.duct.solution import ATTACHED, CHOKES, LOST, NONE, NOT_TRIED, SOLVED, STATUSES, THROAT, TRAIN, UNSETTLED
from cycle.flowpath.duct import Flow

ENDS: dict[str, int] = {"attached": ATTACHED, "train": TRAIN, "unstart": THROAT}
"""Each limit, and the last mode that stands before it."""
_LASTS = np.array(list(ENDS.values()))

CAUSES = ("", "separation", "choking", "impulse", "isolator-length", *STATUSES)
"""What sets a limit, by code: separation or choking of the attached flow, choking of the stream behind the shock train, impulse or
isolator length at unstart; or the status of the points beyond."""

_SCANNED, _SCANNED_COUPLED = 25, 13
_BUNCHED = 1.5
"""Exponent of the scan's ratios over the even ones: denser at little heat."""
_SETTLED, _SETTLED_COUPLED = 3e-9, 3e-5
"""Width of the last bracket, over the ratio; where the flow and what it is given are found in turn at every ratio."""
_TURNS = 40
_STRAIGHT = 1e-5
"""Width of a bracket over the ratio, below which its margin is straight."""
_AIMED, _SPREAD, _SPREAD_COUPLED = 6, 16, 8
"""Ratios of a turn that are looked at in a bracket whose margin is known at both ends, and in another one."""
_NEAREST = 1e-6
"""How near the nearest probes stand to the zero of a straight line, over the bracket."""

At = Callable[[Codes, Array, Codes], Flow]
"""The ducts of the points (K,) at fuel ratios (K,), with the last mode that is asked for, codes (K,)."""


@dataclass(frozen=True, slots=True)
class End:
    """Largest fuel ratio of N points before a mode ends, (N,): inf where it does not end below the search's end, 0 where the mode stands
    nowhere, NaN where it is not known. cause: codes of `CAUSES`."""

    ratio: Array
    cause: Codes


_MARGINS = ("separation_margin", "unstart_margin", "isolator_margin")
_WHICH = np.array([{"separation": 0, "impulse": 1, "isolator-length": 2, "choking": 3, "no-mode": 3}.get(cause, -1) for cause in CAUSES])
"""By cause, which of them, or `Flow.spare`, tells how far a point is from it; -1: none."""


@dataclass(frozen=True, eq=False)
class _Seen:
    """What ducts say: stands (ends, ...), 1 or 0, NaN where it is not known; cause (ends, ...) of what does not stand, codes of `CAUSES`;
    margins (margins, ...)."""

    stands: Array
    cause: Codes
    margins: Array

    def at(self, row: Codes, point: Codes) -> _Seen:
        """Of chosen ducts: (ends, K)."""
        return _Seen(self.stands[:, row, point], self.cause[:, row, point], self.margins[:, row, point])

    def placed(self, row: Codes, column: Codes, shape: tuple[int, ...]) -> _Seen:
        """These ducts (ends, K) at their places of a table; not known elsewhere."""
        whole = _Seen(
            np.full((len(self.stands), *shape), np.nan),
            np.zeros((len(self.cause), *shape), np.int64),
            np.full((len(self.margins), *shape), np.nan),
        )
        for table, values in ((whole.stands, self.stands), (whole.cause, self.cause), (whole.margins, self.margins)):
            table[:, row, column] = values
        return whole

    def shaped(self, *shape: int) -> _Seen:
        """The ducts in rows."""
        return _Seen(self.stands.reshape(-1, *shape), self.cause.reshape(-1, *shape), self.margins.reshape(-1, *shape))


def _seen(flow: Flow) -> _Seen:
    mode = np.where(flow.status == SOLVED, flow.mode, NONE)
    unknown = (flow.status == LOST) | (flow.tried["attached"] == UNSETTLED)
    stands = np.array([np.where(unknown, np.nan, (mode != NONE) & (mode <= last)) for last in ENDS.values()])
    margins = np.array([*(flow.figures[name] for name in _MARGINS), flow.spare])
    unstarted = np.where(margins[2] < 0.0, CAUSES.index("isolator-length"), CAUSES.index("impulse"))
    ended = np.where(flow.status == STATUSES.index("unstarted"), unstarted, CAUSES.index("solved") + flow.status)
    choking = np.full(mode.shape, CAUSES.index("choking"))
    attached = np.where(np.isin(flow.tried["attached"], [CHOKES, NOT_TRIED]), choking, CAUSES.index("separation"))
    return _Seen(stands, np.array([attached, np.where(mode == NONE, ended, choking), ended]), margins)


def heat_limits(at: At, now: Array, upper: Array, coupled: bool = False) -> dict[str, End]:
    """The end of each mode nearest to the fuel ratio of each point; see `ENDS` and `End`.

    at: the ducts of some points at some ratios; now: the ratio of each point, (N,), NaN unknown; upper: end of the search,
    (N,); coupled: whether what a duct is given depends on its mode, which makes it dear.
    """
    n = now.size
    count = _SCANNED_COUPLED if coupled else _SCANNED
    even = upper * ((np.arange(count) / (count - 1.0)) ** _BUNCHED)[:, None]
    ratio = np.sort(np.vstack([even, np.clip(np.nan_to_num(now), 0.0, upper)]), axis=0)
    rows = len(ratio)
    scan = _seen(at(np.tile(np.arange(n), rows), ratio.ravel(), np.full(ratio.size, THROAT))).shaped(rows, n)
    here = np.minimum((ratio < now).sum(0), rows - 1)
    lows, highs, limits = (np.array(rows) for rows in zip(*(_bracket(stands, here) for stands in scan.stands), strict=True))
    limits[:, np.isnan(now)] = np.nan
    e, point = np.nonzero((lows >= 0) & ~np.isnan(now))
    low, high = lows[e, point], highs[e, point]
    narrow = _SETTLED_COUPLED if coupled else _SETTLED
    search = _Search(
        narrow,
        _SPREAD_COUPLED if coupled else _SPREAD,
        e,
        point,
        ratio[low, point],
        ratio[high, point],
        scan.at(low, point),
        scan.at(high, point),
    )
    search.close(at)
    causes = np.zeros(limits.shape, np.int64)
    limits[e, point], causes[e, point] = search.ends(), search.cause
    return {name: End(limits[i], causes[i]) for i, name in enumerate(ENDS)}


def _bracket(stands: Array, here: Codes) -> tuple[Codes, Codes, Array]:
    """Rows (N,) of the last ratio at which a mode stands and the first at which it does not, nearest to the row `here`, and the limit
    that needs no search: inf, 0, or NaN where there is a search; rows are -1 where there is none. stands: (R, N)."""
    rows, columns = np.arange(len(stands))[:, None], np.arange(here.size)
    known = ~np.isnan(stands)
    before = np.maximum.accumulate(np.where(known, rows, -1), axis=0)
    before = np.vstack([np.full((1, here.size), -1), before[:-1]])
    ends = (stands == 0.0) & (before >= 0) & (stands[before, columns] == 1.0)
    above, below = ends & (before >= here), ends & (before < here)
    now = stands[here, columns]
    up = above.any(0) & ((now == 1.0) | ~below.any(0))
    high = np.where(up, above.argmax(0), len(stands) - 1 - below[::-1].argmax(0))
    searched = (up | (below.any(0) & (now == 0.0))) & ~np.isnan(now)
    limit = np.select([searched | np.isnan(now), now == 1.0], [np.nan, np.inf], 0.0)
    return np.where(searched, before[high, columns], -1), np.where(searched, high, -1), limit


class _Search:
    """Brackets (K,) of ends of modes, closed in on together. narrow: width over the ratio at which one is closed; spread: ratios looked at
    in a turn where no margin is known; end: which mode; point: of which point; low stands, high does not."""

    def __init__(
        self, narrow: float, spread: int, end: Codes, point: Codes, low: Array, high: Array, at_low: _Seen, at_high: _Seen
    ) -> None:
        own, self.narrow, self.spread = np.arange(end.size), narrow, spread
        self.end, self.point, self.low, self.high = end, point, low, high
        self.margins = np.stack([at_low.margins, at_high.margins])
        self.cause = at_high.cause[end, own]

    @property
    def open(self) -> Codes:
        """Which are not narrow yet; a straight line through margins that are known at both ends is as good as a hundredth of the bracket
        or better once that is short."""
        width = (self.high - self.low) / self.high
        return np.flatnonzero(width > np.where(np.isfinite(self._zero()), np.minimum(_STRAIGHT, 1e2 * self.narrow), self.narrow))

    def _zero(self) -> Array:
        """Where a margin that is known at both ends vanishes on a straight line, part of the bracket (K,); NaN where none is known."""
        which = _WHICH[self.cause]
        a, b = self.margins[:, which, np.arange(which.size)]
        known = (which >= 0) & (a > 0.0) & (b < 0.0)
        return np.where(known, a / np.where(known, a - b, 1.0), np.nan)

    def ends(self) -> Array:
        """The ends of the modes, (K,)."""
        return self.low + (self.high - self.low) * np.nan_to_num(self._zero())

    def close(self, at: At) -> None:
        """Narrow all brackets, a batch of ducts a turn; what sets an end of which only the modes before were asked for is asked last."""
        for _ in range(_TURNS):
            w = self.open
            if not w.size:
                break
            tried = self._probes(w)
            self._learn(w, tried, self._look(at, w, tried, _LASTS[self.end[w]]))
        w = np.flatnonzero((self.cause == CAUSES.index("no-mode")) & (_LASTS[self.end] < THROAT))
        if w.size:
            seen, own = self._look(at, w, self.high[w, None], np.full(w.size, THROAT)), np.arange(w.size)
            fails = seen.stands[self.end[w], own, 0] == 0.0
            self.cause[w[fails]] = seen.cause[self.end[w], own, 0][fails]

    def _look(self, at: At, w: Codes, tried: Array, most: Codes) -> _Seen:
        """The ducts of the brackets `w` at ratios (len(w), C), NaN where none is looked at, up to the modes `most`."""
        row, column = np.nonzero(np.isfinite(tried))
        return _seen(at(self.point[w[row]], tried[row, column], most[row])).placed(row, column, tried.shape)

    def _probes(self, w: Codes) -> Array:
        """Ratios to look at (len(w), C), rising, NaN behind the last: even ones, or dense about the zero of a margin that is known at both
        ends, and the middle, so that a bent margin cannot hold the search up."""
        low, high = self.low[w, None], self.high[w, None]
        part = self._zero()[w]
        known, zero = np.isfinite(part), np.where(np.isfinite(part), part, 0.5)[:, None]
        span = np.linspace(-1.0, 1.0, _AIMED + 1)[1:-1] * _AIMED / (_AIMED - 1.0)
        side = _NEAREST ** (1.0 - np.abs(span)) * np.sign(span)
        about = zero + side * np.where(side < 0.0, zero, 1.0 - zero) * (1.0 - 1e-3)
        tried = np.tile(np.arange(1.0, self.spread + 1.0) / (self.spread + 1.0), (w.size, 1))
        tried[known] = np.nan
        tried[known, :_AIMED] = np.sort(np.hstack([about, np.full((w.size, 1), 0.5)]), axis=1)[known]
        return low + (high - low) * tried

    def _learn(self, w: Codes, tried: Array, seen: _Seen) -> None:
        own = np.arange(w.size)
        stands = seen.stands[self.end[w], own]
        fails = stands == 0.0
        high = np.where(fails.any(1), fails.argmax(1), tried.shape[1])
        before = (np.arange(tried.shape[1]) < high[:, None]) & (stands == 1.0)
        low = np.where(before.any(1), tried.shape[1] - 1 - before[:, ::-1].argmax(1), -1)
        for side, row, edge in ((1, high, self.high), (0, low, self.low)):
            new = np.flatnonzero((row >= 0) & (row < tried.shape[1]))
            edge[w[new]] = tried[new, row[new]]
            self.margins[side][:, w[new]] = seen.margins[:, new, row[new]]
            if side:
                self.cause[w[new]] = seen.cause[self.end[w[new]], new, row[new]]
