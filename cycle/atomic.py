"""Files read within bounds, and written whole or not at all; those of the installed program are never changed."""

from __future__ import annotations

import errno
import os
import stat
from collections.abc import Callable
from contextlib import suppress

from cycle.errors import CaseError, Fault, shown

_ROOT = os.path.dirname(os.path.dirname(os.path.realpath(__file__)))
OWN = tuple(os.path.join(_ROOT, name) for name in ("cycle", "tui", "cases"))
"""Folders of the installed program, without links."""


class ReadOnly(PermissionError):  # noqa: N818 (a state of a path, not a defect)
    """The path lies in the installed program, whose files are never written, renamed or deleted."""


def is_own(path: str | os.PathLike[str]) -> bool:
    """Whether a file of this name lies in a folder of the installed program. path: a last part that is a link is not followed."""
    folder, name = os.path.split(os.path.abspath(os.fspath(path)))
    place = os.path.join(os.path.realpath(folder), name)
    return any(place == own or place.startswith(own + os.sep) for own in OWN)


def refuse_own(path: str | os.PathLike[str]) -> None:
    """Raise `ReadOnly` where a file of this name lies in a folder of the installed program. path: as of `is_own`."""
    if is_own(path):
        raise ReadOnly(errno.EACCES, "part of the installed program, which is read-only; give a name outside it", os.fspath(path))


class Irregular(OSError):  # noqa: N818 (a state of a path, not a defect)
    """The path is that of a device, a pipe or a socket."""


def read_file(path: str | os.PathLike[str], most: int) -> tuple[bytes, os.stat_result]:
    """Content of a regular file, and its status.

    path; most: bytes that are wanted; one more is read, so that too much is seen. Raises `Irregular` where it is no regular file,
    IsADirectoryError, OSError where it cannot be read, ValueError where the path can be none.
    """
    # without O_NONBLOCK a pipe that nobody writes to would hold the program for ever
    with open(path, "rb", opener=lambda name, flags: os.open(name, flags | os.O_NONBLOCK)) as stream:
        status = os.fstat(stream.fileno())
        if not stat.S_ISREG(status.st_mode):
            raise Irregular("it is no ordinary file")
        return stream.read(most + 1), status


def read_named(name: str, most: int, kind: str) -> tuple[bytes, os.stat_result]:
    """Content of a file that a user names, and its status.

    name: its path; most: bytes that it may have; kind: what it should be, such as "a case file". Raises CaseError where it cannot be
    read, is no regular file or is larger.
    """
    try:
        data, status = read_file(name, most)
    except Irregular:
        raise _fault(name, f"not {kind}", "a device or pipe", "a file, or - for standard input") from None
    except IsADirectoryError:
        raise _fault(name, f"not {kind}", "a directory", "a file, or - for standard input") from None
    except (OSError, ValueError) as error:
        raise trouble(name, "read", error) from None
    if len(data) > most:
        raise _fault(name, "too large", f"{max(status.st_size, len(data))} bytes", f"at most {most} bytes")
    return data, status


def trouble(name: str, doing: str, error: OSError | ValueError) -> CaseError:
    """What keeps a file from being read or written as a CaseError. name: its path; doing: "read" or "written"; error: as raised."""
    if isinstance(error, OSError):
        return _fault(name, f"cannot be {doing}: {(error.strerror or str(error)).lower()}")
    return _fault(name, "no name of a file", shown(name), "a path")


def _fault(file: str, text: str, given: str = "", allowed: str = "") -> CaseError:
    return CaseError([Fault(file, "", text, given, allowed)])


def place_of(name: str) -> tuple[str, os.stat_result | None]:
    """Where a file that a user names is written, links followed, and the status of what is there, None for nothing.

    name: its path. Raises CaseError where no file can be: in a missing folder, or in the place of anything but a file or a device of
    characters. A pipe would be waited for, and a disk is no file.
    """
    try:
        target = os.path.realpath(name)
        os.stat(os.path.dirname(target))
        status = os.stat(target) if os.path.lexists(target) else None
    except (OSError, ValueError) as error:
        raise trouble(name, "written", error) from None
    if status is not None and not (stat.S_ISREG(status.st_mode) or stat.S_ISCHR(status.st_mode)):
        given = "a directory" if stat.S_ISDIR(status.st_mode) else "a pipe, socket or disk"
        raise _fault(name, "cannot be written", given, "a file")
    return target, status


def write_named(name: str, data: bytes) -> None:
    """Write a file that a user names: a regular one or none yet whole or not at all, a device of characters without waiting for it.

    name: its path, a link is followed. Raises CaseError where it cannot be written; an existing file is then untouched.
    """
    target, status = place_of(name)
    try:
        if status is None or stat.S_ISREG(status.st_mode):
            replace_file(target, data)
        else:
            with os.fdopen(os.open(target, os.O_WRONLY | os.O_NONBLOCK | os.O_NOCTTY), "wb") as device:
                device.write(data)
    except OSError as error:
        raise trouble(name, "written", error) from error


def new_file(path: str | os.PathLike[str], data: bytes) -> None:
    """Write a file that is not there yet, flushed to the disk.

    Raises FileExistsError where something has that name, also where it got it a moment ago; `ReadOnly` in the installed program;
    OSError where the disk refuses: nothing is then left behind.
    """
    refuse_own(path)
    with open(path, "xb") as stream:
        try:
            stream.write(data)
            stream.flush()
            os.fsync(stream.fileno())
        except BaseException:
            with suppress(OSError):
                os.unlink(path)
            raise


def replace_file(target: str, data: bytes, before: Callable[[], None] | None = None) -> float:
    """Replace a file in one step: a new one beside it, flushed to the disk, then renamed.

    target: path of a regular file or of none yet; an existing one keeps its mode. before: called when the new file is
    ready and before it takes the place of the old one; whatever it raises leaves the old one untouched. Returns the new
    file's modification time. Raises `ReadOnly` in the installed program, OSError where the disk refuses; the old file is then
    untouched.
    """
    refuse_own(target)
    folder = os.path.dirname(target)
    # a name has at most 255 bytes, whatever its characters take
    start = os.fsdecode(os.fsencode(os.path.basename(target))[:200])
    beside = os.path.join(folder, f".{start}.{os.getpid()}.tmp")
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
