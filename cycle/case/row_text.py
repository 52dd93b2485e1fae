"""Arrays of tables in the text of a case file: rows changed, added and taken out, comments kept.

Rows are paired by what they say, so that a row taken out of the middle leaves the others untouched.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from difflib import SequenceMatcher
from typing import Any

import tomlkit
from tomlkit.container import Container
from tomlkit.items import AoT, Array, Comment, InlineTable, Null, Table, Trivia, Whitespace

from cycle.case.leaves import Body, Path, collapse, insert, item, leaf, remove, tables, write

Row = Mapping[str, Any]


def row_tables(key: str, rows: Sequence[Row]) -> str:
    """Text of rows that a file does not have yet. Parameters: key of the table; rows, as written."""
    return "".join(f"\n[[{key}]]\n{tomlkit.dumps(_lines(row))}" for row in rows)


def _lines(row: Row) -> tomlkit.TOMLDocument:
    lines = tomlkit.document()
    for column, value in row.items():
        lines.add(column, item(value))
    return lines


def change_rows(body: Body, path: Path, one_of: Sequence[str], old: Sequence[Row], new: Sequence[Row]) -> None:
    """Make a file's rows say others.

    Parameters: body, of the file; path, of the table; one_of, columns that stand for each other; old, new: rows as written.
    """
    place = leaf(body, path)
    array = place[0][place[1]][1] if place is not None else None
    rows: _Tables | _Inline = _Inline(array) if isinstance(array, Array) else _Tables(list(_arrays(body, path)))
    matcher = SequenceMatcher(None, [_said(row) for row in old], [_said(row) for row in new], autojunk=False)
    for _, a, b, c, d in reversed([code for code in matcher.get_opcodes() if code[0] != "equal"]):
        both = min(b - a, d - c)
        for n in range(b - 1, a + both - 1, -1):
            rows.drop(n)
        for n in range(d - 1, c + both - 1, -1):
            rows.put(a + both, new[n])
        for n in range(both):
            _change(rows.table(a + n), one_of, old[a + n], new[c + n])


def drop_rows(body: Body, path: Path) -> None:
    """Take all rows of a table out of a file; comments stay. Parameters: body, of the file; path, of the table."""
    place = leaf(body, path)
    if place is not None and isinstance(place[0][place[1]][1], Array):
        remove(body, path)
        return
    for parent, index in reversed(list(_places(body, path))):
        rows = parent[index][1]
        assert isinstance(rows, AoT)
        left = [entry for table in rows.body for entry in _comments(table)]
        parent[index : index + 1] = left or [(None, Null())]
    collapse(body, path)


def _said(row: Row) -> tuple[tuple[str, str], ...]:
    return tuple(sorted((column, repr(value)) for column, value in row.items()))


def _places(body: Body, path: Path) -> Iterator[tuple[Body, int]]:
    """Where the arrays of tables of a path stand: more than one where other tables lie between its rows."""
    parts = [parent[index][1].value.body for parent, index in tables(body, path[:-1])]
    for part in parts:
        for index, (key, entry) in enumerate(part):
            if key is not None and key.key == path[-1] and isinstance(entry, AoT):
                yield part, index


def _arrays(body: Body, path: Path) -> Iterator[AoT]:
    for part, index in _places(body, path):
        array = part[index][1]
        assert isinstance(array, AoT)
        yield array


def _comments(table: Table) -> Body:
    """What a row holds besides its cells; blank lines alone are nothing."""
    left: Body = [(key, entry) for key, entry in table.value.body if key is None and not isinstance(entry, Null)]
    return left if any(isinstance(entry, Comment) for _, entry in left) else []


def _change(table: Table | InlineTable, one_of: Sequence[str], old: Row, new: Row) -> None:
    """Make one row say another, a column that takes another's place in its line."""
    body = table.value.body
    gone = [column for column in old if column not in new]
    come = [column for column in new if column not in old]
    for column in gone:
        heir = next((other for other in come if column in one_of and other in one_of), None)
        if heir is not None and write(body, (column,), heir, new[heir]):
            come.remove(heir)
        else:
            remove(body, (column,))
    for column in come:
        insert(body, table, column, new[column])
    for column in (c for c in new if c in old and repr(old[c]) != repr(new[c])):
        write(body, (column,), column, new[column])


class _Tables:
    """Rows with a header each."""

    def __init__(self, arrays: list[AoT]) -> None:
        self.arrays = arrays

    def _at(self, number: int) -> tuple[list[Table], int]:
        for array in self.arrays:
            if number < len(array.body):
                return array.body, number
            number -= len(array.body)
        last = self.arrays[-1].body
        return last, len(last)

    def table(self, number: int) -> Table:
        rows, at = self._at(number)
        return rows[at]

    def drop(self, number: int) -> None:
        """Take a row out; its comments go to the row before or behind."""
        rows, at = self._at(number)
        left = _comments(rows.pop(at))
        if at:
            rows[at - 1].value.body.extend(left)
        elif rows:
            rows[0].value.body[:0] = left

    def put(self, number: int, row: Row) -> None:
        """Put a row ahead of the one of that number, spaced like the row before it."""
        rows, at = self._at(number)
        like = rows[max(at - 1, 0)] if rows else None
        table = Table(Container(), Trivia(indent=like.trivia.indent if like else "", trail="\n"), True)
        for column, value in row.items():
            insert(table.value.body, table, column, value)
        if like is not None and _ends_blank(like):
            table.value.body.append((None, Whitespace("\n")))
        rows.insert(at, table)


def _ends_blank(table: Table) -> bool:
    body = table.value.body
    return bool(body) and isinstance(body[-1][1], Whitespace) and "\n" in body[-1][1].value


class _Inline:
    """Rows in an array of one line or more."""

    def __init__(self, array: Array) -> None:
        self.array = array

    def table(self, number: int) -> InlineTable:
        row = self.array[number]
        assert isinstance(row, InlineTable)
        return row

    def drop(self, number: int) -> None:
        del self.array[number]

    def put(self, number: int, row: Row) -> None:
        self.array.insert(number, item(row))
