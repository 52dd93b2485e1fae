"""The command `explain`: what a quantity is, with a case's numbers in its equation."""

from __future__ import annotations

import argparse
import math
from collections.abc import Callable, Iterable
from typing import TYPE_CHECKING

from cycle.explain import Entry, Number, Term, Word, find, group_of, numbers, see_also
from cycle.quantities import INPUT, MODES, Group, Input, Output
from cycle.units import format_number, si_unit
from tui.output import emit
from tui.solve import Outcome, exit_status, outcome
from tui.tables import Block, Heading, Lines, Table, as_text
from tui.text import input_text, limit_words, mode_sentences

if TYPE_CHECKING:
    from cycle.result import Walk

_DIGITS = 6


def run(options: argparse.Namespace) -> int:
    """Explain the quantity of the command line; the exit status is that of the case, 0 without one."""
    entries = find(options.quantity)
    found = outcome(options.case, {}) if options.case else None
    if found is not None and found.walk is None:
        return exit_status(found)
    blocks = [block for entry in entries for block in explanation(entry, found)]
    more = see_also(entries)
    if more:
        blocks.append(Lines((f"See also: {', '.join(more)}.",)))
    emit(as_text(blocks).lstrip("\n"))
    return 0 if found is None else exit_status(found)


def explanation(entry: Entry, found: Outcome | None) -> list[Block]:
    """An entry as blocks; with a solved case its numbers in that case."""
    blocks: list[Block] = [Heading(_title(entry)), Table(("", ""), tuple(_facts(entry)), wrapped=1)]
    if found is not None and found.walk is not None:
        blocks += _NUMBERS[type(entry)](entry, found.name, found.walk)
    return blocks


def _title(entry: Entry) -> str:
    if isinstance(entry, Group):
        return entry.meaning
    return f"{entry.label} ({entry.symbol})" if entry.symbol else entry.label


def _facts(entry: Entry) -> Iterable[tuple[str, str]]:
    yield "name", entry.name if isinstance(entry, Group) else entry.key
    yield from _FACTS[type(entry)](entry)


def _output_facts(entry: Output) -> Iterable[tuple[str, str]]:
    yield "kind", _PLACES[entry.where]
    yield "meaning", entry.meaning
    yield "unit", si_unit(entry.unit) or "none, a ratio"
    yield "equation", f"{_sign(entry)} = {entry.equation}" if entry.equation else "none: the meaning defines it"
    yield "source", entry.source


def _sign(entry: Output) -> str:
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


def _input_facts(entry: Input) -> Iterable[tuple[str, str]]:
    yield "kind", "input of a case"
    yield "meaning", entry.meaning
    if entry.kind == "number":
        yield "unit", si_unit(entry.unit) or "none, a ratio"
        yield "allowed", _bounds(entry)
    for column in entry.columns:
        yield f"column {column.key}", f"{column.meaning} {_bounds(column)}; default {_default(column)}"
    if entry.columns:
        yield "rows", f"{entry.fewest} to {entry.most}"
    if entry.choices:
        yield "choices", ", ".join(entry.choices)
    yield "default", _default(entry)
    group = group_of(entry)
    if group is not None:
        yield "one of", f"the ways to say {group.meaning} ({group.name}): {_ways(group)}"
    if entry.when:
        yield "used with", "; ".join(f"{key} = {' or '.join(values)}" for key, values in entry.when)
    yield "source", entry.source


def _bounds(entry: Input) -> str:
    sides = (("from", entry.lower), ("above", entry.above), ("to", entry.upper), ("below", entry.below))
    unit = si_unit(entry.unit)
    return " ".join(f"{word} {format_number(x)}" for word, x in sides if x is not None) + (f" {unit}" if unit else "")


def _default(entry: Input) -> str:
    if entry.default is not None:
        unit = si_unit(entry.unit) if entry.kind == "number" else ""
        return f"{_si_text(entry.default)} {unit}".strip()
    return "none, it must be given" if entry.required else "none"


def _si_text(value: object) -> str:
    return format_number(value) if isinstance(value, float) else str(value)


def _group_facts(entry: Group) -> Iterable[tuple[str, str]]:
    yield "kind", "group of inputs of which exactly one is given" if entry.required else "group of inputs of which at most one is given"
    yield "ways", _ways(entry)
    if entry.default:
        yield "default", entry.default


