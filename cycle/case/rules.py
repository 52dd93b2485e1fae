"""Which keys a case needs, which it may have and which mean nothing in it: read off the declarations in `quantities`."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace
from functools import lru_cache
from graphlib import TopologicalSorter

from cycle.declarations import When
from cycle.errors import Fault
from cycle.quantities import GROUP, GROUPS, INPUT, INPUTS, Group, Input, Member
from cycle.units import format_number, si_unit

Choices = Mapping[str, str | None]

FLIGHT_TABLES = ("flight", "inlet")
ENTRY_TABLES = ("entry",)
ABSENT = "absent"


@dataclass(frozen=True, slots=True)
class Resolved:
    """What the given keys amount to.

    choices: choice inputs, groups and "start" that apply, None where a fault leaves them open; applicable: keys that mean
    something here; unused: given keys that do not, with the condition that fails; faults: without a file name yet.
    """

    choices: dict[str, str | None]
    applicable: frozenset[str]
    unused: dict[str, tuple[str, tuple[str, ...]]]
    faults: tuple[Fault, ...]


def _failing(when: When, choices: Choices) -> tuple[str, tuple[str, ...]] | None:
    for name, allowed in when:
        tag = choices.get(name, "")
        if tag is not None and tag not in allowed:
            return name, allowed
    return None


def _open(when: When, choices: Choices) -> bool:
    """Whether a fault elsewhere leaves a condition undecided."""
    return any(choices.get(name, "") is None for name, _ in when)


@lru_cache(maxsize=1)
def _order() -> tuple[str, ...]:
    """Choice inputs and groups, each behind those its own conditions name and behind the groups it belongs to."""
    nodes: dict[str, When] = {i.key: i.when for i in INPUTS if i.kind == "choice"}
    nodes.update({g.name: g.when for g in GROUPS})
    follows = {i.key: i.follows for i in INPUTS if i.kind == "choice" and i.follows}
    graph = {
        name: {other for other, _ in when if other in nodes}
        | ({follows[name]} if name in follows else set())
        | {group.name for group in groups_of().get(name, ())}
        for name, when in nodes.items()
    }
    return tuple(TopologicalSorter(graph).static_order())


@lru_cache(maxsize=1)
def groups_of() -> dict[str, tuple[Group, ...]]:
    """Groups that hold a key as one of their members' keys."""
    found: dict[str, tuple[Group, ...]] = {}
    for group in GROUPS:
        for key in keys_of(group):
            found[key] = (*found.get(key, ()), group)
    return found


def reach(member: Member) -> tuple[str, ...]:
    """Keys that a member may be given with."""
    return member.keys + member.also


def keys_of(group: Group) -> tuple[str, ...]:
    """Keys of all members of a group."""
    return tuple(dict.fromkeys(key for member in group.members for key in reach(member)))


def start_of(given: Iterable[str], tables: Iterable[str] = ()) -> str | None:
    """ "flight" or "entry", by the tables that hold keys (by empty tables where none does); None where both do."""
    for names in ({key.split(".")[0] for key in given}, set(tables)):
        flight, entry = not names.isdisjoint(FLIGHT_TABLES), not names.isdisjoint(ENTRY_TABLES)
        if flight and entry:
            return None
        if flight or entry:
            return "entry" if entry else "flight"
    return "flight"


def members_present(group: Group, given: Mapping[str, object]) -> list[Member]:
    """Members of which a key is given, without those that another one covers."""
    present = [m for m in group.members if any(k in given for k in m.keys)]

    def covered(m: Member) -> bool:
        keys = [k for k in m.keys if k in given]
        return any(n is not m and all(k in n.also for k in keys) for n in present)

    return [m for m in present if not covered(m)]


def alternatives(group: Group, choices: Choices) -> tuple[str, ...]:
    """Tags of a group that may be chosen beside these choices, the default that is no member first."""
    tags = [] if group.default is None or group.default in {m.tag for m in group.members} else [group.default]
    for member in group.members:
        beside = {**choices, group.name: member.tag}
        if not any(_failing(INPUT[key].when, beside) for key in member.keys):
            tags.append(member.tag)
    return tuple(dict.fromkeys(tags))


def section_of(group: Group) -> str:
    """Table of the case file that holds a group's keys."""
    return group.name.split(".")[0]


