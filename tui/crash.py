"""What happens to a defect: a crash file, one line to the user, exit status 1."""

from __future__ import annotations

import contextlib
import os
import sys
import tempfile
import traceback
from datetime import UTC, datetime
from pathlib import Path
from types import TracebackType

from tui.journal import state_directory
from tui.output import tell


def install() -> None:
    """From now on an exception that nothing handles leaves a crash file instead of a traceback."""
    sys.excepthook = _report


def _report(kind: type[BaseException], error: BaseException, trace: TracebackType | None) -> None:
    detail = "".join(traceback.format_exception(kind, error, trace))
    words = f"{datetime.now(UTC).isoformat(timespec='seconds')}\n{' '.join(sys.argv)}\nPython {sys.version}\n\n{detail}"
    where = next((path for path in (_write(folder, words) for folder in _folders()) if path), "")
    kept = f"details are in {where}" if where else "no file could be written for the details"
    tell(f"ductwalk: internal error, a defect of the program ({kind.__name__}); {kept}")


def _folders() -> list[Path]:
    """Where a crash file may go, the preferred place first."""
    temporary = Path(tempfile.gettempdir())
    try:
        return [state_directory(), temporary]
    except OSError:
        return [temporary]


def _write(folder: Path, words: str) -> str:
    """Path of the crash file written in `folder`, "" where it cannot be."""
    with contextlib.suppress(OSError):
        folder.mkdir(parents=True, exist_ok=True)
        handle, path = tempfile.mkstemp(prefix="crash-", suffix=".txt", dir=folder)
        with os.fdopen(handle, "w", encoding="utf-8", errors="backslashreplace") as file:
            file.write(words)
        return path
    return ""
