"""The case file and the journal: reading, restoring what was left behind, saving, leaving."""

from __future__ import annotations

import difflib
import os
from collections.abc import Callable
from contextlib import suppress
from dataclasses import dataclass, replace
from functools import partial
from typing import TYPE_CHECKING, Any

from rich.text import Text

from cycle.errors import CaseError, FileChanged
from tui import figures, items, journal, keeping, session, shipped
from tui.actions import key_of
from tui.engine import Result
from tui.journal import Left
from tui.journal_file import Record
from tui.keeping import Kept
from tui.line import OVER, PLAIN, Line, clean, line
from tui.screens.desk import Desk, fault_words
from tui.screens.page import Answer, Page, text_body
from tui.screens.prompt import Prompt
from tui.session import Session
from tui.views import cases

if TYPE_CHECKING:
    from cycle.case import Case


@dataclass(frozen=True, slots=True)
class Read:
    """A case as read: the case, the hash of its file, the journal left behind for it, the pin kept for it, why there is no journal
    or pin."""

    case: Case
    content: str
    left: Left | None
    pin: Kept | None
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
    left, pin, trouble = None, None, ""
    try:
        left = journal.left_behind(path)
    except OSError as error:
        trouble = f"edits are not kept on disk: {error.strerror or error}"
    try:
        pin = keeping.kept_pin(path) if path else None
    except keeping.Spoilt as error:
        trouble = f"the pin kept for this case is dropped: {error}"
        with suppress(OSError):
            keeping.drop_pin(path)
    except OSError as error:
        trouble = trouble or f"the pin kept for this case cannot be read: {error.strerror or error}"
    return Read(case, journal.content_hash(path), left, pin, trouble)


def write(case: Case, path: str, stamp: Any) -> Saved:
    """Write a case; `FileChanged` where the file is not the one that was read."""
    from cycle.case import save

    return Saved(case, path, save(case, path, stamp), journal.content_hash(path))


def replay(now: Session, left: Left) -> Restored:
    """Make the records of a journal again; edits that no longer hold are left out, and with them what took them back or made them
    again. The case they give is solved once, so that one that meets a defect is never taken. Errors: whatever that solve raises."""
    kept: list[Record] = []
    made: list[bool] = []
    taken: list[bool] = []
    refused = 0
    for record in left.records:
        again: Session | None = now
        if "undo" in record or "redo" in record:
            back = "undo" in record
            source, target = (made, taken) if back else (taken, made)
            if source:
                target.append(source.pop())
                again = (session.undone if back else session.redone)(now) if target[-1] else now
        else:
            again = _again(now, record)
            made.append(again is not None and again.generation != now.generation)
            taken.clear()
        refused += again is None
        if again is not None and again.generation != now.generation:
            now = again
            kept.append(record)
    if kept and now.case is not None:
        figures.solve(now.case)
    return Restored(now, tuple(kept), refused, left)


def _again(now: Session, record: Record) -> Session | None:
    """The session with an edit made again, None where it no longer holds, or asks for nothing that this version knows."""
    change = record.get("edit")
    try:
        return _edited(now, record, change) if session.is_change(change) else None
    except CaseError:
        return None


