"""The interactive screen in a pseudo-terminal of 80x24: time from key to paint, bytes on the link, first paint."""

from __future__ import annotations

import os
import re
import select
import statistics
import sys
import tempfile
import time
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import cycle
from benchmarks.timing import Row, at_most
from tests.tui.pty_support import ROOT, Terminal
from tui.items import items
from tui.session import Session, columns_of

SCREEN = "the design's bar, tui in a pty of 80x24"
BARE = """
from textual.app import App
from textual.widgets import DataTable
class Bare(App):
    def compose(self):
        yield DataTable()
    def on_mount(self):
        table = self.query_one(DataTable)
        table.add_columns(*"abcdef")
        table.add_rows([["0.000"] * 6 for _ in range(12)])
        self.call_after_refresh(lambda: self.call_after_refresh(self.exit))
Bare(ansi_color=True).run()
"""
FIRST = """
import sys
from tui.screens.main import MainScreen
MainScreen._start = lambda self: self.app.exit()
from tui.app import run
run(sys.argv[1])
"""
CASE = ROOT / "cases" / "saltmarsh.toml"


@dataclass(frozen=True, slots=True)
class Edited:
    """A case whose heat is edited: its file, the first value and the step from one edit to the next."""

    path: Path
    first: float
    step: float


SIMPLE = Edited(CASE, 0.40, 0.003)
DUAL_MODE = Edited(ROOT / "cases" / "tidegate.toml", 0.74, 0.002)
HEADLINE = re.compile(rb"Isp \d")
KEY = "combustor.equivalence_ratio"
ANSWER = re.compile(rb"(?:\x1b\[([\d;]*)m)?\+0\.01: thrust")
"""The start of the answer line, with the style before it: dim while the sensitivities are of the inputs before."""


def _opened(folder: str, path: Path = CASE, columns: int = 80, rows: int = 24) -> Terminal:
    terminal = Terminal([str(path)], columns=columns, rows=rows, env={"XDG_STATE_HOME": folder})
    terminal.wait("audit ok")
    terminal.settle(0.5)
    return terminal


def _until(terminal: Terminal, holds: Callable[[bytes], bool], limit: float = 5.0) -> float:
    """Seconds until the bytes that came since `terminal.raw` was emptied pass a test. Bytes only: pyte is slow."""
    start = time.perf_counter()
    while not holds(bytes(terminal.raw)):
        assert time.perf_counter() - start < limit, bytes(terminal.raw)
        if select.select([terminal.process.fd], [], [], 0.5)[0]:
            terminal.raw += os.read(terminal.process.fd, 65536)
    return time.perf_counter() - start


def _quantile(times: list[float], share: float) -> float:
    return sorted(times)[min(len(times) - 1, int(share * len(times)))]


def _to_heat(terminal: Terminal, path: Path) -> None:
    """Bring the equivalence ratio to hand by the arrow keys."""
    state = Session(str(path), cycle.load(path), station="4")
    stations, here = columns_of(state.case), [item.key for item in items(state)]
    terminal.press(*["right"] * stations.index("4"), "tab", *["down"] * here.index(KEY))
    terminal.settle(0.5)


def _weighed(raw: bytes) -> bool:
    """Whether the sensitivities of the new inputs have been painted: the answer line was sent undimmed."""
    styles = [match.group(1) for match in ANSWER.finditer(raw)]
    return bool(styles) and b"2" not in (styles[-1] or b"").split(b";")


def edit_times(terminal: Terminal, edited: Edited, runs: int) -> tuple[list[float], list[float], list[float], list[float]]:
    """Edits of the equivalence ratio: seconds to new headline figures, to new sensitivities, to the last byte, bytes in all.

    The field is open and its text typed before the clock starts; Enter starts it. The headline is repainted when the
    specific impulse is sent again, the whole edit is over when nothing comes for 0.4 s.
    """
    _to_heat(terminal, edited.path)
    shown, weighed, whole, sent = [], [], [], []
    for run in range(runs):
        terminal.press("enter")
        terminal.settle(0.2)
        terminal.press(f"{edited.first + edited.step * run:.4f}")
        terminal.settle(0.2)
        terminal.raw.clear()
        terminal.press("enter")
        shown.append(_until(terminal, lambda raw: HEADLINE.search(raw) is not None))
        weighed.append(shown[-1] + _until(terminal, _weighed))
        start = time.perf_counter()
        end = start
        while select.select([terminal.process.fd], [], [], 0.4)[0]:
            terminal.raw += os.read(terminal.process.fd, 65536)
            end = time.perf_counter()
        whole.append(weighed[-1] + end - start)
        sent.append(float(len(terminal.raw)))
    return shown, weighed, whole, sent


