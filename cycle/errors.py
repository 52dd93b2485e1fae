"""Errors that the user can mend, as classes with attributes; their text is one plain line per fault."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from datetime import date, time

MOST_FAULTS = 50
"""Faults printed of one file; the rest is counted."""


class DuctwalkError(Exception):
    """Base of every error that the program raises on purpose."""


# fillers and selectors that count as printable and show nothing
_HIDDEN = re.compile("[\u034f\u115f\u1160\u17b4\u17b5\u180b-\u180f\u3164\ufe00-\ufe0f\uffa0\U000e0100-\U000e01ef]")


def printable(text: str, longest: int | None = 80) -> str:
    """Text safe and short enough for one line of a terminal.

    Parameters: text, any string; longest, number of characters kept, None for all.
    Returns: the text with line ends, control characters, marks of direction and what has no width escaped, cut with "..." where it is
    longer.
    """
    cut = text if longest is None or len(text) <= longest else text[: longest - 3] + "..."
    if cut.isprintable() and _HIDDEN.search(cut) is None:
        return cut
    return "".join(c if c.isprintable() and not _HIDDEN.match(c) else c.encode("unicode_escape").decode("ascii") for c in cut)


def shown(value: object, longest: int = 64) -> str:
    """A value as a message quotes it.

    Parameters: value, anything a case file or a caller may give; longest, number of characters kept.
    Returns: quoted text, a number, true or false, or the kind of a larger thing.
    """
    if isinstance(value, str):
        return f'"{printable(value, longest)}"'
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, int) and value.bit_length() > 128:
        return "an integer beyond the range of numbers"
    if value is None:
        return "none"
    if isinstance(value, (date, time)):
        return value.isoformat()
    if isinstance(value, Mapping):
        return "a table"
    if isinstance(value, (list, tuple)):
        return "an array"
    return printable(repr(value), longest)


@dataclass(frozen=True, slots=True)
class Fault:
    """One thing wrong with a case: file and key (or line and column), what is wrong, what was given, what is allowed."""

    file: str
    key: str
    text: str
    given: str = ""
    allowed: str = ""
    line: int | None = None
    column: int | None = None

    def __str__(self) -> str:
        where = self.key
        if self.line is not None:
            where = f"line {self.line}" + ("" if self.column is None else f", column {self.column}")
        head = ": ".join(printable(part, 200) for part in (self.file, where, self.text) if part)
        told = (("given", self.given), ("allowed", self.allowed))
        tail = "; ".join(f"{word} {printable(what, None)}" for word, what in told if what)
        return f"{head}: {tail}" if tail else head


class CaseError(DuctwalkError):
    """A case that cannot be used, or a case file that cannot be read or written; holds every fault at once."""

    def __init__(self, faults: Iterable[Fault]) -> None:
        self.faults = tuple(faults)
        super().__init__(self.faults)

    def __str__(self) -> str:
        lines = [str(fault) for fault in self.faults[:MOST_FAULTS]]
        if len(self.faults) > MOST_FAULTS:
            lines.append(f"... and at least {len(self.faults) - MOST_FAULTS} more")
        return "\n".join(lines)


class UnitError(DuctwalkError, ValueError):
    """A value that cannot be read as a quantity of its dimension."""

    def __init__(self, text: str, given: str, dimension: str, allowed: str) -> None:
        self.text = text
        self.given = given
        self.dimension = dimension
        self.allowed = allowed
        super().__init__(text, given, dimension, allowed)

    def __str__(self) -> str:
        return f"{self.text}: given {self.given}; allowed {self.allowed}"


class FileChanged(DuctwalkError):  # noqa: N818 (a state of affairs, not a defect)
    """The file on disk is not the one the case was read from; holds both texts."""

    def __init__(self, path: str, ours: str, theirs: str) -> None:
        self.path = path
        self.ours = ours
        self.theirs = theirs
        super().__init__(path, ours, theirs)

    def __str__(self) -> str:
        return f"{printable(self.path, 200)}: the file was changed or made by somebody else since it was read; not overwritten"
