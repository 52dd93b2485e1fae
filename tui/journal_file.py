"""The file of a journal: JSON lines, read within bounds; locked by the session that writes it, each write whole or not at all."""

from __future__ import annotations

import fcntl
import itertools
import json
import os
import threading
from contextlib import suppress
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from cycle.atomic import read_file

LARGEST = 16 * 1024 * 1024
"""Bytes of a journal that are read at most."""
MOST_RECORDS, LONGEST_RECORD, DEEPEST = 100_000, 4 << 20, 16
"""Records of a journal, bytes of one and levels of tables and arrays in it that are read at most."""

Record = dict[str, Any]


def records(file: Path) -> list[Record]:
    """Whole records of a journal, its head first; a last line cut off by a crash is left out. Errors: OSError.

    Behind a line that is none nothing can be made again as it was: that line and all behind it are empty records.
    """
    content, _ = read_file(file, LARGEST)
    lines = content[:LARGEST].split(b"\n", MOST_RECORDS)
    whole = lines[:-1] if len(content) <= LARGEST and len(lines) <= MOST_RECORDS else [*lines[:-1], b""]
    read = list(itertools.takewhile(bool, map(_record, whole)))
    return read + [{}] * (len(whole) - len(read))


def _record(raw: bytes) -> Record:
    """A record, {} where a line is none."""
    try:
        found = json.loads(raw) if len(raw) <= LONGEST_RECORD else None
    except (ValueError, RecursionError):
        return {}
    return found if isinstance(found, dict) and not _deep(found) else {}


def _deep(value: Any) -> bool:
    """Whether tables and arrays are nested deeper than in any record."""
    level = [value]
    for _ in range(DEEPEST):
        parts = (part for one in level for part in (one.values() if isinstance(one, dict) else one))
        level = [part for part in parts if isinstance(part, dict | list)]
        if not level:
            return False
    return True


def is_free(descriptor: int) -> bool:
    """Whether no running session holds the journal, which this one holds then; a file system without locks counts as free."""
    try:
        fcntl.flock(descriptor, fcntl.LOCK_EX | fcntl.LOCK_NB)
    except BlockingIOError:
        return False
    except OSError:
        return True
    return True


def _append(descriptor: int, data: bytes) -> None:
    """Append all of it or nothing: a disk that fills up takes a part, behind which no record could be read. Errors: OSError."""
    size = os.fstat(descriptor).st_size
    try:
        while data:
            data = data[os.write(descriptor, data) :]
    except OSError:
        with suppress(OSError):
            os.ftruncate(descriptor, size)
        raise


def _created(folder: Path, stem: str) -> tuple[int, Path]:
    """A new file of a name that starts with `stem`, never one that is there: its descriptor, locked, and its path. Errors: OSError."""
    folder.mkdir(parents=True, exist_ok=True, mode=0o700)
    for number in itertools.count():
        file = folder / f"{stem}-{os.getpid()}{f'-{number}' if number else ''}.journal"
        try:
            descriptor = os.open(file, os.O_WRONLY | os.O_CREAT | os.O_EXCL | os.O_APPEND, 0o600)
        except FileExistsError:
            continue
        is_free(descriptor)
        return descriptor, file
    raise AssertionError


@dataclass(slots=True)
class Written:
    """A journal file that is open for writing, locked. trouble: why the disk lost what it had taken, "" while it did not."""

    file: Path
    descriptor: int
    trouble: str = ""
    _closed: bool = False
    _dirty: threading.Event = field(default_factory=threading.Event)

    @classmethod
    def begun(cls, folder: Path, stem: str, data: bytes) -> Written:
        """A new one with this in it. Errors: OSError; there is none then."""
        descriptor, file = _created(folder, stem)
        new = cls(file, descriptor)
        try:
            new.append(data)
        except OSError:
            new.close(remove=True)
            raise
        threading.Thread(target=new._bring, name="journal", daemon=True).start()
        return new

    def append(self, data: bytes) -> None:
        """Append to the file; a thread brings it to the disk. Errors: OSError; nothing of it is appended then."""
        _append(self.descriptor, data)
        self._dirty.set()

    def _bring(self) -> None:
        while self._dirty.wait() and not self._closed:
            self._dirty.clear()
            with suppress(OSError):
                self.flush()

    def flush(self) -> None:
        """Wait until all is on the disk, which may say only now that it is full. Errors: OSError."""
        try:
            os.fsync(self.descriptor)
        except OSError as error:
            self.trouble = "" if self._closed else str(error.strerror or error)
            raise

    @property
    def sound(self) -> bool:
        """Whether what was written is still there: another hand may remove the file."""
        return not self.trouble and os.fstat(self.descriptor).st_nlink > 0

    def close(self, remove: bool = False) -> None:
        """Close the file. remove: whether it goes; one that cannot be removed is offered again, which loses nothing."""
        self._closed = True
        with suppress(OSError):
            if remove and os.fstat(self.descriptor).st_nlink:  # else its name may be that of the next one
                self.file.unlink(missing_ok=True)
        with suppress(OSError):
            fcntl.flock(self.descriptor, fcntl.LOCK_UN)  # closed alone it is held while the thread waits for the disk
        os.close(self.descriptor)
        self._dirty.set()
