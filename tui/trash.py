"""Files thrown away can be brought back: they go to the home trash of the freedesktop.org Trash specification.

Source: freedesktop.org, Trash specification, version 1.0 (2014): `$XDG_DATA_HOME/Trash` with `files` and `info/NAME.trashinfo`. Where that
folder cannot be used, the state directory has one of the same form.
"""

from __future__ import annotations

import errno
import itertools
import os
import shutil
import time
from contextlib import suppress
from dataclasses import dataclass
from pathlib import Path
from urllib.parse import quote

from cycle.atomic import new_file, read_file, refuse_own
from tui.journal import state_directory, user_folder

LARGEST = 64 * 1024 * 1024
"""Bytes of a file that is moved to another file system at most."""


@dataclass(frozen=True, slots=True)
class Thrown:
    """A file in the trash: where it is, the file that says where it was, and where it was."""

    file: Path
    info: Path
    origin: str


def home_trash() -> Path:
    """The user's trash. Errors: OSError where there is no home folder."""
    return user_folder("XDG_DATA_HOME", ".local", "share") / "Trash"


def throw_away(path: str) -> Thrown:
    """Move a file to the trash. Errors: OSError, `ReadOnly` in the installed program among them; the file is then where it was."""
    refuse_own(path)
    origin = os.path.join(os.path.realpath(os.path.dirname(path) or "."), os.path.basename(path))
    os.lstat(origin)
    try:
        return _into(home_trash(), origin)
    except OSError:
        return _into(state_directory() / "trash", origin)


def _into(trash: Path, origin: str) -> Thrown:
    for part in ("files", "info"):
        (trash / part).mkdir(parents=True, exist_ok=True, mode=0o700)
    name, info = _reserved(trash, origin)
    target = trash / "files" / name
    try:
        move_new(origin, str(target))
    except OSError:
        info.unlink(missing_ok=True)
        raise
    return Thrown(target, info, origin)


def _reserved(trash: Path, origin: str) -> tuple[str, Path]:
    """A name that is free in the trash, taken by its info file."""
    base, end = os.path.splitext(os.path.basename(origin))
    words = f"[Trash Info]\nPath={quote(os.fsencode(origin))}\nDeletionDate={time.strftime('%Y-%m-%dT%H:%M:%S')}\n"
    for number in itertools.count(1):
        name = f"{base}{f'.{number}' if number > 1 else ''}{end}"
        info = trash / "info" / f"{name}.trashinfo"
        if os.path.lexists(trash / "files" / name):
            continue
        try:
            with info.open("x", encoding="ascii") as stream:
                stream.write(words)
        except FileExistsError:
            continue
        return name, info
    raise AssertionError


def bring_back(thrown: Thrown) -> None:
    """Move a file back to where it was. Errors: OSError, also where another file has its name by now."""
    move_new(str(thrown.file), thrown.origin)
    thrown.info.unlink(missing_ok=True)


def move_new(path: str, target: str) -> None:
    """Move a file to a name that no file has. Errors: FileExistsError, OSError, `ReadOnly` where one of both is in the installed
    program; the file is then where it was."""
    refuse_own(path)
    refuse_own(target)
    try:
        os.link(path, target, follow_symlinks=False)
    except FileExistsError:
        raise
    except OSError:  # another file system, or one without links
        _copied(path, target)
    try:
        os.unlink(path)
    except OSError:
        with suppress(OSError):
            os.unlink(target)
        raise


def _copied(path: str, target: str) -> None:
    """A copy of a file or of a link under a name that no file has, not even one that got it a moment ago. Errors: OSError."""
    if os.path.islink(path):
        os.symlink(os.readlink(path), target)
        return
    content, _ = read_file(path, LARGEST)
    if len(content) > LARGEST:
        raise OSError(errno.EFBIG, os.strerror(errno.EFBIG))
    new_file(target, content)
    with suppress(OSError):
        shutil.copystat(path, target)
