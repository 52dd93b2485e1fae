"""A case file's tables to its content, with every fault as one line in the trade's words."""

from __future__ import annotations

import difflib
import math
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

from cycle.case.joint import JOINT_RULES, Facts, has_lip_circle
from cycle.case.rows import cells, place
from cycle.case.rules import Resolved, bounds, resolve
from cycle.errors import MOST_FAULTS, CaseError, Fault, shown
from cycle.quantities import INPUT, INPUTS, SECTIONS, TABLES, Input, split_cell
from cycle.units import format_number, read, si_unit

if TYPE_CHECKING:
    from cycle.case.schema import Problem

FORMAT = 1
"""Format of the case files that this program reads and writes."""
DEEPEST = 32
_TOP = ("format", "title", "notes", *TABLES, "study")


@dataclass(frozen=True, slots=True)
class Content:
    """What a sound case holds; the fields are those of `cycle.case.Case`."""

    title: str
    notes: str
    numbers: dict[str, float]
    choices: dict[str, str]
    texts: dict[str, str]
    fractions: dict[str, float]
    applicable: frozenset[str]


def flatten(document: Mapping[str, Any]) -> dict[str, object]:
    """Keys of the input tables and sub-tables with their values as written; "section.name" -> value."""
    found: dict[str, object] = {}
    for section in SECTIONS:
        table: object = document
        for part in section.split("."):
            table = table.get(part) if isinstance(table, Mapping) else None
        if isinstance(table, Mapping):
            found.update({key: value for name, value in table.items() if (key := f"{section}.{name}") not in SECTIONS})
    return found


def home(key: str) -> tuple[str, ...]:
    """Tables that hold a key, then its name in the last of them. Parameters: key, as "section.name"."""
    section, _, name = key.rpartition(".")
    return (*section.split("."), name) if section in SECTIONS else tuple(key.split(".", 1))


def nest(flat: Mapping[str, object]) -> dict[str, Any]:
    """Tables from "section.name" keys; keys without a point stay at the top."""
    document: dict[str, Any] = {}
    for key, value in flat.items():
        *tables, name = home(key)
        inside = document
        for table in tables:
            inside = inside.setdefault(table, {})
        inside[name] = value
    return document


def depth(value: object) -> int:
    """Levels of tables and arrays inside a value."""
    deepest, level, layer = 0, 0, [value]
    while layer:
        deepest = level
        inner: list[object] = []
        for item in layer:
            inner.extend(item.values() if isinstance(item, Mapping) else item if isinstance(item, list) else ())
        layer, level = inner, level + 1
    return deepest


def examine(document: Mapping[str, Any], file: str) -> Content:
    """Content of a case file.

    Parameters: document, nested tables as TOML gives them, with "format"; file, the name that messages use.
    Returns: Content. Errors: CaseError with every fault.
    """
    faults = _format(document)
    if not faults:
        content, faults = _examine(document)
        if content is not None:
            return content
    raise CaseError(replace(fault, file=file) for fault in faults)


def json_schema() -> dict[str, Any]:
    """JSON Schema (2020-12) of a case file, with units, bounds, defaults and meanings, as plain data."""
    from cycle.case.schema import json_schema as made

    return made()


def _format(document: Mapping[str, Any]) -> list[Fault]:
    allowed = f"format = {FORMAT}"
    given = document.get("format")
    if given is None:
        return [Fault("", "format", "the file does not say which format it is in", "none", allowed)]
    if isinstance(given, int) and not isinstance(given, bool) and given > FORMAT:
        return [Fault("", "format", f"format {shown(given)} is newer than this program ({FORMAT})", shown(given), allowed)]
    if given is not FORMAT and (isinstance(given, bool) or given != FORMAT or not isinstance(given, int)):
        return [Fault("", "format", "unknown format", shown(given), allowed)]
    if depth(document) > DEEPEST:
        return [Fault("", "", "tables or arrays are nested too deeply", f"{depth(document)} levels", f"{DEEPEST} levels")]
    return []


