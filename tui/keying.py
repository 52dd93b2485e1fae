"""Typing in a one-line field, as pure functions on text and caret. The caret does not blink: an idle screen sends nothing."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from tui.line import clean
from tui.session import Entry

LONGEST = 400
"""Characters a field takes."""

Move = Callable[[str, int], tuple[str, int]]

MOVES: dict[str, Move] = {
    "left": lambda text, at: (text, max(0, at - 1)),
    "right": lambda text, at: (text, min(len(text), at + 1)),
    "home": lambda text, at: (text, 0),
    "end": lambda text, at: (text, len(text)),
    "backspace": lambda text, at: (text[: max(0, at - 1)] + text[at:], max(0, at - 1)),
    "delete": lambda text, at: (text[:at] + text[at + 1 :], at),
    "ctrl+u": lambda text, at: (text[at:], 0),
    "ctrl+k": lambda text, at: (text[:at], at),
}
"""Editing keys: (text, caret) -> (text, caret)."""

ERASES = ("backspace", "delete")


def insert(entry: Entry, text: str, longest: int = LONGEST) -> Entry:
    """The field with text put in at the caret, `longest` characters at most; the first text typed into a fresh field replaces what
    stood there."""
    text = clean(text)
    old = "" if entry.fresh else entry.text
    at = 0 if entry.fresh else entry.caret
    new = (old[:at] + text + old[at:])[:longest]
    return replace(entry, text=new, caret=min(at + len(text), len(new)), fresh=False, fault="")


def press(entry: Entry, key: str, character: str | None, longest: int = LONGEST) -> Entry:
    """The field after a key; keys that mean nothing here leave it as it is.

    Parameters: entry, the open field; key, name of the key; character, what it types, if anything; longest, characters it takes.
    """
    if key in MOVES:
        if entry.fresh and key in ERASES:
            return replace(entry, text="", caret=0, fresh=False, fault="")
        text, caret = MOVES[key](entry.text, entry.caret)
        fault = entry.fault if text == entry.text else ""
        return replace(entry, text=text, caret=caret, fresh=False, fault=fault)
    if character is not None and character.isprintable():
        return insert(entry, character, longest)
    return entry
