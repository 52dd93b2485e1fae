"""A widget that paints styled lines and repaints only the cells that changed."""

from __future__ import annotations

from rich.segment import Segment
from textual.geometry import Region
from textual.strip import Strip
from textual.widget import Widget

from tui.line import PLAIN, Cell, Line, cells, changed

GAP = 12
"""Unchanged cells between two changed ones that are cheaper to repaint than to jump over."""


def strip_of(row: list[Cell]) -> Strip:
    """Neighbouring cells of one style as one segment; every segment has a style."""
    segments: list[Segment] = []
    text, style = "", PLAIN
    for character, own in row:
        if own is not style and own != style and text:
            segments.append(Segment(text, style))
            text = ""
        text, style = text + character, own
    segments.append(Segment(text, style))
    return Strip(segments, len(row))


class Sheet(Widget):
    """Paints the lines it is given. `show` compares them with what stands there and repaints the difference."""

    DEFAULT_CSS = "Sheet { width: 1fr; height: 1fr; }"

    def __init__(self, *, id: str) -> None:
        super().__init__(id=id)
        self._lines: list[Line] = []
        self._rows: list[list[Cell]] = []
        self._strips: list[Strip] = []

    def show(self, lines: list[Line]) -> None:
        """Paint `lines` from the top; what does not fit the widget is left out, what is missing is blank."""
        if lines == self._lines and len(self._rows) == self.size.height:
            return
        self._lines = lines
        columns, height = self.size
        rows = [cells(content, columns) for content in [*lines, *[()] * height][:height]]
        old, self._rows = self._rows, rows
        fits = len(old) == height and all(len(row) == columns for row in old)
        if not fits:
            self._strips = [strip_of(row) for row in rows]
            self.refresh()
            return
        regions = []
        for y, (before, after) in enumerate(zip(old, rows, strict=True)):
            if before != after:
                self._strips[y] = strip_of(after)
                regions += [Region(x, y, length, 1) for x, length in changed(before, after, GAP)]
        if regions:
            self.refresh(*regions)

    def render_line(self, y: int) -> Strip:
        """The strip of line `y`."""
        return self._strips[y] if y < len(self._strips) else Strip([Segment(" " * self.size.width, PLAIN)])
