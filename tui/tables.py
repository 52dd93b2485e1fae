"""Blocks of plain output: headings, lines and tables, as text of at most 80 columns or as Markdown."""

from __future__ import annotations

import textwrap
import unicodedata
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from cycle.errors import printable

WIDTH = 80
_INDENT = "  "
_LONGEST_CELL = 38
_NARROWEST = 20  # columns of a column of words


def plain(text: str) -> str:
    """`text` of any length without control characters, so that a file's own words cannot drive the terminal."""
    return printable(text, None)


def columns(text: str) -> int:
    """Terminal columns that printable `text` takes: two for each wide character, none for a combining one."""
    wide = sum(unicodedata.east_asian_width(c) in "WF" for c in text)
    return len(text) + wide - sum(unicodedata.combining(c) > 0 for c in text)


def clip(text: str, width: int) -> str:
    """`text` cut to at most `width` columns, "..." marking the cut."""
    if columns(text) <= width:
        return text
    while columns(text) > width - 3:
        text = text[:-1]
    return text + "..."


def wrap(text: str, width: int, indent: str = "") -> list[str]:
    """Lines of at most `width` columns; every line but the first starts with `indent`."""
    text = plain(text)
    each = width if columns(text) <= len(text) else width // 2
    pieces = textwrap.wrap(text, each, subsequent_indent=indent, break_on_hyphens=False) or [""]
    return [clip(piece, width) for piece in pieces]


def _pad(text: str, width: int, left: bool) -> str:
    blanks = " " * (width - columns(text))
    return text + blanks if left else blanks + text


@dataclass(frozen=True, slots=True)
class Heading:
    """A heading; `level` 1 is the title of a walk."""

    words: str
    level: int = 2

    def text(self) -> list[str]:
        """Lines of at most 80 columns."""
        title = clip(plain(self.words), WIDTH)
        return [title, "=" * columns(title)] if self.level == 1 else ["", title]

    def markdown(self) -> list[str]:
        """Lines of Markdown."""
        return ["#" * self.level + " " + _escape(plain(self.words)), ""]


@dataclass(frozen=True, slots=True)
class Lines:
    """Sentences, each on lines of its own."""

    sentences: tuple[str, ...]

    def text(self) -> list[str]:
        """Lines of at most 80 columns."""
        return [_INDENT + line for sentence in self.sentences for line in wrap(sentence, WIDTH - len(_INDENT), _INDENT)]

    def markdown(self) -> list[str]:
        """Lines of Markdown."""
        return [line for sentence in self.sentences for line in (_escape(plain(sentence)), "")]


@dataclass(frozen=True, slots=True)
class Table:
    """Rows under a header. The first column is left-aligned, so are those listed in `left`; `wrapped` is the one column of
    words that may run over several lines."""

    header: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    left: tuple[int, ...] = ()
    wrapped: int | None = None

    def text(self) -> list[str]:
        """Lines of at most 80 columns: columns that do not fit side by side follow below, the first one repeated."""
        table = self._cells()
        widths = [max(columns(row[i]) for row in table) for i in range(len(self.header))]
        if self.wrapped is not None:
            others = sum(w for i, w in enumerate(widths) if i != self.wrapped)
            room = WIDTH - len(_INDENT) - others - 2 * (len(widths) - 1)
            widths[self.wrapped] = min(max(widths[self.wrapped], 1), max(room, _NARROWEST))
        gap = 2 if len(_blocks(widths, 2)) == 1 else 1
        lines: list[str] = []
        shown = table if any(self.header) else table[1:]
        for block in _blocks(widths, gap):
            lines += ([""] if lines else []) + [line for row in shown for line in self._lines(row, widths, block, gap)]
        return lines

    def markdown(self) -> list[str]:
        """Lines of Markdown."""
        header, *rows = ([_escape(plain(cell)) for cell in row] for row in (self.header, *self.rows))
        rule = [":--" if self._left(i) else "--:" for i in range(len(header))]
        return ["| " + " | ".join(row) + " |" for row in (header, rule, *rows)] + [""]

    def _left(self, column: int) -> bool:
        return column == 0 or column in self.left or column == self.wrapped

    def _cells(self) -> list[list[str]]:
        whole = [[plain(cell) for cell in row] for row in (self.header, *self.rows)]
        natural = sum(max(columns(row[i]) for row in whole) for i in range(len(self.header)) if i != self.wrapped)
        if natural + len(_INDENT) + 2 * len(self.header) + _NARROWEST <= WIDTH:
            return whole
        return [[c if i == self.wrapped else clip(c, _LONGEST_CELL) for i, c in enumerate(row)] for row in whole]

    def _lines(self, row: Sequence[str], widths: Sequence[int], block: Sequence[int], gap: int) -> list[str]:
        split = {i: wrap(row[i], widths[i]) if i == self.wrapped else [row[i]] for i in block}
        height = max(len(lines) for lines in split.values())
        filled = {i: lines + [""] * (height - len(lines)) for i, lines in split.items()}
        joined = ((" " * gap).join(_pad(filled[i][k], widths[i], self._left(i)) for i in block) for k in range(height))
        return [(_INDENT + line).rstrip() for line in joined]


Block = Heading | Lines | Table


def _blocks(widths: Sequence[int], gap: int) -> list[list[int]]:
    """Columns that fit side by side `gap` blanks apart, the first one in each block."""
    blocks: list[list[int]] = [[0]]
    used = len(_INDENT) + widths[0]
    for i in range(1, len(widths)):
        if used + gap + widths[i] > WIDTH and len(blocks[-1]) > 1:
            blocks.append([0])
            used = len(_INDENT) + widths[0]
        blocks[-1].append(i)
        used += gap + widths[i]
    return blocks


def _escape(text: str) -> str:
    for mark in "\\`*_|<>[]#":
        text = text.replace(mark, "\\" + mark)
    return text


def as_text(blocks: Iterable[Block]) -> str:
    """Plain text of at most 80 columns, ending with a line end."""
    return "\n".join(line for block in blocks for line in block.text()).rstrip("\n") + "\n"


def as_markdown(blocks: Iterable[Block]) -> str:
    """The same blocks as Markdown."""
    return "\n".join(line for block in blocks for line in block.markdown()).rstrip("\n") + "\n"