def move_bytes(terminal: Terminal) -> list[float]:
    """Bytes of each cursor move, through the stations in the table and in the inputs, and through the rows."""
    sent = []
    keys = [*["left"] * 4, *["right"] * 4, *["down"] * 8, "tab", *["left"] * 4, *["right"] * 3, *["down"] * 6]
    for key in keys:
        terminal.press(key)
        sent.append(float(terminal.settle(0.15)))
    return sent


def _seconds_to_end(program: str, folder: str) -> float:
    start = time.perf_counter()
    env = {"XDG_STATE_HOME": folder, "PYTHONDONTWRITEBYTECODE": "", "PYTHONPYCACHEPREFIX": f"{folder}/compiled"}
    with Terminal([str(CASE)], env=env, program=program) as terminal:
        while terminal.process.isalive():
            terminal.pump(0.002)
        return time.perf_counter() - start


def first_paint(runs: int, folder: str) -> float:
    """First paint of the program over that of a bare Textual table: median of runs taken in turn, start to end. Both are compiled,
    as installed programs are."""
    for program in (FIRST, BARE):
        _seconds_to_end(program, folder)
    ratios = []
    for _ in range(runs):
        ours = _seconds_to_end(FIRST, folder)
        ratios.append(ours / _seconds_to_end(BARE, folder))
    return statistics.median(ratios)


def _forget(folder: str) -> None:
    """Remove the journals that a killed session left."""
    for journal in Path(folder).rglob("*.journal"):
        journal.unlink()


def _edits(folder: str, edited: Edited, runs: int, columns: int = 80, rows: int = 24) -> tuple[list[float], ...]:
    with _opened(folder, edited.path, columns, rows) as terminal:
        times = edit_times(terminal, edited, runs)
    _forget(folder)
    return times


def typed_times(folder: str, runs: int) -> list[float]:
    """Seconds from a key to its paint while the sensitivities of a duct are being solved: a field opened and typed into behind a step."""
    times = []
    with _opened(folder, DUAL_MODE.path) as terminal:
        _to_heat(terminal, DUAL_MODE.path)
        for _ in range(runs):
            terminal.press("+")
            time.sleep(0.13)
            for key in ("enter", *"0.77"):
                terminal.raw.clear()
                terminal.press(key)
                times.append(_until(terminal, lambda raw: len(raw) > 3))
            terminal.press("escape")
            terminal.settle(0.8)
    _forget(folder)
    return times


def _p95(name: str, times: list[float], bar: float, against: str = SCREEN) -> Row:
    return at_most(f"{name}, p95", 1e3 * _quantile(times, 0.95), "ms", bar, against)


def rows(short: bool = False) -> list[Row]:
    """Rows of the screen's bars. Parameters: short, fewer runs. Returns: one dict a figure."""
    with tempfile.TemporaryDirectory() as folder:
        with _opened(folder) as terminal:
            idle = float(terminal.pump(3.0)) / 3.0
            moves = move_bytes(terminal)
        _forget(folder)
        shown, weighed, _, sent = _edits(folder, SIMPLE, 10 if short else 40)
        _, _, whole, wide_sent = _edits(folder, SIMPLE, 5 if short else 20, 120, 40)
        dual_shown, dual_weighed, _, dual_sent = _edits(folder, DUAL_MODE, 5 if short else 30)
        typed = typed_times(folder, 4 if short else 12)
        paint = first_paint(3 if short else 7, folder)
    return [
        _p95("edit to table and headline painted", shown, 60.0),
        at_most("edit to table and headline painted, median", 1e3 * statistics.median(shown), "ms", 60.0, SCREEN),
        _p95("edit to sensitivities painted", weighed, 150.0),
        _p95("edit to limits, sensitivities and losses painted (120x40)", whole, 150.0, "the bar of the sensitivities"),
        _p95("dual-mode duct: edit to table and headline painted", dual_shown, 150.0),
        _p95("dual-mode duct: edit to sensitivities painted", dual_weighed, 500.0),
        _p95("dual-mode duct: a character typed while sensitivities are solved", typed, 100.0, "a bar of our own"),
        at_most("bytes of an edit, most", max(*sent, *dual_sent), "B", 6000.0, SCREEN),
        at_most("bytes of an edit, most (120x40)", max(wide_sent), "B", 6000.0, "the bar of 80x24"),
        at_most("bytes of a cursor move, most", max(moves), "B", 1000.0, SCREEN),
        at_most("bytes while idle", idle, "B/s", 0.0, SCREEN),
        at_most("first paint", paint, "x", 1.15, "a bare Textual table, process start to end"),
    ]


if __name__ == "__main__":
    for row in rows("--short" in sys.argv):
        print(row)
