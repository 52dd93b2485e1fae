"""The screen of a peek: a figure against one input, or over two, with a cursor along the points."""

from __future__ import annotations

import itertools
from collections.abc import Iterator
from dataclasses import replace
from typing import ClassVar

from cycle.units import respell
from tui import peek
from tui.engine import Result
from tui.items import completed, written
from tui.line import Line, clean, line, wrap
from tui.peek import Peek
from tui.plots import Chart, Grid
from tui.screens.desk import Desk
from tui.screens.picture import Picture
from tui.screens.prompt import Prompt
from tui.screens.roster import Choice, Roster, Verb
from tui.session import performance_keys, undone
from tui.views import peek as view

TOLD_LINES, TIGHT = 3, 24
"""Lines for the point under the cursor; one less on a screen lower than this."""


class PeekScreen(Picture):
    """Draws a peek and keeps its sweeps going."""

    KEYS: ClassVar[dict[str, str]] = {
        "left": "do_left", "right": "do_right", "up": "do_up", "down": "do_down", "home": "do_first", "end": "do_last",
        "+": "do_closer", "=": "do_closer", "-": "do_wider", "<": "do_back", ">": "do_ahead", ",": "do_back", ".": "do_ahead",
        "y": "do_figure", "m": "do_map", "s": "do_study", "enter": "do_take", "u": "do_undo", "w": "do_write", "g": "do_leave",
    }  # fmt: skip
    WORDS = "arrows  + - range  < > shift  y figure  m map  Enter take  s study  w file  Esc"

    _numbers: ClassVar[Iterator[int]] = itertools.count(1)
    """Numbers of what is asked for, of all peeks: a piece of one that is closed must not be taken for one of the next."""

    def __init__(self, desk: Desk, start: Peek) -> None:
        super().__init__(desk)
        self.peek = start
        self._asked, self._trouble = 0, ""

    def drawn(self) -> list[Chart | Grid]:
        """The curve or the map."""
        picture = view.picture(self.peek, self.desk.session.borders)
        return [picture] if picture is not None else []

    def instead(self) -> str:
        """What is solved, or why nothing is."""
        return self._trouble or f"{view.title(self.peek)}: being solved ..."

    def foot(self, wide: int) -> list[Line]:
        """The point under the cursor, and what is still to come."""
        most = TOLD_LINES - (self.app.size.height < TIGHT)
        told = wrap(clean(view.under_cursor(self.peek)).split(), wide)[:most]
        told += [""] * (most - len(told))
        coming = view.under_way(self.peek)
        if coming and not told[-1]:
            told[-1] = coming
        return [line(words) for words in told]

    def on_mount(self) -> None:
        """Ask for the first piece."""
        self.ask()

    def ask(self) -> None:
        """Ask the worker for the piece that is due; one asked before is dropped."""
        due = self.peek.due
        if due is None:
            self._ask_borders()
            return
        self._asked = next(self._numbers)
        sweep = due[1]
        self.desk.engine.newest("peek", self._asked, sweep.piece)

    def _ask_borders(self) -> None:
        """Ask for the borders of a duct's regimes where its heat is drawn: they cost more than the line, so they come last."""
        heat = f"combustor.{self.peek.case.value('combustor.heat')}"
        if [s.input.key for s in self.peek.spans] == [heat]:
            self.desk.ask_heat_limits()

    def solved(self, result: Result) -> None:
        """Take a piece; one of a line that is no longer drawn is dropped."""
        due = self.peek.due
        if result.generation != self._asked or due is None:
            return
        if result.error is not None:
            self._trouble = " | ".join(str(result.error).splitlines())
            self.paint()
            return
        self.peek = peek.took(self.peek, result.value)
        self.paint()
        self.ask()

    def _show(self, new: Peek) -> None:
        """Draw another line, and solve what it needs."""
        self.peek = new
        self.ask()

    def do_left(self) -> None:
        """One point back along the first input."""
        self.peek = peek.moved(self.peek, 0, -1)

    def do_right(self) -> None:
        """One point on along the first input."""
        self.peek = peek.moved(self.peek, 0, 1)

    def do_up(self) -> None:
        """One point on along the second input."""
        self.peek = peek.moved(self.peek, 1, 1)

    def do_down(self) -> None:
        """One point back along the second input."""
        self.peek = peek.moved(self.peek, 1, -1)

    def do_first(self) -> None:
        """The first point."""
        self.peek = peek.moved(self.peek, 0, -len(self.peek.curve.status) if self.peek.curve is not None else 0)

    def do_last(self) -> None:
        """The last point."""
        self.peek = peek.moved(self.peek, 0, len(self.peek.curve.status) if self.peek.curve is not None else 0)

    def do_closer(self) -> None:
        """Half the range."""
        self._show(peek.widened(self.peek, 0.5))

    def do_wider(self) -> None:
        """Twice the range."""
        self._show(peek.widened(self.peek, 2.0))

    def do_back(self) -> None:
        """The range half of its half width down."""
        self._show(peek.shifted(self.peek, -0.5))

    def do_ahead(self) -> None:
        """The range half of its half width up."""
        self._show(peek.shifted(self.peek, 0.5))

    def do_figure(self) -> None:
        """The next figure; a headline one is the one watched from now on."""
        self.peek = peek.next_figure(self.peek)
        if self.peek.figure in performance_keys(self.desk.session):
            self.desk.put(replace(self.desk.session, watched=self.peek.figure))

    def do_leave(self) -> None:
        """Back to the table."""
        self.leave("")

    def do_map(self) -> None:
        """Ask for a second input; in a map, back to the line."""
        if len(self.peek.spans) > 1:
            self._show(peek.with_second(self.peek, ""))
            return
        spread = {i.key: i for i in peek.others(self.peek)}
        stated = {s.input.key: s for s in self.peek.case.inputs()}

        def rows(wide: int, typed: str) -> list[Choice]:
            wanted = [i for i in spread.values() if all(word in f"{i.label} {i.key} {i.symbol}".lower() for word in typed.lower().split())]
            return [Choice(i.key, line(f" {i.label:<36} {written(stated[i.key], self.peek.system)}")) for i in wanted]

        title = f"A map over {self.peek.spans[0].input.label} and"
        self.app.push_screen(Roster(title, rows, (Verb("enter", "Enter", "draws the map"),), typing=True), self._second)

    def _second(self, chosen: tuple[str, str] | None) -> None:
        if chosen is not None and chosen[1]:
            self._show(peek.with_second(self.peek, chosen[1]))
            self.paint()

    def do_take(self) -> None:
        """Give the inputs the values under the cursor: an edit like any other."""
        case = self.peek.case
        values = {s.input.key: v for s, v in zip(self.peek.spans, self.peek.place, strict=True) if v != case.numbers[s.input.key]}
        if not values:
            self.message = "the cursor stands at the present value: arrows move it"
            return
        change: dict[str, object] = {}
        for key, value in values.items():
            change |= completed({"set": {key: value}}, case, {})["set"]
        if self.desk.change({"set": change}):
            self._edited("taken; u takes it back")
        else:
            self._refused()

    def _refused(self) -> None:
        """Show why an edit is none."""
        self.message = " | ".join(self.desk.session.faults)
        self.desk.put(replace(self.desk.session, faults=()))

    def _edited(self, message: str, again: bool = True) -> None:
        case = self.desk.session.case
        new = peek.of_case(self.peek, case, again) if case is not None else None
        if new is None:
            self.leave("")
            return
        self.message = message
        if again:
            self._show(new)
        else:
            self.peek = new

    def do_undo(self) -> None:
        """Take back the last edit of the session."""
        before = self.desk.session
        self.desk.adopt(undone(before), {"undo": 1})
        if self.desk.session.case is before.case:
            self.message = "nothing to undo"
        else:
            self._edited(self.desk.session.note)

    def do_study(self) -> None:
        """Ask for a name, and make what is drawn a study of the case."""
        curve = self.peek.curve
        if curve is None:
            self.message = "nothing is solved yet"
            return
        start = "-".join(s.input.name for s in self.peek.spans)
        question = "Name of the study (letters, digits, - and _)"
        self.app.push_screen(Prompt(question, start), self._named_study)

    def _named_study(self, name: str | None) -> None:
        if not name:
            return
        if self.desk.change({"study": [name, self._study()]}):
            self._edited(f"study {name} made; u takes it back, s in the table saves the case", again=False)
        else:
            self._refused()
        self.paint()

    def _study(self) -> dict[str, object]:
        """What is drawn, as a case file says it: the values in the user's own units."""
        assert self.peek.curve is not None
        spelled = {s.input.key: s.spelled for s in self.peek.case.inputs()}
        vary = []
        for axis in reversed(self.peek.curve.axes):
            ends = (float(f"{v:.10g}") for v in (axis.values[0], axis.values[-1]))
            low, high = (respell(v, spelled.get(axis.input.key), axis.input.unit) for v in ends)
            vary.append({"input": axis.input.key, "from": low, "to": high, "points": len(axis.values)})
        return {"outputs": [self.peek.figure], "vary": vary}
