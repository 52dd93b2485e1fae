"""The case file and the journal: reading, restoring what was left behind, saving, leaving."""

from __future__ import annotations

import difflib
import os
import time
from dataclasses import dataclass, replace
from functools import partial
from typing import TYPE_CHECKING, Any

from rich.text import Text

from cycle.errors import CaseError, FileChanged
from tui import items, journal, session
from tui.actions import key_of
from tui.engine import Result
from tui.journal import Left, Record
from tui.line import OVER, PLAIN, Line, clean, line
from tui.screens.desk import Desk, fault_words
from tui.screens.page import Answer, Page, text_body
from tui.screens.prompt import Prompt
from tui.session import Session

if TYPE_CHECKING:
    from cycle.case import Case


@dataclass(frozen=True, slots=True)
class Read:
    """A case as read: the case, the hash of its file, the journal left behind for it, why there is no journal."""

    case: Case
    content: str
    left: Left | None
    trouble: str


@dataclass(frozen=True, slots=True)
class Saved:
    """A case as written: the case, where, the file's new stamp and the hash of its content."""

    case: Case
    path: str
    stamp: Any
    content: str


@dataclass(frozen=True, slots=True)
class Restored:
    """A session with the records of a journal made again, those that hold, and how many were refused."""

    session: Session
    records: tuple[Record, ...]
    refused: int
    left: Left


def read(path: str) -> Read:
    """Read a case and look for a journal left behind; a new case from the template where no path is given."""
    from cycle.case import load, loads, template

    case = load(path) if path else loads(template(), "new case")
    try:
        left, trouble = journal.left_behind(path), ""
    except OSError as error:
        left, trouble = None, f"edits are not kept on disk: {error.strerror or error}"
    return Read(case, journal.content_hash(path), left, trouble)


def write(case: Case, path: str, stamp: Any) -> Saved:
    """Write a case; `FileChanged` where the file is not the one that was read."""
    from cycle.case import save

    return Saved(case, path, save(case, path, stamp), journal.content_hash(path))


def replay(now: Session, left: Left) -> Restored:
    """Make the records of a journal again, undo and redo among them; what no longer holds is left out."""
    kept: list[Record] = []
    for record in left.records:
        try:
            now = _again(now, record)
        except (CaseError, KeyError, ValueError):
            continue
        kept.append(record)
    return Restored(now, tuple(kept), len(left.records) - len(kept), left)


def _again(now: Session, record: Record) -> Session:
    if "undo" in record:
        return session.undone(now)
    if "redo" in record:
        return session.redone(now)
    assert now.case is not None
    case = session.apply(now.case, record["edit"])
    return session.edited(now, case, items.describe(now.case, case, record["edit"], now.system))


def difference_body(changed: FileChanged) -> list[Line]:
    """Lines of the difference between the file on disk and the case as it would be saved."""
    rows = difflib.unified_diff(changed.theirs.splitlines(), changed.ours.splitlines(), "on disk", "to be saved", lineterm="")
    return [line((clean(row), OVER if row.startswith("-") else PLAIN)) for row in rows]


def _counted(edits: int) -> str:
    return f"{edits} edit{'' if edits == 1 else 's'}"


