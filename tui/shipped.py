"""The cases that come with the program: read where they are installed, never changed there, copied out under a name of the user's."""

from __future__ import annotations

import os
import textwrap
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path

from cycle.atomic import is_own, read_file
from cycle.errors import CaseError, DuctwalkError, Fault
from tui.output import near

FOLDER = Path(__file__).resolve().parent.parent / "cases"
FIRST = "saltmarsh"
"""The case that opens where none is named."""
LARGEST = 1 << 20
"""Bytes read of a case at most."""


class NoSuchCaseError(DuctwalkError):
    """No shipped case has that name; its text says so and what comes near."""


@dataclass(frozen=True, slots=True)
class Shipped:
    """A shipped case: its name, its title, and the first sentence of its notes."""

    name: str
    title: str
    line: str


def names() -> tuple[str, ...]:
    """Names of the shipped cases, in the order of the alphabet."""
    return tuple(sorted(file.stem for file in FOLDER.glob("*.toml")))


def path_of(name: str) -> str:
    """Path of a shipped case. Raises NoSuchCaseError where there is none of that name, with or without its ending."""
    stem = name.removesuffix(".toml")
    if stem not in names():
        raise NoSuchCaseError(f"no shipped case is called {name[:80]!r}{near(stem, names())}; ductwalk cases lists them")
    return str(FOLDER / f"{stem}.toml")


def is_shipped(path: str) -> bool:
    """Whether a path is that of a file in the installed program, a link to one included."""
    return bool(path) and (is_own(path) or is_own(os.path.realpath(path)))


def named(path: str) -> str:
    """A path in words: a shipped case goes by its name, any other file by its path."""
    return f"the shipped case {Path(path).stem}" if is_shipped(path) else path


def every() -> Iterable[Shipped]:
    """The shipped cases by name."""
    from cycle.case import load

    for name in names():
        case = load(path_of(name))
        yield Shipped(name, case.title, first_sentence(case.notes))


def first_sentence(notes: str) -> str:
    """The first sentence of notes, on one line."""
    words = " ".join(notes.split())
    head, point, _ = words.partition(". ")
    return head.rstrip(".") + "." if point or words else ""


def content(name: str) -> bytes:
    """Content of a shipped case as it is installed. Raises NoSuchCaseError, CaseError where it cannot be read."""
    path = path_of(name)
    try:
        return read_file(path, LARGEST)[0]
    except OSError as error:
        raise CaseError((Fault(path, "", f"cannot be read: {error.strerror}"),)) from error


def listing(wide: int = 80) -> str:
    """The shipped cases in lines of text: name, title, and what each shows. wide: columns."""
    rows = list(every())
    room = max(len(row.name) for row in rows) + 2
    out = ["Shipped cases, all invented. 'ductwalk cases NAME' copies one to NAME.toml in the working folder.", ""]
    out[:1] = textwrap.wrap(out[0], wide)
    for row in rows:
        out.append(f"{row.name:<{room}}{row.title}")
        out += textwrap.wrap(row.line, wide, initial_indent=" " * room, subsequent_indent=" " * room)
    return "\n".join(out) + "\n"
