"""Editing the input in hand: in place, by steps, by choices, by another way of saying it; undo and redo."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from contextlib import suppress
from dataclasses import replace
from typing import TYPE_CHECKING

from textual import events

from cycle.errors import CaseError
from cycle.quantities import GROUP, INPUT
from cycle.units import format_number, show
from tui import items, keying, rows, session, starts
from tui.actions import key_of
from tui.figures import NAN, PRESENT, Figures
from tui.items import Item
from tui.screens.desk import Desk
from tui.screens.page import Answer, Page, text_body
from tui.session import Entry

if TYPE_CHECKING:
    from cycle.case import Case

_LETTERS = "123456789abcdefghijklmnop"
"""Keys of the answers to a question with many."""
BEGINS = "0123456789."
"""Characters that open the field of the number in hand."""
_WAYS = (
    "A value in [ ] is that of the present walk: the walk stays where it is. Where more is needed beside it, start values are filled in."
)


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
            self.put(replace(self.session, note=f"{hand.label}: {key_of(self.session.actions, 'ways')} says it another way"))
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

    def do_more_ten(self) -> None:
        """Ten steps up."""
        self._step(10)

    def do_less_ten(self) -> None:
        """Ten steps down."""
        self._step(-10)

    def _step(self, steps: int) -> None:
        hand = self._hand()
        if hand is None or hand.input is None:
            return
        if hand.input.kind == "choice":
            self._cycle(hand, 1 if steps > 0 else -1)
        elif isinstance(hand.value, int | float) and hand.input.kind == "number":
            value, words = items.stepped(hand, steps)
            if value is None or (self._set(hand.key, value, rapid=True) and words):
                self.put(replace(self.session, note=f"{hand.label}: {words}"))
        else:
            self.do_edit()

    def _set(self, key: str, value: object, rapid: bool = False, beside: Mapping[str, object] | None = None) -> bool:
        """Give an input or a cell a value, and what hangs on it. Returns: whether it held."""
        case = self.session.case
        if case is None:
            return False
        change = items.completed({"set": {key: value}}, case, beside or {})
        held = self.change(change, rapid)
        if held and rows.place_of(key) is not None and len(change["set"]) > 1 and not rapid:
            self.put(replace(self.session, note=f"{', '.join(sorted(k.partition('.')[2] for k in change['set'] if k != key))}: follow"))
        return held

    def _cycle(self, hand: Item, sign: int) -> None:
        """The next choice, with start values for what it needs and what was set aside does not give."""
        choice = items.next_choice(hand, sign)
        beside = self._beside(hand.key, choice)
        case = self.session.case
        if case is not None and any(key in case.aside for key in beside):
            own = {key: value for key, value in beside.items() if key not in case.aside}
            with suppress(CaseError):
                case.replace({hand.key: choice, **own})
                beside = own
        self._set(hand.key, choice, beside=beside)

    def _beside(self, name: str, tag: str) -> Mapping[str, object]:
        """Start values of what a way or a choice needs beside itself."""
        case = self.session.case
        return starts.of(case, self._fresh(), name, tag) if case is not None else {}

    def do_default(self) -> None:
        """Take the value in hand back to its default."""
        hand = self._hand()
        if hand is None or hand.input is None:
            return
        if hand.default:
            self.put(replace(self.session, note=f"{hand.label}: holds its default"))
        else:
            self._set(hand.key, None)

    def do_add_row(self) -> None:
        """One row more behind the one in hand."""
        self._rows(rows.more)

    def do_remove_row(self) -> None:
        """The row in hand gone."""
        self._rows(rows.less)

    def _rows(self, edit: Callable[[Case, str], tuple[dict[str, object], str]]) -> None:
        hand, case = self._hand(), self.session.case
        if hand is None or case is None:
            return
        if rows.place_of(hand.key) is None:
            self.put(replace(self.session, note=f"{hand.label} stands in no row"))
            return
        changes, key = edit(case, hand.key)
        if self.change({"set": changes}) and self.session.case is not None:
            self._take_in_hand(rows.others(key)[0] if rows.hidden(self.session.case, key) and rows.others(key) else key)

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
        if rows.others(hand.key):
            self._other_cell(hand, rows.others(hand.key)[0])
            return
        ways = [(g, t) for g in items.groups_of(case, hand) for t in case.alternatives(g) if t != case.value(g)]
        if not ways:
            self.put(replace(self.session, note=f"{hand.label} has no other way to say it"))
            return
        answers = tuple(Answer(_LETTERS[i], str(i), self._way_words(group, tag)) for i, (group, tag) in enumerate(ways))
        intro = [f"Now: {hand.label} {hand.written}", _WAYS]
        meaning = ", ".join(GROUP[name].meaning for name in dict.fromkeys(group for group, _ in ways))
        self.app.push_screen(Page(meaning, text_body(intro), answers), lambda at: self._switch(*ways[int(at)]) if at else None)

    def _other_cell(self, hand: Item, key: str) -> None:
        """Say an area of a duct section as a ratio or the other way round; the area at burner entry is the walk's."""
        found, value = self._fresh(), hand.value
        entry = found.at("3", "area") if found is not None else NAN
        if entry != entry or not isinstance(value, int | float):
            self.put(replace(self.session, note="no solved walk of these inputs to say it the other way"))
            return
        ratio = key.endswith("_ratio")
        if self._set(key, float(f"{value / entry if ratio else value * entry:.10g}")):
            self._take_in_hand(key)

    def _way_words(self, group: str, tag: str) -> str:
        member = next((m for m in GROUP[group].members if m.tag == tag), None)
        known = [(k, self._present(k)) for k in member.keys] if member is not None else []
        told = [_shown(k, v, self.session.system) for k, v in known if v == v]
        return f"{items.way_label(group, tag)}{' [' + ', '.join(told) + ']' if told else ''}"

    def _fresh(self) -> Figures | None:
        """Figures of the solved walk of these inputs, None where there is none."""
        found = self.session.figures
        return found if found is not None and found.solved and self.session.settled else None

    def _present(self, key: str) -> float:
        """Value of an input in the present walk, nan where it is not known."""
        found = self._fresh()
        return PRESENT[key](found) if found is not None and key in PRESENT else NAN

    def _switch(self, group: str, tag: str) -> None:
        """Say a group in another way: by the walk's values or by start values, else by a field that asks for it."""
        case = self.session.case
        assert case is not None
        member = next((m for m in GROUP[group].members if m.tag == tag), None)
        beside = self._beside(group, tag)
        asks = [k for k in member.keys if INPUT[k].kind != "flag" and k not in beside] if member is not None else []
        known = {k: self._present(k) for k in asks}
        if member is None or all(v == v for v in known.values()):
            value: object = next(iter(known.values()), None) if len(known) < 2 else known
            done = self.change(items.completed({"switch": [group, tag, value]}, case, beside))
            if done and member is not None:
                first = member.keys[0]
                self._take_in_hand(first if INPUT[first].kind != "rows" else f"{first}.1.{INPUT[first].columns[0].key}")
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
        station = items.home(self.session, key)
        self.put(replace(self.session, station=station, inputs={**self.session.inputs, station: key}))

    def typed_in_field(self, entry: Entry, event: events.Key) -> None:
        """While a field is open, keys belong to it."""
        if event.key in ("escape", "ctrl+c"):
            self.put(replace(self.session, entry=None, note=""))
        elif event.key == "enter":
            self._commit(entry)
        else:
            self.put(replace(self.session, entry=keying.press(entry, event.key, event.character)))

    def typed_over(self, event: events.Key) -> None:
        """A digit on a number in hand opens its field and types over."""
        hand = items.in_hand(self.session)
        begins = event.character is not None and event.character in BEGINS and self.session.focus == "inputs"
        if begins and hand is not None and hand.input is not None and hand.input.kind == "number":
            entry = keying.press(items.entry_for(hand, self.session), event.key, event.character)
            self.put(replace(self.session, entry=entry, note="", faults=()))

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
        elif self._committed(entry) and entry.switch is not None:
            self._take_in_hand(entry.key)

    def _committed(self, entry: Entry) -> bool:
        case = self.session.case
        if entry.switch is None:
            return self._set(entry.key, items.typed(entry))
        return case is not None and self.change(items.completed(items.change_of(entry), case, self._beside(*entry.switch)))


def _shown(key: str, value: float, system: str) -> str:
    number, unit = show(value, INPUT[key].unit, system, key)
    return f"{format_number(number, 5)} {unit}".strip()