def _ways(group: Group) -> str:
    return "; ".join(" and ".join(member.keys) for member in group.members)


def _word_facts(entry: Word) -> Iterable[tuple[str, str]]:
    yield "kind", entry.label
    yield "meaning", entry.meaning


_FACTS: dict[type, Callable[..., Iterable[tuple[str, str]]]] = {
    Output: _output_facts,
    Input: _input_facts,
    Group: _group_facts,
    Word: _word_facts,
}


def _output_numbers(entry: Output, name: str, walk: Walk) -> list[Block]:
    found = numbers(entry, walk)
    limits = [limit for limit in walk.limits if f"limit.{limit.key}" == entry.key]
    sentences = [_number_words(entry, number) for number in found if not limits or not math.isnan(number.value)]
    sentences += [limit_words(limit, "si") for limit in limits]
    blocks: list[Block] = [Lines((f"In {name}:", *(sentences or ["none in this walk"])))]
    terms = {t.symbol: t for number in found if len(found) == 1 for t in number.terms}
    if terms:
        rows = tuple((t.symbol, _value_text(t.value), t.unit, t.label) for t in terms.values())
        blocks.append(Table(("symbol", "value", "unit", ""), rows, left=(2, 3)))
    return blocks


def _number_words(entry: Output, number: Number) -> str:
    """One sentence: the figure, and the equation with numbers where it is arithmetic."""
    where = f"{number.where}: " if number.where else ""
    symbol = _sign(entry)
    if math.isnan(number.value):
        return f"{where}no value: {number.reason}"
    value = f"{_value_text(number.value)} {si_unit(entry.unit)}".strip()
    if number.worked:
        return f"{where}{symbol} = {number.worked} = {value}"
    entering = ", ".join(_term_words(t) for t in number.terms) if number.where else ""
    return f"{where}{symbol} = {value}" + (f", with {entering}" if entering else "")


def _term_words(term: Term) -> str:
    return f"{term.symbol} {_value_text(term.value)} {term.unit}".strip()


def _value_text(value: float) -> str:
    return format_number(value, _DIGITS)


def _input_numbers(entry: Input, name: str, walk: Walk) -> list[Block]:
    column = _column_of(entry, walk)
    if column:
        told_column = ", ".join("-" if value is None else _value_text(value) for value in column)
        return [Lines((f"In {name}, row by row: {told_column} {si_unit(entry.unit)}".rstrip() + ".",))]
    rows = walk.case.rows.get(entry.key)
    if rows is not None:
        told = (", ".join(f"{name} {_value_text(value)}" for name, value in row.items()) for row in rows)
        return [Lines((f"In {name}, in SI:", *(f"{n}: {words}" for n, words in enumerate(told, 1))))]
    stated = next((s for s in walk.case.inputs() if s.input.key == entry.key), None)
    if stated is None:
        return [Lines((f"In {name}: not used.",))]
    if stated.value is None:
        return [Lines((f"In {name}: not given.",))]
    unit = si_unit(entry.unit) if entry.kind == "number" else ""
    value = _value_text(stated.value) if isinstance(stated.value, float) else input_text(entry, stated.value, "si")
    return [Lines((f"In {name}: {value} {unit}".rstrip() + ("." if stated.given else ", the default."),))]


def _column_of(entry: Input, walk: Walk) -> list[float | None]:
    """Values of a column in the case's rows; none where the entry is no column."""
    table, _, column = entry.key.rpartition(".")
    declared = INPUT.get(table)
    if declared is None or declared.kind != "rows":
        return []
    return [row.get(column) for row in walk.case.rows.get(table, ())]


def _group_numbers(entry: Group, name: str, walk: Walk) -> list[Block]:
    tag = walk.case.choices.get(entry.name)
    return [Lines((f"In {name}: {tag}." if tag else f"In {name}: not used.",))]


def _word_numbers(entry: Word, name: str, walk: Walk) -> list[Block]:
    margins = mode_sentences(walk, "si") if entry.key in MODES else ()
    return [Lines((f"{name}: status {walk.status}, mode {walk.mode}.", *margins))]


_NUMBERS: dict[type, Callable[..., list[Block]]] = {
    Output: _output_numbers,
    Input: _input_numbers,
    Group: _group_numbers,
    Word: _word_numbers,
}
