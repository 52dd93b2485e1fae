"""The command `compare`: cases and stored walks side by side."""

from __future__ import annotations

import argparse
import math
from collections.abc import Iterable, Iterator, Mapping, Sequence

import cycle
from cycle.case import loads
from cycle.compare import DATUM, Comparison, Figure, Setting, Side, compare, station_names
from cycle.errors import CaseError, DuctwalkError
from cycle.gas.species import data_hash
from cycle.quantities import Output
from cycle.record import LARGEST_FILE, case_of, is_stored, read_stored, record
from cycle.shares import shares
from cycle.units import display_unit, format_number
from tui.influence import blocks_of_shares
from tui.output import emit, read_content, tell
from tui.solve import AUDIT_FAILED, BAD_INPUT, NO_SOLUTION, SOLVED
from tui.tables import Block, Heading, Lines, Table, as_text
from tui.text import CAUTION, figure, input_text, named, unit_label

_LETTERS = "ABCDEFGHIJKLMNOPQRSTUVWXYZ"
_AGAIN = 1e-6
"""Relative difference of a figure up to which a walk is the stored one."""

LEAST_CHANGE = 5e-6
"""Relative change that a table of percentages shows as more than zero."""


def run(options: argparse.Namespace) -> int:
    """Compare the walks of the command line; returns the highest exit status of them."""
    sides: list[Side] = []
    faulty = False
    for name in options.cases:
        try:
            sides += read_sides(name)
        except CaseError as error:
            tell(str(error))
            faulty = True
    if faulty:
        return BAD_INPUT
    if not 2 <= len(sides) <= len(_LETTERS):
        raise DuctwalkError(f"compare takes 2 to {len(_LETTERS)} walks: {len(sides)} given")
    emit(as_text(comparison_blocks(compare(sides), options.units, share_blocks(sides, options.units))))
    return max(_status(side) for side in sides)


def read_sides(name: str) -> list[Side]:
    """The walks of a file: stored ones as they are, a case after solving it. Raises CaseError."""
    content = read_content(name, LARGEST_FILE)
    if is_stored(content):
        return [Side(f"{s.name} ({name})", s.walk, s.version, s.species_data) for s in read_stored(content, name)]
    walk = cycle.solve(loads(content, name))
    return [Side(name, record(walk), cycle.__version__, data_hash())]


def _status(side: Side) -> int:
    if side.walk["status"] != "solved":
        return NO_SOLUTION
    return SOLVED if side.walk["audit"].get("ok") is True else AUDIT_FAILED


def comparison_blocks(found: Comparison, system: str, more: Iterable[Block] = ()) -> list[Block]:
    """The comparison as blocks. system: "si" or "us"; more: blocks behind the headline figures."""
    letters = _LETTERS[: len(found.sides)]
    blocks: list[Block] = [Heading("Comparison", 1), Lines(tuple(_legend(found)))]
    blocks += [Lines(found.notes)] if found.notes else []
    blocks += [Heading("Inputs that differ"), _settings(found.settings, letters, system)]
    blocks += [Heading("Performance"), _headline(found.headline, letters, system), *more]
    if found.margins:
        blocks += [Heading("Margins of the modes"), _margins(found.margins, letters)]
    for i in range(1, len(found.sides)):
        blocks += [Heading(f"Stations: change from A to {letters[i]}, % or in the unit named"), _station_changes(found, i, system)]
    return [*blocks, Heading("Caution"), Lines((CAUTION,))]


def share_blocks(sides: Sequence[Side], system: str) -> Iterator[Block]:
    """Where the headline figures of every side less those of the first come from. system: "si" or "us"."""
    first, *others = sides
    for letter, side in zip(_LETTERS[1:], others, strict=False):
        yield Heading(f"Where the difference comes from, {letter} - A, by groups of inputs")
        try:
            found = shares(case_of(first.walk["case"], "A"), case_of(side.walk["case"], letter))
        except CaseError as error:
            yield Lines((f"Not assessed: a stored case is none of this version: {error.faults[0].text}",))
            continue
        yield from blocks_of_shares(found, system, recomputed({"A": (first, found.first), letter: (side, found.second)}))


