"""The interactive screen in a pseudo-terminal of 80x24: time from key to paint, bytes on the link, first paint."""

from __future__ import annotations

import os
import select
import statistics
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

from benchmarks.timing import Row, at_most
from tests.tui.pty_support import ROOT, Terminal

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


def _opened(folder: str, columns: int = 80, rows: int = 24) -> Terminal:
    terminal = Terminal([str(CASE)], columns=columns, rows=rows, env={"XDG_STATE_HOME": folder})
    terminal.wait("audit ok")
    terminal.settle()
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


def edit_times(terminal: Terminal, runs: int) -> tuple[list[float], list[float], list[float]]:
    """Edits of the equivalence ratio: seconds to new headline figures, seconds to new limits too, bytes in all.

    The field is open and its text typed before the clock starts; Enter starts it. The headline is repainted when the
    specific impulse is sent again, the whole edit is over when nothing comes for 0.3 s.
    """
    terminal.press("right", "right", "right", "tab", "down", "down", "down", "down")
    terminal.settle()
    shown, whole, sent = [], [], []
    for run in range(runs):
        terminal.press("enter")
        terminal.settle(0.2)
        terminal.press(f"{0.40 + 0.003 * run:.4f}")
        terminal.settle(0.2)
        terminal.raw.clear()
        terminal.press("enter")
        shown.append(_until(terminal, lambda raw: b"Isp " in raw))
        start = time.perf_counter()
        end = start
        while select.select([terminal.process.fd], [], [], 0.3)[0]:
            terminal.raw += os.read(terminal.process.fd, 65536)
            end = time.perf_counter()
        whole.append(shown[-1] + end - start)
        sent.append(float(len(terminal.raw)))
    return shown, whole, sent


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
    with Terminal([str(CASE)], env={"XDG_STATE_HOME": folder}, program=program) as terminal:
        while terminal.process.isalive():
            terminal.pump(0.002)
        return time.perf_counter() - start


def first_paint(runs: int, folder: str) -> float:
    """First paint of the program over that of a bare Textual table: median of runs taken in turn, start to end."""
    ratios = []
    for _ in range(runs):
        ours = _seconds_to_end(FIRST, folder)
        ratios.append(ours / _seconds_to_end(BARE, folder))
    return statistics.median(ratios)


def _forget(folder: str) -> None:
    """Remove the journals that a killed session left."""
    for journal in Path(folder).rglob("*.journal"):
        journal.unlink()


def rows(short: bool = False) -> list[Row]:
    """Rows of the screen's bars. Parameters: short, fewer runs. Returns: one dict a figure."""
    with tempfile.TemporaryDirectory() as folder:
        with _opened(folder) as terminal:
            idle = float(terminal.pump(3.0)) / 3.0
            moves = move_bytes(terminal)
        _forget(folder)
        with _opened(folder) as terminal:
            shown, _, sent = edit_times(terminal, 10 if short else 40)
        _forget(folder)
        with _opened(folder, 120, 40) as terminal:
            _, whole, _ = edit_times(terminal, 5 if short else 20)
        _forget(folder)
        paint = first_paint(3 if short else 7, folder)
    return [
        at_most("edit to table and headline painted, p95", 1e3 * _quantile(shown, 0.95), "ms", 60.0, SCREEN),
        at_most("edit to table and headline painted, median", 1e3 * statistics.median(shown), "ms", 60.0, SCREEN),
        at_most(
            "edit to limits by margin painted too (120x40), p95", 1e3 * _quantile(whole, 0.95), "ms", 150.0, "the bar of the sensitivities"
        ),
        at_most("bytes of an edit, most", max(sent), "B", 6000.0, SCREEN),
        at_most("bytes of a cursor move, most", max(moves), "B", 1000.0, SCREEN),
        at_most("bytes while idle", idle, "B/s", 0.0, SCREEN),
        at_most("first paint", paint, "x", 1.15, "a bare Textual table, process start to end"),
    ]


if __name__ == "__main__":
    for row in rows("--short" in sys.argv):
        print(row)
