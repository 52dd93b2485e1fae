"""Walks beside each other: headline figures, where the difference comes from, inputs that differ, margins, stations."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from cycle.compare import DATUM, Comparison, Figure, Setting, Side, compare, station_names
from cycle.quantities import HEADLINE, OUTPUT, Input, Output
from cycle.units import display_unit, format_number
from tui.comparing import percent, recomputed
from tui.influence import change
from tui.line import BOLD, DIM, NEAR, PLAIN, Line, Piece, clean, fit, line, width
from tui.screens.page import text_body
from tui.text import figure, input_text, unit_label

if TYPE_CHECKING:
    from cycle.case import Case
    from cycle.shares import Part, Shares

LETTERS = "ABCDEFGHIJKLMNOPQRSTUVWXYZ"
WAITING = "shares are being computed ..."
CELL = 10
"""Columns of a figure, a blank before it among them."""
MOST_LABEL, LEAST_LABEL, UNIT = 27, 12, 10


@dataclass(slots=True)
class Walked:
    """One walk of the comparison: the side that `cycle.compare` takes, its case, and where its difference from the first one comes
    from, None while that is computed."""

    side: Side
    case: Case
    shares: Shares | None = None


@dataclass(slots=True)
class Beside:
    """What the comparison shows. walks: the first one is what the others are measured against; hand: the one whose differences are shown;
    relative: changes of the stations in percent, else in units."""

    walks: list[Walked]
    hand: int = 1
    relative: bool = True

    @property
    def letter(self) -> str:
        """Letter of the walk in hand."""
        return LETTERS[self.hand]

    def shown(self, wide: int) -> list[int]:
        """Walks that fit side by side: the first one, and those from the one in hand on, or before it where there is room."""
        room = max(1, (wide - LEAST_LABEL - UNIT) // CELL - 3)
        last = len(self.walks) - 1
        start = max(1, min(self.hand, last - room + 1))
        return [0, *range(start, min(start + room, last + 1))]


def lines(view: Beside, system: str, watched: str, wide: int) -> list[Line]:
    """The whole comparison.

    Parameters: view; system, "si" or "us"; watched, key of the figure that the bars of the shares are drawn for; wide, columns.
    """
    if len(view.walks) < 2:
        return [*_legend(view, wide), line(""), *text_body([_ALONE])(wide)]
    found = compare([walk.side for walk in view.walks])
    body = _legend(view, wide)
    body += [line((text, NEAR)) for note in found.notes for text in _wrapped(note, wide)]
    parts = (_headline, _shares, _settings, _performance, _margins, _stations)
    return body + [row for part in parts for row in part(view, found, system, watched, wide)]


_ALONE = (
    "Nothing to compare with: nothing is pinned, or the pinned walk is this one. a adds a case, a stored walk or a moment of this "
    "session; p on the main screen pins the walk there, P another one."
)


def _wrapped(text: str, wide: int) -> list[str]:
    return ["".join(piece for piece, _ in row) for row in text_body([text])(wide)]


def _legend(view: Beside, wide: int) -> list[Line]:
    out = []
    for i, walk in enumerate(view.walks):
        record = walk.side.walk
        mode = record["mode"] if record["status"] == "solved" else f"no solution, {record['status']}"
        words = f"{LETTERS[i]}  {walk.side.name}: {record['case'].get('title', '')}; {mode}"
        out.append(line((fit(clean(words), wide), BOLD if i in (0, view.hand) else PLAIN)))
    return out


@dataclass(frozen=True, slots=True)
class _Row:
    label: str
    unit: str
    cells: tuple[str, ...]


def _grid(title: str, heads: Sequence[str], rows: Iterable[_Row], wide: int) -> list[Line]:
    """A title with column heads, and a row each; columns that find no room follow below."""
    rows = tuple(rows)
    unit = UNIT if any(row.unit for row in rows) else 0
    room = max(LEAST_LABEL, min(MOST_LABEL, wide - unit - CELL * len(heads)))
    fitting = max(1, (wide - room - unit) // CELL)
    out: list[Line] = [line("")]
    if width(title) >= room + unit:
        out.append(line((fit(title, wide), BOLD)))
        title = ""
    for start in range(0, len(heads), fitting):
        part = slice(start, start + fitting)
        out.append(line((_left(title if not start else "", room + unit), BOLD), *(_right(head) for head in heads[part])))
        out += [line(_left(row.label, room), (_left(row.unit, unit), DIM), *(_right(c) for c in row.cells[part])) for row in rows]
    return out


def _left(text: str, room: int) -> str:
    kept = fit(clean(text), room - 1) if room else ""
    return kept + " " * (room - width(kept))


def _right(text: str) -> str:
    kept = fit(clean(text), CELL - 1)
    return " " * (CELL - width(kept)) + kept


def _heads(view: Beside, shown: list[int]) -> list[str]:
    """Letters over the columns, that of the walk in hand in brackets."""
    return [f"[{LETTERS[i]}]" if i == view.hand else LETTERS[i] for i in shown]


def _change_heads(view: Beside) -> list[str]:
    return [f"{view.letter} - A", "%"]


def _headline(view: Beside, found: Comparison, system: str, watched: str, wide: int) -> list[Line]:
    """The figures that the main screen shows on top."""
    keys = _judged_by(view)
    return _figures(view, "headline figures", [row for row in found.headline if row.output.key in keys], system, wide)


def _performance(view: Beside, found: Comparison, system: str, watched: str, wide: int) -> list[Line]:
    """All other figures of the engine."""
    keys = _judged_by(view)
    return _figures(view, "other figures of the engine", [row for row in found.headline if row.output.key not in keys], system, wide)


def _judged_by(view: Beside) -> set[str]:
    """Keys of the headline figures of the walks."""
    return {key for walk in view.walks for key in HEADLINE[walk.case.choices["start"]]}


def _figures(view: Beside, title: str, figures: list[Figure], system: str, wide: int) -> list[Line]:
    if not figures:
        return []
    shown = view.shown(wide)
    rows = []
    for row in figures:
        o = row.output
        values = [figure(row.values[i], o.unit, system, o.key) for i in shown]
        part = percent(row.changes()[view.hand])
        moved = part if part == "0" else _change(o, row.values[view.hand] - row.values[0], row.values[0], system)
        rows.append(_Row(o.label, unit_label(o.unit, system, o.key), (*values, moved, part)))
    return _grid(title, _heads(view, shown) + _change_heads(view), rows, wide)


def _settings(view: Beside, found: Comparison, system: str, watched: str, wide: int) -> list[Line]:
    shown = view.shown(wide)
    rows = []
    for setting in found.settings:
        entry, values = setting.input, setting.values
        unit = unit_label(entry.unit, system, entry.key) if entry.kind == "number" else ""
        rows.append(_Row(entry.label, unit, (*(input_text(entry, values[i], system) for i in shown), *_moved(view, setting, system))))
    if not rows:
        return [line(""), line(("inputs that differ", BOLD), "  none")]
    return _grid("inputs that differ", _heads(view, shown) + _change_heads(view), rows, wide)


def _moved(view: Beside, setting: Setting, system: str) -> tuple[str, str]:
    """Difference and change in percent of a number that both have."""
    entry, one, other = setting.input, setting.values[0], setting.values[view.hand]
    if entry.kind != "number" or not isinstance(one, int | float) or not isinstance(other, int | float):
        return "", ""
    told = "0" if one == other else _signed(_shown_change(entry, other - one, system))
    return told, percent((other - one) / abs(one) if one else math.nan)


def _shown_change(entry: Input | Output, change: float, system: str) -> float:

    return change / display_unit(entry.unit, system, entry.key).factor


def _signed(value: float) -> str:
    text = format_number(value, 3)
    return f"+{text}" if value > 0.0 else text


def _margins(view: Beside, found: Comparison, system: str, watched: str, wide: int) -> list[Line]:
    shown = view.shown(wide)
    rows = []
    for row in found.margins:
        moved = _change(row.output, row.values[view.hand] - row.values[0], row.values[0], system)
        rows.append(_Row(row.output.label, "", (*(format_number(row.values[i]) for i in shown), moved)))
    return _grid("margins of the modes", _heads(view, shown) + _change_heads(view)[:1], rows, wide) if rows else []


def _stations(view: Beside, found: Comparison, system: str, watched: str, wide: int) -> list[Line]:
    title = f"stations: {view.letter} - A{', %' if view.relative else ''}"
    names = station_names([view.walks[0].side, view.walks[view.hand].side])
    table: dict[Output, list[Figure]] = {}
    for row in found.stations:
        table.setdefault(row.output, []).append(row)
    room = max(LEAST_LABEL, min(MOST_LABEL, wide - CELL * len(names)))
    rows = []
    for output, figures in table.items():
        relative = view.relative and output.key not in DATUM
        cells = _percents(view, figures) if relative else _differences(view, figures, system)
        if any(cells.get(n, "-") not in ("-", "0") for n in names):
            unit = "" if relative else unit_label(output.unit, system, output.key)
            rows.append(_Row(_label(output, unit, room), "", tuple(cells.get(n, "-") for n in names)))
    if not rows:
        return [line(""), line((title, BOLD), "  no change")]
    return _grid(title, names, rows, wide)


def _label(output: Output, unit: str, room: int) -> str:
    """Label and unit of a row; the symbol stands for a label that finds no room."""
    whole = f"{output.label}, {unit}" if unit else output.label
    return whole if width(whole) < room else whole.replace(output.label, output.symbol)


def _percents(view: Beside, figures: Iterable[Figure]) -> dict[str, str]:
    return {row.station: percent(row.changes()[view.hand]) for row in figures}


def _differences(view: Beside, figures: Sequence[Figure], system: str) -> dict[str, str]:
    """Differences of one figure; what is small beside its largest value anywhere is rounding."""
    known = (abs(row.values[i]) for row in figures for i in (0, view.hand) if not math.isnan(row.values[i]))
    largest = max(known, default=0.0)
    return {row.station: _change(row.output, row.values[view.hand] - row.values[0], largest, system) for row in figures}


def _change(output: Output, value: float, base: float, system: str) -> str:
    """A change in the unit shown, with as many digits as the column takes."""
    text = change(value, output, base, system)
    if len(text) < CELL:
        return text
    shown = value / display_unit(output.unit, system, output.key).factor
    return f"{'+' if shown > 0.0 else ''}{format_number(shown, 2)}"


def _shares(view: Beside, found: Comparison, system: str, watched: str, wide: int) -> list[Line]:
    title = (f"where {view.letter} - A comes from, by groups of inputs", BOLD)
    shares = view.walks[view.hand].shares
    if shares is None:
        return [line(""), line(title), line(WAITING)]
    if shares.why_not:
        return [
            line(""),
            line(title),
            *(line(text) for text in _wrapped("; ".join((f"not attributed: {shares.why_not}", *shares.notes)), wide)),
        ]
    bars = watched if watched in shares.outputs else shares.outputs[0]
    ends = {"A": (found.sides[0], shares.first), view.letter: (found.sides[view.hand], shares.second)}
    said = [*recomputed(ends), *shares.notes]
    out = [line(""), line(title), *_share_rows(shares, bars, system, wide)]
    return out + [line((text, DIM)) for note in said for text in _wrapped(note, wide)]


def _share_rows(shares: Shares, bars: str, system: str, wide: int) -> list[Line]:
    room = max(LEAST_LABEL, min(MOST_LABEL, wide - CELL * len(shares.outputs) - 14))
    outputs = shares.outputs[: max(1, (wide - room) // CELL)]
    outputs = outputs if bars in outputs else (bars, *outputs[1:])
    heads = [OUTPUT[key] for key in outputs]
    long = max(0, wide - room - CELL * len(outputs) - 2)
    rows = [line(_left("", room), *(_right(o.symbol) for o in heads), (f"  {OUTPUT[bars].symbol}" if long > 4 else "", DIM))]
    rows.append(line(_left("", room), *((_right(unit_label(o.unit, system, o.key)), DIM) for o in heads)))
    scale = max((abs(part.shares[bars]) for part in shares.parts), default=0.0)
    for part in sorted(shares.parts, key=lambda p: -abs(p.shares[bars])):
        cells = [_right(_share(shares, key, part.shares[key], system)) for key in outputs]
        rows.append(line(_left(" + ".join(part.groups), room), *cells, _bar(part, bars, scale, long)))
    total = {key: math.fsum(part.shares[key] for part in shares.parts) for key in outputs}
    rows.append(line((_left("together", room), BOLD), *((_right(_share(shares, k, total[k], system)), BOLD) for k in outputs)))
    return rows


def _share(shares: Shares, key: str, value: float, system: str) -> str:
    return _change(OUTPUT[key], value, max(abs(shares.first[key]), abs(shares.second[key])), system)


def _bar(part: Part, key: str, scale: float, long: int) -> Piece:
    """Signs as long as the share is large, so that it reads without colour."""
    value = part.shares[key]
    count = round(long * abs(value) / scale) if scale else 0
    return "  " + ("+" if value > 0.0 else "-") * count, PLAIN
