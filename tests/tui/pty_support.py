"""A real pseudo-terminal with the program in it: what a pilot cannot see (bytes, signals, sizes, colours)."""

from __future__ import annotations

import os
import select
import signal
import sys
import time
from collections.abc import Callable, Sequence
from pathlib import Path

import ptyprocess
import pyte

ROOT = Path(__file__).resolve().parents[2]
READY = "audit ok"
"""Words of the screen when a walk is there and assessed."""
START = "import sys; from tui.app import run; sys.exit(run(sys.argv[1]))"
KEYS = {
    "up": "\x1b[A",
    "down": "\x1b[B",
    "right": "\x1b[C",
    "left": "\x1b[D",
    "enter": "\r",
    "escape": "\x1b",
    "tab": "\t",
    "ctrl+z": "\x1a",
    "ctrl+l": "\x0c",
    "ctrl+q": "\x11",
}


class QuietScreen(pyte.Screen):
    """pyte without the private report modes that it would draw as text."""

    def report_device_status(self, mode: int, **_: object) -> None:
        """A terminal that reports nothing."""


class Terminal:
    """One program in a pseudo-terminal of a size; its screen is read by pyte."""

    def __init__(
        self,
        arguments: Sequence[str],
        *,
        columns: int = 80,
        rows: int = 24,
        env: dict[str, str] | None = None,
        program: str = START,
        cwd: Path = ROOT,
    ) -> None:
        own = {k: v for k, v in os.environ.items() if k not in ("NO_COLOR", "COLORTERM", "SSH_CONNECTION")}
        own |= {"TERM": "xterm-256color", "PYTHONPATH": str(ROOT), "OMP_NUM_THREADS": "1", **(env or {})}
        command = [sys.executable, "-c", program, *arguments]
        self.process = ptyprocess.PtyProcess.spawn(command, env=own, dimensions=(rows, columns), cwd=str(cwd))
        self.screen = QuietScreen(columns, rows)
        self.stream = pyte.ByteStream(self.screen)
        self.sent = 0
        self.raw = bytearray()

    def __enter__(self) -> Terminal:
        return self

    def __exit__(self, *_: object) -> None:
        if self.process.isalive():
            self.process.kill(signal.SIGKILL)
        self.process.close(force=True)
        self.process.fileobj.close()

    def pump(self, seconds: float) -> int:
        """Read what comes within `seconds`; returns the bytes read."""
        end, got = time.monotonic() + seconds, 0
        while (left := end - time.monotonic()) > 0:
            if not select.select([self.process.fd], [], [], left)[0]:
                break
            try:
                data = os.read(self.process.fd, 65536)
            except OSError:
                break
            if not data:
                break
            got += len(data)
            self.raw += data
            self.stream.feed(data)
        return got

    def settle(self, quiet: float = 0.3, limit: float = 10.0) -> int:
        """Read until nothing comes for `quiet` seconds; returns the bytes read."""
        end, got = time.monotonic() + limit, 0
        while time.monotonic() < end:
            more = self._once(quiet)
            if not more:
                break
            got += more
        return got

    def _once(self, wait: float) -> int:
        if not select.select([self.process.fd], [], [], wait)[0]:
            return 0
        return self.pump(0.001)

    @property
    def text(self) -> str:
        """The screen as lines of text."""
        return "\n".join(self.screen.display)

    def wait(self, test: str | Callable[[str], bool], limit: float = 15.0) -> str:
        """Read until the screen holds a text (or passes a test); fails with the screen shown."""
        holds = (lambda screen: test in screen) if isinstance(test, str) else test
        end = time.monotonic() + limit
        while not holds(self.text):
            assert time.monotonic() < end, f"waited for {test!r} on the screen:\n{self.text}"
            self.pump(0.02)
        return self.text

    def press(self, *keys: str) -> None:
        """Type keys: names of `KEYS`, or the text itself."""
        self.process.write("".join(KEYS.get(key, key) for key in keys).encode())

    def status(self, limit: float = 8.0) -> int:
        """Exit status of the program, minus the signal where one ended it."""
        end = time.monotonic() + limit
        while self.process.isalive():
            assert time.monotonic() < end, "the program did not end"
            self.pump(0.05)
        self.pump(0.05)
        signalled = self.process.signalstatus
        return -int(signalled) if signalled else int(self.process.exitstatus)

    def resize(self, columns: int, rows: int) -> None:
        """Give the terminal another size."""
        self.screen.resize(rows, columns)
        self.process.setwinsize(rows, columns)
