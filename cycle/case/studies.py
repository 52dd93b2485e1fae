"""Named studies of a case: which inputs are varied between what, and which figures are asked for."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import TYPE_CHECKING, Any

from cycle.case.rules import outside
from cycle.errors import Fault, UnitError, shown
from cycle.quantities import OUTPUT, Input
from cycle.units import format_number, read, si_unit

if TYPE_CHECKING:
    from cycle.case.case import Case

Study = Mapping[str, Any]
FEWEST, MOST = 2, 10_000
"""Points along one input of a study."""


def faults_of(case: Case, name: str, study: Study) -> list[Fault]:
    """What stands against a new study of a case.

    Parameters: case; name of the study; study: {"outputs": [key, ...], "vary": [{"input", "from", "to", "points"}, ...]}, where
    `from` and `to` are numbers in SI or text with a unit. Returns: the faults, none where it may be added; what a name may be
    is judged with the whole case.
    """
    place, file = f"study.{name}", case.path or case.name
    found = [Fault(file, place, "there is a study of this name", "", "another name")] if name in case.studies else []
    found += [
        Fault(file, f"{place}.outputs", "unknown figure", shown(key))
        for key in study["outputs"]
        if key not in OUTPUT and not _of_station(key)
    ]
    return found + [fault for vary in study["vary"] for fault in _varied(case, file, place, vary)]


def _of_station(key: str) -> bool:
    """Whether a key is that of a figure at a station, such as "4.temperature"."""
    station, _, name = key.partition(".")
    return station.isdigit() and name in OUTPUT and OUTPUT[name].where == "station"


def _varied(case: Case, file: str, place: str, vary: Mapping[str, Any]) -> Iterator[Fault]:
    entry = case.declared(vary["input"])
    if entry is None or entry.kind != "number" or not case.applies(entry.key):
        yield Fault(file, f"{place}.vary", "no number input of this case", shown(vary["input"]))
        return
    for end in ("from", "to"):
        yield from _end(entry, file, f"{place}.vary", vary[end])
    if not FEWEST <= vary["points"] <= MOST:
        yield Fault(file, f"{place}.points", "out of bounds", shown(vary["points"]), f"{FEWEST} to {MOST}")


def _end(entry: Input, file: str, place: str, given: float | str) -> Iterator[Fault]:
    try:
        value = read(given, entry.unit)
    except UnitError as error:
        yield Fault(file, place, error.text, shown(given), error.allowed)
        return
    if outside(entry, value):
        yield Fault(file, place, f"{entry.label} out of bounds", f"{format_number(value, 6)} {si_unit(entry.unit)}".strip())
