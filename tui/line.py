"""Lines of styled text: what views make and what the sheet widget paints. Nothing here knows the session."""

from __future__ import annotations

import unicodedata
from collections.abc import Iterable

from rich.style import Style

PLAIN = Style()
BOLD = Style(bold=True)
DIM = Style(dim=True)
CURSOR = Style(reverse=True)
OVER = Style(color="red", bold=True)
NEAR = Style(color="yellow")
UNDERLINE = Style(underline=True)

Piece = tuple[str, Style]
Line = tuple[Piece, ...]
Cell = tuple[str, Style]


def clean(text: str) -> str:
    """Text without control characters, so that a title or a path cannot steer the terminal.

    Parameters: text, any string. Returns: printable text on one line, a mark in place of each character removed.
    """
    return "".join(c if c.isprintable() else " " if c.isspace() else "?" for c in text)


def breadth(character: str) -> int:
    """Columns one printable character takes on a terminal: 0, 1 or 2."""
    if character.isascii():
        return 1
    if unicodedata.combining(character) or unicodedata.category(character) in ("Mn", "Me", "Cf"):
        return 0
    return 2 if unicodedata.east_asian_width(character) in ("W", "F") else 1


def line(*pieces: str | Piece) -> Line:
    """One line from plain strings and (text, style) pairs."""
    return tuple((p, PLAIN) if isinstance(p, str) else p for p in pieces)


def width(text: str) -> int:
    """Columns that `text` takes on a terminal."""
    return len(text) if text.isascii() else sum(breadth(c) for c in text)


def fit(text: str, columns: int) -> str:
    """`text` cut to `columns`, its last column a dot where something was cut off."""
    if width(text) <= columns:
        return text
    kept = ""
    for character in text:
        if width(kept) + breadth(character) > columns - 1:
            break
        kept += character
    return kept + "." if columns > 0 else ""


def wrap(words: Iterable[str], columns: int, joint: str = " ") -> list[str]:
    """Lines no wider than `columns` from whole words (a longer word is cut)."""
    lines: list[str] = []
    for word in words:
        joined = f"{lines[-1]}{joint}{word}" if lines else ""
        if lines and width(joined) <= columns:
            lines[-1] = joined
        else:
            lines.append(fit(word, columns))
    return lines


def cells(content: Line, columns: int) -> list[Cell]:
    """The line as exactly `columns` cells; the second cell of a wide character is empty text.

    Parameters: content, styled pieces; columns, width of the widget. Returns: list of (character, style).
    """
    out: list[Cell] = []
    for text, style in content:
        for character in text:
            size = breadth(character)
            if size and len(out) + size <= columns:
                # the last gate: whatever a view forgot to clean, no control character is sent
                out.append((character if character.isprintable() else "?", style))
                out.extend([("", style)] * (size - 1))
    out.extend([(" ", PLAIN)] * (columns - len(out)))
    return out


def reach(old: list[Cell], new: list[Cell]) -> int:
    """Cells from the start of a row to the last one that differs, 0 where none does; the rows are of one length."""
    return next((x + 1 for x in reversed(range(len(old))) if old[x] != new[x]), 0)
