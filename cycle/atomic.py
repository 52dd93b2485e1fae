"""Files written whole or not at all."""

from __future__ import annotations

import os
import stat
from collections.abc import Callable
from contextlib import suppress


def replace_file(target: str, data: bytes, before: Callable[[], None] | None = None) -> float:
    """Replace a file in one step: a new one beside it, flushed to the disk, then renamed.

    target: path of a regular file or of none yet; an existing one keeps its mode. before: called when the new file is
    ready and before it takes the place of the old one; whatever it raises leaves the old one untouched. Returns the new
    file's modification time. Raises OSError where the disk refuses; the old file is then untouched.
    """
    folder = os.path.dirname(target)
    beside = os.path.join(folder, f".{os.path.basename(target)[:200]}.{os.getpid()}.tmp")
    handle = os.open(beside, os.O_WRONLY | os.O_CREAT | os.O_EXCL | os.O_CLOEXEC, 0o666)
    try:
        with os.fdopen(handle, "wb") as stream:
            with suppress(FileNotFoundError):
                os.fchmod(handle, stat.S_IMODE(os.stat(target).st_mode))
            stream.write(data)
            stream.flush()
            os.fsync(handle)
            mtime = os.fstat(handle).st_mtime
        if before is not None:
            before()
        os.replace(beside, target)
    except BaseException:
        with suppress(FileNotFoundError):
            os.unlink(beside)
        raise
    _flush_directory(folder)
    return mtime


def _flush_directory(directory: str) -> None:
    """Make the rename last through a power cut, where the file system can."""
    with suppress(OSError):
        handle = os.open(directory, os.O_RDONLY | os.O_DIRECTORY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)
