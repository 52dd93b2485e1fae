"""A solution is freed when it is dropped, at once and wholly: many of them take no more memory than one.

`python -m tests.flat_memory N` shows it over N solutions.
"""

from __future__ import annotations

import gc
import pickle
import tracemalloc
import weakref
from collections.abc import Iterator
from itertools import islice

import numpy as np
import pytest

import cycle
from cycle.sweep import curve
from tests.case_files import SHIPPED, case_file
from tests.flat_memory import KINDS, read, solutions


@pytest.fixture(autouse=True)
def _no_collector() -> Iterator[None]:
    gc.collect()
    gc.disable()
    yield
    gc.enable()


@pytest.mark.parametrize("path", sorted(SHIPPED.glob("*.toml")), ids=lambda path: path.stem)
@pytest.mark.parametrize("batch", [False, True])
def test_a_solution_is_freed_when_dropped(path: object, batch: bool) -> None:
    """With the cycle collector off, after every figure was asked for: the solution, its arrays and its copy are gone, and nothing that
    only the collector could free is left of the solving or the reading."""
    case = cycle.load(str(path))
    changes = {"combustor.burnt_fraction": [0.8, 0.9]} if batch else None
    read(cycle.solve(case, changes))
    gc.collect()
    walk = cycle.solve(case, changes)
    read(walk)
    copy = pickle.loads(pickle.dumps(walk))
    read(copy)
    held = [weakref.ref(part) for part in (walk, copy, walk.march.records[-1].stream.velocity, walk.station["3"], walk.performance)]
    assert all(ref() is not None for ref in held)
    del walk, copy
    assert [ref() for ref in held] == [None] * len(held)
    assert gc.collect() == 0


def test_heat_limits_leave_nothing_behind() -> None:
    walk = cycle.solve(cycle.load(case_file("tidegate")))
    gone = weakref.ref(walk)
    assert walk.march.solved.size  # read-only from here on, for the search too
    assert walk.heat_limits and walk.limits and walk.reason == ""
    del walk
    assert gone() is None and gc.collect() == 0


def test_figures_live_on_without_their_solution() -> None:
    walk = cycle.solve(cycle.load(case_file("plain")), {"combustor.burnt_fraction": [0.8, 0.9]})
    gone, four = weakref.ref(walk), walk.station["4"]
    del walk
    assert gone() is None and np.isfinite(four.total_pressure).all()


def test_sensitivities_and_curves_leave_nothing_behind() -> None:
    case = cycle.load(case_file("plain"))
    for _ in range(2):
        gc.collect()
        cycle.sensitivities(case)
        curve(case, {"flight.mach": [7.0, 8.0]}, limits=True)
    assert gc.collect() == 0


def test_many_solutions_take_no_more_memory_than_some() -> None:
    """Memory that Python and numpy hold, after one round of all kinds of solutions and after another: what is kept by table is there."""
    kinds = len(KINDS)
    made = islice(solutions(7), 2 * kinds + 1)
    found = []
    for make in islice(made, kinds):
        walk = make()
        found.append(walk.mode if walk.shape == () else "batch")
        read(walk)
    assert found[3:] == ["scramjet-shock-train", "ramjet-thermal-throat", "batch", "batch"]
    tracemalloc.start()
    walk = next(made)()
    read(walk)
    del walk
    first, _ = tracemalloc.get_traced_memory()
    for make in made:
        walk = make()
        read(walk)
        del walk
    last, _ = tracemalloc.get_traced_memory()
    tracemalloc.stop()
    assert last - first < 0.3e6, f"{(last - first) / 1e3:.0f} kB more"
