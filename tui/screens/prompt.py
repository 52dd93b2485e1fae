"""A question answered by one line of text, such as the name of a file."""

from __future__ import annotations

from textual import events
from textual.geometry import Size

from tui import keying
from tui.line import BOLD, CURSOR, DIM, Line, clean, fit, line
from tui.screens.overlay import Overlay
from tui.session import Entry


class Prompt(Overlay[str]):
    """Asks for one line. Gives the text, "" where it was left.

    Parameters: question; text, what stands in the field at first.
    """

    def __init__(self, question: str, text: str) -> None:
        super().__init__()
        self._question = question
        self._entry = Entry("", text, len(text), fresh=False)

    def lines_for(self, size: Size) -> list[Line]:
        """The question, the field, the keys."""
        wide = max(4, size.width)
        entry = self._entry
        start = max(0, entry.caret - wide + 3)
        text = clean(entry.text)
        seen = (text + " ")[start : start + wide - 1]
        at = entry.caret - start
        return [
            line((fit(self._question, wide), BOLD)),
            line(seen[:at], (seen[at : at + 1] or " ", CURSOR), seen[at + 1 :]),
            line((fit("Enter takes it; Escape leaves", wide), DIM)),
        ]

    def typed(self, event: events.Key) -> None:
        """Type, take or leave."""
        if event.key == "escape":
            self.leave("")
        elif event.key == "enter":
            if self._entry.text.strip():
                self.leave(self._entry.text.strip())
        else:
            self._entry = keying.press(self._entry, event.key, event.character)
            self.paint()

    def on_paste(self, event: events.Paste) -> None:
        """Put pasted text in at the caret."""
        event.stop()
        self._entry = keying.insert(self._entry, event.text)
        self.paint()
