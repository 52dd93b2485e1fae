"""The journal: every committed edit on disk when it is made, so that no way of dying loses work.

A journal is a text file of JSON lines in the state directory: a head with the case's path and content hash, then one
record an edit, undo or redo. A running session holds a lock on its journal; one without a lock was left behind.
"""

from __future__ import annotations

import fcntl
import hashlib
import json
import os
import threading
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

FORMAT = 1
LARGEST = 16 * 1024 * 1024
"""Bytes of a journal that are read at most."""

Record = dict[str, Any]


def state_directory() -> Path:
    """Directory of the program's state: `$XDG_STATE_HOME/ductwalk`, else `~/.local/state/ductwalk`.

    Errors: OSError where there is no home folder.
    """
    given = os.environ.get("XDG_STATE_HOME", "")
    if os.path.isabs(given):
        return Path(given) / "ductwalk"
    try:
        return Path.home() / ".local" / "state" / "ductwalk"
    except RuntimeError as error:
        raise OSError("no home folder") from error


def content_hash(path: str) -> str:
    """Hash of the bytes of a file, "" where it cannot be read."""
    try:
        return hashlib.sha256(Path(path).read_bytes()).hexdigest()
    except OSError:
        return ""


def _stem(path: str) -> str:
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


def _free(descriptor: int) -> bool:
    """Whether no running session holds the journal; a file system without locks counts as free."""
    try:
        fcntl.flock(descriptor, fcntl.LOCK_EX | fcntl.LOCK_NB)
    except BlockingIOError:
        return False
    except OSError:
        return True
    return True


def _records(text: str) -> list[Record]:
    """Whole records of a journal; a last line cut off by a crash is left out."""
    out: list[Record] = []
    for raw in text.split("\n")[:-1]:
        try:
            record = json.loads(raw)
        except ValueError:
            break
        if not isinstance(record, dict):
            break
        out.append(record)
    return out


def _read(file: Path, path: str) -> Left | None:
    with file.open("rb") as stream:
        if not _free(stream.fileno()):
            return None
        text = stream.read(LARGEST).decode("utf-8", "replace")
        written = os.fstat(stream.fileno()).st_mtime
    records = _records(text)
    if len(records) < 2 or records[0].get("format") != FORMAT:
        return None
    return Left(file, tuple(records[1:]), written, records[0].get("content") == content_hash(path))


def left_behind(path: str) -> Left | None:
    """The newest journal that an ended session left for the case at `path`, None where there is none.

    Errors: OSError where the state directory cannot be read.
    """
    folder = state_directory()
    if not folder.is_dir():
        return None
    found = [left for file in folder.glob(f"{_stem(path)}-*.journal") if (left := _read(file, path)) is not None]
    return max(found, key=lambda left: left.written, default=None)


def discard(left: Left) -> None:
    """Remove a journal left behind."""
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
            os.write(self._descriptor, (json.dumps(record) + "\n").encode())
        except OSError as error:
            self.failure = f"edits are not kept on disk: {error.strerror or error}"
        else:
            self.failure = ""
            self._dirty.set()

    def _open(self) -> None:
        folder = state_directory()
        folder.mkdir(parents=True, exist_ok=True, mode=0o700)
        self._file = folder / f"{_stem(self.path)}-{os.getpid()}.journal"
        descriptor = os.open(self._file, os.O_WRONLY | os.O_CREAT | os.O_TRUNC | os.O_APPEND, 0o600)
        _free(descriptor)
        head = {"format": FORMAT, "case": os.path.realpath(self.path), "content": self.content}
        os.write(descriptor, (json.dumps(head) + "\n").encode())
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

    def remove(self) -> None:
        """Remove the journal file; the next record makes a new one."""
        if self._descriptor is not None and self._file is not None:
            self._file.unlink(missing_ok=True)
            os.close(self._descriptor)
        self._descriptor = self._file = None
        self._dirty.set()
