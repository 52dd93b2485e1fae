"""The value of an input at which a limit is just reached: a search along one input for the zero of a margin.

The search begins at the case's own value and goes both ways in steps that grow, one batch for all of them. Where the margin changes
sign between two solved points a zero is closed in on; where the walk loses its solution, the last point that has one. What is given
is always a solved point, and the one on the safe side.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise
from typing import Literal

import numpy as np

from cycle import limits
from cycle.arrays import Array
from cycle.case import Case
from cycle.case.moves import Refusal, moved
from cycle.flowpath.setting import why_fixed
from cycle.quantities import STATUSES, Input
from cycle.result import solve
from cycle.units import format_number
from cycle.walk import March

Kind = Literal["zero", "jump", "edge", "none"]

ZERO = 1e-6
"""Largest margin that is one at the limit, 1: above the noise of a solution, below what anybody reads."""

_CLOSE = 1e-9
"""Margin at which the search is over."""
_NARROW, _NARROW_EDGE = 1e-11, 1e-8
"""Width of the last bracket of a zero, and of the end of the solution, over the value, 1."""
_SHORT = 0.999
"""Part of the way to a bound that is tried where the bound itself is out."""
_SIDE = 12
"""Points of the first batch on each side."""
_SHARES = np.linspace(0.0, 1.0, 18)[1:-1]
_DECADES = 10.0 ** -np.arange(1.0, 9.0)
_ROUNDS = 12
_PLACES = 3
"""Places that are closed in on at most, the nearest first."""
_BY_STATUS = ("thermal_choking", "unstart_heat")
_DIGITS = range(6, 12)
"""Digits of a value that is given: the fewest that keep it at the limit."""


@dataclass(frozen=True, slots=True)
class Reached:
    """Where a limit is reached along an input.

    limit: its key; input: what is varied; now: its value, SI, NaN where the case has none; kind: "zero", a value at which the margin is
    zero; "jump", one at which it changes sign without being zero; "edge", the last one with a solution; "none", no such place within
    reach; value: that value, SI, NaN for "none"; margin: the margin there; status: what becomes of the walk behind an edge; words: what
    stands behind an edge, or why there is none, "" else.
    """

    limit: str
    input: Input
    now: float
    kind: Kind
    value: float = math.nan
    margin: float = math.nan
    status: str = ""
    words: str = ""


@dataclass(frozen=True, slots=True)
class _Point:
    """A value tried: margin there, NaN where there is none, and what became of the walk (a status, "bound" or "refused")."""

    x: float
    margin: float
    status: str

    @property
    def known(self) -> bool:
        return not math.isnan(self.margin)


@dataclass(frozen=True, slots=True)
class _Gap:
    """Two neighbours between which something happens, the one nearer to the case's own value first."""

    near: _Point
    far: _Point

    @property
    def signs(self) -> bool:
        """Whether the margin is known at both and changes sign."""
        return self.near.known and self.far.known

    @property
    def width(self) -> float:
        return abs(self.far.x - self.near.x)

    @property
    def safe(self) -> _Point:
        """The end that is solved and has more margin."""
        return max((p for p in (self.near, self.far) if p.known), key=lambda p: p.margin)


def solve_for_limit(case: Case, limit: str, key: str) -> Reached:
    """The value of an input at which a limit is just reached.

    case; limit: key of a limit of its walk ("unstart"); key: of a number input, or of a cell of a row that is there.
    Returns: the nearest place, see `Reached`; the margin at a "zero" is at most 1e-6 and not negative where the search can tell.
    Errors: KeyError where the key is none of a number input, or the walk has no such limit.
    Source: bracketing and bisection; the margin is that of `cycle.limits`.
    """
    for found in search(case, limit, key):
        if found is not None:
            return found
    raise AssertionError("a search ends with what it found")


