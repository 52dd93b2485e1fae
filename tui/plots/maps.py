"""A map as lines of cells: bands of colour in half blocks with digits on their edges, or digits alone where there is no colour."""

from __future__ import annotations

from functools import partial

from rich.style import Style

from cycle.units import format_number
from tui.line import BOLD, PLAIN, Cell, Line, line
from tui.plots.board import Board, Key, Rows, lay
from tui.plots.chart import Grid
from tui.plots.levels import CURSOR, HERE, PIN, Levels, banded, edges, legend_of, levels_of, spread, statuses
from tui.plots.paint import Glyphs, Paint
from tui.plots.reading import Ends, marks_of, unsolved_entries
from tui.plots.scale import Scale, scale_of

_SIDE_FROM = 60


def lay_map(grid: Grid, columns: int, lines: int, colours: Paint, glyphs: Glyphs) -> list[Line] | None:
    """A map that can be drawn, in `columns` by `lines`; None where there is no room."""
    levels = levels_of(grid)
    board = Board(
        grid.title,
        grid.x_axis,
        grid.y_axis,
        partial(scale_of, grid.x_axis, grid.x, tight=True),
        partial(scale_of, grid.y_axis, grid.y, tight=True),
        partial(_field, grid, levels, colours, glyphs),
        partial(_legend, grid, levels, colours, glyphs),
        grid.notes,
        side_from=_SIDE_FROM,
    )
    return lay(board, columns, lines, glyphs)


def _legend(grid: Grid, levels: Levels, colours: Paint, glyphs: Glyphs, ends: Ends) -> list[Key]:
    bands = colours.bands(len(levels.contours) + 1)
    keys = [Key(_sample(n, bands, glyphs), text) for n, text in legend_of(levels)]
    for name, mark, place in (("here", HERE, grid.here), ("pin", PIN, grid.pin)):
        if place is not None:
            keys.append(Key(line((mark, BOLD)), f"{name}: {', '.join(map(format_number, place))}"))
    return [*keys, *(Key(line((e.tag, colours.unsolved)), e.words) for e in unsolved_entries(statuses(grid)))]


def _sample(n: int, bands: tuple[tuple[str, str], ...], glyphs: Glyphs) -> Line:
    """A contour: the colours above and below it, and its digit."""
    if not n:
        return ()
    if not bands:
        return line((str(n), BOLD))
    if glyphs == "unicode":
        return line(("▀▀", Style(color=bands[n][0], bgcolor=bands[n - 1][0])), (f" {n}", BOLD))
    return line((f" {n} ", Style(color=bands[n][1], bgcolor=bands[n][0])))


def _field(grid: Grid, levels: Levels, colours: Paint, glyphs: Glyphs, x: Scale, y: Scale, columns: int, rows: int) -> Rows:
    marks = marks_of(statuses(grid))
    grounds = colours.bands(len(levels.contours) + 1)
    halves = 2 if grounds and glyphs == "unicode" else 1
    bands = banded(grid, levels, x, y, columns, rows * halves)
    if grounds:
        pairs = zip(bands[::halves], bands[halves - 1 :: halves], strict=True)
        out = [[_coloured(a, b, grounds, marks, colours) for a, b in zip(top, bottom, strict=True)] for top, bottom in pairs]
    else:
        out = [[(marks[b], colours.unsolved) if isinstance(b, str) else (" ", PLAIN) for b in row] for row in bands]
    for own, places in edges(bands[::halves]).items():
        style = Style(color=grounds[own][1], bgcolor=grounds[own][0], bold=True) if grounds else PLAIN
        for r, c in spread(places) if grounds else places:
            out[r][c] = (str(own), style)
    for mark, place in ((PIN, grid.pin), (HERE, grid.here), (CURSOR, grid.cursor)):
        if place is not None and x.low <= place[0] <= x.high and y.low <= place[1] <= y.high:
            out[rows - 1 - y.place(place[1], rows)][x.place(place[0], columns)] = (mark, Style(bold=True, reverse=True))
    return out


def _coloured(top: int | str, bottom: int | str, grounds: tuple[tuple[str, str], ...], marks: dict[str, str], colours: Paint) -> Cell:
    if isinstance(top, str):
        if isinstance(bottom, str):
            return marks[top], colours.unsolved
        return "▄", Style(color=grounds[bottom][0])
    if isinstance(bottom, str):
        return "▀", Style(color=grounds[top][0])
    if top == bottom:
        return " ", Style(bgcolor=grounds[top][0])
    return "▀", Style(color=grounds[top][0], bgcolor=grounds[bottom][0])
