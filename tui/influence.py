"""What moves a walk, in plain words and tables: sensitivities of its inputs, and where a difference comes from."""

from __future__ import annotations

import math
from collections.abc import Iterable
from typing import TYPE_CHECKING

from cycle import noise
from cycle.quantities import OUTPUT, Output
from cycle.units import display_unit, format_number
from tui.tables import Block, Heading, Lines, Table
from tui.text import named

if TYPE_CHECKING:
    from cycle.sensitivity import Sensitivities, Sensitivity
    from cycle.shares import Shares

_WITHOUT_COLUMN = ("overall_efficiency", "equivalence_ratio")
"""Headline figures that follow from the others; the other forms of the output have them."""

_SIDES = {"central": "", "above": "+ only", "below": "- only", "none": "none"}


def change(value: float, output: Output, base: float, system: str) -> str:
    """A change of a figure with its sign, in the unit it is shown in; "0" for rounding, "-" for NaN.

    value and base: SI, base what it is a change of. system: "si" or "us".
    """
    if math.isnan(value):
        return "-"
    if noise.settled(value, base, noise.STEP) == 0.0:
        return "0"
    text = format_number(value / display_unit(output.unit, system, output.key).factor, 3)
    return f"+{text}" if value > 0.0 else text


def sensitivity_blocks(found: Sensitivities, system: str) -> list[Block]:
    """Sensitivities as blocks, the largest first. system: "si" or "us"."""
    outputs = [OUTPUT[key] for key in found.outputs if key not in _WITHOUT_COLUMN]
    heading = Heading(f"Sensitivities: what one step of each input gives, by {outputs[0].label}")
    if found.why_not:
        return [heading, Lines((f"Not assessed: {found.why_not}",))]
    ranked = found.ranked()
    rows = tuple((row.input.key, _step(row, system), *_changes(found, row, outputs, system), _mark(row)) for row in ranked)
    heads = tuple(named(o.symbol, o.unit, system, o.key) for o in outputs)
    table = Table(("input", "step", *heads, ""), rows, left=(len(heads) + 2,))
    return [heading, table, Lines(tuple(_remarks(found, ranked)))]


def _step(row: Sensitivity, system: str) -> str:
    unit = display_unit(row.input.unit, system, row.input.key)
    sign = "" if row.step < 0.0 else "+"
    return f"{sign}{format_number(row.step / unit.factor, 3)} {unit.label}".strip()


def _changes(found: Sensitivities, row: Sensitivity, outputs: Iterable[Output], system: str) -> Iterable[str]:
    return (change(row.changes.get(o.key, math.nan), o, found.base[o.key], system) for o in outputs)


def _mark(row: Sensitivity) -> str:
    return _SIDES[row.side] + (" jump" if row.modes else "")


def _remarks(found: Sensitivities, rows: Iterable[Sensitivity]) -> Iterable[str]:
    """Why changes are one-sided, missing or over a jump, and what is left out."""
    reasons: dict[str, list[str]] = {}
    for row in rows:
        if row.reason:
            reasons.setdefault(row.reason, []).append(row.input.key)
        if row.modes:
            reasons.setdefault(f"jump, the mode goes {' - '.join(row.modes)}", []).append(row.input.key)
    for key, why in found.left_out.items():
        reasons.setdefault(f"left out, {why}", []).append(key)
    return (f"{why}: {', '.join(keys)}" for why, keys in reasons.items())


def blocks_of_shares(found: Shares, system: str, remarks: Iterable[str] = ()) -> list[Block]:
    """Shares of a difference as blocks. system: "si" or "us"; remarks: sentences ahead of the table."""
    if found.why_not:
        return [Lines((f"Not assessed: {found.why_not}", *remarks, *found.notes))]
    outputs = [OUTPUT[key] for key in found.outputs]
    whole = {o.key: found.second[o.key] - found.first[o.key] for o in outputs}

    def cells(values: dict[str, float]) -> tuple[str, ...]:
        return tuple(change(values[o.key], o, max(abs(found.first[o.key]), abs(found.second[o.key])), system) for o in outputs)

    rows = [(" + ".join(part.groups), *cells(dict(part.shares))) for part in found.parts]
    heads = tuple(named(o.symbol, o.unit, system, o.key) for o in outputs)
    said = (*remarks, *found.notes)
    table = Table(("", *heads), (*rows, ("in all", *cells(whole))))
    return [table, Lines(said)] if said else [table]
