"""Blocks of plain output: they fit 80 columns, and a file's words cannot drive the terminal."""

from __future__ import annotations

from hypothesis import given, settings
from hypothesis import strategies as st

from tui.tables import WIDTH, Heading, Lines, Table, as_markdown, as_text, clip, columns

CELLS = st.text(max_size=60)


def test_a_table_aligns_names_left_and_figures_right() -> None:
    table = Table(("station", "0", "2"), (("Mach number", "8", "3.62"), ("pressure, kPa", "1.12", "67")))
    assert table.text() == [
        "  station           0     2",
        "  Mach number       8  3.62",
        "  pressure, kPa  1.12    67",
    ]


def test_columns_that_do_not_fit_follow_below_with_the_names_again() -> None:
    table = Table(("station", *(f"{i:>12}" for i in range(9))), (("pressure", *["123456789012"] * 9),))
    lines = table.text()
    assert max(map(columns, lines)) <= WIDTH
    assert sum("pressure" in line for line in lines) == 2
    assert sum(line.count("123456789012") for line in lines) == 9


def test_a_column_of_words_runs_over_lines() -> None:
    table = Table(("", "note"), (("row", "word " * 60),), wrapped=1)
    lines = table.text()
    assert len(lines) > 3
    assert " ".join(lines).count("word") == 60


def test_control_characters_are_written_out() -> None:
    text = as_text([Heading("\x1b[31mred\x07", 1), Lines(("a\x1b]0;title\x07b",)), Table(("\x9b2J",), (("\r\n",),))])
    assert all(c.isprintable() for line in text.splitlines() for c in line)
    assert "\x1b" not in text
    assert "red" in text


def test_markdown_marks_are_escaped() -> None:
    text = as_markdown([Table(("a|b", "c"), (("*x*", "1"),))])
    assert text.splitlines() == ["| a\\|b | c |", "| :-- | --: |", "| \\*x\\* | 1 |"]


def test_wide_characters_count_twice() -> None:
    assert columns("超音速") == 6
    assert columns(clip("超音速" * 10, 20)) <= 20


@settings(deadline=None, max_examples=50)
@given(st.lists(st.tuples(CELLS, CELLS, CELLS, CELLS), min_size=1, max_size=5), st.sampled_from([None, 3]))
def test_no_table_is_wider_than_the_page(rows: list[tuple[str, ...]], wrapped: int | None) -> None:
    header, *body = rows
    for line in as_text([Table(header, tuple(body), wrapped=wrapped)]).splitlines():
        assert columns(line) <= WIDTH
        assert all(c.isprintable() for c in line)


@settings(deadline=None, max_examples=50)
@given(st.text(max_size=300))
def test_no_sentence_is_wider_than_the_page(text: str) -> None:
    for line in as_text([Heading(text, 1), Heading(text), Lines((text,))]).splitlines():
        assert columns(line) <= WIDTH
