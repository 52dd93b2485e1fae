"""Bytes that no terminal should send, into the screen in a pseudo-terminal: `python -m tests.tui.byte_fuzz SEEDS TOKENS`.

For each seed keys, pastes, escape sequences whole, cut and huge, bytes that are no text, and sizes. At the end the program must answer,
have written no crash file, and its journal must give the case that it shows.
"""

from __future__ import annotations

import json
import os
import random
import select
import signal
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

from cycle.case import load, thawed
from tests.tui.pty_support import Terminal
from tests.tui.test_screen_parts import TEXT
from tests.tui.test_screen_pty import cpu_seconds
from tui import journal
from tui.screens.filing import replay
from tui.session import Session, loaded
from tui.terminal import PATIENCE

PROGRAM = """
import json, os, signal, sys
from tui import app, leaving
from tui.screens.main import MainScreen
MainScreen.do_leave = MainScreen.do_suspend = lambda self: None
made, start = [], app.DuctwalkApp.__init__
def begin(self, *given, **named):
    made.append(self)
    start(self, *given, **named)
def tell(*_):
    from cycle.case import thawed
    now = made[0].main.session
    case = now.case and [now.case.title, now.case.notes, thawed(now.case.spelled), thawed(now.case.studies)]
    with open(sys.argv[2] + ".new", "w") as file:
        json.dump({"path": now.path, "case": case}, file)
    os.replace(sys.argv[2] + ".new", sys.argv[2])
app.DuctwalkApp.__init__ = begin
signal.signal(signal.SIGUSR1, tell)
sys.exit(app.run(sys.argv[1]))
"""
"""The screen without the keys that leave and suspend it; it tells its case to a file when it gets a signal."""

KEYS = [
    b"\x1b[A",
    b"\x1b[B",
    b"\x1b[C",
    b"\x1b[D",
    b"\t",
    b"\r",
    b"\x7f",
    b"\x1b",
    b"\x0c",
    b"\x1b[5~",
    b"\x1b[6~",
    b"\x1bOP",
    b"\x1b[H",
    b"\x1b[F",
]
# neither / nor ~ : a name typed must stay inside the folder of the test
PRINTED = b"abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ0123456789+-=<>.,:?!'\"()[]{}%* "
ODD = ["\u00e9", "\u4e2d", "\U0001f680", "e\u0301", "\u202e", "\u200b", "\u2028", "\ufeff", "\x00", "\x9b", "\ud7ff", "\uffff", "\u0661"]


def number(draw: random.Random) -> bytes:
    """A number of a report: small, at an edge, or with hundreds of digits."""
    size = draw.choice((1, 1, 2, 3, 5, 7, 10, 20, 400))
    edge = draw.choice((b"0", b"1", b"-1", b"65535", b"55296", b"57343", b"1114111", b"1114112", b"2026", b"2048", b"48", b""))
    return edge if draw.random() < 0.4 else b"".join(draw.choice((b"0", b"1", b"9", b"5")) for _ in range(size))


def numbers(draw: random.Random) -> bytes:
    """Several, joined as reports join them."""
    return draw.choice((b";", b";", b";", b":")).join(number(draw) for _ in range(draw.randint(0, 5)))


def sequence(draw: random.Random) -> bytes:
    """A control sequence: a report of a cursor, a size, a mode, a mouse, a key; or any other."""
    head = b"\x1b[" + draw.choice((b"", b"", b"<", b"?", b">", b"="))
    return (
        head
        + numbers(draw)
        + draw.choice((b"", b"", b"$", b" ", b"!"))
        + draw.choice((b"R", b"t", b"y", b"u", b"M", b"m", b"~", b"A", b"c", b"n", b"I"))
    )


def raw_mouse(draw: random.Random) -> bytes:
    """A mouse report of the oldest kind."""
    return b"\x1b[M" + draw.randbytes(3)