def search(case: Case, limit: str, key: str) -> Iterator[Reached | None]:
    """`solve_for_limit` in pieces: None after every batch of walks, then what was found. Parameters and errors as there."""
    spec = case.declared(key)
    if spec is None or spec.kind != "number":
        raise KeyError(key)
    now = case.value(key)
    if not isinstance(now, int | float):
        yield _none(limit, spec, math.nan, f"{spec.label} has no value in this case")
        return
    if fixed := why_fixed(key, case.choices):
        yield _none(limit, spec, float(now), fixed)
        return
    tried = _Tries(case, limit, spec, float(now))
    tried.take(tried.first())
    yield None
    ends: list[_Gap] = []
    for gap in tried.gaps()[:_PLACES]:
        for closer in tried.closed(gap):
            gap = closer
            yield None
        ends.append(gap)
        if tried.is_zero(gap):
            break
    yield tried.outcome(ends)


def _none(limit: str, spec: Input, now: float, words: str) -> Reached:
    return Reached(limit, spec, now, "none", words=words)


class _Tries:
    """What has been tried along one input. Its scale is that of the numbers met: a width is narrow beside it."""

    def __init__(self, case: Case, limit: str, spec: Input, now: float) -> None:
        self.case, self.limit, self.spec, self.now = case, limit, spec, now
        self.points: dict[float, _Point] = {}
        self.missing = ""
        self.by_status = limit in _BY_STATUS

    def first(self) -> Array:
        """The case's own value and steps from it that grow up to the bounds."""
        sides = [self.now + sign * _growing(self.spec.step, reach) for sign, reach in self._reaches()]
        return np.concatenate([[self.now], *sides])

    def _reaches(self) -> Iterator[tuple[float, float]]:
        """Sign and room on each side; the bound itself is tried where the input may have it."""
        spec, far = self.spec, 1e3 * max(self.spec.step, abs(self.now))
        for sign, closed, open_ in ((-1.0, spec.lower, spec.above), (1.0, spec.upper, spec.below)):
            room = far if closed is None else sign * (closed - self.now)
            yield sign, min(far, room if open_ is None else _SHORT * sign * (open_ - self.now))

    def take(self, values: Array) -> None:
        """Try values: those that are in bounds and fit the case are walked in one batch."""
        fresh = [x for x in dict.fromkeys(values.tolist()) if x not in self.points]
        changes = {x: moved(self.case, {self.spec.key: x}) for x in fresh}
        good = {x: change for x, change in changes.items() if not isinstance(change, Refusal)}
        self.points |= {x: _Point(x, math.nan, change.kind) for x, change in changes.items() if isinstance(change, Refusal)}
        if not good:
            return
        keys = list(next(iter(good.values())))
        walk = solve(self.case, {k: np.array([change[k] for change in good.values()]) for k in keys})
        margins = self._margins(walk.march, list(walk.status))
        self.points |= {x: _Point(x, m, s) for x, m, s in zip(good, margins, walk.status, strict=True)}

    def _margins(self, march: March, status: list[str]) -> list[float]:
        """Margins of a batch. The largest heat has none there: a choked or unstarted point is beyond it, a solved one is not, and no more
        is known."""
        row = next((r for r in limits.limits(march) if r.key == self.limit), None)
        if row is None:
            raise KeyError(self.limit)
        self.missing = row.missing
        if self.by_status:
            return [{"solved": 1.0, "choked": -1.0, "unstarted": -1.0, "no-mode": -1.0}.get(s, math.nan) for s in status]
        return [float(m) if s == "solved" else math.nan for m, s in zip(row.margin, status, strict=True)]

    def _sorted(self) -> list[_Point]:
        return [self.points[x] for x in sorted(self.points)]

    def gaps(self, low: float = -math.inf, high: float = math.inf) -> list[_Gap]:
        """Pairs of neighbours where the margin changes sign or the solution ends; changes of sign first, then the nearest."""
        inside = [p for p in self._sorted() if low <= p.x <= high]
        pairs = [_Gap(*sorted(pair, key=self._distance)) for pair in pairwise(inside)]
        met = [g for g in pairs if (g.near.margin < 0.0) != (g.far.margin < 0.0) or g.near.known != g.far.known]
        return sorted(met, key=lambda g: (not g.signs, self._distance(g.near)))

    def _distance(self, point: _Point) -> float:
        return abs(point.x - self.now)

    def closed(self, gap: _Gap) -> Iterator[_Gap]:
        """Narrower and narrower gaps inside one, a batch each."""
        for _ in range(_ROUNDS):
            if self._is_narrow(gap) or self.is_zero(gap, _CLOSE):
                return
            low, high = sorted((gap.near.x, gap.far.x))
            self.take(self._between(gap, low, high))
            inside = self.gaps(low, high)
            gap = inside[0]
            yield gap

    def _is_narrow(self, gap: _Gap) -> bool:
        part = _NARROW if gap.signs else _NARROW_EDGE
        return gap.width <= part * max(abs(gap.near.x), abs(gap.far.x), self.spec.step)

    def _between(self, gap: _Gap, low: float, high: float) -> Array:
        """Points of the next batch: even ones, or where the margin is a number at both ends, dense about its straight line's zero."""
        if not gap.signs or self.by_status:
            return low + (high - low) * _SHARES
        root = gap.near.x + (gap.far.x - gap.near.x) * gap.near.margin / (gap.near.margin - gap.far.margin)
        about = np.concatenate([[root], root + (high - low) * _DECADES, root - (high - low) * _DECADES])
        return about[(about > low) & (about < high)]

    def is_zero(self, gap: _Gap, most: float = ZERO) -> bool:
        """Whether the margin is zero at the safe end: by its own size, for choking by how narrow the gap is."""
        if self.by_status:
            return gap.signs and self._is_narrow(gap)
        return abs(gap.safe.margin) <= most

    def outcome(self, ends: list[_Gap]) -> Reached:
        """What came of the gaps that were closed: the zero, which is the last one, else the jump or edge with the least margin."""
        if not ends:
            return _none(self.limit, self.spec, self.now, self._nothing())
        if self.is_zero(ends[-1]):
            return self._told("zero", ends[-1])
        worst = min(ends, key=lambda g: (not g.signs, g.safe.margin))
        return self._told("jump" if worst.signs else "edge", worst)

    def _told(self, kind: Kind, gap: _Gap) -> Reached:
        safe, other = gap.safe, gap.far if gap.safe is gap.near else gap.near
        safe = self._short(safe, math.copysign(1.0, safe.x - other.x), kind)
        margin = 0.0 if self.by_status and kind == "zero" else safe.margin
        status = "" if other.known else other.status
        return Reached(self.limit, self.spec, self.now, kind, safe.x, margin, status, _BEHIND.get(status, ""))

    def _short(self, safe: _Point, side: float, kind: Kind) -> _Point:
        """The safe end, moved away from the limit to a number of few digits that serves as well."""
        short = [_towards(safe.x, side, digits) for digits in _DIGITS]
        self.take(np.array(short))
        least = 0.0 if kind == "zero" else -math.inf
        most = ZERO if kind == "zero" and not self.by_status else math.inf
        near = (p for x in short if (p := self.points[x]).known and abs(x - safe.x) <= ZERO * abs(safe.x))
        return next((p for p in near if least <= p.margin <= most), safe)

    def _nothing(self) -> str:
        """What the margin does over the range where no place was met."""
        known = [p.margin for p in self._sorted() if p.known]
        if not known:
            return self.missing or "no walk within reach has this limit"
        if self.by_status:
            return f"no choking within reach of {self.spec.label}"
        low, high = (format_number(100.0 * m, 3) for m in (min(known), max(known)))
        return f"not reached within the bounds of {self.spec.label}: margin {low} to {high} %"


_BEHIND = {
    **STATUSES,
    "solved": "the limit has no value",
    "bound": "the input is out of bounds",
    "refused": "the rest of the case does not fit it",
}
"""What stands behind an edge, by status."""


def _growing(step: float, reach: float) -> Array:
    """Steps from one up to a reach in equal ratios, at most twelve; () where there is no room."""
    if reach <= 0.0:
        return np.empty(0)
    if reach <= step:
        return np.array([0.5 * reach, reach])
    return np.append(np.geomspace(step, reach, _SIDE)[:-1], reach)


def _towards(x: float, side: float, digits: int) -> float:
    """`x` with few digits, rounded to the side of the sign of `side`."""
    if x == 0.0:
        return x
    unit = 10.0 ** (math.floor(math.log10(abs(x))) - digits + 1)
    whole = math.ceil(x / unit) if side > 0.0 else math.floor(x / unit)
    return float(f"{whole * unit:.{digits}g}")
