"""Times in one process, on one thread: what a row of a benchmark is made of."""

from __future__ import annotations

import statistics
import time
from collections.abc import Callable
from typing import TypedDict


class Row(TypedDict):
    """One figure: bar is what it must reach (None: reported only), met whether it does."""

    name: str
    value: float
    unit: str
    bar: float | None
    met: bool | None
    compared_with: str


def seconds(work: Callable[[], object], repeats: int = 5) -> float:
    """Median CPU time of the calling thread over several runs, after one run to warm up."""
    work()
    times = []
    for _ in range(repeats):
        before = time.thread_time()
        work()
        times.append(time.thread_time() - before)
    return statistics.median(times)


def ratio(first: Callable[[], object], second: Callable[[], object], repeats: int = 5) -> float:
    """Median of first's time over second's, the two timed in turn so that a change of clock meets both."""
    first(), second()
    found = []
    for _ in range(repeats):
        a, b = seconds_once(first), seconds_once(second)
        found.append(a / b)
    return statistics.median(found)


def seconds_once(work: Callable[[], object]) -> float:
    """CPU time of the calling thread for one run."""
    before = time.thread_time()
    work()
    return time.thread_time() - before


def at_most(name: str, value: float, unit: str, bar: float, compared_with: str) -> Row:
    """A row whose value must not exceed its bar."""
    return Row(name=name, value=value, unit=unit, bar=bar, met=value <= bar, compared_with=compared_with)


def at_least(name: str, value: float, unit: str, bar: float, compared_with: str) -> Row:
    """A row whose value must reach its bar."""
    return Row(name=name, value=value, unit=unit, bar=bar, met=value >= bar, compared_with=compared_with)


def reported(name: str, value: float, unit: str, compared_with: str = "") -> Row:
    """A row without a bar."""
    return Row(name=name, value=value, unit=unit, bar=None, met=None, compared_with=compared_with)


def printed(rows: list[Row]) -> str:
    """The rows as text, one a line."""
    lines = []
    for row in rows:
        verdict = "" if row["met"] is None else f"  bar {row['bar']:g}: {'met' if row['met'] else 'NOT MET'}"
        against = f"  against {row['compared_with']}" if row["compared_with"] else ""
        lines.append(f"{row['name']}: {row['value']:.4g} {row['unit']}{verdict}{against}")
    return "\n".join(lines)
