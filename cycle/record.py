"""A walk as plain data: the JSON of `solve`, and the stored form that other sessions read back."""

from __future__ import annotations

import json
import math
import os
import re
import sys
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from datetime import UTC, datetime
from itertools import islice
from typing import TYPE_CHECKING, Any

from cycle.atomic import write_named
from cycle.errors import CaseError, Fault, shown
from cycle.glossary import ENTRIES, mode_of, no_value, process_figure
from cycle.quantities import INPUTS, OUTPUTS, Input
from cycle.units import si_unit

if TYPE_CHECKING:
    from cycle.case import Case
    from cycle.result import Walk

FORMAT = 1
KIND = "stored walk"
LARGEST_FILE = 16 * 1024 * 1024
"""Bytes of the largest stored file that is read."""

MOST_PARTS = 2_000_000
"""Commas, colons and brackets of a stored file that is read."""
LONGEST_INTEGER = 1000
_JSON_PART = re.compile(r'"(?:[^"\\]|\\.)*+"?|[,:\[{]', re.DOTALL)

Json = dict[str, Any]

_STATION_KEYS = tuple(o.key for o in OUTPUTS if o.where == "station")
_PERFORMANCE_KEYS = tuple(o.key for o in OUTPUTS if o.where == "performance")
ENTERING = ("mach", "pressure", "temperature", "velocity", "dynamic_pressure", "mass_flow")
"""Figures of the first station that a point of a trajectory has."""

_PARTS: dict[str, type] = {
    "case": dict, "status": str, "mode": str, "stations": dict, "processes": list, "performance": dict, "losses": list, "limits": list,
    "audit": dict, "referee": dict, "units": dict, "reasons": dict,
}  # fmt: skip


def record(walk: Walk, referee: bool = False) -> Json:
    """The walk of one point as plain data of the JSON contract: long names, SI, null with a reason instead of NaN.

    walk: of shape (). referee: also recompute the states by the referee (slow).
    """
    reasons: dict[str, str] = {}
    performance = {key: _number(getattr(walk.performance, key)) for key in _PERFORMANCE_KEYS}
    reasons |= {f"performance.{k}": walk.why_not(k) for k, v in performance.items() if v is None}
    stations = {name: _station(station) for name, station in walk.station.items()}
    reasons |= {f"stations.{n}": walk.reason for n, station in walk.station.items() if not station.has_value}
    lost = ((n, key) for n, station in stations.items() for key in _STATION_KEYS if station[key] is None)
    reasons |= {f"stations.{n}.{key}": walk.why_not_at(n, key) for n, key in lost}
    for name in ("losses", "exergy"):
        if not getattr(walk, name):
            reasons[name] = walk.why_not(name)
    processes = [_process(p) for p in walk.processes]
    reasons |= {f"processes.{p['name']}.{k}": no_value(k) for p in processes for k, v in p["figures"].items() if v is None}
    heat = {name: _number(value) for name, value in walk.heat_limits.items()}
    reasons |= {f"heat_limits.{name}": heat_limit_words(walk.heat_limits[name]) for name, value in heat.items() if value is None}
    return {
        "format": FORMAT,
        "case": case_record(walk.case),
        "defaults": [i.input.key for i in walk.case.inputs() if not i.given and i.value is not None],
        "status": str(walk.status),
        "mode": str(walk.mode),
        "reason": str(walk.reason),
        "failed_process": str(walk.failed_process),
        "stations": stations,
        "processes": processes,
        "profile": profile_record(walk),
        "heat_limits": heat,
        "performance": performance,
        "potentials": [_row(r) for r in walk.potentials],
        "losses": [_row(r) for r in walk.losses],
        "exergy": [_row(r) for r in walk.exergy],
        "limits": [_limit(limit) for limit in walk.limits],
        "notes": [{"key": n.key, "words": n.words(), "value": _number(n.value), "unit": si_unit(n.unit)} for n in walk.notes],
        "audit": _audit(walk),
        "referee": _referee(walk, referee),
        "units": _units(),
        "reasons": reasons,
    }


