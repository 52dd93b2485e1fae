"""A list over the main screen: rows with one in hand, keys that do something with it, a text that narrows it down."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from textual import events
from textual.geometry import Size

from tui import keying
from tui.line import BOLD, CURSOR, DIM, Line, clean, fit, line, width
from tui.screens.overlay import Overlay
from tui.screens.page import MOVES
from tui.session import Entry


@dataclass(frozen=True, slots=True)
class Choice:
    """One row: its name, and what is shown of it on one line."""

    name: str
    shown: Line


@dataclass(frozen=True, slots=True)
class Verb:
    """What a key does with the row in hand. key: its name; shown: as printed, "" for a second key of a verb; words: for the line of keys;
    stays: whether the list stays open, so that `act` is told instead of the caller; bare: whether it needs no row."""

    key: str
    shown: str
    words: str
    stays: bool = False
    bare: bool = False


Rows = Callable[[int, str], list[Choice]]
"""Width, text typed -> rows."""

Told = Callable[[str, int], list[Line]]
"""Name of the row in hand, width -> lines on it, below the rows."""


def marked(content: Line, wide: int) -> Line:
    """A row in hand: reversed over the whole width, its own colours gone."""
    text = fit("".join(piece for piece, _ in content), wide)
    return line((text + " " * (wide - width(text)), CURSOR))


class Roster(Overlay[tuple[str, str]]):
    """Shows rows and asks for one. Gives (key of the verb, name of the row); ("", "") where it was left.

    Parameters: title, words or what gives them; rows; verbs, the first one is that of Enter where its key is "enter"; head, lines
    above the rows; told, lines below them on the row in hand; typing, whether letters narrow the rows down (verbs then go
    by other keys); act, told of a verb that stays; start, name of the row in hand at first;
    counted, whether the title says how many rows there are.
    """

    def __init__(
        self,
        title: str | Callable[[], str],
        rows: Rows,
        verbs: tuple[Verb, ...],
        *,
        head: Callable[[int], list[Line]] = lambda wide: [],
        told: Told = lambda name, wide: [],
        typing: bool = False,
        act: Callable[[str, str], None] = lambda key, name: None,
        start: str = "",
        counted: bool = True,
    ) -> None:
        super().__init__()
        self._heading = title if callable(title) else lambda: title
        self._rows, self._verbs = rows, verbs
        self._head, self._told, self._typing, self._act = head, told, typing, act
        self._name, self._at, self._top, self._room = start, 0, 0, 1
        self._field = Entry("", "", 0, fresh=False)
        self._counted = counted

    def point_at(self, name: str) -> None:
        """Take a row in hand, where it is there, and paint."""
        self._name = name
        self.paint()

    @property
    def name_in_hand(self) -> str:
        """Name of the row in hand, "" where there is none."""
        return self._name

    def hold(self, name: str) -> None:
        """Take a row in hand, the first one where none has that name; for `act`, which changes what the rows are."""
        self._name, self._at, self._top = name, 0, 0

    def lines_for(self, size: Size) -> list[Line]:
        wide, height = size
        rows = self._rows(wide, self._field.text)
        self._keep(rows)
        head = self._head(wide)
        told = self._told(self._name, wide) if self._name else []
        above: list[Line] = [line((fit(clean(self._heading()) + self._count(len(rows)), wide), BOLD)), *self._typed(wide)]
        spare = height - len(above) - 1
        head = head[: max(0, spare - 3)]
        told = told[: max(0, spare - len(head) - 3)]
        self._room = room = max(1, spare - len(head) - len(told))
        self._top = max(0, min(self._top, self._at, len(rows) - room), self._at - room + 1)
        shown = [marked(c.shown, wide) if self._top + i == self._at else c.shown for i, c in enumerate(rows[self._top : self._top + room])]
        padding: list[Line] = [line("")] * (room - len(shown))
        keys = line((fit(self._keys(), wide), DIM))
        return [*above, *head, *shown, *padding, *told, keys][:height]

    def _keep(self, rows: list[Choice]) -> None:
        names = [c.name for c in rows]
        if self._name in names:
            self._at = names.index(self._name)
        else:
            self._at = max(0, min(self._at, len(rows) - 1))
            self._name = names[self._at] if names else ""

    def _count(self, rows: int) -> str:
        if not self._counted:
            return ""
        return f" ({self._at + 1} of {rows})" if rows else " (none)"

    def _typed(self, wide: int) -> list[Line]:
        if not self._typing:
            return []
        text = clean(self._field.text)
        start = max(0, self._field.caret - wide + 9)
        at = self._field.caret
        return [line("find: ", text[start:at], (text[at : at + 1] or " ", CURSOR), text[at + 1 :])]

    def _keys(self) -> str:
        parts = [f"{v.shown} {v.words}" for v in self._verbs if v.shown]
        return "  ".join([*parts, "Esc back"])

    def typed(self, event: events.Key) -> None:
        """Move, do, narrow down or leave."""
        verb = next((v for v in self._verbs if v.key == event.key or (v.key == event.character and not self._typing)), None)
        if event.key in MOVES and not (self._typing and event.key in ("home", "end")):
            self._move(event.key)
        elif event.key in ("escape", "ctrl+q", "ctrl+c") or (event.key == "q" and not self._typing):
            self.leave(("", ""))
        elif verb is not None:
            self._do(verb)
        elif self._typing:
            self._field = keying.press(self._field, event.key, event.character)
            self._name, self._at = "", 0
            self.paint()

    def _move(self, key: str) -> None:
        rows = self._rows(self.size.width, self._field.text)
        self._at = max(0, min(MOVES[key](self._at, max(1, self._room - 1), len(rows) - 1), len(rows) - 1))
        self._name = rows[self._at].name if rows else ""
        self.paint()

    def _do(self, verb: Verb) -> None:
        if not self._name and not verb.bare:
            return
        if verb.stays:
            self._act(verb.key, self._name)
            self.paint()
        else:
            self.leave((verb.key, self._name))

    def on_paste(self, event: events.Paste) -> None:
        """Pasted text narrows the rows down where letters do."""
        event.stop()
        if self._typing:
            self._field = keying.insert(self._field, event.text)
            self._name, self._at = "", 0
            self.paint()
