"""The journal: every committed edit on disk when it is made, so that no way of dying loses work.

A journal is a text file of JSON lines in the state directory: a head with the case's path and content hash, then one
record an edit, undo or redo. A running session holds a lock on its journal; one without a lock was left behind.
"""

from __future__ import annotations

import fcntl
import hashlib
import itertools
import json
import os
import threading
from collections.abc import Iterable
from contextlib import suppress
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from cycle.atomic import read_file

FORMAT = 1
LARGEST = 16 * 1024 * 1024
"""Bytes of a journal that are read at most."""
MOST = 200
"""Journals that are looked through at most, the newest ones."""

Record = dict[str, Any]


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
        else:
            made, undone = made + 1, 0
    return made


def _free(descriptor: int) -> bool:
    """Whether no running session holds the journal; a file system without locks counts as free."""
    try:
        fcntl.flock(descriptor, fcntl.LOCK_EX | fcntl.LOCK_NB)
    except BlockingIOError:
        return False
    except OSError:
        return True
    return True


def _records(file: Path) -> list[Record]:
    """Whole records of a journal; a last line cut off by a crash is left out, and so is all behind what is none. Errors: OSError."""
    out: list[Record] = []
    for raw in read_file(file, LARGEST)[0][:LARGEST].split(b"\n")[:-1]:
        try:
            record = json.loads(raw)
        except (ValueError, RecursionError):
            break
        if not isinstance(record, dict):
            break
        out.append(record)
    return out


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
        live = not _free(descriptor)
        head, *records = _records(file) or [{}]
        written = os.fstat(descriptor).st_mtime
    except OSError:
        return None
    finally:
        os.close(descriptor)
    return _Opened(live, written, head, tuple(records)) if records and head.get("format") == FORMAT else None


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
    descriptor, new = _copied(left.file, path)
    os.close(descriptor)
    os.utime(new, (left.written, left.written))
    left.file.unlink(missing_ok=True)


def _copied(file: Path, path: str) -> tuple[int, Path]:
    """A copy of a journal for the case at `path`: its descriptor, locked, and its file."""
    head, _, rest = file.read_bytes().partition(b"\n")
    told = {**json.loads(head), "case": os.path.realpath(path)}
    return _begun(path, json.dumps(told).encode() + b"\n" + rest, flushed=True)


def _begun(path: str, data: bytes, flushed: bool) -> tuple[int, Path]:
    """A new journal for the case at `path` with this in it: its descriptor, locked, and its file. Errors: OSError; there is none then.

    flushed: whether to wait until it is on the disk.
    """
    descriptor, new = _created(path)
    try:
        _write(descriptor, data)
        if flushed:
            os.fsync(descriptor)
    except OSError:
        os.close(descriptor)
        new.unlink(missing_ok=True)
        raise
    return descriptor, new


def _write(descriptor: int, data: bytes) -> None:
    """Append all of it or nothing: a disk that fills up takes a part, behind which no record could be read. Errors: OSError."""
    size = os.fstat(descriptor).st_size
    try:
        while data:
            data = data[os.write(descriptor, data) :]
    except OSError:
        with suppress(OSError):
            os.ftruncate(descriptor, size)
        raise


def _created(path: str) -> tuple[int, Path]:
    """A new journal file for the case at `path`, never one that is there, and its descriptor, locked."""
    folder = state_directory()
    folder.mkdir(parents=True, exist_ok=True, mode=0o700)
    for number in itertools.count():
        file = folder / f"{stem(path)}-{os.getpid()}{f'-{number}' if number else ''}.journal"
        try:
            descriptor = os.open(file, os.O_WRONLY | os.O_CREAT | os.O_EXCL | os.O_APPEND, 0o600)
        except FileExistsError:
            continue
        _free(descriptor)
        return descriptor, file
    raise AssertionError


def discard(left: Left) -> None:
    """Remove a journal left behind. Errors: OSError where it stays."""
    left.file.unlink(missing_ok=True)


@dataclass(slots=True)
class Journal:
    """The journal of this session. The file appears with the first record.

    Parameters: path, the case file. `failure` says why edits are not kept on disk, "" while they are.
    """

    path: str
    content: str = ""
    failure: str = ""
    _descriptor: int | None = None
    _file: Path | None = None
    _dirty: threading.Event = field(default_factory=threading.Event)

    def append(self, record: Record) -> None:
        """Write one record. It survives the end of this process at once, that of the machine within a moment: a
        thread of its own brings it to the disk, so that a slow home folder never holds the screen up."""
        try:
            if self._descriptor is None:
                self._open()
            assert self._descriptor is not None
            _write(self._descriptor, (json.dumps(record) + "\n").encode())
        except OSError as error:
            self.failure = f"edits are not kept on disk: {error.strerror or error}"
        else:
            self.failure = ""
            self._dirty.set()

    def _open(self) -> None:
        head = {"format": FORMAT, "case": os.path.realpath(self.path), "content": self.content}
        descriptor, self._file = _begun(self.path, (json.dumps(head) + "\n").encode(), flushed=False)
        self._hold(descriptor)

    def _hold(self, descriptor: int) -> None:
        self._descriptor = descriptor
        threading.Thread(target=self._sync, args=(descriptor,), name="journal", daemon=True).start()

    def _sync(self, descriptor: int) -> None:
        while self._dirty.wait():
            self._dirty.clear()
            try:
                os.fsync(descriptor)
            except OSError:
                return

    def restart(self, path: str, content: str) -> None:
        """Begin again after a save: what was journalled is in the file now."""
        self.remove()
        self.path, self.content = path, content

    def turn_to(self, path: str, keep: bool) -> None:
        """Begin for another case. keep: whether what is journalled stays on disk, to be offered when the case is opened again."""
        if keep:
            self._let_go()
        else:
            self.remove()
        self.path, self.content, self.failure = path, "", ""

    def moved(self, path: str) -> None:
        """Go on under the name of another file, to which the case was moved. Errors: OSError where it stays under the old one."""
        old, self.path = self._file, path
        if old is None or old.name.startswith(f"{stem(path)}-"):
            return
        descriptor, file = _copied(old, path)
        self.remove()
        self._file = file
        self._hold(descriptor)

    def remove(self) -> None:
        """Remove the journal file; the next record makes a new one. One that cannot be removed is offered again, which loses nothing."""
        if self._file is not None:
            with suppress(OSError):
                self._file.unlink(missing_ok=True)
        self._let_go()

    def _let_go(self) -> None:
        """Close the file and leave it where it is."""
        if self._descriptor is not None:
            os.close(self._descriptor)
        self._descriptor = self._file = None
        self._dirty.set()
