"""Memory over many solutions: `python -m tests.flat_memory N` solves N times, reads all figures, and prints the memory along the way.

Single cases (simple ones, a duct with a shock train, one with a thermal throat) and batches take turns; the first half of the solutions
is made without Python's cycle collector, so that only what is freed when it is dropped is freed.
"""

from __future__ import annotations

import gc
import sys
from collections.abc import Callable, Iterator
from functools import partial
from itertools import cycle as turns
from itertools import islice
from pathlib import Path

import numpy as np

import cycle
from tests.case_files import case_file
from tests.whole_walk import parts

KINDS: tuple[tuple[str, dict[str, float], int], ...] = (
    ("plain", {}, 1),
    ("sandbar", {}, 1),
    ("narrows", {}, 1),
    ("tidegate", {"combustor.equivalence_ratio": 0.61}, 1),
    ("tidegate", {"combustor.equivalence_ratio": 0.75}, 1),
    ("plain", {"combustor.equivalence_ratio": 0.5}, 500),
    ("tidegate", {"combustor.equivalence_ratio": 0.61}, 3),
)
"""Cases that take turns, what is changed in them, and the number of points of each solution."""


def resident() -> float:
    """Memory of this process that is in use, MiB; NaN where the system does not say."""
    status = Path("/proc/self/status")
    lines = status.read_text(encoding="ascii").splitlines() if status.exists() else []
    return next((int(line.split()[1]) / 1024.0 for line in lines if line.startswith("VmRSS")), np.nan)


def solutions(seed: int) -> Iterator[Callable[[], cycle.Walk]]:
    """Solutions of the kinds in turn without end, of changing burnt fraction, each made when it is called."""
    rng = np.random.default_rng(seed)
    cases = [(cycle.load(case_file(name)).replace(changes), size) for name, changes, size in KINDS]
    for case, size in turns(cases):
        burnt = rng.uniform(0.95, 1.0, size)
        yield partial(_solved, case, burnt)


def _solved(case: cycle.Case, burnt: np.ndarray) -> cycle.Walk:
    key = "combustor.burnt_fraction"
    return cycle.solve(case.replace({key: burnt[0]})) if burnt.size == 1 else cycle.solve(case, {key: burnt})


def read(walk: cycle.Walk) -> None:
    """Ask for every figure but those that a duct takes a search for."""
    for _ in parts(walk, searched=False):
        pass


def main(count: int, seed: int = 1) -> int:
    """Solve `count` times and print the memory; 1 where it grew by more than a tenth behind the first tenth."""
    marks = {max(1, count * k // 10) for k in range(1, 11)} | {1}
    sizes: list[float] = []
    gc.disable()
    for number, make in enumerate(islice(solutions(seed), count), 1):
        if number == count // 2:
            gc.enable()
        read(make())
        if number in marks:
            sizes.append(resident())
            print(f"{number:7d} solutions: {sizes[-1]:7.1f} MiB, collector {'on' if gc.isenabled() else 'off'}", flush=True)
    gc.enable()
    first, last = sizes[:2][-1], sizes[-1]
    print(f"seed {seed}: grown by {last - first:.1f} MiB behind the first tenth")
    return int(last > 1.1 * first)


if __name__ == "__main__":
    sys.exit(main(int(sys.argv[1])))