def _inside(group: Group, keys: Iterable[str]) -> list[str]:
    """Keys as they are named inside the group's table."""
    return list(dict.fromkeys(key.removeprefix(f"{section_of(group)}.") for key in keys))


def _one_of(group: Group, members: Iterable[Member]) -> str:
    names = [" + ".join(_inside(group, m.keys)) for m in members]
    if len(group.members) == 1:
        return names[0]
    return f"{'exactly' if group.required else 'at most'} one of {', '.join(names)}"


def ways(group: Group) -> str:
    """One line that says what a group is for and by which keys it may be given."""
    default = f"; {group.default} when none is given" if group.default else ""
    return f"{group.meaning}: {_one_of(group, group.members)}{default}"


def _allowed(group: Group, choices: Choices) -> str:
    tags = alternatives(group, choices)
    return _one_of(group, [m for m in group.members if m.tag in tags])


def _resolve_group(group: Group, given: Mapping[str, object], choices: Choices) -> tuple[str | None, list[Fault]]:
    present = members_present(group, given)
    undecided = _open(group.when, choices)
    if len(present) > 1 and undecided:
        return None, []
    if len(present) > 1:
        keys = _inside(group, (k for m in present for k in m.keys if k in given))
        text = f"{group.meaning} is stated more than once"
        return None, [Fault("", section_of(group), text, ", ".join(keys), _allowed(group, choices))]
    if present:
        return present[0].tag, _missing_partners(present[0], given)
    if group.default is not None:
        return group.default, []
    if undecided or not group.required:
        return None, []
    return None, [Fault("", section_of(group), f"{group.meaning} is not stated", "none", _allowed(group, choices))]


def _missing_partners(member: Member, given: Mapping[str, object]) -> list[Fault]:
    there = [k for k in member.keys if k in given]
    return [
        Fault("", k, f"needed with {', '.join(INPUT[t].name for t in there)}", "none", INPUT[k].label)
        for k in member.keys
        if k not in given
    ]


def _resolve_choice(entry: Input, given: Mapping[str, object], bad: frozenset[str], choices: Choices) -> str | None:
    """The choice, "" where it has none, None where a fault leaves it open."""
    if entry.key in bad or (entry.required and entry.key not in given):
        return None
    if entry.key in given:
        return str(given[entry.key])
    if _open(entry.when, choices):
        return None
    if entry.follows:
        return choices.get(entry.follows)
    return str(entry.default) if entry.default is not None else ""


def _has_no_nozzle(start: str | None, given: Iterable[str]) -> bool:
    return start == "entry" and not any(key.startswith("nozzle.") for key in given)


def _in_groups(key: str, choices: Choices) -> bool | None:
    """Whether the chosen members of the key's groups hold it; None while a fault leaves that open."""
    undecided = False
    for group in groups_of().get(key, ()):
        if group.name not in choices:
            continue
        tag = choices[group.name]
        if tag is None:
            undecided = True
        elif not any(key in reach(m) for m in group.members if m.tag == tag):
            return False
    return None if undecided else True


def resolve(given: Mapping[str, object], bad: frozenset[str] = frozenset(), tables: Iterable[str] = ()) -> Resolved:
    """What the given keys amount to, and what is wrong with their being together.

    Parameters: given, key -> value as written; bad, keys whose values are faulty; tables, names of the tables of the file.
    Returns: Resolved. Errors: none; faults are returned.
    """
    start = start_of(given, tables)
    choices: dict[str, str | None] = {"start": start}
    faults: list[Fault] = []
    if start is None:
        allowed = "[flight] with [inlet], or [entry], not both"
        faults.append(Fault("", "entry", "a case starts in flight or at the entry of a rig", "both", allowed))
    bare = _has_no_nozzle(start, given)
    if bare:
        choices["nozzle.exit"] = ABSENT
    for name in _order():
        declared: Group | Input = GROUP[name] if name in GROUP else INPUT[name]
        if (bare and name.startswith("nozzle.")) or _failing(declared.when, choices):
            continue
        if isinstance(declared, Group):
            choices[name], found = _resolve_group(declared, given, choices)
            faults.extend(found)
        elif _in_groups(name, choices) is not False:
            tag = _resolve_choice(declared, given, bad, choices)
            if tag != "":
                choices[name] = tag
    applicable, unused, found = _sort_keys(given, choices, bare)
    return Resolved(choices, applicable, unused, (*faults, *found))


