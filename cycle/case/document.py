"""The text of a case file with some leaves changed and everything else as the user wrote it."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import Any

import tomlkit
from tomlkit.exceptions import TOMLKitError

from cycle import toml
from cycle.case.case import Case, thawed
from cycle.case.checking import FORMAT, flatten, home
from cycle.case.leaves import Body, Path, add, is_inline, item, remove, write
from cycle.case.row_text import change_rows, drop_rows, row_tables
from cycle.case.rows import TABLES
from cycle.case.rules import groups_of
from cycle.case.study_text import change_studies
from cycle.errors import CaseError, Fault
from cycle.quantities import INPUT


def edited(text: str, case: Case) -> str:
    """Text of a case file that says what the case says.

    Parameters: text, sound TOML; case. Returns: the text with changed, added and removed leaves only. Errors: CaseError where the text
    is no TOML or more than is read.
    """
    windows = "\r\n" in text and text.count("\r\n") == text.count("\n")
    source = text.replace("\r\n", "\n") if windows else text
    ended = source.endswith("\n")
    data = toml.tables(source, case.name)
    try:
        document = tomlkit.parse(source if ended else source + "\n")
    except TOMLKitError:
        raise CaseError([Fault(case.name, "", "the text is written in a way that cannot be changed in place; save a copy")]) from None
    before, after = flatten(data), {key: thawed(value) for key, value in case.spelled.items()}
    old, new = _leaves(before), _leaves(after)
    old.update({(name,): data[name] for name in ("format", "title", "notes") if name in data})
    new.update(_heads(case, old))
    homeless = _apply_leaves(document.body, old, new)
    rows = _apply_rows(document.body, before, after)
    studies = change_studies(document.body, data.get("study", {}), thawed(case.studies))
    result = tomlkit.dumps(document) + _new_tables(homeless) + rows + studies
    if not ended:
        result = result.removesuffix("\n")
    return result.replace("\n", "\r\n") if windows else result


def _apply_leaves(body: Body, old: Mapping[Path, Any], new: Mapping[Path, Any]) -> dict[Path, Any]:
    """Change, add and remove leaves; those that the file has no table for yet are given back."""
    added = [path for path in new if path not in old]
    removed = []
    for path in old:
        heir = _heir(path, added) if path not in new else None
        if heir is not None and write(body, path, heir[-1], new[heir]):
            added.remove(heir)
        elif path not in new:
            removed.append(path)
        elif not _same(old[path], new[path]):
            write(body, path, path[-1], new[path])
    leaves = _with_whole_tables(body, {path: new[path] for path in added}, old)
    homeless = {path: value for path, value in leaves.items() if not add(body, path, value)}
    for path in removed:
        remove(body, path)
    return homeless


def _apply_rows(body: Body, before: Mapping[str, Any], after: Mapping[str, Any]) -> str:
    """Change arrays of tables; the text of those that the file does not have yet."""
    text = ""
    for key in TABLES:
        path, old, new = home(key), before.get(key), after.get(key)
        if old is not None and new is not None:
            change_rows(body, path, INPUT[key].one_of, old, new)
        elif old is not None:
            drop_rows(body, path)
        elif new is not None and not (is_inline(body, path[:-1]) and add(body, path, new)):
            text += row_tables(key, new)
    return text


def _leaves(flat: Mapping[str, Any]) -> dict[Path, Any]:
    """Leaves of the tables that a case owns, mole fractions one by one, without arrays of tables."""
    found: dict[Path, Any] = {}
    for key, value in flat.items():
        if isinstance(value, Mapping):
            found.update({(*home(key), part): fraction for part, fraction in value.items()})
        elif key not in TABLES:
            found[home(key)] = value
    return found


def _heads(case: Case, old: Mapping[Path, Any]) -> dict[Path, Any]:
    texts = (("title", case.title, "untitled"), ("notes", case.notes, ""))
    return {("format",): FORMAT, **{(name,): text for name, text, default in texts if text != default or (name,) in old}}


def _same(a: object, b: object) -> bool:
    return type(a) is type(b) and a == b


def _heir(path: Path, added: Iterable[Path]) -> Path | None:
    """The added key that takes the place of a removed one: another member of one of its groups."""
    groups = set(groups_of().get(".".join(path), ()))
    heirs = (other for other in added if len(path) == len(other) == 2 and other[0] == path[0])
    return next((other for other in heirs if groups.intersection(groups_of().get(".".join(other), ()))), None)


def _with_whole_tables(body: Body, added: Mapping[Path, Any], old: Iterable[Path]) -> dict[Path, Any]:
    """Added leaves; those of a table of mole fractions, or of a sub-table inside an inline one, that is not there yet in one."""
    there = {path[:2] for path in old if len(path) == 3}
    found: dict[Path, Any] = {}
    for path, value in added.items():
        whole = ".".join(path[:2]) in INPUT or is_inline(body, path[:1])
        if len(path) == 3 and path[:2] not in there and whole:
            found.setdefault(path[:2], {})[path[2]] = value
        else:
            found[path] = value
    return found


def _new_tables(leaves: Mapping[Path, Any]) -> str:
    """Text of tables that the file does not have yet."""
    tables: dict[Path, tomlkit.TOMLDocument] = {}
    for path, value in leaves.items():
        tables.setdefault(path[:-1], tomlkit.document()).add(path[-1], item(value))
    return "".join(f"\n[{'.'.join(path)}]\n{tomlkit.dumps(lines)}" for path, lines in tables.items())
