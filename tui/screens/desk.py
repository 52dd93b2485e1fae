"""What every part of the main screen shares: the session, how it is changed, solved and painted."""

from __future__ import annotations

import asyncio
from collections.abc import Callable
from dataclasses import replace
from time import monotonic
from typing import Any

from cycle.errors import CaseError
from tui import figures, items, session
from tui.actions import key_of
from tui.engine import Engine
from tui.journal import Journal
from tui.screens.overlay import Steady
from tui.session import ASSESSING, SOLVING, Change, Session

PAINT_EVERY = 0.25
"""Seconds between two paints while a step key is held."""

MOMENT = 0.05
"""Seconds that a single edit waits for its walk, so that both are one paint, before it is painted without."""

PATIENCE = 0.1
"""Seconds that a step waits for its walk before it is painted without."""

SLOW = 0.5
"""Seconds after which a solve is announced."""

HELD = 0.25
"""Seconds between two steps up to which the key counts as held; sensitivities wait until it has rested for as long."""


def fault_words(error: CaseError, beside: str = "") -> tuple[str, ...]:
    """Faults of an edit in words, without the file's name, and without the key of the field they stand beside."""
    out = []
    for fault in error.faults:
        parts = [f"given {fault.given}" if fault.given else "", f"allowed {fault.allowed}" if fault.allowed else ""]
        told = "; ".join(p for p in parts if p)
        key = f"{fault.key}: " if fault.key and fault.key != beside else ""
        out.append(f"{key}{fault.text}{': ' + told if told else ''}")
    return tuple(out)