def _examine(document: Mapping[str, Any]) -> tuple[Content | None, list[Fault]]:
    from cycle.case.schema import check

    values, problems = check(document)
    faults = list(_single(problems))
    bad = frozenset(".".join(owner(p.where)) for p in problems)
    tables = [name for name in TABLES if name in document]
    given = {key: value for key, value in flatten(document).items() if key in INPUT}
    resolved = resolve(given, bad, tables)
    # a table that is no table hides what it holds: what is missing from it cannot be told
    hidden = {p.where[0] for p in problems if len(p.where) == 1 or ".".join(p.where) in SECTIONS}
    faults.extend(f for f in resolved.faults if f.key.split(".")[0] not in hidden)
    facts = Facts(resolved.choices, values)
    faults.extend(fault for rule in JOINT_RULES for fault in rule(facts))
    if faults:
        return None, faults
    return _content(values, resolved), []


def _content(values: Mapping[str, Any], resolved: Resolved) -> Content:
    numbers: dict[str, float] = {}
    for entry in INPUTS:
        if entry.kind == "number" and entry.key in resolved.applicable:
            value = values.get(entry.key, numbers.get(entry.follows, entry.default_in(resolved.choices)))
            if value is not None:
                numbers[entry.key] = float(value)
        elif entry.kind == "rows" and entry.key in resolved.applicable:
            numbers.update(cells(entry.key, values.get(entry.key, [])))
    if has_lip_circle(resolved.choices) and "engine.capture_area" not in values:
        numbers["engine.capture_area"] = math.pi * numbers["inlet.lip_y"] ** 2
    fractions = dict(values.get("air.mole_fractions", {}))
    total = sum(fractions.values())
    return Content(
        values["title"],
        values["notes"],
        numbers,
        {name: tag for name, tag in resolved.choices.items() if tag is not None},
        {i.key: values[i.key] for i in INPUTS if i.kind == "text" and i.key in values},
        {name: value / total for name, value in fractions.items()},
        resolved.applicable,
    )


def owner(where: tuple[str, ...]) -> tuple[str, ...]:
    """The part of a place in the document that a fault there makes useless: an input with all it holds, else the place."""
    return next((where[:n] for n in range(2, len(where)) if ".".join(where[:n]) in INPUT), where)


def _single(problems: list[Problem]) -> Iterator[Fault]:
    for problem in problems[: 4 * MOST_FAULTS]:
        yield _WORDS.get(problem.kind, _wrong_type)(problem, _key(problem.where))


def _table_of(where: tuple[str, ...]) -> Input | None:
    """The rows that a place lies in."""
    entry = INPUT.get(".".join(owner(where)))
    return entry if entry is not None and entry.kind == "rows" and len(owner(where)) < len(where) else None


def _key(where: tuple[str, ...]) -> str:
    table = _table_of(where)
    if table is None:
        return ".".join(where)
    number, *column = where[len(owner(where)) :]
    return place(table.key, int(number) + 1, ".".join(column))


def _entry(where: tuple[str, ...]) -> Input | None:
    """The input or column that a place is a value of."""
    table = _table_of(where)
    if table is None:
        return INPUT.get(".".join(where))
    return next((c for c in table.columns if where[len(owner(where)) + 1 :] == (c.key,)), None)


def _neighbours(where: tuple[str, ...]) -> list[str]:
    """Names that could stand at a place."""
    table, section = _table_of(where), ".".join(where[:-1])
    if table is not None:
        return [column.key for column in table.columns]
    inside = [name.removeprefix(f"{section}.") for name in SECTIONS if name.rpartition(".")[0] == section]
    return [i.name for i in INPUTS if i.section == section] + inside


def _unknown(problem: Problem, key: str) -> Fault:
    if len(problem.where) == 1:
        names = list(_TOP)
        allowed = f"title, notes, study, or the tables {', '.join(TABLES)}"
    else:
        names = _neighbours(problem.where)
        allowed = ", ".join(names)
    near = difflib.get_close_matches(problem.where[-1], names, 1, 0.6)
    elsewhere = [i.key for i in INPUTS if i.name == problem.where[-1]]
    hint = near[0] if near else elsewhere[0] if elsewhere else ""
    text = "unknown key" + (f" (did you mean {hint}?)" if hint else "")
    return Fault("", key, text, shown(problem.given), allowed)


