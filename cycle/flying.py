"""A case flown along a trajectory: rows of Mach number and altitude, or of any other numbers of the case, walked as one batch.

A trajectory is a CSV file. Its first row holds keys of inputs, with a unit in brackets where the numbers below are not SI:

    flight.mach, flight.altitude [km]
    5.0, 22.1
    6.0, 24.5

Units may stand in the cells instead ("22.1 km"). Lines that begin with # and blank lines say nothing.
"""

from __future__ import annotations

import csv
import difflib
import io
import os
import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from cycle.atomic import read_named
from cycle.case.rules import bounds, groups_of, members_present, outside
from cycle.errors import CaseError, Fault, UnitError, shown
from cycle.quantities import GROUPS, INPUTS, Input, input_of
from cycle.units import read

if TYPE_CHECKING:
    from cycle.arrays import Array
    from cycle.case import Case
    from cycle.result import Walk

LARGEST = 1 << 20
"""Bytes read of a trajectory at most."""
MOST_ROWS = 20_000
MOST_COLUMNS = 32

_LINE_END = re.compile(r"\r\n|\n|\r")
_HEAD = re.compile(r"\s*([A-Za-z0-9_.]{1,80})\s*(?:\[([^\[\]]{0,40})\])?\s*")


@dataclass(frozen=True, slots=True)
class Trajectory:
    """Rows along which a case is flown. name: of its file; values: key of an input -> numbers, SI, (N,), in the file's order."""

    name: str
    values: Mapping[str, Array]

    @property
    def size(self) -> int:
        """Number of rows, N."""
        return next(iter(self.values.values())).size


@dataclass(frozen=True, slots=True)
class _Column:
    """One column: its input, and the unit of its cells as the header states it, None where the cells may bring their own."""

    input: Input
    unit: str | None


def fly(case: Case, trajectory: Trajectory) -> Walk:
    """The case at every row of a trajectory, as one batch of shape (N,).

    case: usually a fixed flowpath; trajectory: its columns take the place of the case's own values, a member of a group that of the
    group. Returns: the Walk; a row without a solution has its status and reason. Errors: CaseError, naming the trajectory, where its
    columns do not fit the case or each other.
    """
    from cycle.result import solve

    try:
        return solve(case, trajectory.values)
    except CaseError as error:
        raise CaseError(replace(fault, file=trajectory.name) for fault in error.faults) from None


def read_trajectory(path: str | os.PathLike[str]) -> Trajectory:
    """Read and check a trajectory.

    path: of a regular CSV file, UTF-8, of at most 1 MiB, 20,000 rows and 32 columns. Returns: the Trajectory.
    Errors: CaseError with every fault: file, line, column, what was given and what is allowed; also where it cannot be read.
    """
    name = os.fspath(path)
    data, _ = read_named(name, LARGEST, "a file of rows")
    return parse_trajectory(data, name)


def parse_trajectory(text: str | bytes, name: str = "-") -> Trajectory:
    """Check the text of a trajectory.

    text: CSV, bytes as UTF-8, within the bounds of `read_trajectory`; name: for messages. Returns: the Trajectory.
    Errors: CaseError with every fault.
    """
    data = text.encode("utf-8", "surrogatepass") if isinstance(text, str) else text
    if len(data) > LARGEST:
        raise _one(name, "too large", f"more than {LARGEST} bytes", f"at most {LARGEST} bytes")
    try:
        decoded = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        raise _one(name, f"line {line} is not UTF-8 text", f"byte 0x{data[error.start]:02x}", "UTF-8") from None
    (_, head), *rows = _lines(decoded, name)
    columns = _columns(head, name)
    if not rows:
        raise _one(name, "no rows", "a header alone", f"1 to {MOST_ROWS} rows of numbers")
    return Trajectory(name, _values(columns, rows, name))


def _one(file: str, text: str, given: str = "", allowed: str = "") -> CaseError:
    return CaseError([Fault(file, "", text, given, allowed)])


def _lines(text: str, name: str) -> list[tuple[int, list[str]]]:
    """Line number and cells of every line that says something; the first one is the header."""
    found: list[tuple[int, list[str]]] = []
    for number, line in enumerate(_LINE_END.split(text), 1):
        if not line.strip() or line.lstrip().startswith("#"):
            continue
        if len(found) > MOST_ROWS:
            raise _one(name, "too many rows", f"more than {MOST_ROWS}", f"at most {MOST_ROWS}")
        try:
            cells = next(csv.reader(io.StringIO(line), skipinitialspace=True, strict=True))
        except csv.Error:
            raise _one(name, f"line {number} is not CSV", shown(line), "cells between commas, quotes in pairs") from None
        found.append((number, [cell.strip() for cell in cells]))
    if not found:
        raise _one(name, "the file is empty", "nothing", "a row of keys, then rows of numbers")
    return found


