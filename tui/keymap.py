"""Keys of one's own: `keys.toml` says which keys ask for which action of the main screen.

    [keys]
    undo = "z"
    graph = ["g", "f5"]      # several keys
    suspend = []             # none

A key is one printable character (case counts, digits type values), or a name of `NAMED`, "f1" to "f24", or "ctrl+" and a letter.
A fault costs only the entry it is in: the declared keys hold for that action.
"""

from __future__ import annotations

import os
import re
from dataclasses import dataclass
from itertools import islice

from cycle.atomic import read_file
from cycle.errors import CaseError, Fault
from cycle.errors import shown as quoted
from tui.actions import ACTIONS, Action, bound
from tui.journal import user_folder

NAMED = (
    "up", "down", "left", "right", "pageup", "pagedown", "home", "end", "insert", "delete", "backspace", "enter", "escape", "space", "tab",
    "shift+tab", "shift+up", "shift+down", "shift+left", "shift+right", "ctrl+up", "ctrl+down", "ctrl+left", "ctrl+right",
)  # fmt: skip
"""Keys that go by a name."""

SAME = {"ctrl+i": "tab", "ctrl+m": "enter", "ctrl+j": "enter", "ctrl+h": "backspace"}
"""Keys that a terminal cannot tell from another one."""

SIGNS = {
    "plus": "+", "minus": "-", "equals_sign": "=", "slash": "/", "colon": ":", "question_mark": "?", "greater_than_sign": ">",
    "less_than_sign": "<",
}  # fmt: skip
"""Signs by the names that the declarations use."""

KEPT = ("leave", "help")
"""Actions that must keep a key."""

LARGEST = 64 * 1024
"""Bytes of a file of keys that are read."""

MOST = 200
"""Entries of a file of keys that are read."""

_FUNCTION = re.compile(r"f([1-9]|1[0-9]|2[0-4])")
_CONTROL = re.compile(r"ctrl\+[a-z]")
_ALLOWED = "x, f5, ctrl+x"


@dataclass(frozen=True, slots=True)
class Keymap:
    """Actions with the keys that hold, and what is wrong with the file they come from."""

    actions: tuple[Action, ...] = ACTIONS
    faults: tuple[str, ...] = ()


def path() -> str:
    """The file of keys: `$XDG_CONFIG_HOME/ductwalk/keys.toml`, else under `~/.config`; "" where there is no home."""
    try:
        return str(user_folder("XDG_CONFIG_HOME", ".config") / "ductwalk" / "keys.toml")
    except OSError:
        return ""


def read() -> Keymap:
    """The keys of the user's own file; the declared ones where there is none. What is wrong with it comes as `faults`."""
    name = path()
    if not name or not os.path.lexists(name):
        return Keymap()
    try:
        return parse(_text(name), name)
    except OSError as error:
        return Keymap(faults=(_told(name, "", f"cannot be read: {error.strerror or error}"),))
    except UnicodeDecodeError:
        return Keymap(faults=(_told(name, "", "is no UTF-8 text"),))
    except CaseError as error:
        return Keymap(faults=(str(error),))


def _text(name: str) -> str:
    """The text of an ordinary file; nothing here waits for one that is none."""
    content, _ = read_file(name, LARGEST)
    if len(content) > LARGEST:
        raise OSError(f"it is larger than {LARGEST // 1024} kB")
    return content.decode("utf-8-sig")


def _told(name: str, key: str, text: str, given: object = None, allowed: str = "") -> str:
    """A fault on one line, by the file's last name: the page of keys says where it is."""
    return str(Fault(os.path.basename(name), key, text, "" if given is None else "[]" if given == [] else quoted(given, 20), allowed))


