"""Numbers of a case moved, with what hangs on them: the points of a batch about a case."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

from cycle.case.case import Case
from cycle.case.joint import Facts, corridor, has_lip_circle
from cycle.case.rows import ROW_RULES, other_shares, view
from cycle.case.rules import bounds, outside
from cycle.quantities import INPUTS, cell_key, split_cell

Moved = dict[str, float]
"""Key -> value, SI."""

_SHARE = ("combustor.injector", "share")


@dataclass(frozen=True, slots=True)
class Refusal:
    """Why there is no such case. kind: "bound" where a value is out of bounds, "refused" where numbers do not fit each other."""

    kind: str
    words: str


def moved(case: Case, asked: Mapping[str, float]) -> Moved | Refusal:
    """The numbers that change when some do.

    Parameters: case; asked, key of a number input, or of a cell of a row that is there -> value (SI).
    Returns: key -> value of these and of those that follow: inputs that take another one's value when absent, the shares of the other
    injectors, and what a cone's lip and its capture area are to each other. A Refusal
    where a value is out of bounds, the rows do not fit each other or the corridor is upside down.
    Errors: KeyError where a key is none of a number input.
    """
    for key, value in asked.items():
        entry = case.declared(key)
        if entry is None or entry.kind != "number":
            raise KeyError(key)
        if outside(entry, value):
            return Refusal("bound", bounds(entry))
    follow = (part for key, value in asked.items() for part in (_shares(case, key, value), lip_follows(case, key, value)))
    changes = {k: v for part in follow for k, v in part.items()} | dict(asked)
    for other in INPUTS:
        if other.follows in changes and other.key in case.numbers and other.key not in (*case.given, *asked):
            changes[other.key] = changes[other.follows]
    words = _misfit(case, changes)
    return Refusal("refused", words) if words else changes


def _misfit(case: Case, changes: Moved) -> str:
    """Why numbers do not fit each other, "" where they do."""
    if any(key.startswith("limits.") for key in changes):
        return next((fault.text for fault in corridor(Facts(case.choices, {**case.numbers, **changes}))), "")
    cells = {key: parts for key in changes if (parts := split_cell(key))}
    if not cells:
        return ""
    out = {cell_key(table.key, row, name) for table, row, column in cells.values() if column.key in table.one_of for name in table.one_of}
    kept = {key: value for key, value in case.numbers.items() if key not in out}
    tables = view({**kept, **changes})
    return next((fault.text for rule in ROW_RULES for fault in rule(tables)), "")


def _shares(case: Case, key: str, value: float) -> Moved:
    """Shares of the other injectors where the key is one."""
    parts = split_cell(key)
    if parts is None or (parts[0].key, parts[2].key) != _SHARE:
        return {}
    rows = case.rows[_SHARE[0]]
    return {cell_key(_SHARE[0], i + 1, "share"): part for i, part in other_shares(rows, parts[1] - 1, value).items()}


def lip_follows(case: Case, key: str, value: float) -> Moved:
    """What moves with a cone's lip radius or capture area: the area is the circle of the lip, and another area is the same shape, larger.

    Parameters: case; key of an input; value, its new one (SI), above 0. Returns: key -> value of the others; none for another key or inlet.
    """
    if not has_lip_circle(case.choices):
        return {}
    if key == "inlet.lip_y":
        return {"engine.capture_area": math.pi * value**2}
    if key == "engine.capture_area":
        scale = math.sqrt(value / math.pi) / case.numbers["inlet.lip_y"]
        return {name: scale * case.numbers[name] for name in ("inlet.lip_x", "inlet.lip_y")}
    return {}
