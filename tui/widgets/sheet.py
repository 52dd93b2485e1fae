"""A widget that paints styled lines and repaints only the cells that changed."""

from __future__ import annotations

from collections.abc import Callable

from rich.segment import Segment
from textual.geometry import Region, Size
from textual.strip import Strip
from textual.widget import Widget

from tui.crash import defect
from tui.line import OVER, PLAIN, Cell, Line, cells, clean, line, reach, wrap


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


def painted(view: Callable[[], list[Line]], columns: int) -> list[Line]:
    """What a view gives; the words for a defect where it meets one. columns: the width for these."""
    try:
        return view()
    except Exception as error:
        return [line((part, OVER)) for part in wrap(clean(str(defect(error))).split(), columns)]


class Sheet(Widget):
    """Paints the lines it is given. `show` compares them with what stands there and repaints the difference."""

    DEFAULT_CSS = "Sheet { width: 1fr; height: 1fr; }"

    def __init__(self, *, id: str) -> None:
        super().__init__(id=id)
        self._lines: list[Line] = []
        self._rows: list[list[Cell]] = []
        self._strips: list[Strip] = []
        self._shown = Size(0, 0)

    def show(self, lines: list[Line], size: Size | None = None) -> None:
        """Paint `lines` from the top; what does not fit is left out, what is missing is blank.

        Parameters: lines; size, that of the widget, where it is known before the layout is made.
        """
        size = size or self.size
        if lines == self._lines and size == self._shown:
            return
        rows = [cells(content, size.width) for content in [*lines, *[()] * size.height][: size.height]]
        old, self._rows, self._lines = self._rows, rows, lines
        if size != self._shown:
            self._shown = size
            self._strips = [strip_of(row) for row in rows]
            self.refresh()
            return
        regions = []
        for y, (before, after) in enumerate(zip(old, rows, strict=True)):
            if before != after:
                self._strips[y] = strip_of(after)
                # a line is sent from its first cell whatever the region says, so a second region would send it twice
                regions.append(Region(0, y, reach(before, after), 1))
        if regions:
            self.refresh(*regions)

    def render_line(self, y: int) -> Strip:
        """The strip of line `y`."""
        return self._strips[y] if y < len(self._strips) else Strip([Segment(" " * self.size.width, PLAIN)])
