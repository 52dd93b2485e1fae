"""What an edit does to the keys of a case: groups are replaced whole, keys that lose their meaning go, and come back with it."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence

from cycle.case.rules import ENTRY_TABLES, FLIGHT_TABLES, groups_of, keys_of, reach, resolve
from cycle.quantities import INPUT, Group, Member, cell_key, input_of
from cycle.units import respell


def plain(value: object) -> object:
    """A value as plain Python data: arrays become lists, numpy scalars and subclasses of float or str become float, int, bool or str.

    Parameters: value, anything. Returns: plain data where the value is data, the value itself otherwise.
    """
    listed = getattr(value, "tolist", None)
    if callable(listed) and not any(hasattr(value, name) for name in ("mask", "unit", "units")):
        return listed()
    if isinstance(value, Mapping):
        return {str(name): plain(part) for name, part in value.items()}
    if isinstance(value, (list, tuple)):
        return [plain(part) for part in value]
    for kind in (bool, int, float, str):
        if isinstance(value, kind):
            return value if type(value) is kind else kind(value)
    return value


def _target(group: Group, touched: set[str], given: Mapping[str, object]) -> Member:
    """The member that an edit means: the one that covers most of its keys, the present one among equals."""

    def rank(member: Member) -> tuple[int, bool, int]:
        there = any(key in given for key in member.keys)
        return len(touched.intersection(reach(member))), there, len(touched.intersection(member.keys))

    return max(group.members, key=rank)


def _replaced_by(touched: set[str], given: Mapping[str, object]) -> set[str]:
    """Keys that the touched ones push out."""
    out: set[str] = set()
    for group in {g.name: g for key in touched for g in groups_of().get(key, ())}.values():
        inside = touched.intersection(keys_of(group))
        out.update(set(keys_of(group)).difference(reach(_target(group, inside, given)), touched))
    sections = {key.split(".")[0] for key in touched}
    if not sections.isdisjoint(ENTRY_TABLES) and sections.isdisjoint(FLIGHT_TABLES):
        out.update(key for key in given if key.split(".")[0] in FLIGHT_TABLES)
    elif not sections.isdisjoint(FLIGHT_TABLES) and sections.isdisjoint(ENTRY_TABLES):
        out.update(key for key in given if key.split(".")[0] in ENTRY_TABLES)
    return out


def without_unused(spelled: Mapping[str, object], kept: Iterable[str] = ()) -> dict[str, object]:
    """Keys that mean something together.

    Parameters: spelled, key -> value as written; kept, keys that stay whatever they mean. Returns: the rest of them.
    """
    left = dict(spelled)
    stays = set(kept)
    while True:
        drop = [key for key in resolve(left).unused if key not in stays]
        if not drop:
            return left
        for key in drop:
            del left[key]


def _respelled(key: str, value: object, old: object) -> object:
    entry = input_of(key)
    if entry is not None and entry.kind == "rows" and isinstance(value, list) and isinstance(old, Sequence):
        pairs = zip(value, [*old, *({} for _ in value)], strict=False)
        return [_respelled_row(key, row, before) for row, before in pairs]
    if entry is not None and entry.kind == "number" and isinstance(value, (int, float)) and not isinstance(value, bool):
        return respell(value, old, entry.unit) if abs(value) < float("inf") else value
    return value


def _respelled_row(table: str, row: object, old: object) -> object:
    if not isinstance(row, Mapping) or not isinstance(old, Mapping):
        return row
    return {column: _respelled(cell_key(table, 1, column), value, old.get(column)) for column, value in row.items()}


def changed(spelled: Mapping[str, object], changes: Mapping[str, object]) -> dict[str, object]:
    """The keys after an edit.

    Parameters: spelled, key -> value as written; changes, key -> new plain value, None to remove the key.
    Returns: key -> value as written, in the old order with new keys behind. Nothing is validated here.
    """
    new = {key: value for key, value in changes.items() if value is not None}
    removed = {key for key, value in changes.items() if value is None}
    touched = {key for key in new if key in INPUT}
    out = removed | _replaced_by(touched, spelled)
    left = {key: value for key, value in spelled.items() if key not in out}
    for key, value in new.items():
        left[key] = _respelled(key, value, spelled.get(key))
    return without_unused(left, touched)


def _chooses(changes: Mapping[str, object]) -> bool:
    """Whether an edit makes a choice, such as that of the gas model."""
    return any(key in INPUT and INPUT[key].kind == "choice" for key in changes)


def set_aside(
    before: Mapping[str, object], after: Mapping[str, object], changes: Mapping[str, object], aside: Mapping[str, object]
) -> dict[str, object]:
    """Keys that an edit leaves without a meaning, with those of the edits before that still have none.

    Parameters: before and after, key -> value as written, around the edit; changes, the edit; aside, those of the edits before.
    Returns: key -> value as written. What the edit removes, replaces by another way to say it or gives anew is not among them; only a
    choice sets keys aside.
    """
    removed = {key for key, value in changes.items() if value is None}
    gone = removed | _replaced_by({key for key in changes if key in INPUT} - removed, {**before, **aside})
    lost = {key: value for key, value in before.items() if key not in after} if _chooses(changes) else {}
    return {key: value for key, value in {**aside, **lost}.items() if key not in gone and key not in after}


def recalled(left: Mapping[str, object], aside: Mapping[str, object], changes: Mapping[str, object]) -> dict[str, object]:
    """Keys set aside that mean something again after an edit that makes a choice, and say nothing that is said otherwise.

    Parameters: left, key -> value as written after the edit; aside, see `set_aside`; changes, the edit. Returns: key -> value as written.
    """
    if not _chooses(changes):
        return {}
    said = {key for key in left for group in groups_of().get(key, ()) for key in keys_of(group)}
    whole = without_unused({**left, **{key: value for key, value in aside.items() if key not in said}})
    return {key: value for key, value in whole.items() if key not in left}
