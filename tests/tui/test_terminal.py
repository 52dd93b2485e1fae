"""What the terminal sends: bytes that are no text, replies with any numbers, pastes without an end. None of it ends the screen."""

from __future__ import annotations

import random
import re
import time
from pathlib import Path

import pytest
from textual._xterm_parser import XTermParser

from tests.tui import byte_fuzz
from tests.tui.pty_support import READY, Terminal
from tui.terminal import LONGEST, MOST_PASTED, PATIENCE, Sieve


def taken(text: str, *more: str) -> list[str]:
    sieve = Sieve()
    return [piece for part in (text, *more) for piece in sieve.take(part)]


@pytest.mark.parametrize(
    ("parts", "left"),
    [
        (("ab", "c"), ["ab", "c"]),
        (("\x1b[A\x1b[1;5C", "x"), ["\x1b[A", "\x1b[1;5C", "x"]),
        (("\x1b[", "1;", "5C"), ["\x1b[1;5C"]),
        (("a\x1b",), ["a", "\x1b"]),
        (("\x1bOP\x1bx",), ["\x1b", "OP", "\x1b", "x"]),
        ((f"\x1b[{'9' * 400}R", "q"), ["q"]),
        ((f"\x1b[{'9' * 20}", "9" * 400, ";1R", "q"), ["q"]),
        (("\x1b]11;rgb:0/0/0\x1b\\", "a\x1b]11;b\x07c"), ["a", "c"]),
        (("\x1bPqqq", "qqq\x1b", "\\x"), ["x"]),
        (("\x1b[12\x1b[A",), ["\x1b[A"]),
        (("\x1b[1\u00e9",), ["\u00e9"]),
        (("\x1b[200~a\x1bqb\x1b[Ac\x1b[201~d",), ["\x1b[200~", "a", "qb", "c", "\x1b[201~", "d"]),
        (("\x1b[200~\x1b[201~\x1b[201~q",), ["\x1b[200~", "\x1b[201~", "\x1b[201~", "q"]),
    ],
)
def test_keys_pass_whole_and_what_is_none_is_dropped(parts: tuple[str, ...], left: list[str]) -> None:
    assert taken(*parts) == left


def test_a_key_with_alt_waits_a_tick_and_an_endless_string_is_dropped() -> None:
    sieve = Sieve()
    assert [*sieve.take("\x1bP"), *sieve.waited(0.1)] == ["\x1bP"]
    assert [*sieve.take("\x1bPabc"), *sieve.waited(0.1), *sieve.take("d")] == ["d"]


def test_a_paste_without_an_end_is_over_after_a_silence_and_a_huge_one_is_cut() -> None:
    sieve = Sieve()
    assert list(sieve.take("\x1b[200~a")) == ["\x1b[200~", "a"]
    assert list(sieve.waited(PATIENCE / 2)) == [] and list(sieve.take("b")) == ["b"]
    assert list(sieve.waited(PATIENCE / 2)) == []
    assert list(sieve.waited(PATIENCE / 2)) == ["\x1b[201~"]
    pieces = taken("\x1b[200~", *["x" * 4096] * 100, "\x1b[201~y")
    assert sum(map(len, pieces[1:-2])) == MOST_PASTED and pieces[-2:] == ["\x1b[201~", "y"]


def test_whatever_comes_the_pieces_are_ones_that_the_reader_takes(low: int = 0, high: int = 40) -> None:
    """However the text is cut, the same comes out; no sequence is longer than the reader takes, and no string passes."""
    for seed in range(low, high):
        draw = random.Random(seed)
        kinds = list(byte_fuzz.KINDS)
        text = b"".join(draw.choice(kinds)(draw) for _ in range(60)).decode("utf-8", "ignore")
        sieve = Sieve()
        pieces = [piece for at in range(0, len(text), 7) for piece in sieve.take(text[at : at + 7])]
        assert all(pieces) and max(map(len, pieces)) <= max(LONGEST, 7), seed
        assert all(re.fullmatch("\x1b|\x1b\\[[^\x1b]*|[^\x1b]+", piece) for piece in pieces), seed


@pytest.mark.parametrize(
    "sent",
    [
        b"\xe9", b"\xff\xfe\x80", b"\xc3", b"\xed\xa0\x80", b"\x1b[" + b"9" * 400 + b"R", b"\x1b[" + b"9" * 400 + b";1;1M",
        b"\x1b[48;" + b"9" * 9 + b";" + b"9" * 9 + b";1;1t", b"\x1b[48;0;0;0;0t\x1b[<0;5;5M", b"\x1b[<0;99999999;99999999M",
        b"\x1b[<0;0;0M", b"\x1b[<999999;1;1m", b"\x1b[1114112u", b"\x1b[99999999999999999u", b"\x1b[55296;1u", b"\x1b[97:65;5:1u",
        b"\x1b[97;1;55296:1114112u", b"\x1b[?2048;1$y\x1b[?2048;2$y", b"\x1b[M\x00\x00\x00", b"\x1b[M\xff\xff\xff", b"\x1b]0;q\x07",
        "\x1b[\u0661;\u0661R\x1b[\u0669\u0669\u0669\u0669\u0669\u0669\u0669u".encode(), b"\x00" * 500, b"\x1b" * 500,
        b"\x1b[200~" + b"\xe9\x1b[48;1;1;1;1t\x1bqqqqqqqqqqqqqqqqqqqqqqqqqqqqqqqqqqqqqq" + b"\x1b[201~",
        b"\x1b", b"[48;99999;99999;1;1t",
    ],
)  # fmt: skip
def test_the_screen_goes_on_after(terminal: Terminal, sent: bytes) -> None:
    terminal.process.write(sent)
    terminal.settle(0.4)
    terminal.press("escape")
    terminal.settle(0.4)
    terminal.press("tab", "+")
    terminal.wait(lambda text: "M 6.1" in text.splitlines()[0])
    terminal.press("q")
    assert terminal.status() == 0
    assert b"Work is kept" in terminal.raw


def test_a_paste_that_never_ends_lets_keys_through_again(terminal: Terminal) -> None:
    terminal.process.write(b"\x1b[200~qqq")
    time.sleep(PATIENCE + 0.5)
    terminal.press("tab", "+")
    terminal.wait(lambda text: "M 6.1" in text.splitlines()[0])


def test_a_reader_that_stumbles_is_replaced(path: Path, env: dict[str, str]) -> None:
    """Whatever the library's reader raises: here, at a key."""
    program = (
        "import sys\nfrom textual._xterm_parser import XTermParser\nfrom tui.app import run\nmake = XTermParser._sequence_to_key_events\n"
        "def fails(self, sequence, alt=False):\n    if sequence == 'Z': raise ZeroDivisionError\n    return make(self, sequence, alt)\n"
        "XTermParser._sequence_to_key_events = fails\nsys.exit(run(sys.argv[1]))\n"
    )
    with Terminal([str(path)], env=env, program=program) as terminal:
        terminal.wait(READY)
        terminal.press("Z", "tab", "+")
        terminal.wait(lambda text: "M 6.1" in text.splitlines()[0])


def test_the_librarys_reader_has_what_is_used_of_it() -> None:
    reader = XTermParser()
    (key,) = reader.feed("\x1b[A")
    assert getattr(key, "key", "") == "up" and list(reader.tick()) == []


@pytest.mark.parametrize("seed", [101])
def test_bytes_of_all_kinds_leave_the_program_alive_and_the_case_kept(seed: int) -> None:
    byte_fuzz.run(seed, 120)
