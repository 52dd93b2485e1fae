"""Arrays of tables: their cells, edits of single cells, and the rules that join the rows of a case.

The rules look at numbers and at arrays alike, so that every element of a batch is held to them.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from itertools import pairwise
from types import MappingProxyType
from typing import Any

from cycle.errors import Fault, shown
from cycle.quantities import INPUT, INPUTS, Input, cell, cell_key, split_cell
from cycle.units import format_number

Row = Mapping[str, Any]
"""One row: column -> number in SI, or an array of them."""
Rows = Mapping[str, Sequence[Row]]
TABLES = tuple(i.key for i in INPUTS if i.kind == "rows")
"""Keys of the inputs that are arrays of tables."""


def place(table: str, row: int, column: str = "") -> str:
    """Where a row or a cell stands, as messages name it. Parameters: table, its key; row, from 1; column."""
    return f"{table} row {row}" + (f", {column}" if column else "")


def cells(table: str, rows: Sequence[Row]) -> dict[str, Any]:
    """Keys of cells with their values. Parameters: table, its key; rows, those of a case."""
    return {cell_key(table, n, column): value for n, row in enumerate(rows, 1) for column, value in row.items()}


def view(numbers: Mapping[str, Any]) -> dict[str, tuple[Row, ...]]:
    """Tables with their rows, put together from cells.

    Parameters: numbers, keys of cells with numbers or arrays, other keys among them. Returns: table -> rows, in order.
    """
    found: dict[str, dict[int, dict[str, Any]]] = {}
    for key, value in numbers.items():
        parts = split_cell(key)
        if parts is not None:
            table, row, column = parts
            found.setdefault(table.key, {}).setdefault(row, {})[column.key] = value
    return {table: tuple(MappingProxyType(rows[n]) for n in sorted(rows)) for table, rows in found.items()}


def with_cells(spelled: Mapping[str, object], changes: Mapping[str, object], file: str) -> tuple[dict[str, object], list[Fault]]:
    """Changes of single cells as changes of whole tables.

    Parameters: spelled, plain values of a case as written; changes, key of an input or a cell -> new value, None to remove it;
    file, the name that messages use.
    Returns: the changes, without cells; a fault for every cell of a row that is not there.
    """
    whole = {key: value for key, value in changes.items() if split_cell(key) is None}
    faults: list[Fault] = []
    for key, value in changes.items():
        parts = split_cell(key)
        if parts is None:
            continue
        table, number, column = parts
        rows = whole.get(table.key, spelled.get(table.key))
        if not isinstance(rows, list) or not number <= len(rows) or not isinstance(rows[number - 1], dict):
            there = f"row 1 to {len(rows)}" if isinstance(rows, list) else f"[[{table.key}]] first"
            faults.append(Fault(file, place(table.key, number, column.key), "there is no such row", shown(value), there))
        else:
            whole[table.key] = [*rows[: number - 1], _changed(table, rows[number - 1], column, value), *rows[number:]]
    return whole, faults


def _changed(table: Input, row: Mapping[str, object], column: Input, value: object) -> dict[str, object]:
    """A row with another cell; of columns that exclude each other the new one stays."""
    out = set(table.one_of) if column.key in table.one_of and value is not None else {column.key}
    kept = {name: old for name, old in row.items() if name not in out or (name == column.key and value is not None)}
    return kept if value is None else {**kept, column.key: value}


def other_shares(rows: Sequence[Mapping[str, float]], mine: int, share: float) -> dict[int, float]:
    """What the other injectors' shares become when one changes: in their old proportion, so that all sum to one.

    Parameters: rows, the injectors; mine, place of the changed one, from 0; share, its new one. Returns: place -> share.
    """
    rest = [i for i in range(len(rows)) if i != mine]
    old = sum(rows[i]["share"] for i in rest)
    even = 1.0 / len(rest) if rest else 0.0
    return {i: (1.0 - share) * (rows[i]["share"] / old if old > 0.0 else even) for i in rest}


def _any(wrong: Any) -> bool:
    return bool(wrong.any()) if hasattr(wrong, "any") else bool(wrong)


def _first(value: Any, wrong: Any) -> str:
    """The number at fault in words, with its index in an array."""
    if not getattr(wrong, "ndim", 0):
        return format_number(float(value), 8)
    import numpy as np

    index = int(np.flatnonzero(wrong)[0])
    return f"{format_number(float(np.broadcast_to(value, wrong.shape).flat[index]), 8)} at index {index}"


def _fault(key: tuple[str, int, str], text: str, value: Any, wrong: Any, allowed: str) -> Fault:
    unit = {"length": " m"}.get(cell(*key).unit, "")
    return Fault("", place(*key), text, f"{_first(value, wrong)}{unit}", allowed)


def _one_of(tables: Rows) -> Iterator[Fault]:
    """Columns of which a row has exactly one."""
    for table in (INPUT[key] for key in tables if INPUT[key].one_of):
        for number, row in enumerate(tables[table.key], 1):
            given = [name for name in table.one_of if name in row]
            if len(given) != 1:
                allowed = f"exactly one of {', '.join(table.one_of)}"
                yield Fault("", place(table.key, number), f"{table.label} has not one size", ", ".join(given) or "none", allowed)


def _rising(tables: Rows) -> Iterator[Fault]:
    table = "combustor.area"
    places = [row["x"] for row in tables.get(table, ())]
    for number, (before, here) in enumerate(pairwise(places), 2):
        wrong = here <= before
        if _any(wrong):
            limit = _limit(before)
            yield _fault((table, number, "x"), "the places do not rise", here, wrong, f"above {limit}")


def _limit(value: Any) -> str:
    return f"{format_number(float(value), 8)} m" if not getattr(value, "ndim", 0) else "that of the row before"


def _entry_ratio(tables: Rows) -> Iterator[Fault]:
    """At x = 0 the area is that of burner entry."""
    table = "combustor.area"
    for row in tables.get(table, ())[:1]:
        if "area_ratio" in row:
            wrong = (row["x"] == 0.0) & (abs(row["area_ratio"] - 1.0) > 1e-9)
            if _any(wrong):
                yield _fault((table, 1, "area_ratio"), "burner entry has another area", row["area_ratio"], wrong, "1 at x = 0")


def _perimeters(tables: Rows) -> Iterator[Fault]:
    table = "combustor.area"
    rows = tables.get(table, ())
    without = [n for n, row in enumerate(rows, 1) if "perimeter" not in row]
    if 0 < len(without) < len(rows):
        for number in without:
            yield Fault("", place(table, number, "perimeter"), "needed with the other perimeters", "none", "in all rows or in none")


def _shares(tables: Rows) -> Iterator[Fault]:
    table = "combustor.injector"
    total = sum(row["share"] for row in tables.get(table, ()))
    wrong = abs(total - 1.0) > 1e-6
    if tables.get(table) and _any(wrong):
        yield Fault("", table, "the shares of the fuel do not sum to 1", f"a sum of {_first(total, wrong)}", "1 within 1e-6")


def _inside(tables: Rows) -> Iterator[Fault]:
    """Fuel enters ahead of the duct's end."""
    table = "combustor.injector"
    for end in tables.get("combustor.area", ())[-1:]:
        for number, row in enumerate(tables.get(table, ()), 1):
            wrong = row["x"] >= end["x"]
            if _any(wrong):
                limit = _limit(end["x"]) if not getattr(end["x"], "ndim", 0) else "the end of the duct"
                yield _fault((table, number, "x"), "the injector lies behind the duct", row["x"], wrong, f"below {limit}")


ROW_RULES: tuple[Callable[[Rows], Iterator[Fault]], ...] = (_one_of, _rising, _entry_ratio, _perimeters, _shares, _inside)
"""Rules that join cells; each takes table -> rows (numbers or arrays) and yields faults without a file name."""
