"""What is kept in the state directory besides journals: the pin of each case, and the cases opened last."""

from __future__ import annotations

import json
import os
import sys
import time
from collections.abc import Callable
from dataclasses import asdict, dataclass
from pathlib import Path
from typing import Any

from cycle.atomic import read_file, replace_file
from cycle.record import LARGEST_FILE
from tui.journal import is_path, state_directory, stem

FORMAT = 1
RECENT = "recent.json"
MOST_RECENT = 30
"""Cases in the list of those opened last."""
MOST_PARTS = 100_000
"""Tables and arrays of a file of the state directory that are read at most."""


class Spoilt(OSError):  # noqa: N818 (a state of a file, not a defect)
    """A file of the state directory that does not say what it should."""


@dataclass(frozen=True, slots=True)
class Kept:
    """A pin on disk. label: its words; date: day on which it was pinned; name: of the case; text: its TOML, "" where `stored`, the
    content of a stored walk, stands for it."""

    label: str
    date: str
    name: str
    text: str
    stored: str = ""


@dataclass(frozen=True, slots=True)
class Recent:
    """A case opened before: its path, when (s since the epoch)."""

    path: str
    opened: float


def _write(file: Path, data: dict[str, Any]) -> None:
    content = json.dumps(data).encode()
    if len(content) > LARGEST_FILE:
        raise Spoilt(f"too large: {len(content)} bytes")
    file.parent.mkdir(parents=True, exist_ok=True, mode=0o700)
    replace_file(str(file), content)


def _read(file: Path) -> dict[str, Any] | None:
    """The data of a file, None where there is none. Errors: OSError, `Spoilt` among them."""
    try:
        content, _ = read_file(file, LARGEST_FILE)
    except FileNotFoundError:
        return None
    try:
        small = len(content) <= LARGEST_FILE and content.count(b"[") + content.count(b"{") <= MOST_PARTS
        data = json.loads(content) if small else None
    except (ValueError, RecursionError):
        data = None
    if not isinstance(data, dict) or data.get("format") != FORMAT:
        raise Spoilt("not what this version writes")
    return data


def _is_text(words: str) -> bool:
    """Whether a text that was read can be written: half of a surrogate pair, which JSON may hold, is none."""
    try:
        words.encode()
    except UnicodeEncodeError:
        return False
    return True


def _pin_file(path: str) -> Path:
    return state_directory() / f"{stem(path)}.pin"


def keep_pin(path: str, pin: Kept) -> None:
    """Keep the pin of the case at `path`. Errors: OSError."""
    _write(_pin_file(path), {"format": FORMAT, "case": os.path.realpath(path), **asdict(pin)})


def kept_pin(path: str) -> Kept | None:
    """The pin kept for the case at `path`, None where there is none. Errors: OSError, also where it is not readable as one."""
    data = _read(_pin_file(path))
    if data is None:
        return None
    words = [data.get(key) for key in Kept.__slots__]
    if not all(isinstance(word, str) and _is_text(word) for word in words):
        raise Spoilt("not what this version writes")
    return Kept(*words)  # type: ignore[arg-type]


def drop_pin(path: str) -> None:
    """Forget the pin of the case at `path`. Errors: OSError."""
    _pin_file(path).unlink(missing_ok=True)


def pin_mover(path: str) -> Callable[[str], None]:
    """What gives the pin of the case at `path`, where it has one, to its new path. Ask before the case is moved. Errors: OSError."""
    old = _pin_file(path)

    def move(new: str) -> None:
        target = _pin_file(new)
        if old != target and old.exists():
            target.unlink(missing_ok=True)
            old.rename(target)

    return move


def recent() -> tuple[Recent, ...]:
    """The cases opened last, newest first. Errors: OSError."""
    data = _read(state_directory() / RECENT) or {}
    found = data.get("cases")
    cases = [c for c in found if isinstance(c, dict)] if isinstance(found, list) else []
    sound = [c for c in cases if is_path(c.get("path")) and _is_time(c.get("opened"))]
    return tuple(Recent(c["path"], float(c["opened"])) for c in sound[:MOST_RECENT])


def _is_time(value: Any) -> bool:
    return isinstance(value, int | float) and abs(value) <= sys.float_info.max


def remember(path: str) -> None:
    """Put a case first in the list of those opened last. Errors: OSError."""
    full = os.path.realpath(path)
    try:
        before = recent()
    except Spoilt:
        before = ()
    _write_recent([Recent(full, time.time()), *(r for r in before if r.path != full)])


def forget(path: str) -> None:
    """Take a path out of the list of those opened last. Errors: OSError."""
    _write_recent([r for r in recent() if r.path != path])


def _write_recent(cases: list[Recent]) -> None:
    _write(state_directory() / RECENT, {"format": FORMAT, "cases": [asdict(r) for r in cases[:MOST_RECENT]]})
