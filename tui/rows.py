"""Rows of tables (duct sections, injectors, ramps) as edits: one cell, one row more, one row less.

Cells that hang together are changed together, so that every edit is a case: the shares of the fuel sum to one, perimeters stand
in all rows or in none. Rows keep their spelling.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import TYPE_CHECKING, Any

from cycle.errors import UnitError
from cycle.quantities import cell_key, input_of, split_cell
from cycle.units import read

if TYPE_CHECKING:
    from cycle.case import Case

Row = dict[str, Any]
AREA, INJECTOR, RAMP = "combustor.area", "combustor.injector", "inlet.ramp"
FIRST_RAMP = 0.1
"""Length of a ramp that gets one because another follows it, m."""


def place_of(key: str) -> tuple[str, int, str] | None:
    """Table, row from 1 and column of a cell's key, None for the key of another input."""
    found = split_cell(key)
    return None if found is None else (found[0].key, found[1], found[2].key)


def hidden(case: Case, key: str) -> bool:
    """Whether a cell without a value stays out of the inputs: another column of its row says the same, or it is given in all
    rows by the first."""
    found = split_cell(key)
    if found is None or case.value(key) is not None:
        return False
    table, number, column = found
    if (table.key, column.key) == (AREA, "perimeter"):
        return number > 1
    others = [c for c in table.one_of if c != column.key]
    return column.key in table.one_of and any(case.value(cell_key(table.key, number, c)) is not None for c in others)


def others(key: str) -> tuple[str, ...]:
    """Keys of the cells of the same row that say the same as this one; () where there are none."""
    found = split_cell(key)
    if found is None or found[2].key not in found[0].one_of:
        return ()
    return tuple(cell_key(found[0].key, found[1], c) for c in found[0].one_of if c != found[2].key)


def _written(case: Case, table: str) -> list[Row]:
    from cycle.case.case import thawed

    rows: list[Row] = thawed(case.spelled[table])
    return rows


def cell_changes(case: Case, key: str, value: Any) -> dict[str, object]:
    """What an edit of one input or cell changes: it, and those that follow from it.

    Parameters: case; key, that of any input; value, as typed, None to take it back. Returns: key -> value.
    """
    place = place_of(key)
    follow = _FOLLOW.get((place[0], place[2]) if place is not None else ("", key))
    return {key: value, **(follow(case, key, value) if follow is not None else {})}


def _shares(case: Case, key: str, value: Any) -> dict[str, object]:
    """The other shares in their old proportion, so that all sum to one."""
    from cycle.case.rows import other_shares

    rows = case.rows[INJECTOR]
    mine = int(key.split(".")[2]) - 1
    try:
        share = 1.0 if value is None else read(value, "ratio")
    except UnitError:
        return {}
    return {cell_key(INJECTOR, i + 1, "share"): part for i, part in other_shares(rows, mine, share).items()}


def _perimeters(case: Case, key: str, value: Any) -> dict[str, object]:
    """A first perimeter stands in all rows; taken back, it leaves all of them."""
    rows = case.rows[AREA]
    if value is not None and any("perimeter" in row for row in rows):
        return {}
    return {k: value for i in range(len(rows)) if (k := cell_key(AREA, i + 1, "perimeter")) != key}


def _lip(case: Case, key: str, value: Any) -> dict[str, object]:
    """A cone's lip and its capture area, each with the other."""
    from cycle.case.moves import lip_follows
    from cycle.quantities import INPUT

    try:
        number = None if value is None else read(value, INPUT[key].unit)
    except UnitError:
        return {}
    follows = lip_follows(case, key, number) if number is not None and number > 0.0 else {}
    return {name: value for name, value in follows.items() if name in case.given}


_FOLLOW: dict[tuple[str, str], Callable[[Case, str, Any], dict[str, object]]] = {
    (INJECTOR, "share"): _shares,
    (AREA, "perimeter"): _perimeters,
    ("", "inlet.lip_y"): _lip,
    ("", "engine.capture_area"): _lip,
}


