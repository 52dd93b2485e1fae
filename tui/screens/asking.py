"""Questions about a figure: what it is and where it comes from, where it stands, and any action by its name."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import replace
from functools import partial
from typing import TYPE_CHECKING

from textual import events

from cycle.quantities import OUTPUT
from tui import figures, finding, keymap, tracing
from tui.actions import ACTIONS, Action, key_of
from tui.crash import defect
from tui.engine import Result
from tui.keymap import Keymap
from tui.line import BOLD, DIM, Line, clean, fit, line, width
from tui.screens.desk import Desk
from tui.screens.roster import Choice, Roster, Verb
from tui.screens.tracer import Tracer
from tui.tracing import Place

if TYPE_CHECKING:
    pass

FIND = (Verb("enter", "Enter", "goes there"), Verb("f2", "F2", "explains"), Verb("tab", "", ""))
RUN = (Verb("enter", "Enter", "runs it"),)


def by_key(actions: Iterable[Action]) -> dict[str, str]:
    """Key -> name of the action that it asks for."""
    return {key: a.name for a in actions for key in a.keys}


class Asking(Desk, inherit_bindings=False):
    """Handlers of these actions, and the keys of one's own."""

    _tracer: Tracer | None = None
    _action_of: Mapping[str, str] = by_key(ACTIONS)
    key_faults: tuple[str, ...] = ()

    def take_keys(self) -> None:
        """Read the user's own keys and let them hold; what is wrong with them is told with the case."""
        try:
            found = keymap.read()
        except Exception as error:
            found = Keymap(faults=(str(defect(error)),))
        self.key_faults = found.faults
        if found.actions is not self.session.actions:
            self.session = replace(self.session, actions=found.actions)
            self._action_of = by_key(found.actions)

    def asked(self, event: events.Key) -> str:
        """Name of the action that a key asks for, "" where it asks for none."""
        found = self._action_of.get(event.key)
        return found or self._action_of.get(event.character or "", "")

    def tell_keys(self) -> None:
        """Say what is wrong with the user's own keys, on one line."""
        if self.key_faults and not self.session.faults:
            more = f" (+{len(self.key_faults) - 1}: {key_of(self.session.actions, 'help')})" if len(self.key_faults) > 1 else ""
            self.put(replace(self.session, faults=(self.key_faults[0] + more,)))

    def do_explain(self) -> None:
        """Explain the figure or the input in hand."""
        self._explain(tracing.in_hand(self.session))

    def _explain(self, place: Place) -> None:
        self._tracer = tracer = Tracer(lambda: self.session, self._ask, place)
        self.app.push_screen(tracer.screen(), self._traced)
        tracer.look()

    def _ask(self, place: Place) -> None:
        """Have the worker put the walk's numbers into an equation."""
        found = self.session.figures
        if found is not None and found.walk is not None:
            walk = found.walk
            self.engine.newest("explain", self.session.generation, lambda: (place, walk, tracing.worked(place, walk)))

    def explained(self, result: Result) -> None:
        """Show the numbers of the figure that is explained."""
        if self._tracer is not None:
            self._tracer.took(*result.value)

    def came(self, generation: int, found: figures.Figures) -> None:
        """A new walk: what is explained is explained anew."""
        super().came(generation, found)
        if self._tracer is not None:
            self._tracer.look()

    def _traced(self, answer: tuple[str, str] | None) -> None:
        tracer, self._tracer = self._tracer, None
        verb, name = answer or ("", "")
        if tracer is not None and verb == "t":
            self._go(tracer.place_of(name))
        elif verb == "slash":
            self.do_find()

    def do_find(self) -> None:
        """Find anything that has a name."""
        everywhere = finding.everything(self.session)
        known = {f.name: f for f in everywhere}

        def rows(wide: int, text: str) -> list[Choice]:
            hits = [*finding.at_stations(self.session, text), *finding.ranked(everywhere, text)]
            known.update((f.name, f) for f in hits)
            return [Choice(f.name, _found(f, wide)) for f in {f.name: f for f in hits}.values()]

        def told(name: str, wide: int) -> list[Line]:
            return [line((fit(clean(f"{known[name].place.key}: {known[name].meaning}"), wide), DIM))]

        def done(answer: tuple[str, str] | None) -> None:
            verb, name = answer or ("", "")
            if verb:
                (self._go if verb == "enter" else self._explain)(known[name].place)

        self.app.push_screen(Roster("Find", rows, FIND, told=told, typing=True), done)

    def do_palette(self) -> None:
        """Any action by name."""
        actions = [a for a in self.session.actions if a.name != "palette"]

        def rows(wide: int, text: str) -> list[Choice]:
            return [Choice(a.name, _action(a, wide)) for a in _named(actions, text)]

        def done(answer: tuple[str, str] | None) -> None:
            verb, name = answer or ("", "")
            if verb:
                self.action_do(name)

        self.app.push_screen(Roster("Actions", rows, RUN, typing=True), done)

    def action_do(self, name: str) -> None:
        """Run an action. The main screen says how."""
        raise NotImplementedError

    def _go(self, place: Place) -> None:
        """Bring the cursor to a figure or an input; what has no place on the main screen is explained."""
        from tui.views.table import ROWS

        limit = next((m for m in self._limits() if f"limit.{m.key}" == place.key and m.input), None)
        spec = OUTPUT.get(place.key)
        process = place.where.partition(",")[0].rpartition(" to ")[2] if place.key.startswith("process.") else ""
        if spec is not None and spec.where == "station":
            self.put(replace(self.session, station=place.station, row=ROWS.index(place.key), focus="table"))
        elif process:
            self.put(replace(self.session, station=process, focus="table"))
        elif limit is not None:
            self._to_input(limit.input)
        elif not self._to_input(place.key):
            self._explain(place)

    def _limits(self) -> tuple[figures.Margin, ...]:
        return self.session.figures.limits if self.session.figures is not None else ()


