"""The cases of a folder, for the worker: their names, their figures, what may be done with their files."""

from __future__ import annotations

import os
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

from cycle.atomic import new_file
from cycle.errors import CaseError
from cycle.quantities import HEADLINE
from tui import figures, journal, keeping, sources, trash
from tui.journal import Held, Left

LARGEST = 1 << 20
"""Bytes of a case file that is copied at most."""

Stamp = tuple[str, int, int]
"""Path, modification time in ns and size: what tells whether a file is still the one that was solved."""


@dataclass(frozen=True, slots=True)
class Entry:
    """A file of the folder. real: its path without links; held: the journals with unsaved work of it, newest first."""

    name: str
    path: str
    real: str
    changed: float
    stamp: Stamp
    held: tuple[Held, ...] = ()


@dataclass(frozen=True, slots=True)
class Solved:
    """What a file holds: title and notes, mode or status, reason where there is no solution, headline figures (SI), the first fault of a
    file that is no case and how many there are."""

    title: str = ""
    notes: str = ""
    state: str = ""
    reason: str = ""
    figures: Mapping[str, float] | None = None
    fault: str = ""
    faults: int = 0


def listing(folder: str) -> tuple[Entry, ...]:
    """The case files of a folder by name, at most `sources.MOST_FILES`. Errors: OSError."""
    held = by_case()
    found = []
    for name in sources.names(folder, (".toml",)):
        path = os.path.join(folder, name)
        status = _status(path)
        if status is None:
            continue
        stamp, real = (path, status.st_mtime_ns, status.st_size), os.path.realpath(path)
        found.append(Entry(name, path, real, status.st_mtime, stamp, held.get(real, ())))
    return tuple(found)


def _status(path: str) -> os.stat_result | None:
    """Status of a file, of the link itself where it leads nowhere; None where the file is gone by now."""
    for look in (os.stat, os.lstat):
        try:
            return look(path)
        except OSError:
            continue
    return None


def by_case() -> dict[str, tuple[Held, ...]]:
    """Journals with unsaved work by the real path of their case, newest first; none where the state directory cannot be read."""
    out: dict[str, tuple[Held, ...]] = {}
    try:
        every = journal.every()
    except OSError:
        return {}
    for held in every:
        out[held.case] = (*out.get(held.case, ()), held)
    return out


def solved(path: str) -> Solved:
    """Read and solve the case of a file. Errors: none; what is wrong is told."""
    from cycle.case import load

    try:
        case = load(path)
    except CaseError as error:
        return Solved(state="no case", fault=_fault(error), faults=len(error.faults))
    found = figures.solve(case)
    keys = HEADLINE[case.choices["start"]]
    values = {key: found.performance[key] for key in keys} if found.solved else None
    return Solved(case.title, case.notes, found.mode if found.solved else found.status, found.reason, values)


def _fault(error: CaseError) -> str:
    """The first fault without the name of the file."""
    fault = error.faults[0]
    return str(fault).removeprefix(f"{fault.file}: ")


def copy(path: str, target: str) -> None:
    """Copy a file byte for byte to a name that no file has. Errors: CaseError where it cannot be read, OSError."""
    new_file(target, sources.content_of(path, LARGEST))


def rename(path: str, target: str) -> str:
    """Give a file a name that no file has; unsaved work and the kept pin go with it. Returns: what did not go with it, "" where all did.

    Errors: OSError; the file is then where it was.
    """
    left: list[Left] = []
    move_pin: Callable[[str], object] = str
    trouble = ""
    try:
        left, move_pin = journal.all_left(path), keeping.pin_mover(path)
    except OSError as error:
        trouble = str(error.strerror or error)
    trash.move_new(path, target)
    try:
        for one in left:
            journal.move(one, target)
        move_pin(target)
    except OSError as error:
        trouble = str(error.strerror or error)
    return f"unsaved work or the pin stays with the old name: {trouble}" if trouble else ""


def rewrite(path: str, changes: Mapping[str, Any]) -> None:
    """Change title or notes of a file; all else in it stays as it is. Errors: CaseError; FileChanged where another wrote it meanwhile."""
    from cycle.case import load, save

    case = load(path)
    save(case.replace(changes), path, case.stamp)
