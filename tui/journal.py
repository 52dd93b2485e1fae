"""The journal: every committed edit on disk when it is made, so that no way of dying loses work.

A journal is a text file of JSON lines in the state directory: a head with the case's path and content hash, then one
record an edit, undo or redo. A running session holds a lock on its journal; one without a lock was left behind.
"""

from __future__ import annotations

import hashlib
import json
import os
from collections.abc import Iterable
from contextlib import suppress
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from tui import journal_file
from tui.journal_file import Record, Written

FORMAT = 1
MOST = 200
"""Journals that are looked through at most, the newest ones."""


def state_directory() -> Path:
    """Directory of the program's state: `$XDG_STATE_HOME/ductwalk`, else `~/.local/state/ductwalk`.

    Errors: OSError where there is no home folder.
    """
    return user_folder("XDG_STATE_HOME", ".local", "state") / "ductwalk"


def user_folder(variable: str, *below: str) -> Path:
    """A folder of the user's own.

    Parameters: variable, of the environment, counts where it is an absolute path (XDG Base Directory specification); below, the
    folder's place under the home folder else. Errors: OSError where there is no home folder.
    """
    given = os.environ.get(variable, "")
    if os.path.isabs(given):
        return Path(given)
    try:
        home = Path.home()
    except RuntimeError as error:
        raise OSError("no home folder") from error
    if not home.is_absolute():
        raise OSError("no home folder")
    return home.joinpath(*below)


def is_path(given: Any) -> bool:
    """Whether something read from a file of the state directory can be a path. A stray surrogate or a zero byte names no file."""
    try:
        return isinstance(given, str) and bool(given) and b"\0" not in os.fsencode(given)
    except UnicodeEncodeError:
        return False


def content_hash(path: str) -> str:
    """Hash of the bytes of a file, "" where it cannot be read."""
    try:
        return hashlib.sha256(Path(path).read_bytes()).hexdigest()
    except OSError:
        return ""


def stem(path: str) -> str:
    """Start of the names of everything that is kept for the case at `path`."""
    full = os.path.realpath(path)
    name = "".join(c if c.isalnum() or c in "-_" else "_" for c in Path(full).stem)[:40]
    return f"{name}-{hashlib.sha256(os.fsencode(full)).hexdigest()[:12]}"


@dataclass(frozen=True, slots=True)
class Left:
    """A journal that a session left behind: its file, its records, when it was last written (s since the epoch), and
    whether the case file is still what that session read."""

    file: Path
    records: tuple[Record, ...]
    written: float
    same_file: bool


def standing(records: Iterable[Record]) -> int:
    """How many edits of a journal hold at its end: those taken back do not count."""
    made = undone = 0
    for record in records:
        if "undo" in record:
            made, undone = made - (made > 0), undone + (made > 0)
        elif "redo" in record:
            made, undone = made + (undone > 0), undone - (undone > 0)
        elif record:
            made, undone = made + 1, 0
    return made


@dataclass(frozen=True, slots=True)
class _Opened:
    """A journal that holds work: whether a session that runs holds it, when it was last written (s since the epoch), its head, its
    records."""

    live: bool
    written: float
    head: Record
    records: tuple[Record, ...]


def _opened(file: Path) -> _Opened | None:
    """A journal, None where it cannot be read or holds no work: it must not hide the others."""
    try:
        descriptor = os.open(file, os.O_RDONLY | os.O_NONBLOCK)
    except OSError:
        return None
    try:
        # asked first: a session that ends meanwhile has written its last record by then
        live = not journal_file.is_free(descriptor)
        head, *records = journal_file.records(file) or [{}]
        written = os.fstat(descriptor).st_mtime
    except OSError:
        return None
    finally:
        os.close(descriptor)
    return _Opened(live, written, head, tuple(records)) if any(records) and head.get("format") == FORMAT else None


def _read(file: Path, path: str) -> Left | None:
    found = _opened(file)
    if found is None or found.live:
        return None
    return Left(file, found.records, found.written, found.head.get("content") == content_hash(path))


def left_behind(path: str) -> Left | None:
    """The newest journal that an ended session left for the case at `path`, None where there is none.

    Errors: OSError where the state directory cannot be read.
    """
    return max(all_left(path), key=lambda left: left.written, default=None)


def all_left(path: str) -> list[Left]:
    """All journals that ended sessions left for the case at `path`. Errors: OSError."""
    folder = state_directory()
    if not folder.is_dir():
        return []
    return [left for file in folder.glob(f"{stem(path)}-*.journal") if (left := _read(file, path)) is not None]


@dataclass(frozen=True, slots=True)
class Held:
    """A journal that holds unsaved work: its file, its case's path, how many edits hold, when it was last written (s since the epoch), and
    whether a session that runs holds it."""

    file: Path
    case: str
    edits: int
    written: float
    live: bool


def every() -> tuple[Held, ...]:
    """The journals of all cases that hold work, newest first; those that cannot be read are left out.

    Errors: OSError where the state directory cannot be read.
    """
    folder = state_directory()
    if not folder.is_dir():
        return ()
    files = sorted(folder.glob("*.journal"), key=_written, reverse=True)
    return tuple(held for file in files[:MOST] if (held := _held(file)) is not None)


def _written(file: Path) -> float:
    """When a file was last written, s since the epoch; 0 where it is gone by now."""
    try:
        return file.lstat().st_mtime
    except OSError:
        return 0.0


