"""The cases of a folder: solved in the background, opened, copied, renamed, thrown away, annotated; those opened last."""

from __future__ import annotations

import os
from collections.abc import Callable
from dataclasses import replace
from typing import TYPE_CHECKING, Any

from cycle.atomic import is_own
from tui import folder, journal, keeping, shipped, sources, trash
from tui.actions import key_of
from tui.engine import Engine, Result
from tui.errands import Errands
from tui.folder import Entry, Solved, Stamp
from tui.journal import Held, Journal
from tui.keeping import Recent
from tui.line import DIM, NEAR, Line, clean, fit, line
from tui.screens.desk import Desk
from tui.screens.fetching import trouble
from tui.screens.page import Answer, Page, text_body
from tui.screens.prompt import Prompt
from tui.screens.roster import Choice, Roster, Verb
from tui.screens.writing import Writing
from tui.trash import Thrown
from tui.views import cases

if TYPE_CHECKING:
    from tui.screens.writing import Text
    from tui.session import Session

VERBS = (
    Verb("enter", "Enter", "open"),
    Verb("c", "c", "copy", stays=True),
    Verb("r", "r", "rename", stays=True),
    Verb("d", "d", "delete", stays=True),
    Verb("u", "u", "undelete", stays=True, bare=True),
    Verb("n", "n", "notes", stays=True),
    Verb("R", "R", "recent", bare=True),
)

OF_SHIPPED = (
    *(replace(verb, shown="") if verb.key in "rdnu" else verb for verb in VERBS),
    Verb("S", "S", "cases of the working folder", bare=True),
)
"""Verbs of the shipped cases: what would change a file is told why not, and is not offered."""
READ_ONLY = "shipped cases are read-only; c copies one to the working folder"


class Browsing(Desk, inherit_bindings=False):
    """Handlers of the lists of cases."""

    def __init__(self, path: str, engine: Engine, journal: Journal) -> None:
        super().__init__(path, engine, journal)
        self.shelf = Shelf(self, engine)

    def looked(self, result: Result) -> None:
        """The worker looked at a folder or at a case of it."""
        self.shelf.looking.came(result)

    def filed(self, result: Result) -> None:
        """The worker changed files of the folder."""
        self.shelf.filing.came(result)

    def do_browse(self) -> None:
        """The cases of the folder of the case that is open."""
        self.shelf.open()