def string(draw: random.Random) -> bytes:
    """A reply in words: a colour, a name of the terminal."""
    head, end = draw.choice((b"\x1b]11;rgb:", b"\x1bP>|", b"\x1b_G", b"\x1b^", b"\x1bX")), draw.choice((b"\x07", b"\x1b\\", b"", b"\x1b"))
    return head + draw.randbytes(draw.choice((0, 5, 30, 500))) + end


def paste(draw: random.Random) -> bytes:
    """A paste with anything in it, seldom without an end."""
    inside = b"".join(draw.choice((printed, odd, sequence, string, no_text))(draw) for _ in range(draw.randint(0, 8)))
    size = draw.choice((1, 1, 1, 1, 300))
    return b"\x1b[200~" + inside * size + (b"\x1b[201~" if draw.random() < 0.95 else b"")


def printed(draw: random.Random) -> bytes:
    """A key that types something."""
    return bytes([draw.choice(PRINTED)])


def key(draw: random.Random) -> bytes:
    """A key that types nothing."""
    return draw.choice(KEYS)


def control(draw: random.Random) -> bytes:
    """A control character."""
    return bytes([draw.randrange(32)])


def odd(draw: random.Random) -> bytes:
    """A character that is rarely typed."""
    return draw.choice(ODD).encode("utf-8", "surrogatepass")


def no_text(draw: random.Random) -> bytes:
    """Bytes that are no UTF-8: Latin-1, half of a character, a surrogate."""
    return draw.choice((b"\xe9", b"\xff", b"\xc3", b"\xf0\x9f", b"\xed\xa0\x80", b"\x80" * 5, b"\xc0\xaf", draw.randbytes(6)))


def cut(draw: random.Random) -> bytes:
    """The beginning of a sequence."""
    whole = sequence(draw)
    return whole[: draw.randint(1, len(whole))]


def setting(draw: random.Random) -> bytes:
    """A value typed into the input in hand."""
    return b"\x1b\x1b\t\r\x15" + draw.choice((b"6.5", b"7", b"85 kft", b"1e400", b"nan", b"-1", b"5 " + no_text(draw))) + b"\r"


KINDS: dict[Callable[[random.Random], bytes], int] = {
    printed: 30, key: 25, setting: 2, sequence: 12, cut: 6, no_text: 6, odd: 5, control: 4, raw_mouse: 3, string: 3, paste: 4,
}  # fmt: skip


