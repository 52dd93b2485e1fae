"""Where the parts of a picture stand: title, axes with their ticks and headings, the field in the middle, legend, notes."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

from rich.style import Style

from tui.line import BOLD, DIM, PLAIN, Cell, Line, fit, line, width, wrap
from tui.plots.canvas import FINE, blank, joined, put
from tui.plots.chart import Axis
from tui.plots.paint import Glyphs
from tui.plots.reading import Across, Ends
from tui.plots.scale import Scale, heading

Rows = list[list[Cell]]

_LEAST_ROWS, _LEAST_COLUMNS = 4, 12
_FIELD_SHARE = 0.42
"""Share of the lines that the field keeps before legend and notes get any."""

_GAP = 3
_SIDE_WIDEST = 36
_FRAME: dict[Glyphs, dict[str, str]] = {
    "unicode": {"y": "│", "y tick": "┤", "x": "─", "x tick": "┬", "corner": "└"},
    "ascii": {"y": "|", "y tick": "+", "x": "-", "x tick": "+", "corner": "+"},
}


@dataclass(frozen=True, slots=True)
class Key:
    """A line of a legend: what it looks like in the picture, and the words."""

    sample: Line
    words: str

    @property
    def indent(self) -> int:
        """Columns of the sample and the space behind it."""
        taken = sum(width(text) for text, _ in self.sample)
        return taken + 1 if taken else 0


@dataclass(frozen=True, slots=True)
class Flag:
    """A tag or mark at the edge of the field: along which axis, at which value, its text and style."""

    across: Across
    value: float
    text: str
    style: Style


@dataclass(frozen=True, slots=True)
class Board:
    """A picture but for its size. x_scale, y_scale: of at most so many ticks. body: the field's cells for both scales, columns
    and rows. legend: for the ends of the axes. flags: tags of rules. marks: on the x axis itself. side_from: columns from
    which the legend stands beside the field."""

    title: str
    x_axis: Axis
    y_axis: Axis
    x_scale: Callable[[int], Scale]
    y_scale: Callable[[int], Scale]
    body: Callable[[Scale, Scale, int, int], Rows]
    legend: Callable[[Ends], list[Key]]
    notes: tuple[str, ...]
    flags: tuple[Flag, ...] = field(default=())
    marks: tuple[Flag, ...] = field(default=())
    side_from: int = 100


def lay(board: Board, columns: int, lines: int, glyphs: Glyphs) -> list[Line] | None:
    """The board in `columns` by `lines`, None where there is no room for a picture."""
    above = 2 + any(f.across == "x" for f in board.flags)
    rows = lines - above - 3
    if rows < _LEAST_ROWS or columns < _LEAST_COLUMNS:
        return None
    keys = board.legend(_ends(board.x_scale(5), board.y_scale(5)))
    side = min(_SIDE_WIDEST, columns // 3) if columns >= board.side_from and keys else 0
    spare = rows - max(_LEAST_ROWS, round(_FIELD_SHARE * lines))
    below = 0 if side else max(0, min(spare, len(_flowing(keys, columns))))
    notes = [n for words in board.notes for n in wrap(words.split(), columns)][: max(0, spare - below)]
    rows -= below + len(notes)
    y = board.y_scale(max(4, rows // 3 + 1))
    gutter = max(width(t.text) for t in y.ticks)
    margin = max((1 + width(f.text) for f in board.flags if f.across == "y"), default=0)
    wide = columns - gutter - 1 - margin - (side + 1 if side else 0)
    if wide < _LEAST_COLUMNS:
        return None
    x = _roomy(board.x_scale, wide)
    left = _Left(board, x, y, gutter, wide, rows, margin, glyphs)
    picture = left.picture()
    keys = board.legend(_ends(x, y))
    if side:
        picture = _beside(picture, _standing(keys, side, len(picture)), columns - side)
    out = [line((fit(board.title, columns), BOLD)), *picture]
    out += _cut(keys, columns, below)
    return [*out, *(line((n, DIM)) for n in notes)]


def _ends(x: Scale, y: Scale) -> Ends:
    return {"x": (x.low, x.high), "y": (y.low, y.high)}


def _roomy(scale: Callable[[int], Scale], wide: int) -> Scale:
    """The scale with most labels that stand apart."""
    for most in range(max(2, wide // 5), 2, -1):
        found = scale(most)
        if len(found.ticks) * (_GAP + max(len(t.text) for t in found.ticks)) <= wide + _GAP:
            return found
    return scale(2)


@dataclass(frozen=True, slots=True)
class _Left:
    """The picture without title, legend and notes."""

    board: Board
    x: Scale
    y: Scale
    gutter: int
    wide: int
    rows: int
    margin: int
    glyphs: Glyphs

    @property
    def start(self) -> int:
        return self.gutter + 1

    def column(self, value: float) -> int:
        fine = FINE[self.glyphs][0]
        return self.x.place(value, self.wide * fine) // fine

    def row(self, value: float) -> int:
        fine = FINE[self.glyphs][1]
        return self.rows - 1 - self.y.place(value, self.rows * fine) // fine

    def picture(self) -> list[Line]:
        whole = self.start + self.wide + self.margin
        out = [line((fit(heading(self.board.y_axis, self.y.power), whole), PLAIN))]
        if any(f.across == "x" for f in self.board.flags):
            out.append(joined(self._tags(whole)))
        out += map(joined, self._field(whole))
        out.append(joined(self._axis(whole)))
        out.append(joined(self._labels(whole)))
        name = fit(heading(self.board.x_axis, self.x.power), whole)
        pad = min(max(0, self.start + (self.wide - width(name)) // 2), whole - width(name))
        return [*out, line(" " * pad + name)]

    def _tags(self, whole: int) -> list[Cell]:
        row = blank(whole, 1)[0]
        free = 0
        inside = (f for f in self.board.flags if f.across == "x" and self.x.low <= f.value <= self.x.high)
        for flag in sorted(inside, key=lambda f: f.value):
            at = max(free, min(self.start + self.column(flag.value), whole - width(flag.text)))
            put(row, at, flag.text, flag.style)
            free = at + width(flag.text) + 1
        return row

    def _field(self, whole: int) -> Rows:
        marks = _FRAME[self.glyphs]
        body = self.board.body(self.x, self.y, self.wide, self.rows)
        out = [[*[(" ", PLAIN)] * self.gutter, (marks["y"], PLAIN), *cells, *[(" ", PLAIN)] * self.margin] for cells in body]
        for value in self.y.fewer(self.rows - 1):
            out[self.row(value)][self.gutter] = (marks["y tick"], PLAIN)
        labelled = set()
        for tick in self.y.ticks:
            at = self.row(tick.value)
            if at not in labelled:
                labelled.add(at)
                put(out[at], self.gutter - width(tick.text), tick.text, PLAIN)
                out[at][self.gutter] = (marks["y tick"], PLAIN)
        for flag in self.board.flags:
            if flag.across == "y" and self.y.low <= flag.value <= self.y.high:
                put(out[self.row(flag.value)], whole - self.margin + 1, flag.text, flag.style)
        return out

    def _axis(self, whole: int) -> list[Cell]:
        marks = _FRAME[self.glyphs]
        row = blank(whole, 1)[0]
        put(row, self.gutter, marks["corner"] + marks["x"] * self.wide, PLAIN)
        for value in (*self.x.fewer(self.wide // 2), *(t.value for t in self.x.ticks)):
            put(row, self.start + self.column(value), marks["x tick"], PLAIN)
        for flag in self.board.marks:
            put(row, self.start + self.column(flag.value), flag.text, flag.style)
        return row

    def _labels(self, whole: int) -> list[Cell]:
        row, taken = blank(whole, 1)[0], [False] * (whole + 2)
        for tick in (self.x.ticks[0], self.x.ticks[-1], *self.x.ticks[1:-1]):
            size = width(tick.text)
            at = min(max(0, self.start + self.column(tick.value) - size // 2), whole - size)
            if at >= 0 and not any(taken[at : at + size + 2]):
                put(row, at, tick.text, PLAIN)
                taken[at + 1 : at + size + 1] = [True] * size
        return row


def _flowing(keys: list[Key], columns: int) -> list[list[Key]]:
    """Keys in lines one below the other, as many to a line as fit."""
    out: list[list[Key]] = []
    used = 0
    for key in keys:
        size = key.indent + width(key.words)
        if out and used + _GAP + size <= columns:
            out[-1].append(key)
            used += _GAP + size
        else:
            out.append([key])
            used = size
    return out


def _cut(keys: list[Key], columns: int, most: int) -> list[Line]:
    """The legend below the field in exactly `most` lines; what finds no room is counted at its end."""
    rows = _flowing(keys, columns)
    if len(rows) <= most:
        return [*(_row_of(row, columns) for row in rows), *[()] * (most - len(rows))]
    if not most:
        return []
    last, left = list(rows[most - 1]), sum(map(len, rows[most:]))
    while last and _size(last) + _GAP + width(_more(left)) > columns:
        last.pop()
        left += 1
    end = line((" " * (_GAP if last else 0) + fit(_more(left), columns), DIM))
    return [*(_row_of(row, columns) for row in rows[: most - 1]), (*_row_of(last, columns), *end)]


def _more(number: int) -> str:
    return f"{number} more with more room"


def _size(keys: list[Key]) -> int:
    return sum(key.indent + width(key.words) for key in keys) + _GAP * (len(keys) - 1)


def _row_of(keys: list[Key], columns: int) -> Line:
    pieces: list[Cell] = []
    for key in keys:
        pieces += [(" " * _GAP, PLAIN)] if pieces else []
        pieces += [*key.sample, (" " * (key.indent > 0), PLAIN)]
        pieces.append((fit(key.words, max(0, columns - key.indent)), PLAIN))
    return tuple(p for p in pieces if p[0])


def _standing(keys: list[Key], columns: int, most: int) -> list[Line]:
    """The legend beside the field, at most `most` lines."""
    out: list[Line] = []
    for n, key in enumerate(keys):
        words = wrap(key.words.split(), columns - key.indent)
        if len(out) + len(words) + (n < len(keys) - 1) > most:
            return [*out, line((fit(_more(len(keys) - n), columns), DIM))][:most]
        out.append((*key.sample, (" " * (key.indent > 0) + words[0], PLAIN)) if words else key.sample)
        out += [line(" " * key.indent + more) for more in words[1:]]
    return out


def _beside(left: list[Line], right: list[Line], start: int) -> list[Line]:
    """Lines of a legend from column `start` on beside those of a picture."""
    out = []
    for n, own in enumerate(left):
        if n < len(right):
            gap = start - sum(width(text) for text, _ in own)
            own = (*own, (" " * gap, PLAIN), *right[n])
        out.append(own)
    return out