def _edited(now: Session, record: Record, change: session.Change) -> Session:
    assert now.case is not None
    case = session.apply(now.case, change)
    back = record.get("back")
    if isinstance(back, dict):  # a session that saved in between had set it aside, and the file has it no more
        case = case.replace({key: value for key, value in back.items() if key not in case.spelled})
    return session.edited(now, case, items.describe(now.case, case, change, now.system))


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
    _reading = 0

    def read_case(self) -> None:
        """Ask the worker to read the case."""
        path = self.session.path
        self._reading += 1
        self.engine.do("read", self._reading, lambda: read(path))

    def open_case(self, path: str) -> None:
        """Leave the present case, whose unsaved work stays in its journal, and read another."""
        if self._saving:
            self.put(replace(self.session, note="saving ...; open it when the file is written"))
        elif self.session.unsaved and not self.journal.settle():
            self._ask_to_lose("Open another case?", lambda: self._turn_to(path))
        else:
            self._turn_to(path)

    def _turn_to(self, path: str) -> None:
        old = self.session
        self.journal.turn_to(path, keep=old.unsaved)
        self.session = session.afresh(old, path)
        self.case_left()
        self.paint_now()
        self.read_case()

    def was_read(self, result: Result) -> None:
        """Show the case, or why it cannot be read."""
        if result.generation != self._reading:
            return
        if isinstance(result.error, CaseError):
            faults = tuple(str(result.error).splitlines())
            key = partial(key_of, self.session.actions)
            words = f"{key('edit')} reads the file again, {key('browse')} lists the cases beside it, {key('leave')} leaves"
            self.put(replace(self.session, note=words, faults=faults))
            return
        got: Read = result.value
        self.journal.content = got.content
        self.session = session.loaded(replace(self.session, faults=()), got.case, got.case.stamp)
        self.put(replace(self.session, note=got.trouble or self._read_only()))
        self.solve()
        self.case_read(got)
        if got.left is not None:
            self._offer(got.left)

    def _read_only(self) -> str:
        """What is said of a shipped case when it opens, "" for one of the user's."""
        path = self.session.path
        if not shipped.is_shipped(path):
            return ""
        name = clean(os.path.splitext(os.path.basename(path))[0])
        return f"shipped case {name}, read-only: {key_of(self.session.actions, 'save')} saves a copy under a name of yours"

    def _offer(self, left: Left) -> None:
        when = cases.when(left.written)
        told = [f"Work that ended on {when} left {_counted(journal.standing(left.records))} of this case, not saved."]
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
            self.put(replace(self.session, note=self._discarded(left) or "the unsaved edits are discarded"))

    @staticmethod
    def _discarded(left: Left) -> str:
        """Remove a journal left behind. Returns: why it stays, "" where it is gone."""
        try:
            journal.discard(left)
        except OSError as error:
            return f"the unsaved edits stay on disk: {error.strerror or error}"
        return ""

    def was_replayed(self, result: Result) -> None:
        """Take the restored session; its journal is written anew before the old one goes."""
        if result.error is not None:
            self.put(replace(self.session, faults=(f"not restored: {result.error}; the journal is kept",)))
            return
        got: Restored = result.value
        if self.session.generation != result.generation:
            self.put(replace(self.session, note="not restored: the case was edited meanwhile; the journal is kept"))
            return
        if not got.records:
            self.put(replace(self.session, note=f"not restored: {got.refused} of {got.refused} edits no longer hold; the journal is kept"))
            return
        for record in got.records:
            self.journal.append(record)
        if not got.refused and self.journal.settle():
            self._discarded(got.left)
        refused = f", {got.refused} no longer hold (their journal is kept)" if got.refused else ""
        note = f"restored {_counted(journal.standing(got.records))}{refused}; {key_of(self.session.actions, 'undo')} takes them back"
        self.put(replace(got.session, note=note, figures=self.session.figures, good=self.session.good, pin=self.session.pin))
        self.solve()

    def do_save(self) -> None:
        """Save to the file the case was read from; a case without one, and a shipped case, ask for a name."""
        if not self.session.path or shipped.is_shipped(self.session.path):
            self.do_save_as()
        else:
            self._save(self.session.path, self.session.stamp)

    def do_save_as(self) -> None:
        """Ask for a name and save there; an existing file is never overwritten. A shipped case is saved to the working folder."""
        path = self.session.path or "case.toml"
        copied = shipped.is_shipped(path)
        question = "Save a copy of the shipped case as (name of a new file)" if copied else "Save the case as (name of a new file)"
        self.app.push_screen(Prompt(question, os.path.basename(path) if copied else path), self._named)

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
        if self._saving:
            self.put(replace(self.session, note="saving ...; save again when the file is written"))
            return
        self._saving += 1
        self.journal.saving()
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
        note, moved = f"saved {clean(got.path)}", got.path != self.session.path
        self.session = replace(self.session, path=got.path, saved=got.case, stamp=got.stamp, note=note, faults=())
        self.journal.restart(got.path, got.content)
        self.paint_now()
        if moved:
            self.case_named()
        if self._leaving and not self._saving:
            self.do_leave()

    def _other(self, changed: FileChanged) -> None:
        own = os.path.realpath(changed.path) == os.path.realpath(self.session.path or "")
        title = "The file has changed on disk" if own else "There is a file of that name"
        why = "another session or editor wrote it since this one read it" if own else "it is not the file of this case"
        told = [f"{changed.path}: {why}. It is not overwritten."]
        answers = (
            Answer("o", "other", "save under another name"),
            Answer("d", "difference", "show the difference"),
            Answer("c", "cancel", "cancel; the edits stay here"),
        )
        page = Page(title, text_body(told), answers)
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
        elif self.session.unsaved and not self.journal.settle():
            self._ask_to_lose("Leave?", lambda: self.app.exit(return_code=0))
        elif self.session.unsaved:
            name = shipped.named(self.session.path) or "without a name"
            self.app.exit(return_code=0, message=Text(f"Work is kept: the unsaved edits of {clean(name)} are offered next time."))
        else:
            self.journal.remove()
            self.app.exit(return_code=0)

    def _ask_to_lose(self, title: str, leave: Callable[[], object]) -> None:
        """Ask before edits that cannot be kept on disk are lost."""
        told = [
            f"{self.journal.failure}.",
            "Unsaved edits would be lost. Stay and save the case, or save it under another name, to keep them.",
        ]
        answers = (Answer("s", "stay", "stay"), Answer("l", "leave", "leave and lose them"))
        page = Page(title, text_body(told), answers)

        def answered(name: str | None) -> None:
            if name == "leave":
                leave()

        self.app.push_screen(page, answered)
