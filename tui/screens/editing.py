"""Editing the input in hand: in place, by steps, by choices, by another way of saying it; undo and redo."""

from __future__ import annotations

from dataclasses import replace
from functools import partial

from textual import events

from cycle.quantities import GROUP, INPUT
from cycle.units import format_number, show
from tui import items, keying, session
from tui.figures import NAN, PRESENT
from tui.items import Item
from tui.line import Line, line
from tui.screens.desk import Desk
from tui.screens.page import Answer, Page
from tui.session import Entry


class Editing(Desk, inherit_bindings=False):
    """Handlers of the editing actions."""

    def _hand(self) -> Item | None:
        """The input in hand, with the focus brought to the inputs."""
        hand = items.in_hand(self.session)
        if hand is None:
            self.put(replace(self.session, note="this station has no inputs of its own"))
        elif self.session.focus != "inputs":
            self.session = replace(self.session, focus="inputs")
        return hand

    def do_edit(self) -> None:
        """Open the input in hand."""
        hand = self._hand()
        if hand is None:
            return
        if hand.input is None:
            self.do_ways()
        elif hand.input.kind == "choice":
            self._cycle(hand, 1)
        elif hand.input.kind == "flag":
            self.put(replace(self.session, note=f"{hand.label}: o says it another way"))
        else:
            self.put(replace(self.session, entry=items.entry_for(hand, self.session), note="", faults=()))

    def do_cycle(self) -> None:
        """Next choice; a number opens."""
        self.do_edit()

    def do_more(self) -> None:
        """One step up."""
        self._step(1)

    def do_less(self) -> None:
        """One step down."""
        self._step(-1)

    def _step(self, sign: int) -> None:
        hand = self._hand()
        if hand is None or hand.input is None:
            return
        if hand.input.kind == "choice":
            self._cycle(hand, sign)
        elif isinstance(hand.value, int | float) and hand.input.kind == "number":
            value, words = items.stepped(hand, sign)
            if value is None or (self.change({"set": {hand.key: value}}, rapid=True) and words):
                self.put(replace(self.session, note=f"{hand.label}: {words}"))
        else:
            self.do_edit()

    def _cycle(self, hand: Item, sign: int) -> None:
        self.change({"set": {hand.key: items.next_choice(hand, sign)}})

    def do_default(self) -> None:
        """Take the value in hand back to its default."""
        hand = self._hand()
        if hand is None or hand.input is None:
            return
        if hand.default:
            self.put(replace(self.session, note=f"{hand.label}: holds its default"))
        else:
            self.change({"set": {hand.key: None}})

    def do_undo(self) -> None:
        """Take back the last edit."""
        self.adopt(session.undone(self.session), {"undo": 1})

    def do_redo(self) -> None:
        """Make the last undone edit again."""
        self.adopt(session.redone(self.session), {"redo": 1})

    def do_ways(self) -> None:
        """Ask in which other way the input in hand is to be said."""
        hand, case = self._hand(), self.session.case
        if hand is None or case is None:
            return
        if hand.group is None:
            self.put(replace(self.session, note=f"{hand.label} has no other way to say it"))
            return
        group = hand.group
        tags = [t for t in case.alternatives(group) if t != case.value(group)]
        answers = tuple(Answer(str(i + 1), t, self._way_words(group, t)) for i, t in enumerate(tags))
        intro = [f"Now: {hand.label} {hand.written}", "A value in [ ] is that of the present walk: the walk stays where it is."]
        body: list[Line] = [line(text) for text in intro]
        self.app.push_screen(Page(GROUP[group].meaning, lambda wide: body, answers), partial(self._switch, group))

    def _way_words(self, group: str, tag: str) -> str:
        member = next((m for m in GROUP[group].members if m.tag == tag), None)
        known = [(k, self._present(k)) for k in member.keys] if member is not None else []
        told = [_shown(k, v, self.session.system) for k, v in known if v == v]
        return f"{items.way_label(group, tag)}{' [' + ', '.join(told) + ']' if told else ''}"

    def _present(self, key: str) -> float:
        """Value of an input in the present walk, nan where it is not known."""
        found = self.session.figures
        fresh = found is not None and found.solved and self.session.settled
        return PRESENT[key](found) if fresh and found is not None and key in PRESENT else NAN

    def _switch(self, group: str, tag: str | None) -> None:
        """Say a group in another way: by the walk's value where it is known, else by a field that asks for it."""
        if not tag:
            return
        member = next((m for m in GROUP[group].members if m.tag == tag), None)
        asks = [k for k in member.keys if INPUT[k].kind != "flag"] if member is not None else []
        known = {k: self._present(k) for k in asks}
        if member is None or all(v == v for v in known.values()):
            value: object = next(iter(known.values()), None) if len(known) < 2 else known
            done = self.change({"switch": [group, tag, value]})
            if done and member is not None:
                self._take_in_hand(member.keys[0])
        elif len(asks) > 1:
            self.put(replace(self.session, note="both values are needed and no solved walk has them"))
        else:
            self._ask_for(group, tag, asks[0])

    def _ask_for(self, group: str, tag: str, key: str) -> None:
        spec = INPUT[key]
        text = spec.choices[0] if spec.choices else ""
        unit = show(1.0, spec.unit, self.session.system, key)[1] if spec.kind == "number" else ""
        entry = Entry(key, text, len(text), unit, switch=(group, tag))
        note = f"{spec.label}: {spec.meaning}"
        self.put(replace(self.session, entry=entry, note=note, faults=()))

    def _take_in_hand(self, key: str) -> None:
        here = {**self.session.inputs, self.session.station: key}
        self.put(replace(self.session, inputs=here))

    def on_key(self, event: events.Key) -> None:
        """While a field is open, keys belong to it."""
        entry = self.session.entry
        if entry is None or event.key in ("ctrl+z", "ctrl+l"):
            return
        event.stop()
        if event.key in ("escape", "ctrl+c"):
            self.put(replace(self.session, entry=None, note=""))
        elif event.key == "enter":
            self._commit(entry)
        else:
            self.put(replace(self.session, entry=keying.press(entry, event.key, event.character)))

    def on_paste(self, event: events.Paste) -> None:
        """Pasted text goes into the open field, and nowhere else."""
        event.stop()
        if self.session.entry is not None:
            self.put(replace(self.session, entry=keying.insert(self.session.entry, event.text)))

    def _commit(self, entry: Entry) -> None:
        hand = items.in_hand(self.session)
        untouched = hand is not None and entry.switch is None and entry.text == items.entry_for(hand, self.session).text
        if untouched:
            self.put(replace(self.session, entry=None, note=""))
        elif self.change(items.change_of(entry)) and entry.switch is not None:
            self._take_in_hand(entry.key)


def _shown(key: str, value: float, system: str) -> str:
    number, unit = show(value, INPUT[key].unit, system, key)
    return f"{format_number(number, 5)} {unit}".strip()
