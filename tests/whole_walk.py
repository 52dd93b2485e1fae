"""All that a solution says, to be compared to the last bit with what its pickled copy says in a fresh process.

`python -m tests.whole_walk LOW HIGH` does that for random cases, each as one point and as a batch.
"""

from __future__ import annotations

import dataclasses
import hashlib
import json
import pickle
import subprocess
import sys
from collections.abc import Iterator, Mapping, Sequence
from pathlib import Path
from typing import Any

import numpy as np

import cycle
from cycle.record import record
from tests.random_cases import random_case, written
from tests.random_flowpath import loaded, random_flowpath

WORDS = ("status", "mode", "failed_process", "reason")
TABLES = ("profile", "heat_limits", "heat_limit_causes")
ACCOUNTS = ("potentials", "losses", "exergy", "limits", "notes", "audit")


def parts(walk: cycle.Walk, searched: bool = True) -> Iterator[tuple[str, Any]]:
    """Name and value of every figure, account, limit, word and array of a solution; every dear figure is asked for. searched: also what
    the heat limits of a duct take a search for."""
    yield from ((name, getattr(walk, name)) for name in WORDS if searched or name != "reason")
    yield from ((f"performance.{key}", value) for key, value in walk.performance.items())
    yield from ((f"why_not.{key}", walk.why_not(key)) for key in walk.performance)
    for name, station in walk.station.items():
        yield from ((f"{name}.{key}", value) for key, value in station.items())
        yield from ((f"{name}.x.{key}", value) for key, value in station.mole_fractions.items())
    for i, process in enumerate(walk.processes):
        yield f"process {i}", (process.name, process.label, process.start, process.end)
        yield from ((f"process {i}.{key}", value) for key, value in process.figures.items())
    for name in TABLES if searched else TABLES[:1]:
        yield from ((f"{name}.{key}", value) for key, value in getattr(walk, name).items())
    for name in ACCOUNTS:
        yield from _flat(name, getattr(walk, "limits_so_far" if name == "limits" and not searched else name))
    yield from _flat("emitted", walk.emitted())
    if walk.shape == () and searched:
        yield "largest_heat", walk.largest_heat()
        yield "record", repr(record(walk))


def _flat(name: str, value: Any) -> Iterator[tuple[str, Any]]:
    """The leaves of records, tables and rows."""
    if dataclasses.is_dataclass(value) and type(value).__name__ != "SpeciesTable":
        for field in dataclasses.fields(value):
            yield from _flat(f"{name}.{field.name}", getattr(value, field.name))
    elif isinstance(value, Mapping):
        for key, part in value.items():
            yield from _flat(f"{name}.{key}", part)
    elif isinstance(value, (tuple, list)):
        for i, part in enumerate(value):
            yield from _flat(f"{name}.{i}", part)
    else:
        yield name, value


def bits(walk: cycle.Walk, searched: bool = True) -> dict[str, str]:
    """Name -> a digest of the value's bytes and shape. searched: see `parts`."""
    found = {}
    for name, value in parts(walk, searched):
        array = np.asarray(value)
        plain = array.tobytes() if array.dtype.kind in "fiub" else repr(array.tolist()).encode()
        found[name] = f"{array.shape} {hashlib.sha256(plain).hexdigest()[:16]}"
    return found


_CHILD = """
import json, pickle, sys
from tests.whole_walk import bits
walks, searched = pickle.load(sys.stdin.buffer)
print(json.dumps([bits(walk, searched) for walk in walks]))
"""


def elsewhere(walks: Sequence[cycle.Walk], searched: bool = True) -> list[dict[str, str]]:
    """`bits` of each solution, pickled, loaded and asked in a fresh process."""
    root = Path(__file__).resolve().parents[1]
    run = subprocess.run([sys.executable, "-c", _CHILD], input=pickle.dumps((walks, searched)), capture_output=True, check=True, cwd=root)
    found: list[dict[str, str]] = json.loads(run.stdout)
    return found


def differing(walks: Sequence[cycle.Walk], searched: bool = True) -> list[str]:
    """Names of what a copy in a fresh process says otherwise, each with its case; [] where all is the same to the last bit."""
    pairs = [(walk, bits(walk, searched), copy) for walk, copy in zip(walks, elsewhere(walks, searched), strict=True)]
    return [f"{w.case.title} {w.shape}: {key}" for w, own, copy in pairs for key in {**own, **copy} if own.get(key) != copy.get(key)]


def random_walks(seed: int) -> list[cycle.Walk]:
    """Two random cases of a seed, each as one point and as a batch of 2 by 3; of the batch a part is asked for before it is pickled,
    its march made read-only first."""
    found = []
    for case in (cycle.loads(written(random_case(seed), f"simple {seed}"), str(seed)), loaded(random_flowpath(seed))):
        fuel = case.numbers["fuel.temperature"]
        changes = {"combustor.burnt_fraction": np.array([[0.8], [0.95]]), "fuel.temperature": fuel + np.array([0.0, 1.0, 2.0])}
        batch = cycle.solve(case, changes)
        assert batch.march.setting.size == 6 and batch.audit is not None and batch.limits is not None
        found += [cycle.solve(case), batch]
    return found


def main(low: int, high: int) -> int:
    """Compare the seeds from low to below high; 1 where anything differs."""
    faults = 0
    for seed in range(low, high):
        found = differing(random_walks(seed))
        faults += len(found)
        print(f"seed {seed}: {'; '.join(found) or 'the same'}", flush=True)
    return int(faults > 0)


if __name__ == "__main__":
    sys.exit(main(int(sys.argv[1]), int(sys.argv[2])))
