"""The text of a case file with some leaves changed and everything else as the user wrote it.

Works on the parsed body of the file, one leaf at a time: whole tables are never assigned, which would drop their comments.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from typing import Any

import tomlkit
from tomlkit.items import AbstractTable, AoT, InlineTable, Item, Key, Null, SingleKey, Table

from cycle.case.case import Case, thawed
from cycle.case.checking import FORMAT
from cycle.case.rules import groups_of
from cycle.quantities import SECTIONS

Path = tuple[str, ...]
Body = list[tuple[Key | None, Item]]


def edited(text: str, case: Case) -> str:
    """Text of a case file that says what the case says.

    Parameters: text, sound TOML; case. Returns: the text with changed, added and removed leaves only.
    """
    windows = "\r\n" in text and text.count("\r\n") == text.count("\n")
    source = text.replace("\r\n", "\n") if windows else text
    ended = source.endswith("\n")
    document = tomlkit.parse(source if ended else source + "\n")
    old = _leaves(document.unwrap())
    new = _wanted(case, old)
    result = _apply(document, old, new)
    if not ended:
        result = result.removesuffix("\n")
    return result.replace("\n", "\r\n") if windows else result


def _apply(document: tomlkit.TOMLDocument, old: Mapping[Path, Any], new: Mapping[Path, Any]) -> str:
    body = document.body
    added = [path for path in new if path not in old]
    removed = []
    for path in old:
        heir = _heir(path, added) if path not in new else None
        if heir is not None and _write(body, path, heir[-1], new[heir]):
            added.remove(heir)
        elif path not in new:
            removed.append(path)
        elif not _same(old[path], new[path]):
            _write(body, path, path[-1], new[path])
    leaves = _with_whole_tables({path: new[path] for path in added}, old)
    homeless = {path: value for path, value in leaves.items() if not _add(body, path, value)}
    for path in removed:
        _remove(body, path)
    return tomlkit.dumps(document) + _new_tables(homeless)


def _leaves(data: Mapping[str, Any]) -> dict[Path, Any]:
    """Leaves of the tables that a case owns, mole fractions one by one."""
    found: dict[Path, Any] = {(name,): data[name] for name in ("format", "title", "notes") if name in data}
    for section in SECTIONS:
        for name, value in data.get(section, {}).items():
            if isinstance(value, Mapping):
                found.update({(section, name, part): fraction for part, fraction in value.items()})
            else:
                found[section, name] = value
    return found


def _wanted(case: Case, old: Mapping[Path, Any]) -> dict[Path, Any]:
    data: dict[str, Any] = {"format": FORMAT}
    for name, text, default in (("title", case.title, "untitled"), ("notes", case.notes, "")):
        if text != default or (name,) in old:
            data[name] = text
    for key, value in case.spelled.items():
        section, _, name = key.partition(".")
        data.setdefault(section, {})[name] = thawed(value)
    return _leaves(data)


def _same(a: object, b: object) -> bool:
    return type(a) is type(b) and a == b


def _heir(path: Path, added: Iterable[Path]) -> Path | None:
    """The added key that takes the place of a removed one: another member of one of its groups."""
    groups = set(groups_of().get(".".join(path), ()))
    heirs = (other for other in added if len(path) == len(other) == 2 and other[0] == path[0])
    return next((other for other in heirs if groups.intersection(groups_of().get(".".join(other), ()))), None)


def _item(value: Any) -> Item:
    if isinstance(value, Mapping):
        table = tomlkit.inline_table()
        table.update(value)
        return table
    return tomlkit.string(value, multiline=True) if isinstance(value, str) and "\n" in value else tomlkit.item(value)


def _with_whole_tables(added: Mapping[Path, Any], old: Iterable[Path]) -> dict[Path, Any]:
    """Added leaves, those of a table of mole fractions that is not there yet in one."""
    there = {path[:2] for path in old if len(path) == 3}
    found: dict[Path, Any] = {}
    for path, value in added.items():
        if len(path) == 3 and path[:2] not in there:
            found.setdefault(path[:2], {})[path[2]] = value
        else:
            found[path] = value
    return found


def _tables(body: Body, names: Path) -> Iterator[tuple[Body, int]]:
    """Places of every part of the file that belongs to a table."""
    for index, (key, item) in enumerate(body):
        if key is not None and key.key == names[0] and isinstance(item, AbstractTable):
            if len(names) == 1:
                yield body, index
            else:
                yield from _tables(item.value.body, names[1:])


def _leaf(body: Body, path: Path) -> tuple[Body, int] | None:
    """Where a leaf stands."""
    parts = [parent[index][1].value.body for parent, index in _tables(body, path[:-1])] if path[:-1] else [body]
    for part in parts:
        for index, (key, item) in enumerate(part):
            if key is not None and key.key == path[-1] and (not isinstance(item, Table) or isinstance(item, InlineTable)):
                return part, index
    return None


def _write(body: Body, path: Path, name: str, value: Any) -> bool:
    """Put a value, under another name perhaps, where a leaf stands; whether it stands anywhere."""
    place = _leaf(body, path)
    if place is None:
        return False
    part, index = place
    key, old = part[index]
    new = _item(value)
    new.trivia.indent, new.trivia.comment_ws = old.trivia.indent, old.trivia.comment_ws
    new.trivia.comment, new.trivia.trail = old.trivia.comment, old.trivia.trail
    part[index] = (key if key is None or key.key == name else _renamed(key, name), new)
    return True


def _renamed(key: Key, name: str) -> Key:
    """A key spaced like another one."""
    written = key.as_string()
    return SingleKey(name, sep=key.sep, original=name + written[len(written.rstrip()) :])


def _add(body: Body, path: Path, value: Any) -> bool:
    """Put a leaf behind the last one of its table; whether the file has such a table."""
    if not path[:-1]:
        _insert(body, None, path[-1], value)
        return True
    for parent, index in _tables(body, path[:-1]):
        key, table = parent[index]
        # a table that is only the parent of another has no place of its own for a line
        if key is not None and isinstance(table, AbstractTable) and (key.is_dotted() or not _is_super(table)):
            _insert(table.value.body, table, path[-1], value)
            return True
    return False


def _is_super(table: AbstractTable) -> bool:
    return isinstance(table, Table) and table.is_super_table()


def _insert(body: Body, table: AbstractTable | None, name: str, value: Any) -> None:
    last = -1
    for index, (key, item) in enumerate(body):
        if isinstance(item, (Table, AoT)) and key is not None and not key.is_dotted():
            break
        if key is not None:
            last = index
    item = _item(value)
    if isinstance(table, InlineTable):
        item.trivia.indent, item.trivia.trail = (" " if last >= 0 else ""), ""
    else:
        item.trivia.indent = body[last][1].trivia.indent if last >= 0 and not isinstance(body[last][1], Table) else ""
        item.trivia.trail = "\n"
    body.insert(last + 1, (SingleKey(name), item))


def _remove(body: Body, path: Path) -> None:
    """Take a leaf out; a header that is left without keys goes too, its comments stay."""
    place = _leaf(body, path)
    if place is None:
        return
    part, index = place
    part[index] = (None, Null())
    for depth in range(len(path) - 1, 0, -1):
        for parent, at in list(_tables(body, path[:depth])):
            table = parent[at][1]
            if isinstance(table, AbstractTable) and not any(key is not None for key, _ in table.value.body):
                kept: Body = [] if isinstance(table, InlineTable) else list(table.value.body)
                parent[at : at + 1] = kept or [(None, Null())]
                break


def _new_tables(leaves: Mapping[Path, Any]) -> str:
    """Text of tables that the file does not have yet."""
    tables: dict[str, tomlkit.TOMLDocument] = {}
    for (section, name), value in leaves.items():
        tables.setdefault(section, tomlkit.document()).add(name, _item(value))
    return "".join(f"\n[{section}]\n{tomlkit.dumps(lines)}" for section, lines in tables.items())