def recomputed(ends: Mapping[str, tuple[Side, Mapping[str, float]]]) -> Iterator[str]:
    """A sentence for every stored walk that this version does not give again."""
    for letter, (side, values) in ends.items():
        stored = side.walk["performance"]
        if any(not math.isclose(value, stored.get(key) or 0.0, rel_tol=_AGAIN) for key, value in values.items() if math.isfinite(value)):
            yield f"{letter} computed by this version is not the stored walk: these are shares of the walks computed here."


def _legend(found: Comparison) -> Iterable[str]:
    for letter, side in zip(_LETTERS, found.sides, strict=False):
        mode = side.walk["mode"] if side.walk["status"] == "solved" else side.walk["status"]
        yield f"{letter}: {side.name}: {side.walk['case'].get('title', '')}; {mode}"


def _settings(settings: Iterable[Setting], letters: str, system: str) -> Block:
    rows = []
    for setting in settings:
        entry = setting.input
        name = named(entry.key, entry.unit, system, entry.key) if entry.kind == "number" else entry.key
        rows.append((name, *(input_text(entry, value, system) for value in setting.values)))
    return Table(("", *letters), tuple(rows)) if rows else Lines(("none",))


def _headline(figures: Iterable[Figure], letters: str, system: str) -> Block:
    heads = [head for letter in letters for head in ((letter,) if letter == "A" else (letter, f"{letter} - A, %"))]
    rows = []
    for row in figures:
        cells = [cell for i in range(len(letters)) for cell in _cells(row, i, system)]
        rows.append((row.output.label, unit_label(row.output.unit, system, row.output.key), *cells))
    return Table(("", "unit", *heads), tuple(rows), left=(1,))


def _margins(figures: Iterable[Figure], letters: str) -> Block:
    """Margins and borders side by side; a change of a margin in percent would say nothing."""
    rows = ((row.output.label, *(format_number(value) for value in row.values)) for row in figures)
    return Table(("", *letters), tuple(rows))


def _cells(row: Figure, i: int, system: str) -> tuple[str, ...]:
    value = figure(row.values[i], row.output.unit, system, row.output.key)
    return (value,) if i == 0 else (value, percent(row.changes()[i]))


def _station_changes(found: Comparison, i: int, system: str) -> Block:
    names = station_names(found.sides)
    table: dict[Output, dict[str, str]] = {}
    largest: dict[Output, float] = {}
    for row in found.stations:
        largest[row.output] = max([largest.get(row.output, 0.0), *(abs(v) for v in row.values if not math.isnan(v))])
    for row in found.stations:
        table.setdefault(row.output, {})[row.station] = _change(row, i, system, largest[row.output])
    rows = [(_change_name(o, system), *(cells.get(n, "-") for n in names)) for o, cells in table.items()]
    shown = tuple(row for row in rows if any(cell not in ("-", "0") for cell in row[1:]))
    return Table(("station", *names), shown) if shown else Lines(("none",))


def _change_name(output: Output, system: str) -> str:
    return named(output.label, output.unit, system, output.key) if output.key in DATUM else output.label


def _change(row: Figure, i: int, system: str, largest: float) -> str:
    """Change of a figure; largest: of all stations, beside which rounding is none."""
    change = row.changes()[i]
    if row.relative:
        return percent(change)
    if abs(change) <= LEAST_CHANGE * largest:
        return "0"
    text = format_number(change / display_unit(row.output.unit, system, row.output.key).factor, 3)
    return "+" + text if change > 0.0 else text


def percent(change: float) -> str:
    """A relative change in percent with its sign; "0" below what is worth showing, "-" for NaN."""
    if math.isnan(change):
        return "-"
    if abs(change) < LEAST_CHANGE:
        return "0"
    return ("+" if change > 0 else "") + format_number(100.0 * change, 3)
