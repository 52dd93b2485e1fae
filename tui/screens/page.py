"""A page of text over the main screen: help, limits, a difference, a question with its answers."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from types import MappingProxyType

from textual import events
from textual.geometry import Size

from tui.line import BOLD, CURSOR, DIM, PLAIN, Line, clean, fit, line
from tui.screens.overlay import Overlay

Body = Callable[[int], list[Line]]
"""Lines of a page for a width."""


@dataclass(frozen=True, slots=True)
class Answer:
    """One answer to a question: the letter that gives it, its name, the words for it."""

    key: str
    name: str
    words: str


MOVES: dict[str, Callable[[int, int, int], int]] = {
    "up": lambda at, page, last: at - 1,
    "down": lambda at, page, last: at + 1,
    "pageup": lambda at, page, last: at - page,
    "pagedown": lambda at, page, last: at + page,
    "home": lambda at, page, last: 0,
    "end": lambda at, page, last: last,
}


class Page(Overlay[str]):
    """Shows a text and, where there are answers, asks for one. Gives the answer's name, "" where it was left.

    Parameters: title; body, the text, which scrolls; answers; head, lines above the text that stay; verbs, name of a key -> what it
    does, and keys, the words for them on the last line.
    """

    def __init__(
        self,
        title: str,
        body: Body,
        answers: tuple[Answer, ...] = (),
        head: Body = lambda wide: [],
        verbs: Mapping[str, Callable[[], None]] = MappingProxyType({}),
        keys: str = "arrows scroll; Escape goes back",
    ) -> None:
        super().__init__()
        self._verbs, self._keys = verbs, keys
        self._heading, self._body, self._answers, self._fixed = title, body, answers, head
        self._at = 0

    def lines_for(self, size: Size) -> list[Line]:
        """Title, as much of the text as fits, the answers, the keys."""
        wide, height = size
        body, fixed = self._body(wide), self._fixed(wide)[: max(0, height - 3)]
        choices = self._choices(wide)
        self._room = room = max(1, height - 2 - len(choices) - len(fixed))
        top = 0 if self._answers else max(0, min(self._at, len(body) - room))
        if not self._answers:
            self._at = top
        shown = body[top : top + room]
        more = f" ({top + 1}-{top + len(shown)} of {len(body)})" if len(shown) < len(body) else ""
        keys = "arrows and Enter, or the letter; Escape leaves" if self._answers else self._keys
        padding: list[Line] = [line("")] * (room - len(shown))
        head = line((fit(clean(self._heading) + more, wide), BOLD))
        return [head, *fixed, *shown, *choices, *padding, line((fit(keys, wide), DIM))]

    def _choices(self, wide: int) -> list[Line]:
        return [line((fit(f" {a.key}  {clean(a.words)}", wide), CURSOR if i == self._at else PLAIN)) for i, a in enumerate(self._answers)]

    def typed(self, event: events.Key) -> None:
        """Move, answer or leave."""
        if event.key in MOVES:
            last = len(self._answers) - 1 if self._answers else len(self._body(self.size.width))
            self._at = max(0, min(MOVES[event.key](self._at, max(1, self._room - 1), last), max(last, 0)))
            self.paint()
        elif event.key in ("escape", "q", "ctrl+q"):
            self.leave("")
        elif (act := self._verbs.get(event.key) or self._verbs.get(event.character or "")) is not None:
            act()
        elif self._answers:
            self._answer(event)

    def _answer(self, event: events.Key) -> None:
        if event.key == "enter":
            self.leave(self._answers[self._at].name)
            return
        name = next((a.name for a in self._answers if a.key == event.character), None)
        if name is not None:
            self.leave(name)


def text_body(paragraphs: list[str]) -> Body:
    """A body of plain lines, wrapped by words; a line that starts with blanks keeps its indent."""

    def body(wide: int) -> list[Line]:
        out: list[Line] = []
        for paragraph in paragraphs:
            out += [line(part) for part in _wrapped(clean(paragraph), wide)]
        return out

    return body


def _wrapped(text: str, wide: int) -> list[str]:
    indent = min(len(text) - len(text.lstrip()), wide // 2)
    lines, now = [], " " * indent
    for word in text.split():
        if now.strip() and len(now) + 1 + len(word) > wide:
            lines.append(now)
            now = " " * (indent + 2)
        now = f"{now} {word}" if now.strip() else now + word
    return [*lines, fit(now, wide)]