def _found(found: finding.Found, wide: int) -> Line:
    """One thing found: symbol, name, value, what it is."""
    kind = fit(clean(found.kind), 18)
    size = 20 if wide >= 60 else 13
    value = fit(clean(found.value), size)
    room = max(8, min(wide - 10 - size - (20 if wide >= 60 else 0), 48))
    style = DIM if found.rank == 6 else BOLD
    text = f"{fit(found.symbol, 8):<9} {_padded(fit(clean(found.label), room), room)}"
    return line((text, style), f"{value:>{size}}", (f"  {kind}", DIM))


def _padded(text: str, room: int) -> str:
    return text + " " * (room - width(text))


def _action(action: Action, wide: int) -> Line:
    name = action.name.replace("_", " ")
    return line((f"{fit(action.shown, 8):<9}{fit(name, 13):<14}", BOLD), fit(action.help, max(4, wide - 23)))


def _named(actions: list[Action], text: str) -> list[Action]:
    """Actions that a text means: by key, by the beginning of the name, then by words of name and help."""
    text = text.strip().lower()
    if not text:
        return actions
    ways: tuple[Callable[[Action], bool], ...] = (
        lambda a: text in (a.shown.lower(), a.label),
        lambda a: a.name.replace("_", " ").startswith(text) or a.label.startswith(text),
        partial(_has, text.split()),
        lambda a: text in a.help.lower(),
    )
    ranks = ((next((n for n, way in enumerate(ways) if way(a)), len(ways)), i, a) for i, a in enumerate(actions))
    return [a for n, _, a in sorted(ranks, key=lambda r: r[:2]) if n < len(ways)]


def _has(words: list[str], action: Action) -> bool:
    there = f"{action.name.replace('_', ' ')} {action.label} {action.help}".lower().split()
    return all(any(t.startswith(w) for t in there) for w in words)