def _held(file: Path) -> Held | None:
    found = _opened(file)
    if found is None or not is_path(found.head.get("case")):
        return None
    return Held(file, found.head["case"], standing(found.records), found.written, found.live)


def move(left: Left, path: str) -> None:
    """Give a journal left behind to the case at `path`. Errors: OSError where it stays where it was."""
    if left.file.name.startswith(f"{stem(path)}-"):
        return
    new = _copied(left.file, path)
    new.close()
    os.utime(new.file, (left.written, left.written))
    left.file.unlink(missing_ok=True)


def _copied(file: Path, path: str) -> Written:
    """A copy of a journal for the case at `path`, brought to the disk. Errors: OSError."""
    head, _, rest = file.read_bytes().partition(b"\n")
    told = {**json.loads(head), "case": os.path.realpath(path)}
    new = Written.begun(state_directory(), stem(path), json.dumps(told).encode() + b"\n" + rest)
    new.flush()
    return new


def discard(left: Left) -> None:
    """Remove a journal left behind. Errors: OSError where it stays."""
    left.file.unlink(missing_ok=True)


@dataclass(slots=True)
class Journal:
    """The journal of this session. The file appears with the first record. Parameters: path, the case file; content, its hash."""

    path: str
    content: str = ""
    _lines: list[bytes] = field(default_factory=list)
    """All records since the case was last saved, whether they are on disk or not."""
    _kept: int = 0
    """How many of them are in the file."""
    _saved: int = 0
    """How many of them are in the file of the case, once the save that runs is done."""
    _made: int = 0
    _undone: int = 0
    """Edits of the journal that may be taken back, and that may be made again."""
    _refused: str = ""
    _out: Written | None = None

    @property
    def failure(self) -> str:
        """Why edits are not kept on disk, "" while they are."""
        trouble = self._refused or (self._out.trouble if self._out is not None else "")
        return f"edits are not kept on disk: {trouble}" if trouble else ""

    def append(self, record: Record) -> None:
        """Write one record, and before it those that the disk refused. It survives the end of this process at once, that of the
        machine within a moment: a thread of its own brings it to the disk, so that a slow home folder never holds the screen up."""
        self._lines.append((json.dumps(record) + "\n").encode())
        step, edit = ("undo" in record) - ("redo" in record), record.get("edit")
        self._made, self._undone = (self._made - step, self._undone + step) if step else (self._made + 1, 0)
        if isinstance(edit, dict) and "case" in edit:  # an undo of the screen, but an edit of the journal
            self._made = self._undone = 0
        self._catch_up()

    def knows(self, record: Record) -> bool:
        """Whether a record can be made again from this journal: what an undo or redo goes back to may be older than the last save."""
        return self._made > 0 if "undo" in record else self._undone > 0 if "redo" in record else True

    def saving(self) -> None:
        """The case as it is now is being saved: nothing that follows may go back behind it."""
        self._saved, self._made, self._undone = len(self._lines), 0, 0

    def _catch_up(self) -> None:
        """Write the records that are not in the file; all of them into a new one where there is none, or where it is lost."""
        try:
            if self._out is None or not self._out.sound:
                self._begin()
            elif self._kept < len(self._lines):
                self._out.append(b"".join(self._lines[self._kept :]))
        except OSError as error:
            self._refused = str(error.strerror or error)
        else:
            self._kept, self._refused = len(self._lines), ""

    def _begin(self) -> None:
        if not self._lines:
            return
        head = {"format": FORMAT, "case": os.path.realpath(self.path), "content": self.content}
        self._take(Written.begun(state_directory(), stem(self.path), b"".join(((json.dumps(head) + "\n").encode(), *self._lines))))

    def _take(self, new: Written | None, keep: bool = False) -> None:
        """Go on with another file. keep: whether the one before stays."""
        old, self._out = self._out, new
        if old is not None:
            old.close(remove=not keep)

    def settle(self) -> bool:
        """Bring everything to the disk and wait for it. Returns: whether it is there."""
        self._catch_up()
        if self._out is not None:
            with suppress(OSError):
                self._out.flush()
        return not self.failure

    def restart(self, path: str, content: str) -> None:
        """Begin again after a save: what was journalled until `saving` is in the file now."""
        self.path, self.content = path, content
        self._lines, self._saved, self._kept = self._lines[self._saved :], 0, 0
        old, self._out = self._out, None
        self._catch_up()
        if old is not None:
            old.close(remove=not self._refused)

    def turn_to(self, path: str, keep: bool) -> None:
        """Begin for another case. keep: whether what is journalled stays on disk, to be offered when the case is opened again."""
        self._forget(keep)
        self.path, self.content = path, ""

    def moved(self, path: str) -> None:
        """Go on under the name of another file, to which the case was moved. Errors: OSError where it stays under the old one."""
        self.path = path
        if self._out is not None and not self._out.file.name.startswith(f"{stem(path)}-"):
            self._take(_copied(self._out.file, path))

    def remove(self) -> None:
        """Remove the journal file; the next record makes a new one."""
        self._forget(keep=False)

    def _forget(self, keep: bool) -> None:
        self._take(None, keep)
        self._lines, self._kept, self._refused = [], 0, ""
        self._saved = self._made = self._undone = 0
