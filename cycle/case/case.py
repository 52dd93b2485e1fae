"""The case: what the user asks for, validated, in SI and frozen."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from contextlib import suppress
from dataclasses import dataclass, field, fields
from types import MappingProxyType
from typing import Any

from cycle.case import checking, edits, rules
from cycle.case.rows import view, with_cells
from cycle.case.studies import faults_of
from cycle.errors import CaseError, Fault, shown
from cycle.quantities import GROUP, GROUPS, INPUT, INPUTS, Group, Input, cell, input_of, split_cell

Value = float | str | bool | Mapping[str, float] | tuple[Mapping[str, float], ...] | None


@dataclass(frozen=True, slots=True)
class Stamp:
    """State of a file when it was read or written. digest: SHA-256 of its bytes; mtime: seconds since the epoch."""

    digest: str
    mtime: float


@dataclass(frozen=True, slots=True)
class Stated:
    """One input as a case has it. value: SI; given: the case states it, else it is a default; spelled: as written."""

    input: Input
    value: Value
    given: bool
    spelled: object
    group: str | None


def _frozen(data: object) -> Any:
    """Read-only view of nested plain data."""
    if isinstance(data, Mapping):
        return MappingProxyType({name: _frozen(part) for name, part in data.items()})
    return tuple(_frozen(part) for part in data) if isinstance(data, (list, tuple)) else data


def _hashable(data: object) -> Any:
    """Read-only data as something with a hash, the same for equal data."""
    if isinstance(data, Mapping):
        return frozenset((name, _hashable(part)) for name, part in data.items())
    return tuple(_hashable(part) for part in data) if isinstance(data, tuple) else data


def thawed(data: object) -> Any:
    """Plain dicts and lists again of what a case holds read-only.

    Parameters: data, a mapping, tuple or plain value of a case. Returns: an independent copy.
    """
    if isinstance(data, Mapping):
        return {name: thawed(part) for name, part in data.items()}
    return [thawed(part) for part in data] if isinstance(data, (list, tuple)) else data


@dataclass(frozen=True, slots=True)
class Case:
    """One validated case. Made by `load`, `loads` and `replace`; every mapping is read-only, so that a case can be a key of a table.

    numbers: SI values of all number inputs and cells of rows ("combustor.area.2.x", rows from 1) that apply and have a value;
    choices: choice inputs, groups (name -> tag) and
    "start"; texts, fractions: the other kinds; studies: plain data; given: keys that are stated, the others are defaults;
    applicable: keys that mean something here; spelled: values as written; text: the TOML the case came from; aside: values as
    written that a choice left without a meaning, which come back when it is made back. Equality looks at the content, not at
    name, path or spelling.
    """

    title: str
    notes: str
    numbers: Mapping[str, float]
    choices: Mapping[str, str]
    texts: Mapping[str, str]
    fractions: Mapping[str, float]
    studies: Mapping[str, Mapping[str, Any]]
    given: frozenset[str]
    applicable: frozenset[str] = field(compare=False)
    name: str = field(default="-", compare=False)
    path: str | None = field(default=None, compare=False)
    stamp: Stamp | None = field(default=None, compare=False)
    text: str = field(default="", compare=False, repr=False)
    spelled: Mapping[str, object] = field(default_factory=dict, compare=False, repr=False)
    aside: Mapping[str, object] = field(default_factory=dict, compare=False, repr=False)

    def __reduce__(self) -> tuple[Callable[[dict[str, Any]], Case], tuple[dict[str, Any]]]:
        return _restore, ({f.name: thawed(getattr(self, f.name)) for f in fields(self)},)

    def __hash__(self) -> int:
        return hash(tuple(_hashable(getattr(self, f.name)) for f in fields(self) if f.compare))

    def replace(self, changes: Mapping[str, object]) -> Case:
        """The case with other values, validated again.

        Parameters: changes, key of an input or a cell -> number (SI), text with a unit, choice, True, table of mole fractions,
        list of rows, or None to remove it; "title" and "notes" too. A member of a group replaces the group; entry.* replaces
        flight and inlet, and the other way round; keys that lose their meaning and are not named in the changes are dropped, and those
        that a choice (the gas model, say) drops come back when it is made back.
        Returns: a new Case. Errors: CaseError with every fault.
        """
        if not changes:
            return self
        given = {key: edits.plain(value) for key, value in changes.items()}
        heads = {name: given[name] for name in ("title", "notes") if given.get(name) is not None}
        dropped = {name for name in ("title", "notes") if name in given and given[name] is None}
        kept = {name: getattr(self, name) for name in ("title", "notes") if name not in dropped}
        rest = {key: value for key, value in given.items() if key not in ("title", "notes")}
        spelled = self._edited(rest) if rest else thawed(self.spelled)
        aside = edits.set_aside(thawed(self.spelled), spelled, rest, thawed(self.aside))
        head = {"format": checking.FORMAT, "study": thawed(self.studies), **kept, **heads}
        return self._recalling(head, spelled, aside, edits.recalled(spelled, aside, rest))

    def _recalling(self, head: Mapping[str, Any], spelled: dict[str, Any], aside: dict[str, Any], back: Mapping[str, Any]) -> Case:
        """The case of an edit with those of the keys set aside that fit it: all of them, else one after the other. Errors: CaseError."""

        def made(more: Mapping[str, Any]) -> Case:
            left = {key: value for key, value in aside.items() if key not in more}
            document = {**head, **checking.nest({**spelled, **more})}
            return build(document, self.name, self.path, self.stamp, self.text, left)

        if not back:
            return made({})
        try:
            return made(back)
        except CaseError:
            case, kept = made({}), dict[str, Any]()
        for key, value in back.items():
            with suppress(CaseError):
                case = made({**kept, key: value})
                kept[key] = value
        return case

    def with_study(self, name: str, study: Mapping[str, Any]) -> Case:
        """The case with one named study more.

        Parameters: name; study: {"outputs": [keys of figures, or "4.temperature"], "vary": [{"input", "from", "to", "points"}]},
        values in SI or text with a unit. Returns: a new Case. Errors: CaseError with every fault, also where the name is taken.
        """
        found = faults_of(self, name, study)
        if found:
            raise CaseError(found)
        every = {**thawed(self.studies), name: thawed(study)}
        heads = {"format": checking.FORMAT, "title": self.title, "notes": self.notes}
        document = {**heads, "study": every, **checking.nest(thawed(self.spelled))}
        return build(document, self.name, self.path, self.stamp, self.text, self.aside)

    def _edited(self, changes: Mapping[str, object]) -> dict[str, object]:
        """The keys as written after an edit."""
        file = self.path or self.name
        spelled = thawed(self.spelled)
        strays = [checking.stray(key, value, file) for key, value in changes.items()]
        whole, missing = with_cells(spelled, changes, file)
        faults = [fault for fault in (*strays, *missing) if fault]
        if faults:
            raise CaseError(faults)
        return edits.changed(spelled, whole)

    @property
    def rows(self) -> Mapping[str, tuple[Mapping[str, float], ...]]:
        """Arrays of tables that are given: key -> rows, column -> SI number; the cells of `numbers` put together."""
        return MappingProxyType(view(self.numbers))

    def applies(self, key: str) -> bool:
        """Whether an input, or a cell of a row that is there, means something in this case. Parameters: key."""
        parts = split_cell(key)
        return key in self.applicable if parts is None else parts[1] <= len(self.rows.get(parts[0].key, ()))

    def value(self, key: str) -> Value:
        """Value of an input, or tag of a group.

        Parameters: key, an input, a cell, a group or "start". Returns: SI number, text, True for a flag, mole fractions, rows;
        None where it is absent or does not apply. Errors: KeyError for an unknown key.
        """
        if key in GROUP or key == "start":
            return self.choices.get(key)
        if split_cell(key):
            return self.numbers.get(key)
        return _VALUES[INPUT[key].kind](self, key)

    def declared(self, key: str) -> Input | None:
        """The declaration of an input, or of a cell, with the bounds that it has in this case; None for another key. Parameters: key."""
        entry = input_of(key)
        return None if entry is None else rules.in_case(entry, self.choices)

    def inputs(self) -> list[Stated]:
        """Inputs that apply, in declared order; optional ones without a value are among them, with value None.

        A table of rows that is given stands there as its cells, row by row.
        """
        tables = self.rows
        return [part for entry in INPUTS if self._shown(entry.key) for part in self._parts(entry, len(tables.get(entry.key, ())))]

    def _parts(self, entry: Input, rows: int) -> Iterator[Stated]:
        """An input, or its cells where it has rows."""
        if not rows:
            yield self._stated(entry)
        spelled: Any = self.spelled.get(entry.key)
        for number in range(1, rows + 1):
            for column in entry.columns:
                one = cell(entry.key, number, column.key)
                written = spelled[number - 1].get(column.key)
                yield Stated(one, self.numbers.get(one.key), written is not None, written, self._group_of(entry.key))

    def tables(self) -> dict[str, Any]:
        """Inputs that apply and have a value, in the tables of a case file: plain data, numbers in SI, defaults included."""
        values = {entry.key: self.value(entry.key) for entry in INPUTS if self._shown(entry.key)}
        return checking.nest({key: thawed(value) for key, value in values.items() if value is not None})

    def groups(self) -> list[Group]:
        """Groups that apply, in declared order."""
        return [group for group in GROUPS if group.name in self.choices]

    def alternatives(self, group: str) -> tuple[str, ...]:
        """Tags of a group that may be chosen in this case. Parameters: group, its name. Errors: KeyError for an unknown one."""
        return rules.alternatives(GROUP[group], self.choices)

    def switch(self, group: str, tag: str, value: object = None) -> Case:
        """The case with another member of a group.

        Parameters: group, its name; tag, of a member or the default that is none; value, of the member's key (number in SI or
        text), key -> value where there are several, None for a flag or the default.
        Returns: a new Case. Errors: CaseError with every fault; KeyError for an unknown group.
        """
        declared = GROUP[group]
        members = [m for m in declared.members if m.tag == tag]
        if not members:
            return self._switch_off(declared, tag)
        keys = members[0].keys
        if isinstance(value, Mapping) and INPUT[keys[0]].kind != "fractions":
            return self.replace(value)
        if value is None and len(keys) == 1 and INPUT[keys[0]].kind == "flag":
            value = True
        if value is None or len(keys) > 1:
            raise self._fault(keys[0], f"no value for {tag}", shown(value), " and ".join(keys))
        return self.replace({keys[0]: value})

    def _switch_off(self, group: Group, tag: str) -> Case:
        if tag != group.default:
            raise self._fault(group.name, "unknown choice", shown(tag), ", ".join(self.alternatives(group.name)))
        return self.replace(dict.fromkeys(rules.keys_of(group)))

    def _fault(self, key: str, text: str, given: str, allowed: str) -> CaseError:
        return CaseError([Fault(self.path or self.name, key, text, given, allowed)])

    def _shown(self, key: str) -> bool:
        if key not in self.applicable:
            return False
        chosen = [g for g in rules.groups_of().get(key, ()) if g.name in self.choices]
        return all(any(m.tag == self.choices[g.name] for m in g.members if key in rules.reach(m)) for g in chosen)

    def _stated(self, entry: Input) -> Stated:
        written = self.spelled.get(entry.key)
        bounded = rules.in_case(entry, self.choices)
        return Stated(bounded, self.value(entry.key), entry.key in self.given, written, self._group_of(entry.key))

    def _group_of(self, key: str) -> str | None:
        groups = [g.name for g in rules.groups_of().get(key, ()) if g.name in self.choices]
        return groups[-1] if groups else None


_VALUES: dict[str, Callable[[Case, str], Value]] = {
    "number": lambda case, key: case.numbers.get(key),
    "choice": lambda case, key: case.choices.get(key),
    "text": lambda case, key: case.texts.get(key),
    "flag": lambda case, key: True if key in case.given else None,
    "fractions": lambda case, key: case.fractions or None,
    "rows": lambda case, key: case.rows.get(key),
}


def _restore(state: dict[str, Any]) -> Case:
    return Case(**{name: _frozen(value) if isinstance(value, Mapping) else value for name, value in state.items()})


def build(
    document: Mapping[str, Any],
    name: str,
    path: str | None = None,
    stamp: Stamp | None = None,
    text: str = "",
    aside: Mapping[str, object] | None = None,
) -> Case:
    """A case from the tables of a case file.

    Parameters: document, nested plain tables with "format"; name, of the case; path and stamp of its file; text, its TOML; aside, see
    `Case`.
    Returns: the validated Case. Errors: CaseError with every fault.
    """
    content = checking.examine(document, path or name)
    spelled = checking.flatten(document)
    return Case(
        content.title,
        content.notes,
        MappingProxyType(content.numbers),
        MappingProxyType(content.choices),
        MappingProxyType(content.texts),
        MappingProxyType(content.fractions),
        _frozen(document.get("study", {})),
        frozenset(spelled),
        content.applicable,
        name,
        path,
        stamp,
        text,
        _frozen(spelled),
        _frozen(aside or {}),
    )
