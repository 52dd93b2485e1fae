"""What one step of each number input does to the headline figures: every input of a case in one batch."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from cycle.case import Case
from cycle.case.moves import Moved, Refusal, moved
from cycle.flowpath.setting import why_fixed
from cycle.quantities import HEADLINE, Input
from cycle.result import Walk, solve
from cycle.walk import modes

if TYPE_CHECKING:
    from cycle.arrays import ArrayLike

LEFT_OUT: dict[str, str] = {
    "limits": "a threshold of a limit moves no figure",
    "fuel.supply_pressure": "enters the exergy only",
    "fuel.standard_entropy": "enters the exergy only",
    "combustor.slices": "the number of slices is no property of the duct",
}
"""Inputs, or whole tables of them, that move no headline figure by construction -> why they are not varied."""


@dataclass(frozen=True, slots=True)
class Sensitivity:
    """What a step of one input gives.

    value and step: SI; the step is one that the input can take: h, or -h for side "below"; side: "central" for (f(x + h) - f(x - h))/2,
    "above" for f(x + h) - f(x), "below" for f(x - h) - f(x), "none"; changes: output -> its change for the step, SI, NaN where the case
    has no such figure, {} for side "none"; below and above: what became of x - h and x + h: a status of `quantities.STATUSES`, "bound"
    (out of bounds, or a step as large as the value), "refused" (the rows of a table would not fit each other), "no-value" (solved,
    but a figure has no value there) or "apart" (not varied within a batch); reason: in words why the change is one-sided or missing;
    modes: those below, here and above where they are not all the same, so that the change goes over a jump and is no derivative, else ().
    """

    input: Input
    value: float
    step: float
    side: str
    changes: Mapping[str, float]
    below: str
    above: str
    reason: str = ""
    modes: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Sensitivities:
    """What `sensitivities` found. outputs: the headline figures of the case; base: their values, SI; rows in declared order of
    the inputs; left_out: key of a number input that is not varied -> why; why_not: why no row has a value, or ""."""

    outputs: tuple[str, ...]
    base: Mapping[str, float]
    rows: tuple[Sensitivity, ...]
    left_out: Mapping[str, str]
    why_not: str = ""

    def row(self, key: str) -> Sensitivity | None:
        """The row of an input; None where it is not varied. Parameters: key."""
        return next((row for row in self.rows if row.input.key == key), None)

    def ranked(self, output: str = "") -> tuple[Sensitivity, ...]:
        """Rows by the size of the change of an output, the largest first, those without a value last. Parameters: output, the first of
        `outputs` for ""."""
        key = output or self.outputs[0]
        sizes = [abs(row.changes.get(key, math.nan)) for row in self.rows]
        order = sorted(range(len(sizes)), key=lambda i: math.inf if math.isnan(sizes[i]) else -sizes[i])
        return tuple(self.rows[i] for i in order)


def plain(found: Sensitivities) -> list[dict[str, Any]] | None:
    """Sensitivities as plain data of the JSON of `solve`: rows by the size of the first output's change, null for what has no value.

    found: of a case. Returns None where the case has no solution.
    """
    if found.why_not:
        return None
    return [_plain_row(row, found.outputs) for row in found.ranked()]


def _plain_row(row: Sensitivity, outputs: Sequence[str]) -> dict[str, Any]:
    values = {key: row.changes.get(key, math.nan) for key in outputs}
    changes = {key: value if math.isfinite(value) else None for key, value in values.items()}
    ends = {"below": row.below, "above": row.above, "modes": list(row.modes), "reason": row.reason}
    return {"input": row.input.key, "value": row.value, "step": row.step, "side": row.side, "changes": changes, **ends}


@dataclass(frozen=True, slots=True)
class _Point:
    """What is known of one point: its status (as `Sensitivity.below`), mode and figures; words: why there is no such point."""

    status: str
    mode: str = "none"
    figures: Mapping[str, float] | None = None
    words: str = ""


def sensitivities(case: Case, walk: Walk | None = None, apart: bool = False) -> Sensitivities:
    """What one declared step (`Input.step`) of each number input, cells of rows among them, gives of the headline figures.

    Parameters: case; walk, its solved walk of one point, which saves a point; apart, also solve the numbers that say what a fuel
    of one's own is, point by point, as they cannot vary within a batch.
    Returns: `Sensitivities`. Defaults are varied too; an optional input without a value has no row, of an exactly-one-of group only
    the member that is given has one, and `LEFT_OUT` names what moves no figure by construction. A share of the fuel moves
    the other shares in proportion, and an input that another one follows takes that along.
    """
    outputs = HEADLINE[case.choices["start"]]
    base = _points(walk, outputs)[0] if walk is not None else None
    if base is not None and base.status != "solved":
        return _without(case, outputs, base)
    rows = [entry for key in case.numbers if not left_out(key) and (entry := case.declared(key)) is not None]
    tried = {(entry.key, sign): _tried(case, entry, sign, apart) for entry in rows for sign in (-1, 1)}
    asked = {place: point for place, point in tried.items() if isinstance(point, dict)}
    if base is None:
        asked = {("", 0): {}, **asked}
    solved = _solved(case, asked, outputs)
    here = base if base is not None else solved["", 0]
    if here.status != "solved":
        return _without(case, outputs, here)
    found = {
        place: _Point(point.kind, words=point.words) if isinstance(point, Refusal) else solved[place] for place, point in tried.items()
    }
    told = tuple(_row(entry, case.numbers[entry.key], found[entry.key, -1], here, found[entry.key, 1]) for entry in rows)
    return Sensitivities(outputs, dict(_figures(here)), told, _left(case))


def left_out(key: str) -> str:
    """Why an input is not varied, "" where it is. Parameters: key."""
    return LEFT_OUT.get(key) or LEFT_OUT.get(key.split(".")[0], "")


def _left(case: Case) -> dict[str, str]:
    return {key: why for key in case.numbers if (why := left_out(key))}


def _without(case: Case, outputs: Sequence[str], here: _Point) -> Sensitivities:
    """Nothing but why there is nothing."""
    return Sensitivities(tuple(outputs), dict.fromkeys(outputs, math.nan), (), _left(case), f"no solution: {here.status}")


def _tried(case: Case, entry: Input, sign: int, apart: bool) -> Moved | Refusal:
    """The numbers of the point a step away, or why there is no such point."""
    if (fixed := why_fixed(entry.key, case.choices)) and not apart:
        return Refusal("apart", fixed)
    value = case.numbers[entry.key]
    # a step that takes all of a quantity which cannot be negative says nothing about its neighbourhood
    if sign < 0 and _positive(entry) and 0.0 < value <= entry.step * (1.0 + 1e-9):
        return Refusal("bound", "the step is as large as the value")
    found = moved(case, {entry.key: value + sign * entry.step})
    return Refusal("bound", "out of bounds") if isinstance(found, Refusal) and found.kind == "bound" else found


def _positive(entry: Input) -> bool:
    return any(limit is not None and limit >= 0.0 for limit in (entry.lower, entry.above))


Places = Mapping[tuple[str, int], Moved]


def _solved(case: Case, asked: Places, outputs: Sequence[str]) -> dict[tuple[str, int], _Point]:
    """The points asked for: one batch, and one by one those that cannot be in it."""
    alone = {place for place in asked if why_fixed(place[0], case.choices)}
    found = {place: _points(solve(case.replace(asked[place])), outputs)[0] for place in asked if place in alone}
    together = [place for place in asked if place not in alone]
    if together:
        points = _points(solve(case, _batch(case, [asked[place] for place in together])), outputs)
        found.update(zip(together, points, strict=True))
    return found


def _batch(case: Case, points: Sequence[Moved]) -> dict[str, ArrayLike]:
    """Arrays of the numbers that change at any of the points, (N,) by key."""
    keys = dict.fromkeys(key for point in points for key in point)
    arrays = {key: np.full(len(points), case.numbers[key]) for key in keys}
    for i, point in enumerate(points):
        for key, value in point.items():
            arrays[key][i] = value
    return dict(arrays)


def _points(walk: Walk, outputs: Sequence[str]) -> list[_Point]:
    """Status, mode and figures of every point of a walk."""
    figures = [np.ravel(walk.performance[key]).tolist() for key in outputs]
    status = [walk.status] if walk.shape == () else walk.status.tolist()
    each = zip(status, modes(walk.march, of_rigs=True), zip(*figures, strict=True), strict=True)
    return [_Point(found, mode, dict(zip(outputs, values, strict=True))) for found, mode, values in each]


def _figures(point: _Point) -> Mapping[str, float]:
    return point.figures or {}


def _row(entry: Input, value: float, below: _Point, here: _Point, above: _Point) -> Sensitivity:
    """The row of an input from its three points."""
    below, above = _judged(below, here), _judged(above, here)
    there = (below.status == "solved", above.status == "solved")
    side = {(True, True): "central", (False, True): "above", (True, False): "below", (False, False): "none"}[there]
    used = [point for point, has in zip((below, here, above), (there[0], any(there), there[1]), strict=True) if has]
    sign = -1.0 if side == "below" else 1.0
    changes = _changes(used, sign) if side != "none" else {}
    found = tuple(point.mode for point in used)
    jump = found if len(set(found)) > 1 else ()
    return Sensitivity(entry, value, sign * entry.step, side, changes, below.status, above.status, _reason(below, above), jump)


def _judged(point: _Point, here: _Point) -> _Point:
    """The point, or "no-value" where a figure that is there at the base is not."""
    if point.status != "solved":
        return point
    lost = any(math.isnan(point_value) for key, point_value in _figures(point).items() if not math.isnan(_figures(here)[key]))
    return _Point("no-value", point.mode, words="a figure has no value") if lost else point


def _changes(used: Sequence[_Point], sign: float) -> dict[str, float]:
    """Change over one step from the outermost of two or three neighbouring points. sign: of the step."""
    first, last = _figures(used[0]), _figures(used[-1])
    return {key: sign * (last[key] - first[key]) / (len(used) - 1) for key in first}


def _reason(below: _Point, above: _Point) -> str:
    """Why a change is one-sided or missing; "" where it is central."""
    lost = {side: point for side, point in (("below", below), ("above", above)) if point.status != "solved"}
    words = {side: point.words or f"no solution, {point.status}" for side, point in lost.items()}
    same = len(words) > 1 and len({*words.values()}) == 1
    return words["below"] if same else "; ".join(f"{side}: {why}" for side, why in words.items())
