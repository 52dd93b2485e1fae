"""A picture and its data as files: names checked, nothing overwritten, both files or none."""

from __future__ import annotations

import os
import re
from contextlib import suppress
from dataclasses import dataclass

from cycle.atomic import new_file
from cycle.errors import CaseError, Fault

LONGEST = 200
"""Characters of the last part of a name."""
ENDINGS = (".svg", ".csv")


@dataclass(frozen=True, slots=True)
class Written:
    """The two files of a picture."""

    drawing: str
    data: str


def stem_of(name: str) -> str:
    """The name of both files without its ending.

    Parameters: name, as typed; "~" is the home folder, an ending .svg or .csv is left off. Errors: CaseError where it is no name.
    """
    path = os.path.expanduser(name.strip())
    stem = next((path[: -len(e)] for e in ENDINGS if path.lower().endswith(e)), path)
    last = os.path.basename(stem)
    if not last or last in (".", "..") or len(last) > LONGEST or not name.isprintable():
        raise CaseError([Fault("", "", "no name of a file", name[:LONGEST], "the name of a new file")])
    return stem


def plain_name(*words: str) -> str:
    """A file name from words: small letters, digits and dashes."""
    return re.sub(r"[^a-z0-9]+", "-", " ".join(words).lower()).strip("-")[:60] or "picture"


def write(name: str, drawing: str, data: str) -> Written:
    """Write a picture and its data as NAME.svg and NAME.csv, UTF-8.

    Parameters: name, as typed; drawing, SVG; data, CSV. Returns: where they are. Errors: CaseError where one of them exists
    already or cannot be written; then neither is left behind.
    """
    stem = stem_of(name)
    paths = [f"{stem}{ending}" for ending in ENDINGS]
    made: list[str] = []
    path = ""
    try:
        for path, text in zip(paths, (drawing, data), strict=True):
            new_file(path, text.encode("utf-8", "replace"))
            made.append(path)
    except OSError as error:
        for done in made:
            with suppress(OSError):
                os.unlink(done)
        exists = isinstance(error, FileExistsError)
        words = "exists already and is not overwritten" if exists else f"cannot be written: {(error.strerror or str(error)).lower()}"
        raise CaseError([Fault(path, "", words)]) from error
    return Written(*paths)
