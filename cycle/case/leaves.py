"""Single leaves of a parsed case file: found, written, added and taken out with everything around them left as it is.

A leaf is a path of names; whole tables are never assigned, which would drop their comments.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

import tomlkit
from tomlkit.items import AbstractTable, AoT, InlineTable, Item, Key, Null, SingleKey, Table

Path = tuple[str, ...]
Body = list[tuple[Key | None, Item]]


def item(value: Any) -> Item:
    """A value as TOML; a table or a list of tables stands in one line."""
    if isinstance(value, list):
        rows = tomlkit.array()
        for row in value:
            rows.append(item(row))
        return rows
    if isinstance(value, Mapping):
        table = tomlkit.inline_table()
        table.update(value)
        return table
    return tomlkit.string(value, multiline=True) if isinstance(value, str) and "\n" in value else tomlkit.item(value)


def tables(body: Body, names: Path) -> Iterator[tuple[Body, int]]:
    """Places of every part of the file that belongs to a table."""
    for index, (key, entry) in enumerate(body):
        if key is not None and key.key == names[0] and isinstance(entry, AbstractTable):
            if len(names) == 1:
                yield body, index
            else:
                yield from tables(entry.value.body, names[1:])


def leaf(body: Body, path: Path) -> tuple[Body, int] | None:
    """Where a leaf stands."""
    parts = [parent[index][1].value.body for parent, index in tables(body, path[:-1])] if path[:-1] else [body]
    for part in parts:
        for index, (key, entry) in enumerate(part):
            if key is not None and key.key == path[-1] and (not isinstance(entry, Table) or isinstance(entry, InlineTable)):
                return part, index
    return None


def write(body: Body, path: Path, name: str, value: Any) -> bool:
    """Put a value, under another name perhaps, where a leaf stands; whether it stands anywhere."""
    place = leaf(body, path)
    if place is None:
        return False
    part, index = place
    key, old = part[index]
    new = item(value)
    new.trivia.indent, new.trivia.comment_ws = old.trivia.indent, old.trivia.comment_ws
    new.trivia.comment, new.trivia.trail = old.trivia.comment, old.trivia.trail
    part[index] = (key if key is None or key.key == name else _renamed(key, name), new)
    return True


def _renamed(key: Key, name: str) -> Key:
    """A key spaced like another one."""
    written = key.as_string()
    return SingleKey(name, sep=key.sep, original=name + written[len(written.rstrip()) :])


def is_inline(body: Body, names: Path) -> bool:
    """Whether a table stands in one line, where only its own line can take more."""
    return any(isinstance(parent[index][1], InlineTable) for parent, index in tables(body, names))


def add(body: Body, path: Path, value: Any) -> bool:
    """Put a leaf behind the last one of its table; whether the file has such a table."""
    if not path[:-1]:
        insert(body, None, path[-1], value)
        return True
    for parent, index in tables(body, path[:-1]):
        key, table = parent[index]
        # a table that is only the parent of another has no place of its own for a line
        if key is not None and isinstance(table, AbstractTable) and (key.is_dotted() or not _is_super(table)):
            insert(table.value.body, table, path[-1], value)
            return True
    return False


def _is_super(table: AbstractTable) -> bool:
    return isinstance(table, Table) and table.is_super_table()


def insert(body: Body, table: AbstractTable | None, name: str, value: Any) -> None:
    """Put a leaf behind the last one of a body."""
    last = -1
    for index, (key, old) in enumerate(body):
        if isinstance(old, (Table, AoT)) and key is not None and not key.is_dotted():
            break
        if key is not None:
            last = index
    new = item(value)
    if isinstance(table, InlineTable):
        new.trivia.indent, new.trivia.trail = (" " if last >= 0 else ""), ""
    else:
        new.trivia.indent = body[last][1].trivia.indent if last >= 0 and not isinstance(body[last][1], Table) else ""
        new.trivia.trail = "\n"
    body.insert(last + 1, (SingleKey(name), new))


def remove(body: Body, path: Path) -> None:
    """Take a leaf out; a header that is left without keys goes too, its comments stay."""
    place = leaf(body, path)
    if place is None:
        return
    part, index = place
    part[index] = (None, Null())
    collapse(body, path)


def collapse(body: Body, path: Path) -> None:
    """Take out the tables above a leaf that are left without keys; their comments stay."""
    for depth in range(len(path) - 1, 0, -1):
        for parent, at in list(tables(body, path[:depth])):
            table = parent[at][1]
            if isinstance(table, AbstractTable) and not any(key is not None for key, _ in table.value.body):
                kept: Body = [] if isinstance(table, InlineTable) else list(table.value.body)
                parent[at : at + 1] = kept or [(None, Null())]
                break
