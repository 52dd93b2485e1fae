"""Random valid edits: saved, loaded, equal, with everything else byte for byte as it was."""

from __future__ import annotations

import re
import tempfile
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from cycle.case import Case, load, loads, save, template
from cycle.case.rows import TABLES
from cycle.errors import CaseError
from cycle.quantities import INPUT, INPUTS, Input, cell
from cycle.units import UNITS
from tests.case.conftest import DUCT, GEOMETRY, INLINE, PLAIN

SOURCES = {
    "plain": PLAIN, "template": template(), "rig": template("entry"), "geometry": GEOMETRY, "duct": DUCT, "inline": INLINE,
}  # fmt: skip
COMMENT = re.compile(r"#.*$", re.MULTILINE)


def values(entry: Input) -> st.SearchStrategy[object]:
    if entry.kind == "choice":
        return st.sampled_from(entry.choices)
    if entry.kind == "flag":
        return st.just(True)
    if entry.kind == "text":
        return st.sampled_from(["C10H16", "CH4", "C12.3H22.1"])
    if entry.kind == "rows":
        return st.lists(st.fixed_dictionaries({}, optional={c.key: values(c) for c in entry.columns}), max_size=4)
    if entry.kind == "fractions":
        return st.sampled_from([{"N2": 0.79, "O2": 0.21}, {"N2": 0.6, "O2": 0.2, "H2O": 0.2}])
    low = entry.lower if entry.lower is not None else (entry.above or 0.0)
    numbers = st.floats(low, entry.upper, exclude_min=entry.lower is None, width=64)
    units = [u for u in UNITS[entry.unit] if u]
    return numbers | (st.tuples(numbers, st.sampled_from(units)).map(lambda pair: f"{pair[0]!r} {pair[1]}") if units else numbers)


CELLS = [cell(table, row, column.key) for table in TABLES for row in (1, 2, 3) for column in INPUT[table].columns]
EDIT = st.one_of([st.tuples(st.just(entry.key), values(entry) | st.none()) for entry in (*INPUTS, *CELLS)])


def edited(case: Case, edits: list[tuple[str, object]]) -> Case:
    for key, value in edits:
        try:
            case = case.replace({key: value})
        except CaseError:
            continue
    return case


@pytest.mark.parametrize("source", SOURCES)
@settings(deadline=None, max_examples=50)
@given(edits=st.lists(EDIT, min_size=1, max_size=8))
def test_edited_cases_read_back_equal(source: str, edits: list[tuple[str, object]]) -> None:
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "case.toml"
        path.write_text(SOURCES[source])
        case = load(path)
        new = edited(case, edits)
        save(new, path, case.stamp)
        again = load(path)
        assert again == new
        assert again.spelled == new.spelled
        if source != "inline":
            check_kept(SOURCES[source], path.read_text(), case, new)


def filled(case: Case) -> set[str]:
    """Tables with keys of their own."""
    return {INPUT[k].section for k in case.given if INPUT[k].kind != "rows"}


def check_kept(old: str, new: str, a: Case, b: Case) -> None:
    """Lines that no changed key stands on are the same, in the same order."""
    changed = {k for k in a.spelled.keys() | b.spelled.keys() if a.spelled.get(k) != b.spelled.get(k)}
    touched = {k.split(".")[-1] for k in changed}
    emptied = filled(a) - filled(b) | changed.intersection(TABLES)
    columns = {c.key for k in changed for c in INPUT[k].columns}

    def untouched(line: str) -> bool:
        name = line.split("=")[0].strip()
        # a row takes its cells and the blank line behind it along, not its comments
        own = any(f"{column} = " in line for column in columns) or (not line and bool(columns))
        return name not in touched and not own and line.split("]")[0].strip("[") not in emptied

    kept = iter(new.split("\n"))
    for line in old.split("\n"):
        if untouched(line):
            assert any(line == other for other in kept), line


@settings(deadline=None, max_examples=50)
@given(st.text(max_size=200))
def test_any_title_and_notes_survive(text: str) -> None:
    case = loads(PLAIN)
    try:
        new = case.replace({"title": text[:200], "notes": text})
    except CaseError:
        return
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "case.toml"
        save(new, path)
        assert load(path).notes == text


@settings(deadline=None, max_examples=50)
@given(st.binary(max_size=300) | st.text(max_size=300) | st.text(alphabet="[]{}=.\"'\n#a1,", max_size=200))
def test_any_bytes_are_a_case_or_a_list_of_faults(data: bytes | str) -> None:
    try:
        loads(data)
    except CaseError as error:
        assert error.faults
        assert all(line.isprintable() for line in str(error).split("\n"))
