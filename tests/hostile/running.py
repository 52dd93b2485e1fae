"""Every hostile file and word as a command, in a folder that has what it needs."""

from __future__ import annotations

import contextlib
import io
import os
import re
import socket
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

from tests.hostile import cases, large, words
from tests.tui.command_support import QUICK
from tui import commands

Content = bytes | str
TYPES = re.compile(r"<class|NoneType|\b(?:dict|str|int|float|tuple|datetime)\b|pydantic|Traceback|Errno|codec|object at 0x|sys\.set")
"""Words of the language that the program is written in."""


@dataclass(frozen=True, slots=True)
class Trial:
    """A command, and the file that it is about: its name and what makes its content."""

    name: str
    arguments: tuple[str, ...]
    file: str = ""
    content: object = b""

    def prepare(self, folder: Path) -> None:
        """Write the file of the trial."""
        if self.file:
            made = self.content
            if callable(made):
                made = made((folder / "quick.json").read_bytes()) if made.__code__.co_argcount else made()
            assert isinstance(made, bytes)
            (folder / self.file).write_bytes(made)


def trials() -> Iterator[Trial]:
    """All of them; their names are unique."""
    for name, content in {**cases.ALL, **large.ALL, **large.SOUND}.items():
        yield Trial(f"case, {name}", ("check", "x.toml"), "x.toml", content)
    for name, content in words.TRAJECTORIES.items():
        yield Trial(f"trajectory, {name}", ("solve", "quick.toml", "--format", "csv", "--along", "t.csv"), "t.csv", content)
    for name, content in words.WALKS.items():
        yield Trial(f"walk, {name}", ("compare", "quick.json", "x.json"), "x.json", content)
    for name, text in words.SETTINGS.items():
        yield Trial(f"setting, {name}", ("solve", "quick.toml", "--format", "csv", "--set", text))
    for name, place in words.PLACES.items():
        for command in (("check",), ("compare", "quick.json"), ("solve", "quick.toml", "--along")):
            yield Trial(f"place, {name}, {command[0]}{' along' * (len(command) > 2)}", (*command, place))
        for command in (("solve", "quick.toml", "--format", "csv", "-o"), ("new", "-o"), ("fix-geometry", "quick.toml", "-o")):
            yield Trial(f"place, {name}, {command[0]} -o", (*command, place))


def furnish(folder: Path) -> None:
    """Put into a folder what the trials need."""
    (folder / "quick.toml").write_text(QUICK)
    for link, target in (("loop", "loop2"), ("loop2", "loop"), ("nowhere", "missing/x")):
        (folder / link).symlink_to(target)
    os.mkfifo(folder / "pipe")
    (folder / "folder").mkdir()
    with socket.socket(socket.AF_UNIX) as plug, contextlib.chdir(folder):
        plug.bind("socket")
        run("solve", "quick.toml", "-o", "quick.json")


def run(*arguments: str) -> tuple[int, str, str]:
    """Exit status, standard output and standard error of the command in this process, in the working folder."""
    out, told = io.StringIO(), io.StringIO()
    with contextlib.redirect_stdout(out), contextlib.redirect_stderr(told):
        status = commands.main(arguments)
    return status, out.getvalue(), told.getvalue()


def shortened(told: str) -> str:
    """Lines of at most 160 characters; of more than six the first three and the last."""
    lines = [line if len(line) <= 160 else f"{line[:157]}..." for line in told.splitlines()]
    return "\n".join(lines if len(lines) <= 6 else [*lines[:3], "...", lines[-1]])


def expected() -> dict[str, tuple[int, str]]:
    """Name of every trial -> exit status and standard error, shortened, as `lines.txt` has them."""
    blocks = (Path(__file__).parent / "lines.txt").read_text(encoding="utf-8").rstrip("\n").split("\n* ")
    found = {}
    for block in blocks[1:]:
        head, _, lines = block.partition("\n")
        name, _, status = head.rpartition(": ")
        found[name] = int(status), lines
    return found
