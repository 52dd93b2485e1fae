"""The bounds on TOML: signs in texts and comments count for nothing, and none of the others can hide."""

from __future__ import annotations

import tomllib
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from cycle import toml
from cycle.case import load, save
from cycle.errors import CaseError
from tests.tui.command_support import QUICK

SIGNS = "\"'\\#[]{}=.,a1 \n"
NASTY = st.text(SIGNS, max_size=20)


def basic(text: str) -> str:
    return '"' + text.replace("\\", "\\\\").replace('"', '\\"').replace("\n", "\\n") + '"'


def long_basic(text: str) -> str:
    return '"""' + text.replace("\\", "\\\\").replace('"""', '""\\"').rstrip('"') + '"""'


def literal(text: str) -> str:
    return "'" + text.replace("'", "").replace("\n", "") + "'"


def long_literal(text: str) -> str:
    return "'''" + text.replace("'''", "").rstrip("'") + "'''"


def with_quotes_at_the_end(text: str) -> str:
    return long_basic(text)[:-3] + '"""""'


LINES = st.lists(st.tuples(st.sampled_from((basic, long_basic, literal, long_literal, with_quotes_at_the_end)), NASTY, NASTY), max_size=12)


def refused(text: str, most: int) -> bool:
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(toml, "MOST_PARTS", most)
        try:
            toml.bounded(text, "x")
        except CaseError:
            return True
    return False


@given(LINES)
@settings(max_examples=300, deadline=None)
def test_exactly_what_stands_outside_texts_and_comments_is_counted(lines: list[tuple[object, str, str]]) -> None:
    """A key and a line end to a line, whatever its text and its comment hold, and however its name is quoted."""
    text = "".join(
        f"{basic(f'{i}{word}')} = {spell(word)} # {comment.replace(chr(10), '')}\n"  # type: ignore[operator]
        for i, (spell, word, comment) in enumerate(lines)
    )
    assert len(tomllib.loads(text)) == len(lines)
    assert not refused(text, 2 * len(lines))
    assert not lines or refused(text, 2 * len(lines) - 1)


@given(st.text(SIGNS, max_size=60))
@settings(max_examples=300, deadline=None)
def test_what_a_text_without_end_hides_is_not_read_either(text: str) -> None:
    """Whatever stands ahead of it, a reader that gets through has met no more names than the bounds count."""
    try:
        found = tomllib.loads(text)
    except ValueError:
        return
    assert not found or refused(text, len(found) - 1)


@pytest.mark.parametrize(
    "notes", ["see a.b. " * 40, "[" * 40, "{[" * 600, "One. Two. Three. " * 12, "a.b = [[[" * 20, "# [ \\ ' " * 40, "x\n[y]\n" * 500]
)
def test_notes_of_any_signs_are_read_and_saved(tmp_path: Path, notes: str) -> None:
    """0.4.0 refused 33 short sentences, or read them and could not save them."""
    file = tmp_path / "x.toml"
    file.write_text(f"notes = {basic(notes)}\n# {'[a.b.c. ' * 40}\n{QUICK}")
    case = load(file)
    save(case.replace({"flight.mach": 7.5, "notes": f"{notes}\n'''"}), file, case.stamp)
    assert load(file).notes == f"{notes}\n'''" and "[a.b.c. " * 40 in file.read_text()


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("a." * 8 + "a = 1", "names are nested too deeply"),
        ("[" + "a . " * 8 + "a]", "names are nested too deeply"),
        ('""' + ".''" * 8 + " = 1", "names are nested too deeply"),
        ("x = " + "[" * 33 + "]" * 33, "tables or arrays are nested too deeply"),
        ("x = " + "1" * 1001, "a number or name is too long"),
        ("k" * 1001 + " = 1", "a number or name is too long"),
        ("".join(f"a.b.c.k{i} = 1\n" for i in range(84)), "too many names joined by points"),
        ("".join(f"[a.b.k{i}]\n" for i in range(501)), "too many names joined by points"),
        ("\n" * 10_001, "too many keys, values and lines"),
        ("x = [" + "1," * 10_001 + "]", "too many keys, values and lines"),
        ('x = "' + "\\n" * 50_001 + '"', "too many backslashes"),
    ],
)
def test_each_bound_is_one_line(text: str, words: str) -> None:
    with pytest.raises(CaseError, match=f"^x.toml: line [0-9]+: {words}: given more than [0-9]+.*; allowed at most "):
        toml.tables(text, "x.toml")


def test_just_within_the_bounds() -> None:
    text = "a." * 7 + "a = 1\nx = " + "[" * 32 + "]" * 32 + "\ny = " + "1" * 1000 + "\n"
    assert set(toml.tables(text, "x.toml")) == {"a", "x", "y"}