def _sort_keys(
    given: Mapping[str, object], choices: Choices, bare: bool
) -> tuple[frozenset[str], dict[str, tuple[str, tuple[str, ...]]], list[Fault]]:
    applicable: set[str] = set()
    unused: dict[str, tuple[str, tuple[str, ...]]] = {}
    faults: list[Fault] = []
    for entry in INPUTS:
        if bare and entry.section == "nozzle":
            continue
        failing = _failing(entry.when, choices)
        if failing:
            if entry.key in given:
                unused[entry.key] = failing
                faults.append(_not_used(entry, failing, choices))
            continue
        inside = _in_groups(entry.key, choices)
        if inside is False:
            continue
        applicable.add(entry.key)
        if entry.required and entry.key not in given and inside and not _open(entry.when, choices):
            faults.append(Fault("", entry.key, f"{entry.label} is not stated", "none", bounds(entry)))
    return frozenset(applicable), unused, faults


def _not_used(entry: Input, failing: tuple[str, tuple[str, ...]], choices: Choices) -> Fault:
    name, allowed = failing
    tag = choices.get(name, "")
    return Fault("", entry.key, f"not used {_beside(name, tag or '')}", "a value", f"leave it out, or have {_wanted(name, allowed)}")


def _beside(name: str, tag: str) -> str:
    if name == "start":
        return "with [entry]" if tag == "entry" else "with [flight]"
    if not tag:
        return f"without {name}"
    if name in GROUP:
        members = [m for m in GROUP[name].members if m.tag == tag]
        return f"with {members[0].keys[0]}" if members else f"with {name} = {tag}"
    return f"with {name} = {tag}"


def _wanted(name: str, allowed: tuple[str, ...]) -> str:
    if name == "start":
        return " or ".join(f"[{tag}]" for tag in allowed)
    if name in GROUP:
        return " or ".join(" + ".join(m.keys) for m in GROUP[name].members if m.tag in allowed)
    return f"{name} = {' or '.join(tag for tag in allowed if tag)}"


def bounds(entry: Input) -> str:
    """What an input may be, in words: choices, bounds with the SI unit, or how many rows of which columns."""
    if entry.kind == "rows":
        return f"{entry.fewest} to {entry.most} tables [[{entry.key}]], each with {', '.join(c.key for c in entry.columns)}"
    if entry.kind != "number":
        return _KINDS[entry.kind] if entry.kind in _KINDS else ", ".join(entry.choices)
    limits = (("above", entry.above), ("at least", entry.lower), ("below", entry.below), ("at most", entry.upper))
    words = ", ".join(f"{word} {format_number(limit, 10)}" for word, limit in limits if limit is not None)
    flight = "" if entry.flight_upper is None else f", at most {format_number(entry.flight_upper, 10)} {si_unit(entry.unit)} in flight"
    return f"{'a whole number, ' if entry.whole else ''}{words} {si_unit(entry.unit)}".rstrip() + flight


def by_fuel(entry: Input) -> str:
    """The defaults of an input that has one for each fuel, in words."""
    words = ", ".join(f"{name or 'any other fuel'} {format_number(value, 6)}" for name, value in entry.by_fuel)
    return f"{words} {si_unit(entry.unit)}".rstrip()


def in_case(entry: Input, choices: Choices) -> Input:
    """An input with the bounds that it has beside these choices."""
    if entry.flight_upper is None:
        return entry
    upper = entry.flight_upper if choices.get("start") == "flight" else entry.upper
    return replace(entry, upper=upper, flight_upper=None)


def outside(entry: Input, value: float) -> bool:
    """Whether a number lies beyond the bounds of its input, or is none where only whole ones are."""
    beyond = (
        entry.lower is not None and value < entry.lower,
        entry.over is not None and value <= entry.over,
        entry.upper is not None and value > entry.upper,
        entry.below is not None and value >= entry.below,
        entry.whole and not value.is_integer(),
    )
    return any(beyond)


_KINDS = {
    "flag": "true",
    "text": "text, at most 40 characters",
    "fractions": "a table of species and mole fractions that sum to 1",
}
