"""All that a solution says, as plain data that can be compared to the last bit."""

from __future__ import annotations

import dataclasses
import hashlib
from collections.abc import Iterator, Mapping
from typing import Any

import numpy as np

import cycle
from cycle.record import record

WORDS = ("status", "mode", "failed_process", "reason")
TABLES = ("profile", "heat_limits", "heat_limit_causes")
ACCOUNTS = ("potentials", "losses", "exergy", "limits", "notes", "audit", "limits_so_far")


def parts(walk: cycle.Walk) -> Iterator[tuple[str, Any]]:
    """Name and value of every figure, account, limit, word and array of a solution; every dear figure is asked for."""
    yield from ((name, getattr(walk, name)) for name in WORDS)
    yield from ((f"performance.{key}", value) for key, value in walk.performance.items())
    yield from ((f"why_not.{key}", walk.why_not(key)) for key in walk.performance)
    for name, station in walk.station.items():
        yield from ((f"{name}.{key}", value) for key, value in station.items())
        yield from ((f"{name}.x.{key}", value) for key, value in station.mole_fractions.items())
    for i, process in enumerate(walk.processes):
        yield f"process {i}", (process.name, process.label, process.start, process.end)
        yield from ((f"process {i}.{key}", value) for key, value in process.figures.items())
    for name in TABLES:
        yield from ((f"{name}.{key}", value) for key, value in getattr(walk, name).items())
    for name in ACCOUNTS:
        yield from _flat(name, getattr(walk, name))
    yield from _flat("emitted", walk.emitted())
    if walk.shape == ():
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


def bits(walk: cycle.Walk) -> dict[str, str]:
    """Name -> a digest of the value's bytes and shape."""
    found = {}
    for name, value in parts(walk):
        array = np.asarray(value)
        plain = array.tobytes() if array.dtype.kind in "fiub" else repr(array.tolist()).encode()
        found[name] = f"{array.shape} {hashlib.sha256(plain).hexdigest()[:16]}"
    return found
