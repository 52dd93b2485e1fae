"""The command `explain`: what a quantity is, with a case's numbers in its equation."""

from __future__ import annotations

import argparse
import math
from collections.abc import Callable
from typing import TYPE_CHECKING

from cycle.explain import Entry, Number, Term, Word, find, numbers, see_also
from cycle.quantities import INPUT, MODES, Group, Input, Output
from cycle.units import format_number, si_unit
from tui import entries
from tui.output import emit
from tui.solve import Outcome, exit_status, outcome
from tui.tables import Block, Heading, Lines, Table, as_text
from tui.text import input_text, limit_words, mode_sentences

if TYPE_CHECKING:
    from cycle.result import Walk

_DIGITS = 6


def run(options: argparse.Namespace) -> int:
    """Explain the quantity of the command line; the exit status is that of the case, 0 without one."""
    named = find(options.quantity)
    found = outcome(options.case, {}) if options.case is not None else None
    if found is not None and found.walk is None:
        return exit_status(found)
    blocks = [block for entry in named for block in explanation(entry, found)]
    more = see_also(named)
    if more:
        blocks.append(Lines((f"See also: {', '.join(more)}.",)))
    emit(as_text(blocks).lstrip("\n"))
    return 0 if found is None else exit_status(found)


def explanation(entry: Entry, found: Outcome | None) -> list[Block]:
    """An entry as blocks; with a solved case its numbers in that case."""
    blocks: list[Block] = [Heading(entries.title(entry)), Table(("", ""), tuple(entries.facts(entry)), wrapped=1)]
    if found is not None and found.walk is not None:
        blocks += _NUMBERS[type(entry)](entry, found.name, found.walk)
    return blocks


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
    symbol = entries.sign(entry)
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
