"""Walks from elsewhere for the main screen: the choice of one, and the jobs that fetch them."""

from __future__ import annotations

import os
from collections.abc import Callable

from cycle.errors import CaseError, FileChanged
from tui import shipped, sources
from tui.engine import Engine, Result
from tui.errands import Errands
from tui.figures import Figures
from tui.journal import Journal
from tui.line import DIM, NEAR, Line, clean, fit, line, width
from tui.screens.desk import Desk
from tui.screens.prompt import Prompt
from tui.screens.roster import Choice, Roster, Verb
from tui.sources import Found, Source

BY_NAME = Source("file", "a file by its name ...")
_KIND_ROOM = 9


def trouble(error: BaseException) -> str:
    """An error of a file in one line."""
    if isinstance(error, CaseError):
        first, *more = str(error).splitlines() or [""]
        return f"{first} ({len(more)} more)" if more else first
    if isinstance(error, FileChanged):
        return "the file was changed by another meanwhile"
    return str(getattr(error, "strerror", None) or error)


class Fetching(Desk, inherit_bindings=False):
    """What brings a walk from elsewhere to the main screen."""

    def __init__(self, path: str, engine: Engine, journal: Journal) -> None:
        super().__init__(path, engine, journal)
        self.fetching = Errands("beside", engine.newest)

    def fetched(self, result: Result) -> None:
        """A walk from elsewhere, or a list of files, came back."""
        self.fetching.came(result)

    def case_left(self) -> None:
        """Nothing that was asked for the case before is wanted any more."""
        super().case_left()
        self.fetching.clear()

    @property
    def folder(self) -> str:
        """Folder of the case."""
        return os.path.dirname(os.path.abspath(self.session.path or "case.toml"))

    def choose(self, title: str, then: Callable[[Source], None]) -> None:
        """Let the user choose a walk from elsewhere: this session's moments, files of the case's folder, a file by name.

        Parameters: title; then, told the choice.
        """
        offered = [*sources.moments(self.session), BY_NAME]
        told: list[Line] = []
        path, folder = self.session.path, self.folder
        verbs = (Verb("enter", "Enter", "take"),)
        roster = Roster(title, lambda wide, text: _choices(offered, wide, text), verbs, typing=True, head=lambda wide: told)

        def listed(found: tuple[Source, ...] | None, error: BaseException | None) -> None:
            offered.extend(found or ())
            if error is not None:
                told.append(line((f"the folder cannot be listed: {trouble(error)}", NEAR)))
            if roster.is_attached:
                roster.paint()

        def chosen(answer: tuple[str, str] | None) -> None:
            source = offered[int(answer[1])] if answer and answer[1] else None
            if source is BY_NAME:
                start = "" if shipped.is_shipped(path) else os.path.join(folder, "")
                question = Prompt("Name of a case or of a file of stored walks", start)
                self.app.push_screen(question, lambda name: _named(name, then))
            elif source is not None:
                then(source)

        self.fetching.ask(lambda: sources.files(folder, path), listed)
        self.app.push_screen(roster, chosen)

    def one_of(self, found: tuple[Found, ...], then: Callable[[Found], None]) -> None:
        """Take the one walk found; let the user choose where a file stores several."""
        if len(found) == 1:
            then(found[0])
            return

        def rows(wide: int, text: str) -> list[Choice]:
            return [Choice(str(i), line(fit(_of(f.label, f.figures), wide))) for i, f in enumerate(found)]

        def chosen(answer: tuple[str, str] | None) -> None:
            if answer and answer[1]:
                then(found[int(answer[1])])

        self.app.push_screen(Roster("Which of the stored walks", rows, (Verb("enter", "Enter", "take"),)), chosen)


def _of(label: str, found: Figures) -> str:
    return clean(f"{label}  {found.mode if found.solved else found.status}")


def _named(name: str | None, then: Callable[[Source], None]) -> None:
    if name:
        path = os.path.expanduser(name)
        then(Source("file", os.path.basename(path), path=path))


def _choices(offered: list[Source], wide: int, text: str) -> list[Choice]:
    """One row a source whose words hold the text typed."""
    wanted = text.casefold().split()
    return [
        Choice(str(i), _row(source, wide))
        for i, source in enumerate(offered)
        if all(word in f"{source.kind} {source.label}".casefold() for word in wanted)
    ]


def _row(source: Source, wide: int) -> Line:
    kind = fit(source.kind, _KIND_ROOM)
    words = fit(clean(source.label), max(1, wide - _KIND_ROOM - 1))
    return line((kind + " " * (_KIND_ROOM + 1 - width(kind)), DIM), words)
