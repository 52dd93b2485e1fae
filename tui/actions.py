"""Every action of the main screen, declared once: bindings, the line of keys and the help screen follow from here."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Action:
    """One thing a user can ask for.

    name: the handler is `do_<name>` of the screen, and the id that a keymap uses; keys: names of keys; shown: the keys
    as printed; label: a word or two for the line of keys, "" to leave it out there; rank: which go first where the line is
    short; help: one line.
    """

    name: str
    keys: tuple[str, ...]
    shown: str
    label: str
    help: str
    group: str
    rank: int = 2


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
    Action("edit", ("enter",), "Enter", "edit", "open the input in hand; a choice goes on to its next one", EDIT, 1),
    Action("cycle", ("space",), "Space", "", "next choice of the input in hand", EDIT),
    Action("more", ("plus", "equals_sign"), "+ -", "step", "one step up, by the step declared for the input", EDIT, 1),
    Action("less", ("minus",), "-", "", "one step down", EDIT),
    Action("ways", ("o",), "o", "other way", "say the same by another quantity; the walk keeps its value", EDIT),
    Action("add_row", ("a",), "a", "add row", "one duct section, injector or ramp more, behind the one in hand", EDIT, 3),
    Action("remove_row", ("x",), "x", "", "the duct section, injector or ramp in hand gone", EDIT),
    Action("default", ("delete",), "Del", "", "take the value back: the default holds, or none", EDIT),
    Action("undo", ("u",), "u", "undo", "take back the last edit, without end", EDIT, 1),
    Action("redo", ("U", "shift+u"), "U", "redo", "bring back an edit taken back", EDIT),
    Action("peek", ("g",), "g", "graph", "draw the watched figure against the input in hand; a second input makes a map", ASK, 1),
    Action("explain", ("e",), "e", "explain", "what the figure or input in hand is, its equation with this walk's numbers", ASK, 1),
    Action("influence", ("i",), "i", "influence", "the inputs that move the watched figure most, each by its own step", ASK),
    Action("watch", ("y",), "y", "", "watch the next figure: thrust, specific impulse ...; graphs and influence follow it", ASK),
    Action("plots", ("l",), "l", "plots", "lines of this walk: along the duct, temperature-entropy, enthalpy-velocity", ASK),
    Action("went", ("f",), "f", "losses", "from the ideal thrust to this one: what each process cost", ASK),
    Action("find", ("slash",), "/", "find", "find an input or a figure by name or symbol and go there", ASK, 2),
    Action("palette", ("colon", "ctrl+p"), ":", "", "any action by name", ASK),
    Action("pin", ("p",), "p", "pin", "pin this walk: changes are shown against it", COMPARE, 1),
    Action("pin_from", ("P", "shift+p"), "P", "", "pin another: a case, a stored walk, a moment of this session", COMPARE),
    Action("compare", ("c",), "c", "compare", "this walk beside the pinned one and others, and where the difference comes from", COMPARE),
    Action("view", ("v",), "v", "change", "cells as figures, as change against the pin, as change in percent", COMPARE),
    Action("why", ("w",), "w", "limits", "limits by margin and what restores them, audit, referee, thrust", COMPARE),
    Action("duct", ("d",), "d", "duct", "the flow along the duct, and the heat at which it leaves each regime", COMPARE),
    Action("referee", ("r",), "r", "referee", "ask an independent equilibrium code about the states", COMPARE),
    Action("units", ("t",), "t", "units", "SI or US customary", COMPARE),
    Action("save", ("s",), "s", "save", "save the case; comments and order of the file stay", FILE, 1),
    Action("browse", ("b",), "b", "cases", "the cases of this folder with their figures: open, copy, rename, delete, notes", FILE),
    Action("save_as", ("S", "shift+s"), "S", "", "save under another name", FILE),
    Action("redraw", ("ctrl+l",), "Ctrl-L", "", "paint the whole screen afresh", PROGRAM),
    Action("suspend", ("ctrl+z",), "Ctrl-Z", "", "suspend to the shell; fg comes back", PROGRAM),
    Action("help", ("question_mark", "f1"), "?", "keys", "this list of keys", PROGRAM, 0),
    Action("interrupt", ("ctrl+c",), "Ctrl-C", "", "in a field: leave the value as it was; else says how to leave", PROGRAM),
    Action("leave", ("q", "ctrl+q"), "q", "leave", "leave; unsaved work is kept and offered next time", PROGRAM, 0),
)  # fmt: skip