def flown(walk: Walk, trajectory: str, inputs: Mapping[str, Any]) -> Json:
    """A batch along a trajectory as plain data: the case, and its points in order, null for what has no value.

    walk: of shape (N,). trajectory: its name; inputs: key -> values (N,), SI.
    """
    first: Mapping[str, Any] = next(iter(walk.station.values()), {})
    tables = {"performance": (_PERFORMANCE_KEYS, walk.performance), "entering": (ENTERING, first)}
    status, mode, reason = walk.status, walk.mode, walk.reason
    points = []
    for i in range(walk.size):
        figures = {name: {k: _number(table[k][i]) if k in table else None for k in keys} for name, (keys, table) in tables.items()}
        words = {"status": str(status[i]), "mode": str(mode[i]), "reason": str(reason[i])}
        points.append({"inputs": {key: _number(values[i]) for key, values in inputs.items()}, **words, **figures})
    return {
        "format": FORMAT,
        "case": case_record(walk.case),
        "trajectory": trajectory,
        "status": next((p["status"] for p in points if p["status"] != "solved"), "solved"),
        "points": points,
        "audit": {"ok": bool(walk.audit.ok), "worst": _residual(walk.audit.worst)},
        "units": _units(),
    }


def refused(name: str, faults: Iterable[Fault]) -> Json:
    """What stands in the JSON of `solve` for an input that is no case: status "bad-input" and its faults as text."""
    return {"format": FORMAT, "name": name, "case": None, "status": "bad-input", "faults": [str(f) for f in faults]}


def case_record(case: Case) -> Json:
    """The case as solved: its tables with every applicable input, defaults included, numbers in SI.

    Returns a mapping of the shape of a case file, which is itself a valid case once written as TOML.
    """
    heads: Json = {"format": FORMAT, "title": case.title}
    if case.notes:
        heads["notes"] = case.notes
    return heads | case.tables()


def case_of(recorded: Json, name: str) -> Case:
    """The case of a record again.

    recorded: `case_record`, of this version or read back; name: of the case. Raises CaseError where it is no case of this version.
    """
    from cycle.case.case import build

    return build(recorded, name)


def heat_limit_words(value: float) -> str:
    """Why a heat limit is no number. value: inf or NaN."""
    return "not reached within the range of the input" if value == math.inf else "not known: the heat is no fuel ratio"


def profile_record(walk: Walk) -> Json:
    """The flow along the duct of one point by column, SI; only rows that have a place, null for what has no value there.

    walk: of shape (). Returns {} where the burner is no duct or has no solution.
    """
    if not walk.profile:
        return {}
    placed = [i for i, x in enumerate(walk.profile["x"]) if math.isfinite(x)]
    return {name: [_number(values[i]) for i in placed] for name, values in walk.profile.items()}


def _units() -> Json:
    """Units of every key of the record, cells of rows as "table.column"."""
    units = {o.key: si_unit(o.unit) for o in (*OUTPUTS, *ENTRIES)} | {i.key: si_unit(i.unit) for i in INPUTS if i.kind == "number"}
    return units | {f"{i.key}.{c.key}": si_unit(c.unit) for i in INPUTS for c in i.columns}


def _number(value: Any) -> float | None:
    number = float(value)
    return number if math.isfinite(number) else None


def _station(station: Any) -> Json:
    values: Json = {key: _number(getattr(station, key)) for key in _STATION_KEYS}
    values["mole_fractions"] = {name: _number(x) for name, x in station.mole_fractions.items()}
    return values


def _process(process: Any) -> Json:
    figures = {key: _number(value) for key, value in process.figures.items() if process_figure(key)}
    ends = {"start": process.start, "end": process.end, "mode": mode_of(process.figures)}
    return {"name": process.name, "label": process.label, **ends, "figures": figures}


def _row(row: Any) -> Json:
    return {"key": row.key, "label": row.label, "value": _number(row.value), "unit": si_unit(row.unit)}


def _limit(limit: Any) -> Json:
    numbers = {key: _number(getattr(limit, key)) for key in ("actual", "allowed", "margin")}
    words = {"upper": limit.upper, "state": limit.state, "restore": limit.restore, "input": limit.input, "note": limit.note}
    return {"key": limit.key, "label": limit.label, "unit": si_unit(limit.unit), **numbers, **words}


def _residual(residual: Any) -> Json:
    return {"law": residual.law, "where": residual.where, "value": _number(residual.value)}


def _audit(walk: Walk) -> Json:
    rows = [_residual(r) for r in walk.audit.rows]
    return {"ok": bool(walk.audit.ok), "worst": _residual(walk.audit.worst) if rows else None, "rows": rows}


