"""The screen killed at random moments of edits, undos and saves: `python -m tests.tui.kills LOW HIGH`.

No edit that was on the screen may be lost, and the case file is whole: file and journal together give the case that was shown last, or one
with the edit that was under way.
"""

from __future__ import annotations

import os
import random
import re
import signal
import sys
import tempfile
import time
from pathlib import Path

from cycle.case import load
from tests.tui.pty_support import READY, Terminal
from tests.tui.test_screen_parts import TEXT
from tui import journal
from tui.screens.filing import replay
from tui.session import Session, loaded

STEPS = {"+": 1, "-": -1, ">": 10, "<": -10, "u": 0, "U": 0, "s": 0}
"""Keys, and by how many tenths they move the Mach number in hand."""

_MACH = re.compile(r" M ([0-9.]+) ")


def shown(terminal: Terminal) -> float:
    """The Mach number of the solution on the screen."""
    found = _MACH.search(terminal.text.splitlines()[0])
    assert found is not None, terminal.text
    return float(found[1])


class Expected:
    """What the keys ask for: the Mach number, and those that undo and redo go back to."""

    def __init__(self) -> None:
        self.mach, self.past, self.future = 6.0, list[float](), list[float]()

    def press(self, key: str) -> None:
        """Take a key as the screen does."""
        if key == "u" and self.past:
            self.future.append(self.mach)
            self.mach = self.past.pop()
        elif key == "U" and self.future:
            self.past.append(self.mach)
            self.mach = self.future.pop()
        elif STEPS[key]:
            self.past, self.future, self.mach = [*self.past, self.mach], [], round(self.mach + STEPS[key] / 10, 1)


def kept(path: Path) -> float:
    """The Mach number that file and journal give. Errors: CaseError where the file is no case."""
    case = load(path)
    left = journal.left_behind(str(path))
    if left is not None:
        got = replay(loaded(Session(str(path)), case, case.stamp), left)
        assert got.refused == 0 and got.session.case is not None
        case = got.session.case
    return float(case.numbers["flight.mach"])


def run(seed: int) -> None:
    """One program: keys until the screen shows them, then more keys, and a kill while they are taken. Errors: AssertionError."""
    draw = random.Random(seed)
    before = os.environ.get("XDG_STATE_HOME")
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "case.toml"
        path.write_text(TEXT)
        os.environ["XDG_STATE_HOME"] = f"{folder}/state"
        try:
            asked, last = _killed(draw, path, {"XDG_STATE_HOME": f"{folder}/state"})
            found = kept(path)
            assert found in asked, f"seed {seed}: {found} is kept; {asked[0]} was shown, then {asked[1:]} asked for by {last}"
        finally:
            os.environ.pop("XDG_STATE_HOME") if before is None else os.environ.update(XDG_STATE_HOME=before)


def _killed(draw: random.Random, path: Path, env: dict[str, str]) -> tuple[list[float], str]:
    """The Mach number on the screen before the last keys, and those that these ask for, one after the other; these keys."""
    expected = Expected()
    with Terminal([str(path)], env=env) as terminal:
        terminal.wait(READY, 40.0)
        terminal.press("tab")
        for _ in range(draw.randint(1, 8)):
            keys = draw.choices(list(STEPS), (4, 2, 1, 1, 8, 2, 5), k=draw.randint(1, 5))
            for key in keys:
                if 2.0 < expected.mach < 12.0 or not STEPS[key]:
                    terminal.press(key)
                    expected.press(key)
            terminal.press("?")  # a page comes when all keys before are taken
            terminal.wait(lambda text: text.startswith("Keys"), 20.0)
            terminal.press("q")
            terminal.wait(lambda text: not text.startswith("Keys") and shown(terminal) == expected.mach, 20.0)
        asked, last = [expected.mach], "".join(draw.choices(list(STEPS), (4, 3, 1, 1, 4, 2, 4), k=draw.choice((0, 0, 0, 1, 2, 8))))
        for key in last:
            terminal.press(key)
            expected.press(key)
            asked.append(expected.mach)
            time.sleep(draw.choice((0.0, 0.0, 0.003, 0.02)))
        time.sleep(draw.choice((0.0, 0.001, 0.005, 0.02, 0.1)))
        terminal.process.kill(signal.SIGKILL)
        terminal.status()
    return asked, last


if __name__ == "__main__":
    low, high = map(int, sys.argv[1:])
    for number in range(low, high):
        run(number)
    print(f"seeds {low} to {high - 1}: {high - low} kills, no edit lost, every file whole")