class Desk(Steady[None], inherit_bindings=False):
    """The session and the ways to change it. The parts of the main screen are made from this one."""

    def __init__(self, path: str, engine: Engine, journal: Journal) -> None:
        super().__init__()
        self.session = Session(path)
        self.engine = engine
        self.journal = journal
        self._rapid = False
        self._painted = 0.0
        self._later: asyncio.TimerHandle | None = None
        self._slow: asyncio.TimerHandle | None = None
        self._held = False
        self._stepped = 0.0
        self._rest: asyncio.TimerHandle | None = None

    def action_do(self, name: str) -> None:
        """Run an action of `tui.actions`. The main screen says how."""
        raise NotImplementedError

    def open_case(self, path: str) -> None:
        """Leave the present case and read another. The part that knows files does it."""
        raise NotImplementedError

    def case_read(self, got: Any) -> None:
        """A case was read and is being solved. got: `tui.screens.filing.Read`. The parts that wait for it say what they do."""

    def case_left(self) -> None:
        """Another case takes the place of the one here. The parts that have something of the old one drop it."""

    def case_named(self) -> None:
        """The case has another file now."""

    def paint(self) -> None:
        """Paint the session. The main screen says how."""
        raise NotImplementedError

    def tell_defect(self, words: str) -> None:
        """Say that something went wrong inside; the session stays as it is."""
        self.put(replace(self.session, faults=(words,)))

    def put(self, new: Session) -> None:
        """Take a session and paint it at once."""
        self.session = new
        self.paint_now()

    def paint_now(self) -> None:
        """Paint, and forget a paint that waits."""
        if self._later is not None:
            self._later.cancel()
            self._later = None
        self._painted = monotonic()
        if self.session.unkept != self.journal.failure:
            self.session = replace(self.session, unkept=self.journal.failure)
        self.paint()

    def after(self, seconds: float, what: Callable[[], None]) -> asyncio.TimerHandle:
        """Call `what` after some time. The library's own timers skip a call that comes late, as one does on a stalled link."""
        return asyncio.get_running_loop().call_later(seconds, self.call_later, what)

    def _paint_within(self, seconds: float) -> None:
        if self._later is None:
            self._later = self.after(seconds, self._due)

    def _due(self) -> None:
        """Paint, where no other paint came first."""
        if self._later is not None:
            self.paint_now()

    def change(self, change: Change, rapid: bool = False) -> bool:
        """Make an edit: a new session, a record in the journal, a solve. A refused edit puts its faults into the open
        field or on the answer line and changes nothing else.

        Parameters: change, see `tui.session`; rapid, whether it may come many times a second. Returns: whether it held.
        """
        old = self.session.case
        if old is None:
            return False
        try:
            case = session.apply(old, change)
        except CaseError as error:
            self._refused(fault_words(error, self.session.entry.key if self.session.entry is not None else ""))
            return False
        words = items.describe(old, case, change, self.session.system)
        back = session.came_back(old, case)
        self.adopt(session.edited(self.session, case, words), {"edit": change, **({"back": back} if back else {})}, rapid)
        return True

    def _refused(self, faults: tuple[str, ...]) -> None:
        entry = self.session.entry
        if entry is not None:
            self.put(replace(self.session, entry=replace(entry, fault=" | ".join(faults), fresh=False)))
        else:
            self.put(replace(self.session, faults=(" | ".join(faults),)))

    def adopt(self, new: Session, record: dict[str, object], rapid: bool = False) -> None:
        """Take a session whose case changed: journal it, solve it, paint it."""
        changed = new.generation != self.session.generation
        self.session = new
        if changed:
            self.journal.append(record if self.journal.knows(record) else self._whole())
            self.solve()
        self._rapid = rapid and changed
        if changed:
            self._held, self._stepped = rapid and monotonic() - self._stepped < HELD, monotonic()
        if self._rapid:
            self._paint_within(max(PATIENCE, self._painted + PAINT_EVERY - monotonic()))
        elif changed:
            self._paint_within(MOMENT)
        else:
            self.paint_now()

    def _whole(self) -> dict[str, object]:
        """The record of an undo or redo that goes back behind a save: the whole case."""
        from cycle.case.document import edited

        assert self.session.case is not None
        return {"edit": {"case": edited(self.session.case.text, self.session.case)}}

    def solve(self) -> None:
        """Ask the worker for the walk of the present case."""
        case = self.session.case
        if case is None:
            return
        self.engine.newest("solve", self.session.generation, lambda: figures.solve(case))
        if self._slow is not None:
            self._slow.cancel()
        self._slow = self.after(SLOW, self._announce)

    def _announce(self) -> None:
        found = self.session.figures
        waits = not self.session.settled or (found is not None and not found.assessed)
        if waits and not self.session.note:
            self.put(replace(self.session, note=ASSESSING if self.session.settled else SOLVING))

    def came(self, generation: int, found: figures.Figures) -> None:
        """Take a walk that the worker solved or assessed; a stale one is dropped. A solved one is assessed and weighed next, when it
        is painted: the second lane would hold the paint up. While a key is held, paints are spaced."""
        new = session.with_figures(self.session, generation, found)
        if new is self.session:
            return
        self.session = new
        if not found.assessed:
            self.call_after_refresh(self._second_pass, generation, found)
        elif self._slow is not None:
            self._slow.cancel()
        self.paint_spaced()

    def ask_heat_limits(self) -> None:
        """Ask for the heat at which the modes of a duct end, unless it is known: a search that costs many solutions, so a page asks for
        it and no edit waits for it."""
        found, case = self.session.figures, self.session.case
        wanted = case is not None and case.value("combustor.process") == "duct" and self.session.borders is None
        if wanted and found is not None and found.walk is not None and self.session.settled:
            self.engine.newest("borders", self.session.generation, lambda: figures.heat_limits(found))

    def paint_spaced(self) -> None:
        """Paint what a thread gave: at once, or spaced while a step key is held."""
        wait = self._painted + PAINT_EVERY - monotonic()
        if self._rapid and wait > 0.0:
            self._paint_within(wait)
        else:
            self.paint_now()

    def _second_pass(self, generation: int, found: figures.Figures) -> None:
        """Ask for what costs more than the walk: limits and audit, then the sensitivities."""
        if generation != self.session.generation:
            return
        self.engine.newest("assess", generation, lambda: figures.assess(found))
        if self._rest is not None:
            self._rest.cancel()
        if self._held:
            self._rest = self.after(HELD, lambda: self._weigh(generation, found))
        else:
            self._weigh(generation, found)

    def _weigh(self, generation: int, found: figures.Figures) -> None:
        if generation == self.session.generation:
            self.engine.newest("influence", generation, lambda: figures.influence(found))

    def _to_input(self, key: str) -> bool:
        """Bring an input to hand, or the way in which it is said now. Returns: whether there is one."""
        case = self.session.case
        for there in items.ways_now(case, key) if case is not None else ():
            station = items.home(self.session, there)
            at = replace(self.session, station=station, inputs={**self.session.inputs, station: there}, focus="inputs")
            if any(i.key == there for i in items.items(at)):
                words = "" if there == key else f"{key} is another way to say it: {key_of(self.session.actions, 'ways')} changes the way"
                self.put(replace(at, note=words))
                return True
        return False
