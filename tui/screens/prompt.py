"""A question answered by one line of text, such as the name of a file."""

from __future__ import annotations

from textual import events
from textual.app import ComposeResult
from textual.geometry import Size

from tui import keying
from tui.line import BOLD, CURSOR, DIM, clean, fit, line
from tui.screens.overlay import Overlay
from tui.session import Entry
from tui.widgets.sheet import Sheet


class Prompt(Overlay[str]):
    """Asks for one line. Gives the text, "" where it was left.

    Parameters: question; text, what stands in the field at first.
    """

    CSS = "Prompt { layout: vertical; } #prompt { height: 1fr; }"

    def __init__(self, question: str, text: str) -> None:
        super().__init__()
        self._question = question
        self._entry = Entry("", text, len(text), fresh=False)

    def compose(self) -> ComposeResult:
        """One sheet, painted before it is laid out, so that the screen is sent once."""
        self._sheet = Sheet(id="prompt")
        self._paint(self.app.size)
        yield self._sheet

    def on_resize(self) -> None:
        """Paint for the new size, all of it: the terminal may have cut what stands there."""
        self._paint(self.app.size)
        self.refresh()

    def _paint(self, size: Size) -> None:
        """The question, the field, the keys."""
        wide = max(4, size.width)
        entry = self._entry
        start = max(0, entry.caret - wide + 3)
        text = clean(entry.text)
        seen = (text + " ")[start : start + wide - 1]
        at = entry.caret - start
        self._sheet.show(
            [
                line((fit(self._question, wide), BOLD)),
                line(seen[:at], (seen[at : at + 1] or " ", CURSOR), seen[at + 1 :]),
                line((fit("Enter takes it; Escape leaves", wide), DIM)),
            ],
            size,
        )

    def typed(self, event: events.Key) -> None:
        """Type, take or leave."""
        if event.key == "escape":
            self.leave("")
        elif event.key == "enter":
            if self._entry.text.strip():
                self.leave(self._entry.text.strip())
        else:
            self._entry = keying.press(self._entry, event.key, event.character)
            self._paint(self.app.size)

    def on_paste(self, event: events.Paste) -> None:
        """Put pasted text in at the caret."""
        event.stop()
        self._entry = keying.insert(self._entry, event.text)
        self._paint(self.app.size)
