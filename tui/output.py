"""Where the batch command reads cases and writes results: standard input, standard output, standard error."""

from __future__ import annotations

import contextlib
import difflib
import os
import re
import sys
from collections.abc import Iterable
from typing import TYPE_CHECKING, TextIO

from cycle.atomic import read_named, trouble
from cycle.errors import CaseError, Fault, printable

if TYPE_CHECKING:
    from cycle.case import Case

STANDARD_INPUT = "-"
_RUN = re.compile(r"[^\n\t]+")
LARGEST_CASE = 1024 * 1024
"""Bytes of a case that are read from standard input."""


def near(given: str, names: Iterable[str]) -> str:
    """Words that ask for the name that was probably meant, "" where none comes near."""
    found = difflib.get_close_matches(given[:80], list(names), 1, 0.6)
    return f"; did you mean {found[0]}?" if found else ""


def prepare_streams() -> None:
    """Let no character stop the output: what the stream's encoding lacks is written escaped."""
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="backslashreplace")


def harmless(text: str) -> str:
    """`text` with all but its line ends and tabs escaped that would drive a terminal."""
    return _RUN.sub(lambda run: printable(run[0], None), text)


def emit(text: str) -> bool:
    """Write results to standard output at once.

    Returns False where nobody reads any more (a closed pipe or stream). Raises CaseError where they cannot be written.
    """
    if sys.stdout is None:
        return False
    try:
        sys.stdout.write(harmless(text) if sys.stdout.isatty() else text)
        sys.stdout.flush()
    except BrokenPipeError:
        _discard(sys.stdout)
        return False
    except OSError as error:
        _discard(sys.stdout)
        raise trouble("standard output", "written", error) from error
    return True


def tell(text: str) -> None:
    """Write a line to standard error; nothing happens where it is closed."""
    if sys.stderr is None:
        return
    try:
        print(harmless(text), file=sys.stderr, flush=True)
    except OSError:
        _discard(sys.stderr)


def _discard(stream: TextIO) -> None:
    """Send the rest of a broken stream nowhere, so that closing it at exit raises nothing."""
    with contextlib.suppress(OSError), open(os.devnull, "wb") as nowhere:
        os.dup2(nowhere.fileno(), stream.fileno())


def read_content(name: str, largest: int = LARGEST_CASE) -> bytes:
    """Content of a file, or of standard input for "-": at most `largest` bytes and one more, so that too much is seen.

    Raises CaseError where it cannot be read.
    """
    if name != STANDARD_INPUT:
        return read_named(name, largest, "a case file or stored walks")[0]
    try:
        if sys.stdin is None:
            raise CaseError((Fault("standard input", "", "is closed"),))
        return sys.stdin.buffer.read(largest + 1)
    except OSError as error:
        raise trouble("standard input", "read", error) from error


def load_case(name: str) -> Case:
    """The case of a file, or of standard input for "-". Raises CaseError with all its faults."""
    from cycle.case import load, loads

    return loads(read_content(name), "standard input") if name == STANDARD_INPUT else load(name)
