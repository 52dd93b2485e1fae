"""A chart as lines of cells."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial

from rich.style import Style

from tui.line import BOLD, PLAIN, Line, line, width
from tui.plots.board import Board, Flag, Key, Rows, lay
from tui.plots.canvas import FINE, Canvas, Dot, blank, put
from tui.plots.chart import Chart, Kind, Spot
from tui.plots.paint import Glyphs, Paint
from tui.plots.reading import PATTERNS, Across, Ends, Entry, Look, entries, looks, marks_of, points, reached, runs, tags
from tui.plots.scale import Scale, drawable, scale_of

POINT_MARKS: dict[Glyphs, str] = {"unicode": "●▲■◆○△", "ascii": "*+o=~@"}
LINES: dict[Glyphs, dict[tuple[Kind, Across], str]] = {
    "unicode": {
        ("limit", "x"): "┃", ("mode change", "x"): "┊", ("place", "x"): "┆", ("here", "x"): "│", ("pin", "x"): "╎",
        ("limit", "y"): "━", ("mode change", "y"): "┈", ("place", "y"): "┄", ("here", "y"): "─", ("pin", "y"): "╌",
    },
    "ascii": {
        ("limit", "x"): "!", ("mode change", "x"): ":", ("place", "x"): "'", ("here", "x"): "|", ("pin", "x"): ";",
        ("limit", "y"): "=", ("mode change", "y"): ".", ("place", "y"): "~", ("here", "y"): "-", ("pin", "y"): "_",
    },
}  # fmt: skip
_SPOT: dict[Glyphs, str] = {"unicode": "●", "ascii": "O"}
_SAMPLE = 6
_LETTERS_TWICE = 50
"""Columns of the field from which a line carries its letter at two places."""


def lay_chart(chart: Chart, columns: int, lines: int, colours: Paint, glyphs: Glyphs) -> list[Line] | None:
    """A chart that can be drawn, in `columns` by `lines`; None where there is no room."""
    marks = marks_of(u.status for u in chart.unsolved)
    board = Board(
        chart.title,
        chart.x_axis,
        chart.y_axis,
        partial(scale_of, chart.x_axis, reached(chart, "x")),
        partial(scale_of, chart.y_axis, reached(chart, "y")),
        partial(_field, chart, colours, glyphs),
        partial(_legend, chart, colours, glyphs),
        chart.notes,
        tuple(Flag(r.across, drawable(r.value), t, colours.rules[r.kind]) for r, t in zip(chart.rules, tags(chart.rules), strict=True)),
        tuple(Flag("x", x, marks[u.status], colours.unsolved) for u in chart.unsolved if (x := drawable(u.x)) == x),
    )
    return lay(board, columns, lines, glyphs)


def _style(look: Look, role: str, colours: Paint) -> Style:
    own = colours.series[look.hue]
    return own + BOLD if role == "now" else own


def mark_of(look: Look, glyphs: Glyphs) -> str:
    """The mark of a point, and in plain characters the stuff of a line; the letter where marks run out."""
    known = POINT_MARKS[glyphs]
    return known[look.mark] if look.mark < len(known) else look.letter


def _legend(chart: Chart, colours: Paint, glyphs: Glyphs, ends: Ends) -> list[Key]:
    return [Key(_sample(chart, e, colours, glyphs), e.words) for e in entries(chart, ends)]


def _sample(chart: Chart, entry: Entry, colours: Paint, glyphs: Glyphs) -> Line:
    if entry.what == "unsolved":
        return line((entry.tag, colours.unsolved))
    if entry.what == "spot":
        return line((f"{_SPOT[glyphs]} {entry.tag}", BOLD))
    if entry.what == "rule":
        rule = chart.rules[entry.index]
        return line((f"{LINES[glyphs][rule.kind, rule.across]} {entry.tag}", colours.rules[rule.kind]))
    series, look = chart.series[entry.index], looks(chart.series)[entry.index]
    style = _style(look, series.role, colours)
    if not series.joined:
        return line((mark_of(look, glyphs), style))
    if glyphs == "ascii":
        return line((mark_of(look, glyphs) * 3, style))
    strip = Canvas(_SAMPLE, 1, glyphs)
    strip.stroke([(0, 1), (strip.wide - 1, 1)], 0, PATTERNS[look.pattern][1])
    return line(("".join(strip.braille(n, 0) for n in range(_SAMPLE)) + (f" {look.letter}" if look.letter else ""), style))


def _field(chart: Chart, colours: Paint, glyphs: Glyphs, x: Scale, y: Scale, columns: int, rows: int) -> Rows:
    out = blank(columns, rows)
    styles = looks(chart.series)
    fine = FINE[glyphs]

    def dot(px: float, py: float) -> Dot:
        return x.place(px, columns * fine[0]), rows * fine[1] - 1 - y.place(py, rows * fine[1])

    _rules(out, chart, colours, glyphs, x, y, dot)
    canvas = Canvas(columns, rows, glyphs)
    lone: list[tuple[Dot, int]] = []
    order = sorted(range(len(chart.series)), key=lambda i: ("plain", "pin", "now").index(chart.series[i].role))
    for i in order:
        pattern = PATTERNS[styles[i].pattern][1] if glyphs == "unicode" else "1"
        for run in runs(points(chart.series[i]), chart.series[i].joined):
            path = [dot(*p) for p in run]
            if len(run) > 1:
                canvas.stroke(path, i, pattern)
            else:
                lone.append((path[0], i))
    for row in range(rows):
        for column in range(columns):
            owner = canvas.owner(column, row)
            if owner is not None:
                text = canvas.braille(column, row) if glyphs == "unicode" else mark_of(styles[owner], glyphs)
                out[row][column] = (text, _style(styles[owner], chart.series[owner].role, colours))
    for (px, py), i in lone:
        out[py // fine[1]][px // fine[0]] = (mark_of(styles[i], glyphs), _style(styles[i], chart.series[i].role, colours))
    if glyphs == "unicode":
        _letters(out, chart, styles, canvas, colours)
    _spots(out, chart.spots, glyphs, dot)
    return out


def _rules(out: Rows, chart: Chart, colours: Paint, glyphs: Glyphs, x: Scale, y: Scale, dot: Callable[[float, float], Dot]) -> None:
    fine = FINE[glyphs]
    for rule in chart.rules:
        scale, value = (x, drawable(rule.value)) if rule.across == "x" else (y, drawable(rule.value))
        if not scale.low <= value <= scale.high:
            continue
        cell = (LINES[glyphs][rule.kind, rule.across], colours.rules[rule.kind])
        if rule.across == "x":
            column = dot(value, y.low)[0] // fine[0]
            for row in out:
                row[column] = cell
        else:
            row_at = dot(x.low, value)[1] // fine[1]
            out[row_at] = [cell] * len(out[row_at])


def _letters(out: Rows, chart: Chart, styles: tuple[Look, ...], canvas: Canvas, colours: Paint) -> None:
    """A letter on each of several lines, at places of its own where it is on top."""
    times = 2 if canvas.columns >= _LETTERS_TWICE else 1
    for i, look in enumerate(styles):
        seen = [cell for cell in canvas.trails.get(i, []) if canvas.owner(*cell) == i]
        for n in range(times if seen and look.letter else 0):
            column, row = seen[int(len(seen) * (n + (i + 0.5) / len(styles)) / times)]
            out[row][column] = (look.letter, _style(look, chart.series[i].role, colours) + BOLD)


def _spots(out: Rows, spots: tuple[Spot, ...], glyphs: Glyphs, dot: Callable[[float, float], Dot]) -> None:
    """Marks with a label beside them, on the first side with empty cells; without a label where there is none."""
    fine = FINE[glyphs]
    places = []
    for spot in spots:
        at = drawable(spot.x), drawable(spot.y)
        if at[0] == at[0] and at[1] == at[1]:
            px, py = dot(*at)
            column, row = px // fine[0], py // fine[1]
            out[row][column] = (_SPOT[glyphs], BOLD)
            places.append((column, row, spot.label))
    for column, row, label in places:
        size = width(label)
        ends = (column + 1, column - size)
        sides = (*((c, row) for c in ends), (column, row - 1), (column, row + 1), (ends[0], row - 1), (ends[1], row + 1))
        free = (s for s in sides if _free(out, *s, size))
        place = next(free, None)
        if place is not None:
            put(out[place[1]], place[0], label, BOLD)


def _free(out: Rows, column: int, row: int, size: int) -> bool:
    inside = 0 <= row < len(out) and column >= 0 and column + size <= len(out[row])
    return inside and all(cell == (" ", PLAIN) for cell in out[row][column : column + size])
