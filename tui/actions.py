"""Every action of the main screen, declared once: bindings, the line of keys and the help screen follow from here."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace


@dataclass(frozen=True, slots=True)
class Action:
    """One thing a user can ask for.

    name: the handler is `do_<name>` of the screen, and the id that a keymap uses; keys: names of keys; shown: the keys
    as printed; label: a word or two for the line of keys, "" to leave it out there; rank: which go first where the line is
    short; help: one line; pair: another action whose key stands beside it on the line of keys; in_hand: the rank while the inputs
    have the focus, where that is another one.
    """

    name: str
    keys: tuple[str, ...]
    shown: str
    label: str
    help: str
    group: str
    rank: int = 2
    pair: str = ""
    in_hand: int | None = None


WALK, EDIT, ASK, COMPARE, FILE, PROGRAM = "walking", "editing", "asking", "comparing", "case file", "program"

ACTIONS: tuple[Action, ...] = (
    Action("upstream", ("left",), "left", "", "one station upstream, in the table and in the inputs", WALK),
    Action("downstream", ("right",), "right", "", "one station downstream, in the table and in the inputs", WALK),
    Action("up", ("up",), "up", "", "the row above, or the input before", WALK),
    Action("down", ("down",), "down", "", "the row below, or the next input", WALK),
    Action("page_up", ("pageup",), "PgUp", "", "rows of the table a page up", WALK),
    Action("page_down", ("pagedown",), "PgDn", "", "rows of the table a page down", WALK),
    Action("first", ("home",), "Home", "", "the first station", WALK),
    Action("last", ("end",), "End", "", "the last station", WALK),
    Action("focus", ("tab", "shift+tab"), "Tab", "inputs", "between the table and the inputs of the component in hand", WALK, 1),
    Action("table", ("escape",), "Esc", "", "back to the table; in a field: leave the value as it was", WALK),
    Action("edit", ("enter",), "Enter", "edit", "open the selected input; a choice goes on to its next one", EDIT, 1),
    Action("cycle", ("space",), "Space", "", "next choice of the selected input", EDIT),
    Action("more", ("plus", "equals_sign"), "+ -", "step", "one step up, by the step declared for the input", EDIT, 2, "less", in_hand=1),
    Action("less", ("minus",), "-", "", "one step down", EDIT),
    Action("more_ten", ("greater_than_sign",), ">", "", "ten steps up", EDIT),
    Action("less_ten", ("less_than_sign",), "<", "", "ten steps down", EDIT),
    Action("ways", ("o",), "o", "other way", "say the same by another quantity; the walk keeps its value", EDIT, 3),
    Action("add_row", ("a",), "a", "add row", "one duct section, injector or ramp more, behind the one in hand", EDIT, 3),
    Action("remove_row", ("x",), "x", "", "the duct section, injector or ramp in hand gone", EDIT),
    Action("default", ("delete",), "Del", "", "take the value back: the default holds, or none", EDIT),
    Action("undo", ("u",), "u", "undo", "take back the last edit, without end", EDIT, 2, in_hand=1),
    Action("redo", ("U", "shift+u"), "U", "redo", "bring back an edit taken back", EDIT, 4),
    Action("peek", ("g",), "g", "graph", "draw the watched figure against the selected input; a second makes a map", ASK, 2, in_hand=2),
    Action("explain", ("e",), "e", "explain", "the selected figure or input: meaning, equation with numbers", ASK, 1, in_hand=2),
    Action("influence", ("i",), "i", "influence", "the inputs that move the watched figure most, each by its own step", ASK),
    Action("watch", ("y",), "y", "", "watch the next figure: thrust, specific impulse ...; graphs and influence follow it", ASK),
    Action("plots", ("l",), "l", "plots", "lines of this walk: along the duct, temperature-entropy, enthalpy-velocity", ASK),
    Action("went", ("f",), "f", "losses", "from the ideal thrust to this one: what each process cost", ASK),
    Action("find", ("slash",), "/", "find", "find an input or a figure by name or symbol and go there", ASK, 2),
    Action("palette", ("colon", "ctrl+p"), ":", "", "any action by name", ASK),
    Action("pin", ("p",), "p", "pin", "pin this walk: changes are shown against it", COMPARE, 1, in_hand=2),
    Action("pin_from", ("P", "shift+p"), "P", "", "pin another: a case, a stored walk, a moment of this session", COMPARE),
    Action("compare", ("c",), "c", "compare", "this walk beside the pinned one; where the difference comes from", COMPARE, 1, in_hand=1),
    Action("view", ("v",), "v", "change", "cells as figures, as change against the pin, as change in percent", COMPARE, 3),
    Action("why", ("w",), "w", "limits", "limits by margin and what restores them, audit, referee, thrust", COMPARE, 1),
    Action("duct", ("d",), "d", "duct", "the flow along the duct, and the heat at which it leaves each regime", COMPARE, 3),
    Action("referee", ("r",), "r", "referee", "ask an independent equilibrium code about the states", COMPARE, 3),
    Action("units", ("t",), "t", "units", "SI or US customary", COMPARE, 3),
    Action("save", ("s",), "s", "save", "save the case; comments and order of the file stay", FILE, 2),
    Action("browse", ("b",), "b", "cases", "the cases of this folder with their figures: open, copy, rename, delete, notes", FILE),
    Action("save_as", ("S", "shift+s"), "S", "", "save under another name", FILE),
    Action("redraw", ("ctrl+l",), "Ctrl-L", "", "paint the whole screen afresh", PROGRAM),
    Action("suspend", ("ctrl+z",), "Ctrl-Z", "", "suspend to the shell; fg comes back", PROGRAM),
    Action("help", ("question_mark", "f1"), "?", "keys", "this list of keys", PROGRAM, 0),
    Action("interrupt", ("ctrl+c",), "Ctrl-C", "", "in a field: leave the value as it was; else says how to leave", PROGRAM),
    Action("leave", ("q", "ctrl+q"), "q", "leave", "leave; unsaved work is kept and offered next time", PROGRAM, 0),
)  # fmt: skip

NO_KEY = "unbound"
"""Name that stands for the key of an action that has none; no terminal sends it."""

SPELLED = {
    "pageup": "PgUp", "pagedown": "PgDn", "delete": "Del", "escape": "Esc", "backspace": "Backspace", "insert": "Ins", "up": "up",
    "down": "down", "left": "left", "right": "right", "question_mark": "?", "slash": "/", "colon": ":", "plus": "+", "minus": "-",
    "equals_sign": "=", "greater_than_sign": ">", "less_than_sign": "<",
}  # fmt: skip
"""Names of keys -> as printed, where that is not the name with capitals."""


def spelled(key: str) -> str:
    """A key as printed: "ctrl+l" is Ctrl-L. Parameters: key, a name of `Action.keys`. Returns: "none" where there is no key."""
    if key == NO_KEY:
        return "none"
    if len(key) == 1:
        return key
    *held, last = key.split("+")
    word = SPELLED.get(last, last.upper() if len(last) == 1 or last[1:].isdigit() else last.capitalize())
    return "-".join([*(h.capitalize() for h in held), word])


def bound(actions: Iterable[Action], keys: dict[str, tuple[str, ...]]) -> tuple[Action, ...]:
    """Actions with other keys.

    Parameters: actions, as declared; keys, name of an action -> names of its keys, () for none. Returns: them all, the printed keys
    following.
    """
    actions = tuple(actions)
    first = {a.name: spelled((keys.get(a.name, a.keys) or (NO_KEY,))[0]) for a in actions}
    out = []
    for a in actions:
        given = keys.get(a.name)
        moved = given is not None or a.pair in keys
        shown = f"{first[a.name]} {first[a.pair]}" if a.pair else first[a.name]
        out.append(replace(a, keys=a.keys if given is None else given or (NO_KEY,), shown=shown) if moved else a)
    return tuple(out)


def key_of(actions: Iterable[Action], name: str) -> str:
    """The printed key of one action. Parameters: actions; name, of one of them. Errors: KeyError."""
    return {a.name: spelled(a.keys[0]) for a in actions}[name]
