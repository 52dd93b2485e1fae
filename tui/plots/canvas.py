"""Dots in terminal cells: braille, two by four to a cell, or one plain character to a cell."""

from __future__ import annotations

from itertools import pairwise

from rich.style import Style

from tui.line import PLAIN, Cell, Line, cells, line, width
from tui.plots.paint import Glyphs

Dot = tuple[int, int]

_BRAILLE = 0x2800
_BITS = ((0x01, 0x02, 0x04, 0x40), (0x08, 0x10, 0x20, 0x80))
FINE: dict[Glyphs, tuple[int, int]] = {"unicode": (2, 4), "ascii": (1, 1)}
"""Dots in a cell, across and down."""


class Canvas:
    """A field of dots with an owner (a series) for each cell; the last to draw in a cell owns it.

    columns, rows: size in cells. glyphs: what a dot is made of. `trails[owner]` lists the cells of an owner in the order drawn.
    """

    def __init__(self, columns: int, rows: int, glyphs: Glyphs) -> None:
        self.columns, self.rows = columns, rows
        self.fine = FINE[glyphs]
        self.wide, self.high = columns * self.fine[0], rows * self.fine[1]
        self._masks: dict[Dot, int] = {}
        self._owners: dict[Dot, int] = {}
        self.trails: dict[int, list[Dot]] = {}

    def dot(self, x: int, y: int, owner: int) -> None:
        """Set the dot x from the left and y from the top."""
        cell = (x // self.fine[0], y // self.fine[1])
        self._masks[cell] = self._masks.get(cell, 0) | _BITS[x % self.fine[0]][y % self.fine[1]]
        self._owners[cell] = owner
        trail = self.trails.setdefault(owner, [])
        if not trail or trail[-1] != cell:
            trail.append(cell)

    def stroke(self, path: list[Dot], owner: int, pattern: str) -> None:
        """Join dots by straight lines; `pattern` of "1" and "0" is laid along the whole path and repeats."""
        if len(set(path)) == 1:
            self.dot(*path[0], owner)
        phase = 0
        for (x0, y0), (x1, y1) in pairwise(path):
            count = max(abs(x1 - x0), abs(y1 - y0))
            for n in range(count + 1):
                if pattern[(phase + n) % len(pattern)] == "1":
                    self.dot(x0 + _part(x1 - x0, n, count), y0 + _part(y1 - y0, n, count), owner)
            phase += count

    def owner(self, column: int, row: int) -> int | None:
        """Who drew in a cell, None where it is empty."""
        return self._owners.get((column, row))

    def braille(self, column: int, row: int) -> str:
        """The dots of a cell as one character."""
        return chr(_BRAILLE + self._masks.get((column, row), 0))


def _part(whole: int, n: int, count: int) -> int:
    """n of `count` equal parts of a whole, rounded half up in whole numbers."""
    return (2 * whole * n + count) // (2 * count) if count else 0


def blank(columns: int, rows: int) -> list[list[Cell]]:
    """Rows of empty cells."""
    return [[(" ", PLAIN)] * columns for _ in range(rows)]


def put(row: list[Cell], column: int, text: str, style: Style) -> None:
    """Write a text into a row of cells from `column` on; what lies outside is left out."""
    for n, cell in enumerate(cells(line((text, style)), width(text))):
        if 0 <= column + n < len(row):
            row[column + n] = cell


def joined(row: list[Cell]) -> Line:
    """A row of cells as styled pieces, neighbours of one style together, without blanks at the end."""
    end = len(row)
    while end and row[end - 1] == (" ", PLAIN):
        end -= 1
    pieces: list[Cell] = []
    for text, style in row[:end]:
        if pieces and pieces[-1][1] == style:
            pieces[-1] = (pieces[-1][0] + text, style)
        else:
            pieces.append((text, style))
    return tuple(pieces)
