"""A session of someone who knows ramjets and has never seen the program: real keys in a real pseudo-terminal, no manual.

The keys pressed are those that the screen itself names. Within it: change an input, see what limits the engine, compare with
before, leave without losing work and find it again. `python -m tests.tui.test_newcomer 80 24` prints its screens.
"""

from __future__ import annotations

import re
import shutil
import sys
import tempfile
from collections.abc import Iterator
from pathlib import Path

import pytest

from tests.tui.pty_support import ROOT, Terminal

CASE = ROOT / "cases" / "saltmarsh.toml"
SIZES = ((80, 24), (120, 40))


def key_for(terminal: Terminal, word: str) -> str:
    """The key that the last line of the screen names for a word."""
    last = [row for row in terminal.screen.display if row.strip()][-1]
    found = re.search(rf"(\S+) {word}", last)
    assert found is not None, f"no key for {word!r} in {last!r}"
    return found[1]


def press(terminal: Terminal, word: str) -> None:
    """Press the key that the screen names for a word."""
    terminal.press(key_for(terminal, word).lower() if word in ("inputs", "edit") else key_for(terminal, word))


def session(folder: Path, columns: int, rows: int) -> Iterator[tuple[str, str]]:
    """The session: (what was done, the screen after it), step by step. folder: a new one for the case and the state."""
    path = folder / CASE.name
    shutil.copy(CASE, path)
    env = {"XDG_STATE_HOME": str(folder / "state"), "XDG_CONFIG_HOME": str(folder / "config")}
    with Terminal([str(path)], columns=columns, rows=rows, env=env) as terminal:
        terminal.wait("audit ok")
        terminal.settle(0.5)
        yield "opened", terminal.text
        terminal.press("right", "right", "right")
        terminal.settle()
        press(terminal, "inputs")
        terminal.settle()
        terminal.press("down", "down", "down", "down")
        terminal.wait(">equivalence ratio")
        press(terminal, "edit")
        terminal.wait("Enter commits")
        terminal.press(*"0.7", "enter")
        terminal.wait(lambda text: "kN +" in text and "audit ok" in text)
        terminal.settle(0.6)
        yield "Tab, four steps down, Enter, 0.7, Enter", terminal.text
        press(terminal, "limits")
        terminal.wait("its input: temperature ratio")
        terminal.settle()
        yield "w", terminal.text
        terminal.press("escape")
        terminal.wait("component")
        terminal.press("tab")
        terminal.settle()
        press(terminal, "compare")
        terminal.wait(lambda text: "100 %" in text or "equivalence ratio" in text)
        terminal.settle(1.0)
        yield "Tab, c", terminal.text
        terminal.press("escape")
        terminal.wait("component")
        terminal.settle()
        press(terminal, "leave")
        assert terminal.status() == 0
        assert b"Work is kept" in terminal.raw
    with Terminal([str(path)], columns=columns, rows=rows, env=env) as terminal:
        terminal.wait("Unsaved work found")
        terminal.settle()
        yield "q, and opened again", terminal.text


@pytest.mark.parametrize(("columns", "rows"), SIZES)
def test_a_newcomer_finds_the_way_by_what_the_screen_says(tmp_path: Path, columns: int, rows: int) -> None:
    seen = dict(session(tmp_path, columns, rows))
    assert "near: self-ignition, T3" in seen["opened"]
    edited = seen["Tab, four steps down, Enter, 0.7, Enter"]
    assert "equivalence ratio" in edited
    assert "+0.01" in edited
    assert "self-ignition" in seen["w"]
    compared = seen["Tab, c"]
    assert "0.7" in compared
    assert "thrust" in compared
    assert "left 1 edit of this case" in seen["q, and opened again"]


def main(columns: int, rows: int) -> None:
    """Print the screens of the session."""
    with tempfile.TemporaryDirectory() as folder:
        for done, screen in session(Path(folder), columns, rows):
            print(f"== {done}")
            print("\n".join(row.rstrip() for row in screen.splitlines()))


if __name__ == "__main__":
    main(int(sys.argv[1]), int(sys.argv[2]))