def parse(text: str, name: str) -> Keymap:
    """The keys that a text asks for.

    Parameters: text, TOML; name, of its file, for the faults. Returns: actions and faults. Errors: CaseError where it is no TOML.
    """
    from cycle import toml

    table = toml.tables(text, os.path.basename(name))
    faults = [_told(name, key, "no such table", None, "[keys]") for key in islice(table, MOST) if key != "keys"]
    asked = table.get("keys", {})
    if not isinstance(asked, dict):
        return Keymap(faults=(*faults, _told(name, "keys", "is no table", asked, "[keys]")))
    wanted: dict[str, tuple[str, ...]] = {}
    for action, given in islice(asked.items(), MOST):
        keys, fault = _keys(action, given)
        if fault is None:
            wanted[action] = keys
        else:
            faults.append(_told(name, action, *fault))
    if len(asked) > MOST:
        faults.append(_told(name, "keys", "has too many entries", f"{len(asked)}", f"{MOST}; the others are not read"))
    faults += [_told(name, action, *fault) for action, fault in _settle(wanted)]
    return Keymap(bound(ACTIONS, wanted), tuple(faults))


_Wrong = tuple[str, object, str]
"""Words, what is given, what is allowed."""


def _keys(action: str, given: object) -> tuple[tuple[str, ...], _Wrong | None]:
    """Keys of one entry as the screen names them, or what is wrong with it."""
    import difflib

    names = [a.name for a in ACTIONS]
    if action not in names:
        near = difflib.get_close_matches(action[:80], names, 3, 0.5)
        return (), ("no such action", None, " or ".join(near) or "those of ductwalk keys")
    listed = given if isinstance(given, list) else [given]
    if not listed and action in KEPT:
        return (), ("must keep a key", given, _ALLOWED)
    keys = []
    for key in listed:
        named = name_of(key) if isinstance(key, str) else ""
        if not named:
            return (), ("no such key", key, _ALLOWED)
        keys += [named, f"shift+{named.lower()}"] if len(named) == 1 and named.isupper() else [named]
    return tuple(dict.fromkeys(keys)), None


def name_of(key: str) -> str:
    """A key as the screen names it. Parameters: key, as in the file. Returns: "" where it is none."""
    if len(key) == 1:
        return key if key.isascii() and key.isprintable() and not key.isdigit() and key != " " else "space" if key == " " else ""
    name = key.lower()
    if name in SIGNS:
        return SIGNS[name]
    name = SAME.get(name, name)
    return name if name in NAMED or _FUNCTION.fullmatch(name) or _CONTROL.fullmatch(name) else ""


def _settle(wanted: dict[str, tuple[str, ...]]) -> list[tuple[str, _Wrong]]:
    """Take back entries whose key another action has, the later ones first, until no key asks for two actions."""
    refused: list[tuple[str, _Wrong]] = []
    while True:
        held: dict[str, str] = {}
        clash = None
        order = sorted(ACTIONS, key=lambda a: list(wanted).index(a.name) if a.name in wanted else -1)
        for action in order:
            for key in wanted.get(action.name, tuple(SIGNS.get(k, k) for k in action.keys)):
                if key in held and clash is None:
                    clash = (action.name, key, held[key])
                held.setdefault(key, action.name)
        if clash is None:
            return refused
        name, key, other = clash
        refused.append((name, (f"{other} has this key", key, "a key of its own")))
        del wanted[name]


def written(key: str) -> str:
    """A key as a file of keys says it. Parameters: key, as the screen names it."""
    return SIGNS.get(key, key)


def example() -> str:
    """The declared keys as a file of keys, each with what its action does."""
    out = ["# Keys of the main screen. Save as:", "#   $XDG_CONFIG_HOME/ductwalk/keys.toml, or ~/.config/ductwalk/keys.toml"]
    out += ["# A line that is left out keeps its keys; [] is none. Lists, pages and fields have keys of their own.", "", "[keys]"]
    group = ""
    for action in ACTIONS:
        if action.group != group:
            group = action.group
            out += ["", f"# {group}"]
        # a capital letter stands for its second name too
        keys = [written(k) for k in action.keys if not (k.startswith("shift+") and k[6:].upper() in action.keys)]
        listed = ", ".join(f'"{k}"' for k in keys)
        value = listed if len(keys) == 1 else f"[{listed}]"
        out.append(f"{f'{action.name} = {value}':<34}# {action.help}")
    return "\n".join(out) + "\n"