class Shelf:
    """The list of the cases of a folder and what is done with them. Parameters: desk, the screen with the case that is open; engine."""

    def __init__(self, desk: Browsing, engine: Engine) -> None:
        self._desk = desk
        self.looking = Errands("folder", engine.newest)
        self.filing = Errands("files", engine.do)
        self._folder = ""
        self._entries: tuple[Entry, ...] = ()
        self._solved: dict[Stamp, Solved] = {}
        self._thrown: list[Thrown] = []
        self._list: Roster | None = None
        self._said = ""
        self._acts: dict[str, Callable[[Entry], None]] = {"c": self._copy, "r": self._rename, "d": self._delete, "n": self._notes}

    @property
    def _session(self) -> Session:
        return self._desk.session

    def open(self, at: str = "") -> None:
        """Show the cases of a folder. at: the folder, "" for that of the case that is open."""
        path = os.path.abspath(at or self._session.path or "case.toml")
        self._folder = path if os.path.isdir(path) else os.path.dirname(path)
        self._entries, self._said = (), "the folder is being read ..."
        own = shipped.is_shipped(self._folder)
        title = "Shipped cases, read-only" if own else f"Cases of {cases.homely(self._folder)}"
        self._list = Roster(title, self._rows, OF_SHIPPED if own else VERBS, head=self._head, told=self._told, act=self._act)
        self._desk.app.push_screen(self._list, self._chosen)
        self._look("")

    def _look(self, said: str, hand: str = "") -> None:
        """Read the folder again, then solve what is new in it, one case a job. hand: name of the file to take in hand, "" for the one
        that is."""
        at = self._folder
        self.looking.clear()

        def then(found: tuple[Entry, ...] | None, error: BaseException | None) -> None:
            self._said = said if error is None else f"the folder cannot be read: {trouble(error)}"
            first = not self._entries
            self._entries = found or ()
            if len(self._entries) == sources.MOST_FILES:
                self._said = f"{said}; " * bool(said) + f"no more than {sources.MOST_FILES} cases of a folder are listed"
            if (first or hand) and self._list is not None and self._list.is_attached:
                self._list.point_at(hand or os.path.basename(self._session.path))
            for entry in self._entries:
                if entry.stamp not in self._solved:
                    self._solve_one(entry)
            self._repaint()

        self.looking.ask(lambda: folder.listing(at), then)

    def _solve_one(self, entry: Entry) -> None:
        def then(found: Solved | None, error: BaseException | None) -> None:
            self._solved[entry.stamp] = found if found is not None else Solved(fault=trouble(error or OSError()), faults=1)
            self._repaint()

        self.looking.ask(lambda: folder.solved(entry.path), then)

    def _repaint(self) -> None:
        if self._list is not None and self._list.is_attached:
            self._list.paint()

    def _say(self, words: str) -> None:
        self._said = words
        self._repaint()

    def _head(self, wide: int) -> list[Line]:
        return [line((fit(clean(self._said), wide), NEAR)), cases.heads(wide)]

    def _here(self, path: str) -> bool:
        return bool(self._session.path) and os.path.realpath(path) == os.path.realpath(self._session.path)

    def _rows(self, wide: int, text: str) -> list[Choice]:
        system = self._session.system
        here = os.path.realpath(self._session.path) if self._session.path else ""
        shown = (cases.row(e, self._solved.get(e.stamp), e.real == here, system, wide) for e in self._entries)
        return [Choice(e.name, row) for e, row in zip(self._entries, shown, strict=True)]

    def _entry(self, name: str) -> Entry | None:
        return next((e for e in self._entries if e.name == name), None)

    def _told(self, name: str, wide: int) -> list[Line]:
        entry = self._entry(name)
        return self._told_of(entry, wide) if entry is not None else []

    def _told_of(self, entry: Entry, wide: int) -> list[Line]:
        return cases.told(entry, self._solved.get(entry.stamp), self._here(entry.path), self._session.system, wide)

    def _chosen(self, answer: tuple[str, str] | None) -> None:
        key, name = answer or ("", "")
        self.looking.clear()
        if key == "R":
            self._ask_recent()
        elif key == "S":
            self.open(os.getcwd())
        elif key == "enter" and (entry := self._entry(name)) is not None:
            self._open(entry.path)
        elif self._session.case is None and not self._session.faults:
            browse, leave = (key_of(self._session.actions, name) for name in ("browse", "leave"))
            self._desk.put(replace(self._session, note=f"no case is open: {browse} lists those of the folder, {leave} leaves"))

    def _open(self, path: str) -> None:
        if self._session.case is None or not self._here(path):
            self._desk.open_case(path)

    def _act(self, key: str, name: str) -> None:
        if key == "u":
            self._undelete()
        elif (entry := self._entry(name)) is not None:
            self._acts[key](entry)

    def _do(self, job: Callable[[], Any], failing: str, done: Callable[[Any], str], target: str = "") -> None:
        """Change files in the worker, then read the folder again; where the list is left by then the answer line tells it.

        Parameters: job; failing, what is said before the reason where it fails; done, told what the job gave, gives what is said then;
        target, path of the file to take in hand then, "" for the one that is.
        """

        def then(found: Any, error: BaseException | None) -> None:
            if isinstance(error, FileExistsError):
                said = f"{failing}: there is a file of that name"
            else:
                said = done(found) if error is None else f"{failing}: {clean(trouble(error))}"
            if self._list is not None and self._list.is_attached:
                self._look(said, os.path.basename(target) if error is None else "")
            else:
                self._desk.put(replace(self._session, note=clean(said)))

        self.filing.ask(job, then)

    def _target(self, name: str) -> str:
        """Path of a name typed; without an ending it is that of a case, and from the shipped cases it leads to the working folder."""
        typed = os.path.expanduser(name)
        at = os.getcwd() if shipped.is_shipped(self._folder) else self._folder
        return os.path.join(at, typed if os.path.splitext(typed)[1] else f"{typed}.toml")

    def _copy(self, entry: Entry) -> None:
        def named(name: str | None) -> None:
            if name:
                target = self._target(name)
                where = cases.homely(target) if os.path.dirname(target) != self._folder else os.path.basename(target)
                self._do(lambda: folder.copy(entry.path, target), "not copied", lambda _: f"copied to {where}", target)

        self._desk.app.push_screen(Prompt(f"Copy {clean(entry.name)} to (name of a new file)", entry.name), named)

    def _rename(self, entry: Entry) -> None:
        if is_own(entry.path):
            self._say(READ_ONLY)
            return
        if any(held.live for held in entry.held) and not self._here(entry.path):
            self._say("not renamed: another session has unsaved work of it")
            return

        def named(name: str | None) -> None:
            if name and self._target(name) != entry.path:
                self._renamed(entry, self._target(name))

        self._desk.app.push_screen(Prompt(f"Rename {clean(entry.name)} to", entry.name), named)

    def _renamed(self, entry: Entry, target: str) -> None:
        here = self._here(entry.path)

        def done(left: str) -> str:
            if here:
                self._desk.session = replace(self._session, path=target)
                left = self._move_journal(target) or left
            return f"renamed to {os.path.basename(target)}{f'; {left}' if left else ''}"

        self._do(lambda: folder.rename(entry.path, target), "not renamed", done, target)

    def _move_journal(self, target: str) -> str:
        """The journal of this session goes with its case. Returns: why it does not, else ""."""
        try:
            self._desk.journal.moved(target)
        except OSError as error:
            return f"the journal stays with the old name: {trouble(error)}"
        return ""

    def _delete(self, entry: Entry) -> None:
        if is_own(entry.path):
            self._say(READ_ONLY)
            return
        if self._here(entry.path):
            self._say("the case that is open is not deleted; open another one first")
            return
        told = [f"{entry.name} goes to the trash; u in the list brings it back."]
        if entry.held:
            told.append(f"There is unsaved work of it ({cases.work(entry.held[0])}); that stays, and is offered when the file is back.")
        answers = (Answer("d", "delete", "delete it"), Answer("k", "keep", "keep it"))

        def answered(name: str | None) -> None:
            if name == "delete":
                self._throw(entry)

        self._desk.app.push_screen(Page("Delete?", text_body(told), answers), answered)

    def _throw(self, entry: Entry) -> None:
        def done(thrown: Thrown) -> str:
            self._thrown.append(thrown)
            return f"{entry.name} is in the trash; u brings it back ({thrown.file})"

        self._do(lambda: trash.throw_away(entry.path), "not deleted", done)

    def _undelete(self) -> None:
        if not self._thrown:
            self._say("nothing was deleted in this session")
            return
        thrown = self._thrown[-1]

        def done(_: None) -> str:
            self._thrown.remove(thrown)
            return f"{os.path.basename(thrown.origin)} is back"

        self._do(lambda: trash.bring_back(thrown), "not brought back", done, thrown.origin)

    def _notes(self, entry: Entry) -> None:
        solved = self._solved.get(entry.stamp)
        case = self._session.case if self._here(entry.path) else None
        if case is None and shipped.is_shipped(entry.path):
            self._say(READ_ONLY)
            return
        if case is None and (solved is None or solved.fault):
            self._say("a file that is no case has no notes to edit" if solved is not None else cases.WAITING)
            return
        title, notes = (case.title, case.notes) if case is not None else (solved.title, solved.notes) if solved is not None else ("", "")

        def written(text: Text | None) -> None:
            changes: dict[str, object] = {}
            if text is not None and text[0] != title:
                changes["title"] = text[0] or None
            if text is not None and text[1] != notes:
                changes["notes"] = text[1] or None
            if changes:
                self._annotate(entry, changes, open_here=case is not None)

        self._desk.app.push_screen(Writing(f"Title and notes of {entry.name}", title, notes), written)

    def _annotate(self, entry: Entry, changes: dict[str, object], open_here: bool) -> None:
        what = " and ".join(changes)
        if not open_here:
            self._do(lambda: folder.rewrite(entry.path, changes), "not saved", lambda _: f"{what} of {entry.name} saved")
        elif self._desk.change({"set": changes}):
            self._look(f"{what} changed in the case that is open; not saved yet, and u there takes it back")
        else:
            self._say(f"not changed: {' | '.join(self._session.faults)}")

    def _ask_recent(self) -> None:
        """Ask for the cases opened last and for unsaved work, wherever it is."""
        self.looking.ask(_recent, self._show_recent)

    def _show_recent(self, found: list[tuple[str, Recent | None, Held | None, bool]] | None, error: BaseException | None) -> None:
        rows = {path: (recent, held, there) for path, recent, held, there in found or []}
        words = f"the list cannot be read: {trouble(error)}" if error is not None else "* unsaved work, offered when the case is opened"

        def one(path: str, wide: int) -> Choice:
            recent, held, there = rows[path]
            return Choice(path, cases.recent_row(recent, path, held, self._here(path), there, wide))

        def shown(wide: int, text: str) -> list[Choice]:
            return [one(path, wide) for path in rows]

        def act(key: str, path: str) -> None:
            if rows[path][1] is None:
                del rows[path]
                self.looking.ask(lambda: keeping.forget(path), lambda *_: None)

        def chosen(answer: tuple[str, str] | None) -> None:
            key, path = answer or ("", "")
            if key in ("b", "S"):
                self.open(str(shipped.FOLDER) if key == "S" else "")
            elif key == "enter":
                self._open(path)

        verbs = (
            Verb("enter", "Enter", "open"),
            Verb("x", "x", "forget", stays=True),
            Verb("b", "b", "cases of the folder", bare=True),
            Verb("S", "S", "shipped cases", bare=True),
        )
        roster = Roster("Cases opened last, and unsaved work", shown, verbs, head=lambda wide: [line((fit(words, wide), DIM))], act=act)
        self._desk.app.push_screen(roster, chosen)


def _recent() -> list[tuple[str, Recent | None, Held | None, bool]]:
    """Unsaved work first, then the cases opened last: path, when, journal, whether the file is there. Errors: OSError."""
    held: dict[str, Held] = {}
    for one in journal.every():
        held.setdefault(one.case, one)
    recent = {r.path: r for r in keeping.recent()}
    return [(path, recent.get(path), held.get(path), os.path.isfile(path)) for path in dict.fromkeys([*held, *recent])]
