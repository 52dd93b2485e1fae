"""A page to write on: the title and the notes of a case, a line each."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from textual import events
from textual.geometry import Size

from tui import keying
from tui.line import BOLD, CURSOR, DIM, OVER, Line, clean, fit, line
from tui.screens.overlay import Overlay
from tui.screens.page import Answer, Page, text_body
from tui.session import Entry

LONGEST = 20_000
"""Characters of a line; the case says how many the whole may have."""

Text = tuple[str, str]
"""Title and notes."""


def _entry(text: str) -> Entry:
    return Entry("", text, len(text), fresh=False)


class Writing(Overlay[Text | None]):
    """Title on the first line, notes below it. Gives both when they are taken, None where they are left as they were.

    Parameters: question; title; notes, with line ends. A line end at the end of the notes stays.
    """

    def __init__(self, question: str, title: str, notes: str) -> None:
        super().__init__()
        self._question, self._before = question, (title, notes)
        self._lines = [_entry(title), *(_entry(text) for text in notes.split("\n"))]
        self._at, self._top = min(1, len(self._lines) - 1), 0
        self._moves: dict[str, Callable[[], None]] = {
            "up": lambda: self._go(self._at - 1),
            "down": lambda: self._go(self._at + 1),
            "pageup": lambda: self._go(self._at - self._room + 1),
            "pagedown": lambda: self._go(self._at + self._room - 1),
            "enter": self._split,
            "backspace": self._join,
        }

    @property
    def _said(self) -> Text:
        return self._lines[0].text, "\n".join(entry.text for entry in self._lines[1:])

    def lines_for(self, size: Size) -> list[Line]:
        wide, height = max(8, size.width), size.height
        self._room = room = max(1, height - 4)
        self._top = max(0, min(self._top, self._at - 1, len(self._lines) - 1 - room), self._at - room)
        notes = [self._shown(i, wide) for i in range(1 + self._top, min(len(self._lines), 1 + self._top + room))]
        padding: list[Line] = [line("")] * (room - len(notes))
        count = sum(len(e.text) + 1 for e in self._lines[1:]) - 1
        told = (f"notes, {count} characters" if count else "notes", OVER if count > LONGEST else DIM)
        keys = line((fit("Ctrl-S takes it; Escape leaves; Enter begins a line", wide), DIM))
        head = line((fit(clean(self._question), wide), BOLD))
        return [head, self._shown(0, wide), line(told), *notes, *padding, keys][: max(height, 1)]

    def _shown(self, i: int, wide: int) -> Line:
        entry, text = self._lines[i], clean(self._lines[i].text)
        if i != self._at:
            return line(fit(text, wide))
        start = max(0, entry.caret - wide + 2)
        at = entry.caret
        return line(text[start:at], (text[at : at + 1] or " ", CURSOR), text[at + 1 :])

    def _go(self, at: int) -> None:
        at = max(0, min(at, len(self._lines) - 1))
        self._lines[at] = replace(self._lines[at], caret=min(self._lines[self._at].caret, len(self._lines[at].text)))
        self._at = at

    def _split(self) -> None:
        entry = self._lines[self._at]
        if self._at == 0:
            self._at = 1
            return
        before, behind = entry.text[: entry.caret], entry.text[entry.caret :]
        self._lines[self._at : self._at + 1] = [_entry(before), replace(_entry(behind), caret=0)]
        self._at += 1

    def _join(self) -> None:
        entry = self._lines[self._at]
        if entry.caret or self._at < 2:
            self._lines[self._at] = keying.press(entry, "backspace", None, LONGEST)
            return
        before = self._lines[self._at - 1].text
        self._lines[self._at - 1 : self._at + 1] = [replace(_entry(before + entry.text), caret=len(before))]
        self._at -= 1

    def typed(self, event: events.Key) -> None:
        """Write, take or leave."""
        if event.key in ("ctrl+s", "f2"):
            self.leave(self._said)
            return
        if event.key in ("escape", "ctrl+c", "ctrl+q"):
            self._ask_to_leave()
            return
        move = self._moves.get(event.key)
        if move is not None:
            move()
        else:
            self._lines[self._at] = keying.press(self._lines[self._at], event.key, event.character, LONGEST)
        self.paint()

    def _ask_to_leave(self) -> None:
        """Leave at once where nothing was written, else ask."""
        if self._said == self._before:
            self.leave(None)
            return
        answers = (
            Answer("t", "take", "take what is written"),
            Answer("l", "leave", "leave title and notes as they were"),
            Answer("w", "write", "go on writing"),
        )
        page = Page("Take what is written?", text_body(["Title or notes are not as they were."]), answers)
        results: dict[str, Text | None] = {"take": self._said, "leave": None}

        def answered(name: str | None) -> None:
            if name in results:
                self.leave(results[name])

        self.app.push_screen(page, answered)

    def on_paste(self, event: events.Paste) -> None:
        """Pasted text goes in at the caret, line by line."""
        event.stop()
        first, *rest = event.text.replace("\r\n", "\n").replace("\r", "\n").split("\n")
        self._lines[self._at] = keying.insert(self._lines[self._at], first, LONGEST)
        for text in rest:
            self._split()
            self._lines[self._at] = keying.insert(self._lines[self._at], text, LONGEST)
        self.paint()