def _columns(head: list[str], name: str) -> list[_Column]:
    """What the header says. Nothing is read of the rows while it is at fault."""
    if len(head) > MOST_COLUMNS:
        raise _one(name, "too many columns", str(len(head)), f"at most {MOST_COLUMNS}")
    columns: list[_Column] = []
    faults: list[Fault] = []
    for position, cell in enumerate(head, 1):
        try:
            columns.append(_column(cell, f"header, column {position}", name))
        except CaseError as error:
            faults.extend(error.faults)
    faults.extend(_stated_twice([column.input.key for column in columns], name))
    if faults:
        raise CaseError(faults)
    return columns


def _column(cell: str, place: str, name: str) -> _Column:
    match = _HEAD.fullmatch(cell)
    entry = input_of(match[1]) if match else None
    if match is None or entry is None:
        allowed = "a key such as flight.mach, or flight.altitude [km]"
        raise CaseError([Fault(name, place, f"unknown key{_hint(match[1] if match else cell)}", shown(cell), allowed)])
    if entry.kind != "number":
        raise CaseError([Fault(name, place, "not an input that takes numbers", shown(cell), "the key of a number input")])
    unit = match[2]
    if unit is None:
        return _Column(entry, None)
    # a dash is how tables say "no unit"
    label = "" if entry.unit in ("ratio", "none") and unit.strip() == "-" else unit.strip()
    try:
        read(f"1 {label}", entry.unit)
    except UnitError as error:
        raise CaseError([Fault(name, place, error.text, shown(cell), error.allowed)]) from None
    return _Column(entry, label)


def _hint(text: str) -> str:
    numbers = [i for i in INPUTS if i.kind == "number"]
    keys = {i.name: i.key for i in reversed(numbers)} | {i.key: i.key for i in numbers}
    near = difflib.get_close_matches(text, list(keys), 1, 0.6)
    return f" (did you mean {keys[near[0]]}?)" if near else ""


def _stated_twice(keys: list[str], name: str) -> Iterator[Fault]:
    """Columns that say the same thing: one key twice, or two members of a group."""
    for key in dict.fromkeys(k for k in keys if keys.count(k) > 1):
        yield Fault(name, f"header, {key}", "stated more than once", f"{keys.count(key)} columns", "one")
    given = dict.fromkeys(keys, True)
    for group in (g for g in GROUPS if any(g in groups_of().get(key, ()) for key in given)):
        present = members_present(group, given)
        if len(present) > 1:
            there = ", ".join(key for member in present for key in member.keys if key in given)
            yield Fault(name, "header", f"{group.meaning} is stated more than once", there, "one of them")


def _values(columns: list[_Column], rows: list[tuple[int, list[str]]], name: str) -> dict[str, Array]:
    import numpy as np

    numbers: list[list[float]] = []
    faults: list[Fault] = []
    for line, cells in rows:
        if len(cells) != len(columns):
            given, allowed = f"{len(cells)} cells", f"{len(columns)}, as in the header"
            faults.append(Fault(name, f"line {line}", "the row does not fit the header", given, allowed))
            continue
        found = [_number(column, cell, f"line {line}, {column.input.key}", name) for column, cell in zip(columns, cells, strict=True)]
        faults.extend(part for part in found if isinstance(part, Fault))
        numbers.append([part for part in found if isinstance(part, float)])
    if faults:
        raise CaseError(faults)
    table = np.array(numbers).T
    return {column.input.key: values for column, values in zip(columns, table, strict=True)}


def _number(column: _Column, cell: str, place: str, name: str) -> float | Fault:
    """SI value of one cell, or what is wrong with it."""
    entry, unit = column.input, column.unit
    if not cell:
        return Fault(name, place, "no value", "an empty cell", bounds(entry))
    try:
        value = read(cell, entry.unit) if unit is None else read(f"{_bare(cell)} {unit}", entry.unit)
    except UnitError as error:
        allowed = bounds(entry) if unit is None else f"a number alone: the header states its unit [{unit}]"
        return Fault(name, place, error.text, shown(cell), allowed)
    return Fault(name, place, "out of bounds", shown(cell), bounds(entry)) if outside(entry, value) else value


def _bare(cell: str) -> str:
    """The cell, refused where it is more than a number."""
    read(cell, "none")
    return cell
