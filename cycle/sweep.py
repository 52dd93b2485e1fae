"""One or two inputs over their range: figures, status and mode of every point as plain data, in one batch."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from itertools import product
from typing import Any

import numpy as np

from cycle.case import Case
from cycle.case.moves import Moved, Refusal, moved
from cycle.case.rules import outside
from cycle.errors import CaseError, Fault
from cycle.flowpath.setting import why_fixed
from cycle.quantities import HEADLINE, OUTPUTS, Input
from cycle.result import Walk, solve
from cycle.walk import modes

REFUSED = "refused"
"""Status of a point whose rows, or other numbers, do not fit each other: there is no such case."""

_STATION_KEYS = frozenset(o.key for o in OUTPUTS if o.where == "station")
_PERFORMANCE_KEYS = frozenset(o.key for o in OUTPUTS if o.where == "performance")


@dataclass(frozen=True, slots=True)
class Axis:
    """One input that varies. values: SI, those within its bounds."""

    input: Input
    values: tuple[float, ...]


@dataclass(frozen=True, slots=True)
class Curve:
    """What `curve` found. shape: (n,) or (n, m); figures, status and mode of the points in row-major order over the axes, figures
    in SI and NaN where there is none; reasons: status -> why, in the words of the first point that has it; margins: key of a limit -> its
    relative margin (positive is safe, NaN where it is not assessed), {} where they were not asked for; labels: words of these limits."""

    axes: tuple[Axis, ...]
    shape: tuple[int, ...]
    figures: Mapping[str, tuple[float, ...]]
    status: tuple[str, ...]
    mode: tuple[str, ...]
    reasons: Mapping[str, str]
    margins: Mapping[str, tuple[float, ...]] = field(default_factory=dict)
    labels: Mapping[str, str] = field(default_factory=dict)


def around(entry: Input, value: float, factor: float = 1.0, steps: int = 20) -> tuple[float, ...]:
    """The natural range of an input about a value.

    Parameters: entry; value, SI, within bounds; factor, widens (above 1) or narrows the range; steps, to each side.
    Returns: value + k factor step for k = -steps .. steps, ascending, without what is out of bounds; whole numbers where the input takes
    only those.
    """
    size = max(1.0, round(factor * entry.step)) if entry.whole else factor * entry.step
    places = (value + k * size for k in range(-steps, steps + 1))
    return tuple(place for place in places if not outside(entry, place))


def curve(case: Case, axes: Mapping[str, Sequence[float]], figures: Sequence[str] = (), limits: bool = False) -> Curve:
    """A case over a range of one input, or over a grid of two.

    Parameters: case; axes, key of a number input or of a cell -> values (SI); figures, what is wanted beside the headline figures:
    keys of the performance, or "station.key" as "4.temperature"; limits, whether the margins of all limits are wanted: for a duct they
    cost about as much again.
    Returns: `Curve`. Values out of bounds are left out before; a point whose numbers do not fit each other has the status "refused".
    Errors: CaseError where a key is none of a number input, has no value within bounds, or cannot vary within a batch; KeyError for
    an unknown figure; ValueError for none or more than two axes.
    """
    if not 1 <= len(axes) <= 2:
        raise ValueError("a curve has one or two axes")
    lines = tuple(_axis(case, key, values) for key, values in axes.items())
    wanted = dict.fromkeys((*HEADLINE[case.choices["start"]], *figures))
    readers = {key: _reader(key) for key in wanted}
    shape = tuple(len(line.values) for line in lines)
    points = _points(case, lines)
    there = {i: point for i, point in enumerate(points) if not isinstance(point, Refusal)}
    status, mode = [REFUSED] * len(points), ["none"] * len(points)
    margins: dict[str, list[float]] = {}
    labels: dict[str, str] = {}
    values = {key: [math.nan] * len(points) for key in wanted}
    reasons = {point.kind: point.words for point in reversed(points) if isinstance(point, Refusal)}
    if there:
        walk = _solved(case, [*there.values()])
        _put(status, there, walk.status)
        _put(mode, there, modes(walk.march, of_rigs=True))
        for key, read in readers.items():
            _put(values[key], there, read(walk))
        for limit in walk.limits if limits else ():
            _put(margins.setdefault(limit.key, [math.nan] * len(points)), there, limit.margin)
            labels[limit.key] = limit.label
        reasons |= {found: why for found, why in zip(walk.status[::-1], walk.reason[::-1], strict=True) if why}
    plain = ({k: tuple(v) for k, v in found.items()} for found in (values, margins))
    return Curve(lines, shape, next(plain), tuple(status), tuple(mode), reasons, next(plain), labels)


def _axis(case: Case, key: str, values: Sequence[float]) -> Axis:
    entry = case.declared(key)
    file = case.path or case.name
    if entry is None or entry.kind != "number":
        raise CaseError([Fault(file, key, "not an input that takes numbers", key, "the key of a number input")])
    if fixed := why_fixed(key, case.choices):
        raise CaseError([Fault(file, key, fixed)])
    inside = tuple(float(v) for v in values if math.isfinite(v) and not outside(entry, float(v)))
    if not inside:
        raise CaseError([Fault(file, key, "no value within the bounds")])
    return Axis(entry, inside)


def _points(case: Case, lines: Sequence[Axis]) -> list[Moved | Refusal]:
    """What each point of the grid changes, or why there is no such case."""
    keys = [line.input.key for line in lines]
    return [moved(case, dict(zip(keys, values, strict=True))) for values in product(*(line.values for line in lines))]


def _solved(case: Case, points: Sequence[Moved]) -> Walk:
    keys = dict.fromkeys(key for point in points for key in point)
    # a move changes the same keys at every value, so that no point lacks one
    return solve(case, {key: np.array([point[key] for point in points]) for key in keys})


def _put(into: list[Any], at: Iterable[int], values: object) -> None:
    plain = np.asarray(values, dtype=object if isinstance(into[0], str) else np.float64).tolist()
    for i, value in zip(at, plain, strict=True):
        into[i] = value


def _reader(key: str) -> Callable[[Walk], object]:
    """How a figure is read off a walk. Raises KeyError for an unknown one."""
    if key in _PERFORMANCE_KEYS:
        return lambda walk: walk.performance[key]
    station, _, name = key.partition(".")
    if name not in _STATION_KEYS:
        raise KeyError(key)
    return lambda walk: walk.station[station][name] if station in walk.station else np.full(walk.size, np.nan)