def stray(key: str, value: object, file: str) -> Fault | None:
    """The fault of a key that is in no table of inputs, None where it is in one.

    Parameters: key, as "section.name"; value, given with it; file, the name that messages use. Returns: the fault or None.
    """
    if split_cell(key) or (key not in SECTIONS and len(home(key)) > 1 and home(key)[0] in TABLES and home(key)[-1]):
        return None
    keys = {i.key: i.key for i in INPUTS} | {i.name: i.key for i in reversed(INPUTS)}
    near = difflib.get_close_matches(key, list(keys), 1, 0.6)
    hint = f" (did you mean {keys[near[0]]}?)" if near else ""
    return Fault(file, key, f"unknown key{hint}", shown(value), f"table.key, with one of the tables {', '.join(SECTIONS)}")


def _unit(problem: Problem, key: str) -> Fault:
    return Fault("", key, problem.context["text"], shown(problem.given), problem.context["allowed"])


def _out_of_bounds(problem: Problem, key: str) -> Fault:
    entry = _entry(problem.where)
    return Fault("", key, "out of bounds", _given_number(problem.given, entry), bounds(entry) if entry else "at least 0, at most 1")


def _given_number(given: object, entry: Input | None) -> str:
    if entry is None:
        return shown(given)
    negligible = (
        ", which counts as 0"
        if entry.above == 0.0 and isinstance(given, int | float | str) and 0.0 < read(given, entry.unit) <= (entry.over or 0.0)
        else ""
    )
    if not isinstance(given, str):
        return shown(given) + negligible
    return f"{shown(given)}, which is {format_number(read(given, entry.unit), 6)} {si_unit(entry.unit)}".rstrip() + negligible


def _choice(problem: Problem, key: str) -> Fault:
    entry = _entry(problem.where)
    if entry is None:
        from cycle.case.schema import SPECIES

        return Fault("", key, "unknown species", shown(problem.given), ", ".join(SPECIES))
    if entry.kind == "flag":
        return Fault("", key, "can only be true; leave it out otherwise", shown(problem.given), "true")
    near = difflib.get_close_matches(problem.given, entry.choices, 1, 0.6) if isinstance(problem.given, str) else []
    text = "unknown choice" + (f" (did you mean {near[0]}?)" if near else "")
    return Fault("", key, text, shown(problem.given), ", ".join(entry.choices))


def _wrong_type(problem: Problem, key: str) -> Fault:
    entry = _entry(problem.where)
    allowed = bounds(entry) if entry else _EXPECTED.get(problem.kind, "plain text, numbers and tables")
    return Fault("", key, "wrong type", shown(problem.given), allowed)


def _length(problem: Problem, key: str) -> Fault:
    entry = _entry(problem.where)
    limit = problem.context.get("max_length", problem.context.get("min_length"))
    given = f"{len(problem.given)} characters" if isinstance(problem.given, str) else shown(problem.given)
    if entry is not None and entry.kind == "rows" and isinstance(problem.given, list):
        return Fault("", key, "wrong number of rows", str(len(problem.given)), bounds(entry))
    return Fault("", key, "wrong length", given, bounds(entry) if entry else f"at most {limit} characters")


def _missing(problem: Problem, key: str) -> Fault:
    entry = _entry(problem.where)
    return Fault("", key, f"{entry.label if entry else 'a value'} is not stated", "none", bounds(entry) if entry else "a value")


def _broken(problem: Problem, key: str) -> Fault:
    entry = _entry(problem.where)
    return Fault("", key, "not a whole number", shown(problem.given), bounds(entry) if entry else "a whole number")


def _study_name(problem: Problem, key: str) -> Fault:
    return Fault("", key, "no name for a study", shown(problem.where[-1]), "1 to 64 letters, digits, - and _")


_EXPECTED = {
    "string_type": "text",
    "string_unicode": "text of Unicode characters",
    "model_type": "a table",
    "dict_type": "a table",
    "float_type": "a number from 0 to 1",
    "finite_number": "a number from 0 to 1",
}
_WORDS: dict[str, Callable[[Problem, str], Fault]] = {
    "extra_forbidden": _unknown,
    "unit": _unit,
    "greater_than": _out_of_bounds,
    "greater_than_equal": _out_of_bounds,
    "less_than": _out_of_bounds,
    "less_than_equal": _out_of_bounds,
    "literal_error": _choice,
    "string_too_long": _length,
    "string_too_short": _length,
    "too_short": _length,
    "too_long": _length,
    "missing": _missing,
    "multiple_of": _broken,
    "string_pattern_mismatch": _study_name,
}
