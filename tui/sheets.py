"""Walks as CSV: one row a station, a place along the duct, or a point of a trajectory; the header has the units."""

from __future__ import annotations

import csv
import io
from collections.abc import Callable, Iterable, Sequence
from typing import Any

from cycle.errors import printable
from cycle.glossary import PROFILE
from cycle.quantities import OUTPUT, OUTPUTS, Input, Output, input_of
from cycle.record import ENTERING, Json
from cycle.units import display_unit, si_unit

Named = Iterable[tuple[str, Json]]
"""Names of cases and their records."""


def stations(records: Named, system: str) -> str:
    """One row a station. records: of `solve`; system: "si" or "us"."""
    records = list(records)
    species = sorted({x for _, r in records for s in r.get("stations", {}).values() for x in s["mole_fractions"]})
    outputs = [o for o in OUTPUTS if o.where == "station"]
    heads = ["case", "status", "mode", "station", *_heads(outputs, system), *(f"mole_fraction {x}" for x in species)]
    rows = []
    for name, walk in records:
        for station, values in (walk.get("stations") or {"": {}}).items():
            shares = [values.get("mole_fractions", {}).get(x) for x in species]
            start = [name, walk["status"], walk.get("mode", ""), station]
            rows.append([*start, *_cells(outputs, [values.get(o.key) for o in outputs], system), *shares])
    return _text(heads, rows)


def duct(records: Named, system: str) -> str:
    """One row a place along the duct; no row for a case that has none. records: of `solve`; system: "si" or "us"."""
    heads = ["case", "status", "mode", *(_head(_bare(o), o, system) for o in PROFILE)]
    rows = []
    for name, walk in records:
        profile = walk.get("profile") or {}
        columns = [profile[_bare(o)] for o in PROFILE] if profile else []
        rows += [[name, walk["status"], walk["mode"], *_cells(PROFILE, values, system)] for values in zip(*columns, strict=True)]
    return _text(heads, rows)


def points(records: Named, system: str) -> str:
    """One row a point of a trajectory. records: of `solve --along`; system: "si" or "us"."""
    records = list(records)
    keys = dict.fromkeys(key for _, r in records for p in r.get("points", ()) for key in p["inputs"])
    inputs = [entry for entry in map(input_of, keys) if entry is not None]
    entering = [o for o in OUTPUTS if o.where == "station" and o.key in ENTERING]
    outputs = [o for o in OUTPUTS if o.where == "performance"]
    entered = [_head(f"entering {o.key}", o, system) for o in entering]
    heads = ["case", "point", *_heads(inputs, system), "status", "mode", "reason", *entered, *_heads(outputs, system)]
    rows: list[list[Any]] = []
    for name, walk in records:
        if "points" not in walk:
            rows.append([name, "", *("" for _ in inputs), walk["status"], "", "", *("" for _ in (*entering, *outputs))])
        for number, point in enumerate(walk.get("points", ()), 1):
            given = _cells(inputs, [point["inputs"].get(i.key) for i in inputs], system)
            first = _cells(entering, [point["entering"][o.key] for o in entering], system)
            last = _cells(outputs, [point["performance"][o.key] for o in outputs], system)
            rows.append([name, number, *given, point["status"], point["mode"], point["reason"], *first, *last])
    return _text(heads, rows)


def sensitivities(records: Named, system: str) -> str:
    """One row an input: its step and what that gives of the headline figures; no row for a case without a solution. records: of
    `solve --sensitivities`; system: "si" or "us"."""
    records = [(name, walk) for name, walk in records if walk.get("sensitivities")]
    keys = dict.fromkeys(key for _, walk in records for row in walk["sensitivities"] for key in row["changes"])
    outputs = [OUTPUT[key] for key in keys]
    heads = ["case", "input", "value", "step", "unit", "side", *_heads(outputs, system), "below", "above", "modes", "reason"]
    rows: list[list[Any]] = []
    for name, walk in records:
        for row in walk["sensitivities"]:
            entry = input_of(row["input"])
            assert entry is not None
            label, factor, zero = _unit(entry, system)
            changes = [row["changes"].get(key) for key in keys]
            moved = [None if c is None else c / _unit(o, system)[1] for c, o in zip(changes, outputs, strict=True)]
            start = [name, entry.key, (row["value"] - zero) / factor, row["step"] / factor, label, row["side"]]
            rows.append([*start, *moved, row["below"], row["above"], " ".join(row["modes"]), row["reason"]])
    return _text(heads, rows)


SHEETS: dict[str, Callable[[Named, str], str]] = {"stations": stations, "duct": duct, "sensitivities": sensitivities}
"""What a row of the CSV of `solve` is -> what writes it."""


def _bare(output: Output) -> str:
    return output.key.rpartition(".")[2]


def _heads(entries: Iterable[Input | Output], system: str) -> list[str]:
    return [_head(entry.key, entry, system) for entry in entries]


def _head(name: str, entry: Input | Output, system: str) -> str:
    label = _unit(entry, system)[0]
    return f"{name} ({label})" if label else name


def _unit(entry: Input | Output, system: str) -> tuple[str, float, float]:
    """Label, factor and offset: plain SI, or the customary units of a table."""
    if system == "si":
        return si_unit(entry.unit), 1.0, 0.0
    unit = display_unit(entry.unit, system, entry.key)
    return unit.label, unit.factor, unit.offset


def _cells(entries: Sequence[Input | Output], values: Sequence[float | None], system: str) -> list[float | None]:
    units = (_unit(entry, system) for entry in entries)
    return [None if value is None else (value - zero) / factor for value, (_, factor, zero) in zip(values, units, strict=True)]


def _text(heads: Sequence[str], rows: Iterable[Sequence[Any]]) -> str:
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(heads)
    writer.writerows([printable(cell, None) if isinstance(cell, str) else cell for cell in row] for row in rows)
    return text.getvalue()
