"""What an entry says of itself, in words: title and facts, for the command and for the screen."""

from __future__ import annotations

from collections.abc import Callable, Iterable

from cycle.explain import Entry, Word, group_of
from cycle.quantities import RESTORES, Group, Input, Output
from cycle.units import format_number, show, si_unit


def title(entry: Entry) -> str:
    """Name of an entry with its symbol. Parameters: entry."""
    if isinstance(entry, Group):
        return entry.meaning
    return f"{entry.label} ({entry.symbol})" if entry.symbol else entry.label


def facts(entry: Entry, system: str = "") -> Iterable[tuple[str, str]]:
    """Facts of an entry: (name of the fact, its words). Parameters: entry; system, of the display units, "" for plain SI."""
    yield "name", entry.name if isinstance(entry, Group) else entry.key
    yield from _FACTS[type(entry)](entry, system)


def _output_facts(entry: Output, system: str) -> Iterable[tuple[str, str]]:
    yield "kind", _PLACES[entry.where]
    yield "meaning", entry.meaning
    yield "unit", _unit(entry, system) or "none, a ratio"
    yield "equation", f"{sign(entry)} = {entry.equation}" if entry.equation else "none: the meaning defines it"
    yield "source", entry.source


def sign(entry: Output) -> str:
    """What stands for the figure before the equals sign."""
    return entry.symbol or ("margin" if entry.where == "limit" else entry.label)


_PLACES = {
    "station": "figure of each station",
    "performance": "figure of the engine",
    "process": "figure of a process",
    "profile": "figure along a duct",
    "limit": "limit of the walk",
    "heat": "border of the heat of a duct",
    "potential": "row of where the thrust comes from and goes",
    "loss": "row of the losses against the ideal engine",
    "exergy": "row of the exergy balance",
}


def _input_facts(entry: Input, system: str) -> Iterable[tuple[str, str]]:
    yield "kind", "input of a case"
    yield "meaning", entry.meaning
    if entry.kind == "number":
        yield "unit", _unit(entry, system) or "none, a ratio"
        yield "allowed", _bounds(entry, system)
    for column in entry.columns:
        yield f"column {column.key}", f"{column.meaning} {_bounds(column, system)}; default {_default(column, system)}"
    if entry.columns:
        yield "rows", f"{entry.fewest} to {entry.most}"
    if entry.choices:
        yield "choices", ", ".join(entry.choices)
    yield "default", _default(entry, system)
    group = group_of(entry)
    if group is not None:
        yield "one of", f"the ways to say {group.meaning} ({group.name}): {_ways(group)}"
    if entry.when:
        yield "used with", "; ".join(f"{key} = {' or '.join(values)}" for key, values in entry.when)
    yield "source", entry.source


def _bounds(entry: Input, system: str) -> str:
    sides = (("from", entry.lower), ("above", entry.above), ("to", entry.upper), ("below", entry.below))
    unit = _unit(entry, system)
    words = " ".join(f"{word} {_value(entry, x, system)}" for word, x in sides if x is not None) + (f" {unit}" if unit else "")
    return words if entry.flight_upper is None else f"{words}; to {_value(entry, entry.flight_upper, system)} {unit} in flight"


def _default(entry: Input, system: str) -> str:
    if entry.default is not None:
        unit = _unit(entry, system) if entry.kind == "number" else ""
        return f"{_value(entry, entry.default, system)} {unit}".strip()
    if entry.by_fuel:
        fuels = ", ".join(f"{name or 'any other fuel'} {_value(entry, value, system)}" for name, value in entry.by_fuel)
        return f"{fuels} {_unit(entry, system)}"
    return "none, it must be given" if entry.required else "none"


def _value(entry: Input, value: object, system: str) -> str:
    if not isinstance(value, float):
        return str(value)
    return format_number(show(value, entry.unit, system, entry.key)[0] if system else value)


def _unit(entry: Input | Output, system: str) -> str:
    return show(1.0, entry.unit, system, entry.key)[1] if system else si_unit(entry.unit)


def _group_facts(entry: Group, system: str) -> Iterable[tuple[str, str]]:
    yield "kind", "group of inputs of which exactly one is given" if entry.required else "group of inputs of which at most one is given"
    yield "ways", _ways(entry)
    if entry.default:
        yield "default", entry.default


def _ways(group: Group) -> str:
    return "; ".join(" and ".join(member.keys) for member in group.members)


def _word_facts(entry: Word, system: str) -> Iterable[tuple[str, str]]:
    yield "kind", entry.label
    yield "meaning", entry.meaning
    if entry.key in RESTORES:
        yield "restored by", RESTORES[entry.key]


_FACTS: dict[type, Callable[..., Iterable[tuple[str, str]]]] = {
    Output: _output_facts,
    Input: _input_facts,
    Group: _group_facts,
    Word: _word_facts,
}