def _referee(walk: Walk, asked: bool) -> Json:
    if not asked:
        return {"asked": False, "words": "not asked"}
    report = walk.referee()
    figures = ("temperature", "mole_fraction", "sound_speed")
    rows = [{"where": row.where, **{key: _number(getattr(row, key)) for key in figures}} for row in report.rows]
    return {"asked": True, "words": report.words, "agrees": report.agrees, "compared": report.compared, "rows": rows}


def stored(walk: Walk, version: str, referee: bool = False) -> Json:
    """The stored form of a walk of one point: its record with the case's text, version, species-data hash and date (UTC)."""
    from cycle.gas.species import data_hash

    return {
        "format": FORMAT,
        "kind": KIND,
        "name": walk.case.name,
        "version": version,
        "species_data": data_hash(),
        "date": datetime.now(UTC).isoformat(timespec="seconds"),
        "case_text": walk.case.text,
        "walk": record(walk, referee),
    }


def dumps(data: Json | list[Json]) -> str:
    """JSON text, indented, ASCII, never with NaN; ends with a line end."""
    return json.dumps(data, indent=1, allow_nan=False) + "\n"


@dataclass(frozen=True, slots=True)
class Stored:
    """A stored walk read back. file: where it stood; name: of its case; walk: its record."""

    file: str
    name: str
    version: str
    species_data: str
    date: str
    case_text: str
    walk: Json


def is_stored(content: bytes) -> bool:
    """Whether a file's content is meant as stored walks (JSON) rather than as a case (TOML)."""
    start = content.lstrip()[:1]
    return start == b"{" or (start == b"[" and content.lstrip()[1:].lstrip()[:1] == b"{")


def read_stored(content: bytes, file: str) -> tuple[Stored, ...]:
    """Stored walks in the content of a file.

    content: bytes as read; file: the name for messages. Returns one or more.
    Raises CaseError where the content is not JSON, not a stored walk, or of a newer format.
    """
    if len(content) > LARGEST_FILE:
        raise _fault(file, "", "too large for stored walks", f"{len(content)} bytes", f"{LARGEST_FILE} bytes")
    data = _parsed(content, file)
    found = data if isinstance(data, list) else [data]
    if not found:
        raise _fault(file, "", "holds no stored walk")
    return tuple(_stored(item, file) for item in found)


def _parsed(content: bytes, file: str) -> Any:
    """Plain data of JSON, with the work of reading it bounded before it starts."""
    try:
        text = content.decode("utf-8-sig")
        if sum(map(text.count, ",:[{")) > MOST_PARTS and _has_too_many(text):
            raise _fault(file, "", "too much for stored walks", f"more than {MOST_PARTS} values", f"at most {MOST_PARTS}")
        return json.loads(text, parse_constant=_no_number, parse_int=_integer)
    except UnicodeDecodeError as error:
        raise _fault(file, "", "not UTF-8 text", f"byte 0x{content[error.start]:02x}", "UTF-8") from None
    except json.JSONDecodeError as error:
        raise CaseError((Fault(file, "", "not a stored walk: not JSON", "", "", error.lineno, error.colno),)) from None
    except RecursionError:
        raise _fault(file, "", "not a stored walk: nested too deeply") from None
    except ValueError as error:
        raise _fault(file, "", f"not a stored walk: {error}") from None


def _has_too_many(text: str) -> bool:
    """Whether JSON text has more signs than a reader is given, those in strings not counted."""
    signs = (match for match in _JSON_PART.finditer(text) if match[0][0] != '"')
    return next(islice(signs, MOST_PARTS, None), None) is not None


def _integer(text: str) -> int:
    if len(text) > LONGEST_INTEGER:
        raise ValueError(f"a number has more than {LONGEST_INTEGER} digits")
    return int(text)


def _no_number(text: str) -> float:
    raise ValueError(f"{text} is not a number")


