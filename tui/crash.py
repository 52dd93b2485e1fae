"""What happens to a defect: a crash file and one line to the user; where the screen stands it goes on, else the exit status is 1."""

from __future__ import annotations

import contextlib
import os
import sys
import tempfile
import traceback
from collections.abc import Callable, Iterator
from datetime import UTC, datetime
from pathlib import Path
from types import TracebackType

from cycle.errors import CaseError, Fault, printable
from tui.journal import state_directory
from tui.output import tell

_written: dict[tuple[str, str, int], str] = {}
"""Kind of an error and place where it was raised -> its crash file: a defect met at every key writes one."""


class InternalError(CaseError):
    """An error that nothing expects, as one line that says where the details are."""

    def __str__(self) -> str:
        return printable(self.faults[0].text, 1000)


def install() -> None:
    """From now on an exception that nothing handles leaves a crash file instead of a traceback."""
    sys.excepthook = _report


def defect(error: BaseException) -> InternalError:
    """The words for an error that nothing expects; its crash file is written. One that is a `InternalError` already stays as it is."""
    if isinstance(error, InternalError):
        return error
    where = crash_file(error)
    home = os.path.join(os.path.expanduser("~"), "")
    shown = f"~/{where.removeprefix(home)}" if where.startswith(home) else where or "no file could be written for the details"
    return InternalError([Fault("", "", f"internal error ({type(error).__name__}): {shown}")])


@contextlib.contextmanager
def caught(say: Callable[[str], object]) -> Iterator[None]:
    """Tell an error that nothing expects instead of raising it. say: takes its words."""
    try:
        yield
    except Exception as error:
        say(str(defect(error)))


def crash_file(error: BaseException) -> str:
    """Path of the crash file of an error, "" where none could be written."""
    last = (traceback.extract_tb(error.__traceback__) or [traceback.FrameSummary("", 0, "")])[-1]
    place = (type(error).__name__, last.filename, last.lineno or 0)
    if not _written.get(place):
        detail = "".join(traceback.format_exception(error))
        words = f"{datetime.now(UTC).isoformat(timespec='seconds')}\n{' '.join(sys.argv)}\nPython {sys.version}\n\n{detail}"
        _written[place] = next((path for path in (_write(folder, words) for folder in _folders()) if path), "")
    return _written[place]


def _report(kind: type[BaseException], error: BaseException, trace: TracebackType | None) -> None:
    where = crash_file(error)
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
