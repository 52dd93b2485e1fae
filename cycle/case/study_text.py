"""Named studies in the text of a case file: added at its end, taken out with their comments kept."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

import tomlkit
from tomlkit.items import AbstractTable, AoT, Comment, Null

from cycle.case.leaves import Body, collapse, is_inline, item, leaf, tables

Study = Mapping[str, Any]


def change_studies(body: Body, old: Mapping[str, Study], new: Mapping[str, Study]) -> str:
    """Make the studies of a file say others; those that stay the same are not touched.

    Parameters: body, of the parsed file; old, new: the studies by name, as written. Returns: the text of added ones, which goes
    to the end of the file. The comments of one that goes stay.
    """
    for name in (n for n in old if n not in new or old[n] != new[n]):
        _drop(body, name)
    added = {name: study for name, study in new.items() if name not in old or old[name] != study}
    if is_inline(body, ("study",)):
        place = leaf(body, ("study",))
        assert place is not None
        for name, study in added.items():
            place[0][place[1]][1][name] = item(study)  # type: ignore[index]
        return ""
    return "".join(text_of(name, study) for name, study in added.items())


def _drop(body: Body, name: str) -> None:
    for parent, index in reversed(list(tables(body, ("study", name)))):
        parent[index : index + 1] = list(_comments(parent[index][1])) or [(None, Null())]
    collapse(body, ("study", name))


def _comments(entry: Any) -> Iterator[Any]:
    """The comments of a table and of the tables inside it."""
    parts = entry.body if isinstance(entry, AoT) else [entry]
    for part in parts:
        for key, inner in part.value.body:
            if isinstance(inner, AbstractTable | AoT):
                yield from _comments(inner)
            elif key is None and isinstance(inner, Comment):
                yield key, inner


def text_of(name: str, study: Study) -> str:
    """A study as lines of a case file, a blank line ahead of it. Parameters: name; study, plain data."""
    lines = tomlkit.document()
    rows = {key: value for key, value in study.items() if _is_rows(value)}
    for key, value in study.items():
        if key not in rows:
            lines.add(key, item(value))
    text = f"\n[study.{name}]\n{tomlkit.dumps(lines)}"
    for key, value in rows.items():
        for row in value:
            inside = tomlkit.document()
            for column, cell in row.items():
                inside.add(column, item(cell))
            text += f"\n[[study.{name}.{key}]]\n{tomlkit.dumps(inside)}"
    return text


def _is_rows(value: Any) -> bool:
    return isinstance(value, list) and bool(value) and all(isinstance(row, Mapping) for row in value)