class Filing(Desk, inherit_bindings=False):
    """Handlers of the file actions and of what the worker tells about files."""

    _saving = 0
    _leaving = False

    def read_case(self) -> None:
        """Ask the worker to read the case."""
        path = self.session.path
        self.engine.do("read", 0, lambda: read(path))

    def was_read(self, result: Result) -> None:
        """Show the case, or why it cannot be read."""
        if isinstance(result.error, CaseError):
            faults = tuple(str(result.error).splitlines())
            key = partial(key_of, self.session.actions)
            self.put(replace(self.session, note=f"{key('edit')} reads the file again, {key('leave')} leaves", faults=faults))
            return
        got: Read = result.value
        self.journal.content = got.content
        self.session = session.loaded(replace(self.session, faults=()), got.case, got.case.stamp)
        self.put(replace(self.session, note=got.trouble))
        self.solve()
        if got.left is not None:
            self._offer(got.left)

    def _offer(self, left: Left) -> None:
        when = time.strftime("%Y-%m-%d %H:%M", time.localtime(left.written))
        told = [f"A session that ended on {when} left {_counted(len(left.records))} of this case, not saved."]
        if not left.same_file:
            told.append("The case file has changed since; the edits would be made on the file as it is now.")
        answers = (
            Answer("r", "restore", "restore the edits (each can be undone)"),
            Answer("d", "discard", "discard them for good"),
            Answer("k", "keep", "keep them for later and start from the file"),
        )
        page = Page("Unsaved work found", text_body(told), answers)
        self.app.push_screen(page, lambda name: self._answered(left, name or "keep"))

    def _answered(self, left: Left, name: str) -> None:
        if name == "restore":
            now = self.session
            self.engine.do("replay", now.generation, lambda: replay(now, left))
        elif name == "discard":
            journal.discard(left)
            self.put(replace(self.session, note="the unsaved edits are discarded"))

    def was_replayed(self, result: Result) -> None:
        """Take the restored session; its journal is written anew before the old one goes."""
        got: Restored = result.value
        if self.session.generation != result.generation:
            self.put(replace(self.session, note="not restored: the case was edited meanwhile; the journal is kept"))
            return
        for record in got.records:
            self.journal.append(record)
        if not got.refused and not self.journal.failure:
            journal.discard(got.left)
        refused = f", {got.refused} no longer hold (their journal is kept)" if got.refused else ""
        note = f"restored {_counted(len(got.records))}{refused}; u takes them back"
        self.put(replace(got.session, note=note, figures=self.session.figures, good=self.session.good, pin=self.session.pin))
        self.solve()

    def do_save(self) -> None:
        """Save to the file the case was read from."""
        if not self.session.path:
            self.do_save_as()
        else:
            self._save(self.session.path, self.session.stamp)

    def do_save_as(self) -> None:
        """Ask for a name and save there; an existing file is never overwritten."""
        start = self.session.path or "case.toml"
        self.app.push_screen(Prompt("Save the case as (name of a new file)", start), self._named)

    def _named(self, name: str | None) -> None:
        if not name:
            return
        path = os.path.expanduser(name)
        same = os.path.realpath(path) == os.path.realpath(self.session.path or "")
        self._save(path, self.session.stamp if same else None)

    def _save(self, path: str, stamp: Any) -> None:
        case = self.session.case
        if case is None:
            return
        self._saving += 1
        self.engine.do("write", self.session.generation, lambda: write(case, path, stamp))

    def was_written(self, result: Result) -> None:
        """Say where the case is now, or why it is not."""
        self._saving -= 1
        if isinstance(result.error, FileChanged):
            self._leaving = False
            self._other(result.error)
            return
        if isinstance(result.error, CaseError):
            self._leaving = False
            self.put(replace(self.session, note="not saved", faults=tuple(f"not saved: {words}" for words in fault_words(result.error))))
            return
        got: Saved = result.value
        note = f"saved {clean(got.path)}"
        self.session = replace(self.session, path=got.path, saved=got.case, stamp=got.stamp, note=note, faults=())
        if not self.session.unsaved:
            self.journal.restart(got.path, got.content)
        self.paint_now()
        if self._leaving and not self._saving:
            self.do_leave()

    def _other(self, changed: FileChanged) -> None:
        told = [f"{changed.path} is not the file that this session read: another session or editor wrote it. It is not overwritten."]
        answers = (
            Answer("o", "other", "save under another name"),
            Answer("d", "difference", "show the difference"),
            Answer("c", "cancel", "cancel; the edits stay here"),
        )
        page = Page("The file has changed on disk", text_body(told), answers)
        self.app.push_screen(page, lambda name: self._chosen(changed, name or "cancel"))

    def _chosen(self, changed: FileChanged, name: str) -> None:
        if name == "other":
            self.do_save_as()
        elif name == "difference":
            body = difference_body(changed)
            self.app.push_screen(Page("On disk (-) and to be saved (+)", lambda wide: body), lambda _: self._other(changed))
        else:
            self.put(replace(self.session, note="not saved"))

    def do_leave(self) -> None:
        """Leave; unsaved work stays in the journal. A save that runs is waited for."""
        if self._saving:
            self._leaving = True
            self.put(replace(self.session, note="saving, then leaving ..."))
        elif self.session.unsaved and self.journal.failure:
            told = [self.journal.failure, "Unsaved edits would be lost."]
            answers = (Answer("s", "stay", "stay"), Answer("l", "leave", "leave and lose them"))
            page = Page("Leave?", text_body(told), answers)
            self.app.push_screen(page, lambda name: self.app.exit(return_code=0) if name == "leave" else None)
        elif self.session.unsaved:
            name = self.session.path or "without a name"
            self.app.exit(return_code=0, message=Text(f"Work is kept: the unsaved edits of {clean(name)} are offered next time."))
        else:
            self.journal.remove()
            self.app.exit(return_code=0)