def more(case: Case, key: str) -> tuple[dict[str, object], str]:
    """One row more behind that of a cell.

    Parameters: case; key, that of the cell in hand. Returns: (key of the table -> rows, key of the same column in the new row).
    """
    place = place_of(key)
    assert place is not None
    table, number, column = place
    rows, at = _MORE[table](case, _written(case, table), number - 1)
    return {table: rows}, cell_key(table, at + 1, column)


def less(case: Case, key: str) -> tuple[dict[str, object], str]:
    """The row of a cell gone.

    Parameters and returns as for `more`; the key is that of the row that takes its place.
    """
    place = place_of(key)
    assert place is not None
    table, number, column = place
    rows = _written(case, table)
    gone = rows.pop(number - 1)
    if table == INJECTOR and rows:
        _share_out(case, rows, gone, number - 1)
    return {table: rows}, cell_key(table, max(1, min(number, len(rows))), column)


def _share_out(case: Case, rows: list[Row], gone: Row, at: int) -> None:
    kept = [row for i, row in enumerate(case.rows[INJECTOR]) if i != at]
    left = sum(row["share"] for row in kept)
    for row, old in zip(rows, kept, strict=True):
        row["share"] = old["share"] / left if left > 0.0 else 1.0 / len(rows)


def _more_area(case: Case, rows: list[Row], at: int) -> tuple[list[Row], int]:
    """Halfway to the next section on the straight line between the two, which leaves the duct as it is; behind the last
    one a piece of the length and the area of the end."""
    si = [dict(row) for row in case.rows[AREA]]
    here = si[at]
    if at + 1 < len(si):
        new = _between(here, si[at + 1])
    else:
        before = si[at - 1]["x"] if at else 0.0
        new = {**here, "x": 2.0 * here["x"] - before}
    return [*rows[: at + 1], new, *rows[at + 1 :]], at + 1


def _between(here: Mapping[str, float], there: Mapping[str, float]) -> Row:
    shared = [column for column in here if column in there]
    new: Row = {column: 0.5 * (here[column] + there[column]) for column in shared}
    size = [column for column in ("area", "area_ratio") if column in here]
    return {**{column: here[column] for column in size if column not in shared}, **new}


def _more_injector(case: Case, rows: list[Row], at: int) -> tuple[list[Row], int]:
    """Halfway to the next injector, or to the end of the duct, with half of the fuel."""
    si = case.rows[INJECTOR]
    end = si[at + 1]["x"] if at + 1 < len(si) else case.rows[AREA][-1]["x"]
    half = 0.5 * si[at]["share"]
    new: Row = {**si[at], "x": 0.5 * (si[at]["x"] + end), "share": half}
    return [*rows[:at], {**rows[at], "share": half}, new, *rows[at + 1 :]], at + 1


def _more_ramp(case: Case, rows: list[Row], at: int) -> tuple[list[Row], int]:
    """The same ramp again; a last ramp without a length stays the last one."""
    si = case.rows[RAMP]
    if "length" in si[at]:
        return [*rows[: at + 1], dict(si[at]), *rows[at + 1 :]], at + 1
    length = si[at - 1].get("length", FIRST_RAMP) if at else FIRST_RAMP
    return [*rows[:at], {**si[at], "length": length}, *rows[at:]], at


_MORE: dict[str, Callable[[Case, list[Row], int], tuple[list[Row], int]]] = {
    AREA: _more_area,
    INJECTOR: _more_injector,
    RAMP: _more_ramp,
}


def words(before: Case, after: Case, table: str) -> str:
    """Words for an edit of a whole table."""
    spec = input_of(table)
    assert spec is not None
    old, new = (len(case.rows.get(table, ())) for case in (before, after))
    changed = "one more" if new > old else "one less" if new < old else "changed"
    return f"{spec.label}: {changed}, {new} in all"