class Fuzz:
    """One program and what is sent to it. Parameters: folder, empty; draw, the random numbers."""

    def __init__(self, folder: Path, draw: random.Random) -> None:
        self.folder, self.draw = folder, draw
        self.state = folder / "state"
        (folder / "here").mkdir()
        self.case = folder / "here" / "case.toml"
        self.case.write_text(TEXT)
        env = {
            "XDG_STATE_HOME": str(self.state),
            "XDG_DATA_HOME": str(folder / "data"),
            "XDG_CONFIG_HOME": str(folder),
            "HOME": str(folder),
        }
        arguments = [str(self.case), str(folder / "told")]
        self.terminal = Terminal(arguments, env=env, program=PROGRAM, cwd=self.case.parent)

    def send(self, data: bytes) -> None:
        """Send bytes; what the program paints meanwhile is read and dropped."""
        fd, end = self.terminal.process.fd, time.monotonic() + 60.0
        while data:
            assert time.monotonic() < end and self.terminal.process.isalive(), "the program takes nothing more"
            readable, writable, _ = select.select([fd], [fd], [], 1.0)
            if readable:
                self.terminal.raw[:] = os.read(fd, 1 << 16)
            elif writable:
                data = data[os.write(fd, data[:256]) :]

    def token(self) -> None:
        """Send one piece, or give the terminal another size."""
        if self.draw.random() < 0.004:
            self.terminal.process.setwinsize(self.draw.randint(1, 60), self.draw.randint(1, 200))
        else:
            self.send(self.draw.choices(list(KINDS), list(KINDS.values()))[0](self.draw))

    def answers(self) -> None:
        """The program answers: once a paste without an end is over, the page of keys opens and closes."""
        self.terminal.process.setwinsize(24, 80)
        self.terminal.screen.resize(24, 80)
        self.rest()
        self.rest(PATIENCE + 0.6)
        for _ in range(8):
            self.send(b"\x1b")
            self.terminal.pump(0.3)
        self.terminal.screen.reset()
        self.send(b"?")
        self.terminal.wait(lambda text: "Keys" in text.splitlines()[0], 20.0)
        self.send(b"\x1b")
        self.terminal.wait(lambda text: "Keys" not in text.splitlines()[0], 20.0)
        self.rest()

    def rest(self, seconds: float = 0.5) -> None:
        """Wait until the program has nothing to do: all that was sent is taken, and nothing is painted any more."""
        pid, end = self.terminal.process.pid, time.monotonic() + 300.0
        while True:
            assert time.monotonic() < end, "it never comes to rest"
            used, until = cpu_seconds(pid), time.monotonic() + seconds
            while (left := until - time.monotonic()) > 0:
                if select.select([self.terminal.process.fd], [], [], left)[0]:
                    self.terminal.pump(0.01)
            if cpu_seconds(pid) - used <= 0.05 * seconds:
                return

    def told(self) -> dict[str, Any]:
        """What the program says of its case."""
        file = self.folder / "told"
        self.terminal.process.kill(signal.SIGUSR1)
        end = time.monotonic() + 10.0
        while not file.exists():
            assert time.monotonic() < end, "the program says nothing"
            self.terminal.pump(0.05)
        found: dict[str, Any] = json.loads(file.read_text())
        file.unlink()
        return found

    def check(self) -> None:
        """The program answers, met no defect, and its journal gives its case after a kill."""
        self.answers()
        told = self.told()
        assert self.terminal.process.isalive()
        self.terminal.process.kill(signal.SIGKILL)
        self.terminal.status()
        crashes = [file.read_text() for file in (self.state / "ductwalk").glob("crash-*")]
        assert not crashes, crashes[0]
        os.environ["XDG_STATE_HOME"] = str(self.state)
        if told["case"] is not None:
            kept = journalled(str(self.case.parent / told["path"]))
            assert told["case"] == kept, f"{told} is shown, {kept} is kept"


def journalled(path: str) -> list[Any]:
    """The case that file and journal give."""
    case = load(path)
    left = journal.left_behind(path)
    if left is not None:
        got = replay(loaded(Session(path), case, case.stamp), left)
        assert got.refused == 0
        case = got.session.case or case
    found: list[Any] = json.loads(json.dumps([case.title, case.notes, thawed(case.spelled), thawed(case.studies)]))
    return found


def run(seed: int, tokens: int) -> None:
    """One program, so many tokens. Errors: AssertionError that says the seed."""
    kept = os.environ.get("XDG_STATE_HOME")
    try:
        with tempfile.TemporaryDirectory() as folder:
            fuzz = Fuzz(Path(folder), random.Random(seed))
            with fuzz.terminal:
                fuzz.terminal.wait("audit ok")
                try:
                    for _ in range(tokens):
                        fuzz.token()
                    fuzz.check()
                except (AssertionError, OSError) as error:
                    crashes = [f.read_text() for f in (fuzz.state / "ductwalk").glob("crash-*")]
                    raise AssertionError(f"seed {seed}: {error}\n{crashes}\n{bytes(fuzz.terminal.raw)[-2000:]!r}") from error
    finally:
        os.environ.pop("XDG_STATE_HOME", None) if kept is None else os.environ.update(XDG_STATE_HOME=kept)


if __name__ == "__main__":
    for at in range(int(sys.argv[1])):
        start = time.monotonic()
        run(at, int(sys.argv[2]))
        print(f"seed {at}: {sys.argv[2]} tokens, {time.monotonic() - start:.0f} s, alive, case kept, no crash file", flush=True)
