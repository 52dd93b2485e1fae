"""The inputs of the component in hand: which ones a station owns, how each value is written, what an edit of one is."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

from cycle.quantities import GROUP, INPUT, Group, Input, input_of
from cycle.units import display_unit, format_number, respell, show
from tui import rows
from tui.session import Change, Entry, Session, columns_of

if TYPE_CHECKING:
    from cycle.case import Case, Stated

OWNED: tuple[tuple[tuple[str, ...], tuple[str, ...]], ...] = (
    (("inlet.quality", "inlet.compression", "inlet.ramp", "inlet.cone", "inlet.isentropic_ramp"), ("1",)),
    (("inlet.lip", "inlet.lip_x", "inlet.lip_y"), ("1",)),
    (("inlet",), ("2",)),
    (("isolator", "combustor.entry_area_ratio"), ("3",)),
    (("fuel", "combustor"), ("4",)),
    (("nozzle.throat", "nozzle.throat_size", "nozzle.throat_area"), ("5",)),
    (("nozzle",), ("9", "10")),
)
"""Keys, groups or tables and the stations whose component they belong to; the first line that a case has a station for holds.
The first station owns the rest."""

FIRST = ("flight", "entry", "air", "gas", "engine")
LIMITS = {
    "limits.ignition_temperature": "4",
    "limits.ignition_pressure": "4",
    "limits.gas_temperature": "4",
    "limits.nozzle_separation": "10",
}
"""Thresholds of limits -> the station where they bind; the others belong to the first station."""

HEADS = ("title", "notes")
"""What a case says of itself: no inputs, but edited like them."""

_NUMBER = re.compile(r"\s*([-+]?(?:\d+\.?\d*|\.\d+)(?:[eE][-+]?\d+)?)\s*(.*?)\s*\Z", re.DOTALL)


@dataclass(frozen=True, slots=True)
class Item:
    """One line of the inputs. key: the input's key, or a group's name where none of its ways is given; group: the name
    of the group it belongs to; written: its value as shown; default: whether the value is one."""

    key: str
    label: str
    written: str
    default: bool
    group: str | None = None
    input: Input | None = None
    value: object = None
    spelled: object = None


def _owner(key: str, columns: tuple[str, ...]) -> tuple[str, ...]:
    """Stations whose inputs hold `key`."""
    section = key.split(".")[0]
    if section in FIRST:
        return columns[:1]
    if section == "limits":
        home = LIMITS.get(key, columns[0])
        return (home,) if home in columns else columns[-1:]
    for heads, stations in OWNED:
        at = tuple(s for s in stations if s in columns[1:])
        if at and any(key == head or key.startswith(f"{head}.") for head in heads):
            return at
    return columns[-1:]


def home(session: Session, key: str) -> str:
    """The station whose inputs hold `key`: the one in hand where it does, else the first that does."""
    owners = _owner(key, columns_of(session.case))
    return session.station if session.station in owners else owners[0]


def written(stated: Stated, system: str) -> str:
    """A value as the user wrote it, else in the display unit; "-" where an optional one is absent."""
    value = stated.value
    if stated.input.kind == "fractions":
        return f"given, {len(value)} species" if isinstance(value, Mapping) and value else "standard"
    if value is None:
        return "-"
    if isinstance(value, bool):
        return "yes" if value else "no"
    if not isinstance(value, int | float):
        return str(value)
    if system == "si" and isinstance(stated.spelled, str):
        return " ".join(stated.spelled.split())
    shown, unit = show(float(value), stated.input.unit, system, stated.input.key)
    return f"{format_number(shown, 6)} {unit}".strip()


def _of_group(case: Case, group: Group) -> Item | None:
    """A line for a group none of whose ways is given, so that a way can be chosen."""
    tag = str(case.value(group.name))
    if tag in (m.tag for m in group.members):
        return None
    return Item(group.name, group.meaning, tag, True, group.name)


def items(session: Session) -> tuple[Item, ...]:
    """The inputs that belong to the station under the cursor, in declared order; () before the case is read."""
    case = session.case
    if case is None:
        return ()
    columns = columns_of(case)
    out = [
        Item(s.input.key, s.input.label, written(s, session.system), not s.given, s.group, s.input, s.value, s.spelled)
        for s in case.inputs()
        if session.station in _owner(s.input.key, columns) and not rows.hidden(case, s.input.key)
    ]
    for group in case.groups():
        if session.station in _owner(group.name, columns) and (extra := _of_group(case, group)) is not None:
            out.append(extra)
    return tuple(out)


def in_hand(session: Session) -> Item | None:
    """The input in hand at the station under the cursor: the one last chosen there, else the first."""
    here = items(session)
    chosen = session.inputs.get(session.station)
    return next((i for i in here if i.key == chosen), here[0] if here else None)


def unit_of(text: str) -> str:
    """The unit in a written value, "" where there is none."""
    match = _NUMBER.match(text)
    return match.group(2) if match else ""


def entry_for(item: Item, session: Session) -> Entry:
    """A field open on an input, its present value in it."""
    spec = item.input
    if spec is not None and spec.kind == "fractions":
        given = item.value if isinstance(item.value, Mapping) else {}
        text = ", ".join(f"{name} {share:.6g}" for name, share in given.items())
    else:
        text = "" if item.written == "-" else item.written
    return Entry(item.key, text, len(text), bare_unit(item, session.system))


def bare_unit(item: Item, system: str) -> str:
    """The unit that a bare number typed into the field of an input is in: the one it is shown in."""
    if item.input is None or item.input.kind != "number":
        return ""
    if item.written != "-":
        return unit_of(item.written)
    return show(1.0, item.input.unit, system, item.key)[1]


def typed(entry: Entry) -> object:
    """What a field says, as a case takes it: None where it is empty, a bare number in the unit shown, else the text."""
    text = " ".join(entry.text.split())
    if not text:
        return None
    spec = input_of(entry.key)
    kind = spec.kind if spec is not None else "text"
    if kind == "fractions":
        return _fractions(text)
    match = _NUMBER.match(text) if kind == "number" else None
    if match is None or match.group(2):
        return text
    return f"{text} {entry.unit}" if entry.unit else float(text)


def _fractions(text: str) -> object:
    """Mole fractions from "N2 0.7, O2 0.3"; the text itself where it is not that, for the case to refuse."""
    pairs = [part.replace("=", " ").split() for part in text.split(",")]
    try:
        return {name: float(share) for name, share in pairs}
    except ValueError:
        return text


def change_of(entry: Entry) -> Change:
    """The edit that committing a field asks for."""
    value = typed(entry)
    if entry.switch is not None:
        return {"switch": [*entry.switch, value]}
    return {"set": {entry.key: value}}


def completed(change: Change, case: Case, beside: Mapping[str, object]) -> Change:
    """A change with what hangs on it: the cells that follow from one, and what another way needs beside its own value.

    Parameters: change, one value or one switch; case, the present one; beside, key -> value. Returns: the change.
    """
    if "switch" in change:
        group, tag, value = change["switch"]
        keys = next((m.keys for m in GROUP[group].members if m.tag == tag), ())
        if not beside or not keys:
            return change
        own = value if isinstance(value, dict) else {} if value is None else {keys[0]: value}
        flags = {k: True for k in keys if INPUT[k].kind == "flag"}
        return {"switch": [group, tag, {**flags, **own, **beside}]}
    (key, value), *rest = change["set"].items()
    return {"set": {**rows.cell_changes(case, key, value), **dict(rest), **beside}}


def stepped(item: Item, steps: int) -> tuple[float | str | None, str]:
    """The value some declared steps on, held at a bound.

    Parameters: item, a number with a value; steps, how many, negative for down. Returns: (new value in SI, or as text in the user's own
    unit; None at a bound), (words for a bound).
    """
    spec = item.input
    assert spec is not None and isinstance(item.value, int | float)
    old = float(item.value)
    new = float(f"{old + steps * spec.step:.12g}")
    words = ""
    if spec.upper is not None and new > spec.upper:
        new, words = spec.upper, "at its upper bound"
    if spec.lower is not None and new < spec.lower:
        new, words = spec.lower, "at its lower bound"
    outside = (spec.above is not None and new <= spec.above) or (spec.below is not None and new >= spec.below)
    if outside or new == old:
        return None, words or "a step further is out of bounds"
    like = respell(new, item.spelled, spec.unit)
    match = _NUMBER.match(like) if isinstance(like, str) and not words else None
    return f"{float(match.group(1)):.6g} {match.group(2)}" if match else new, words


def next_choice(item: Item, sign: int) -> str:
    """The choice after (or before) the present one, around the end."""
    spec = item.input
    assert spec is not None
    present = spec.choices.index(str(item.value)) if item.value in spec.choices else -1
    return spec.choices[(present + sign) % len(spec.choices)]


def groups_of(case: Case, item: Item) -> list[str]:
    """Groups that an input takes part in, those that hold the fewest ways first."""
    place = rows.place_of(item.key)
    key = place[0] if place is not None else item.key
    every = [g for g in case.groups() if g.name == item.group or any(key in m.keys for m in g.members)]
    return [g.name for g in sorted(every, key=lambda g: len(g.members))]


def ways_now(case: Case, key: str) -> list[str]:
    """The key itself, then the ways in which the case says the groups it belongs to."""
    given = [s.input.key for s in case.inputs() if not rows.hidden(case, s.input.key)]
    inside = next((k for k in given if k.startswith(f"{key}.")), "")
    groups = [g for g in GROUP.values() if g.name == key or any(key in m.keys for m in g.members)]
    ways = [k for g in groups for m in g.members for k in m.keys if k in given]
    return [key, inside, *rows.others(key), *ways, *(g.name for g in groups)]


def way_label(group: str, tag: str) -> str:
    """Words for one way of a group: the labels of its inputs, or the tag of a default that has none."""
    ways = [m for m in GROUP[group].members if m.tag == tag]
    return " and ".join(INPUT[k].label for k in ways[0].keys) if len(ways) == 1 else tag.replace("-", " ")


def bounds(spec: Input, system: str, step: bool = True) -> str:
    """Bounds and, where asked for, the step of a number in words, in the display unit."""
    if spec.kind != "number":
        return ""
    low = spec.lower if spec.lower is not None else spec.above
    high = spec.upper if spec.upper is not None else spec.below
    shown = [format_number(show(v, spec.unit, system, spec.key)[0], 4) for v in (low, high) if v is not None]
    unit = show(0.0, spec.unit, system, spec.key)[1]
    said = f"{' to '.join(shown)} {unit}".strip()
    factor = display_unit(spec.unit, system, spec.key).factor
    return f"{said}, step {format_number(spec.step / factor, 3)}" if step else said


def describe(before: Case, after: Case, change: Change, system: str) -> str:
    """Words for an edit: the input's label with its old and new value, the way a group is said now, or the study made."""
    if "case" in change:
        return "back behind the last save"
    if "study" in change:
        return f"study {change['study'][0]} made"
    if "switch" in change:
        group, tag, _ = change["switch"]
        return f"{GROUP[group].meaning} by {way_label(group, tag)}"
    key = next(iter(change["set"]))
    if key in HEADS:
        return f"{' and '.join(change['set'])} of the case"
    spec = input_of(key)
    assert spec is not None
    if spec.kind == "rows":
        return rows.words(before, after, key)
    old, new = (next((written(s, system) for s in c.inputs() if s.input.key == key), "-") for c in (before, after))
    return f"{spec.label} {old} -> {new}"
