"""Where two cases differ, and cases that take some of their inputs from another."""

from __future__ import annotations

from collections.abc import Iterable

from cycle.case.case import Case, Value, build, thawed
from cycle.case.checking import FORMAT, nest
from cycle.case.edits import without_unused
from cycle.quantities import GROUPS, INPUT, INPUTS, Input, cell_key

INPUT_GROUPS = ("flight", "air", "gas", "inlet", "fuel", "combustor", "nozzle", "engine")
"""Groups of inputs by which a difference between two walks is shared out."""

_GROUP_OF = {"entry": "flight", "isolator": "inlet", "limits": "engine"}


def group_of(key: str) -> str:
    """Group of `INPUT_GROUPS` that an input belongs to. Parameters: key. Returns: its group."""
    section = key.split(".")[0]
    return _GROUP_OF.get(section, section)


def differences(a: Case, b: Case) -> list[tuple[str, Value, Value]]:
    """Where two cases differ.

    Parameters: a, b, two cases. Returns: (key, value in a, value in b) with SI values and tags as `Case.value` gives them, in
    declared order, groups (tags) first; None where a case has no value. Rows of as many are compared cell by cell. Titles,
    notes and studies are left out.
    """
    keys = ["start", *(g.name for g in GROUPS), *(key for i in INPUTS for key in _keys(i, a, b))]
    pairs = ((key, a.value(key), b.value(key)) for key in keys if not _of_the_fuel(key, a, b))
    return [(key, one, other) for key, one, other in pairs if one != other]


def _keys(entry: Input, a: Case, b: Case) -> list[str]:
    """Keys under which an input is compared: those of its cells where both cases have as many rows."""
    count = len(a.rows.get(entry.key, ()))
    if not count or count != len(b.rows.get(entry.key, ())):
        return [entry.key]
    return [cell_key(entry.key, n, column.key) for n in range(1, count + 1) for column in entry.columns]


def _of_the_fuel(key: str, a: Case, b: Case) -> bool:
    """Whether an input has in both cases the default of its fuel: then only the fuel differs."""
    return key in INPUT and bool(INPUT[key].by_fuel) and key not in a.given and key not in b.given


def taking(a: Case, b: Case, groups: Iterable[str]) -> Case:
    """A case with some groups of inputs taken from another.

    Parameters: a, the case; b, the other; groups, names of `INPUT_GROUPS` to take from b. Keys that mean nothing in the
    mixture are dropped.
    Returns: a new Case without a path. Errors: CaseError where the mixture is no case; KeyError for an unknown group.
    """
    taken = set(groups)
    unknown = taken.difference(INPUT_GROUPS)
    if unknown:
        raise KeyError(*sorted(unknown))
    mixed = {key: value for key, value in a.spelled.items() if group_of(key) not in taken}
    mixed.update({key: value for key, value in b.spelled.items() if group_of(key) in taken})
    spelled = thawed(without_unused(mixed))
    document = {"format": FORMAT, "title": a.title, "notes": a.notes, "study": thawed(a.studies), **nest(spelled)}
    return build(document, f"{a.name} with {', '.join(g for g in INPUT_GROUPS if g in taken)} of {b.name}", text=a.text)