def _stored(item: Any, file: str) -> Stored:
    if not isinstance(item, dict) or item.get("kind") != KIND:
        raise _fault(file, "kind", "not a stored walk", allowed=shown(KIND))
    if item.get("format") != FORMAT:
        raise _fault(file, "format", "not a format of stored walks that this version reads", shown(item.get("format")), "1")
    words = ("name", "version", "species_data", "date", "case_text")
    for key in words:
        if not isinstance(item.get(key), str):
            raise _fault(file, key, "not a stored walk: text is missing")
    walk = item.get("walk")
    if not isinstance(walk, dict):
        raise _fault(file, "walk", "not a stored walk: this part is missing")
    for key, kind in _PARTS.items():
        if not isinstance(walk.get(key), kind):
            raise _fault(file, f"walk.{key}", "not a stored walk: this part is missing or of the wrong kind")
    _check_figures(walk, file)
    name, version, species_data, date, case_text = (item[key] for key in words)
    return Stored(file, name, version, species_data, date, case_text, walk)


def _check_figures(walk: Json, file: str) -> None:
    """Refuse a record whose figures are neither numbers nor null."""
    for name, station in walk["stations"].items():
        if not isinstance(station, dict):
            raise _fault(file, f"walk.stations.{name}", "not a stored walk: no table of figures")
    for i, process in enumerate(walk["processes"]):
        if not isinstance(process, dict) or not isinstance(process.get("figures"), dict):
            raise _fault(file, f"walk.processes.{i}", "not a stored walk: no table of figures")
        _check_table(process["figures"], process["figures"], f"walk.processes.{i}.figures", file)
    heat = walk.get("heat_limits", {})  # walks of version 0.1.0 may lack it
    if not isinstance(heat, dict):
        raise _fault(file, "walk.heat_limits", "not a stored walk: no table of figures")
    _check_table(heat, heat, "walk.heat_limits", file)
    tables = {f"walk.stations.{n}": (s, _STATION_KEYS) for n, s in walk["stations"].items()}
    for where, (table, keys) in (tables | {"walk.performance": (walk["performance"], _PERFORMANCE_KEYS)}).items():
        _check_table(table, keys, where, file)
    _check_inputs(walk["case"], file)


def _check_table(table: Json, keys: Iterable[str], where: str, file: str) -> None:
    for key in keys:
        if not is_figure(table.get(key)):
            raise _fault(file, f"{where}.{key}", "neither a number nor null", shown(table.get(key)))


def _check_inputs(case: Json, file: str) -> None:
    """Refuse a case whose tables hold anything but numbers where numbers belong and words elsewhere."""
    for entry in INPUTS:
        value = case_value(case, entry)
        if value is _NO_TABLE:
            raise _fault(file, f"walk.case.{entry.section}", "not a table of a case")
        if value is not None and not _KINDS[entry.kind](value):
            raise _fault(file, f"walk.case.{entry.key}", f"no {entry.kind}", shown(value))


_NO_TABLE = object()


def case_value(case: Json, entry: Input) -> Any:
    """What a case's record says of an input: SI number, text, True, mole fractions, rows; None where it says nothing.

    case: `case_record`. Returns an object of no use where something else stands in the place of the input's table.
    """
    table: Any = case
    for name in entry.section.split("."):
        table = table.get(name, {}) if isinstance(table, dict) else _NO_TABLE
    return table.get(entry.name) if isinstance(table, dict) else _NO_TABLE


def is_figure(value: Any) -> bool:
    """Whether something in a record can be a figure: a number that a float can hold, or None for none. Parameters: value, plain data."""
    return value is None or (isinstance(value, int | float) and not isinstance(value, bool) and abs(value) <= sys.float_info.max)


def _is_row(row: Any) -> bool:
    return isinstance(row, dict) and all(is_figure(x) and x is not None for x in row.values())


LONGEST_TABLE = max(i.most for i in INPUTS)
_KINDS: dict[str, Callable[[Any], bool]] = {
    "number": is_figure,
    "choice": lambda value: isinstance(value, str),
    "text": lambda value: isinstance(value, str),
    "flag": lambda value: isinstance(value, bool),
    "rows": lambda value: isinstance(value, list) and len(value) <= LONGEST_TABLE and all(_is_row(row) for row in value),
    "fractions": lambda value: isinstance(value, dict) and all(is_figure(x) and x is not None for x in value.values()),
}


def _fault(file: str, key: str, text: str, given: str = "", allowed: str = "") -> CaseError:
    return CaseError((Fault(file, key, text, given, allowed),))


def write(path: str | os.PathLike[str], text: str) -> None:
    """Write a file whole or not at all. path: a link is followed to its target; a device of characters is written directly.

    Raises CaseError where the file cannot be written; an existing one is then untouched.
    """
    write_named(os.fspath(path), text.encode("utf-8"))
