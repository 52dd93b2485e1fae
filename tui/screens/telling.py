"""Pages of words: the keys, and the accounts of a walk."""

from __future__ import annotations

from cycle.quantities import OUTPUT
from tui.actions import Action, key_of, spelled
from tui.figures import Figures
from tui.keymap import path
from tui.line import BOLD, OVER, Line, clean, line, wrap
from tui.screens.page import Body, text_body
from tui.session import Session
from tui.views.numbers import quantity

LEAD = 16
"""Columns of the keys on their page."""


def keys(session: Session, faults: tuple[str, ...] = ()) -> Body:
    """All actions by group with the keys that hold, from their declarations.

    Parameters: session; faults, what is wrong with the user's own file of keys.
    """
    groups = dict.fromkeys(a.group for a in session.actions)

    def body(wide: int) -> list[Line]:
        out = [tuple((text, OVER) for text, _ in row) for row in text_body([*faults, *([f"in {path()}", ""] if faults else [])])(wide)]
        for group in groups:
            out.append(line((group, BOLD)))
            out += [row for a in session.actions if a.group == group for row in _action(a, wide)]
        return [*out, line(""), *text_body([_FIELD, _LISTS, _MARKS])(wide)]

    return body


def _action(action: Action, wide: int) -> list[Line]:
    """The keys of an action, and what it does beside them."""
    words = wrap(action.help.split(), max(8, wide - LEAD - 2))
    return [line(f"  {_all_keys(action) if i == 0 else '':<{LEAD}}{part}") for i, part in enumerate(words)]


def _all_keys(action: Action) -> str:
    """Every key of an action as printed, without the second name of a capital letter."""
    return " ".join(spelled(k) for k in action.keys if not k.startswith("shift+") or len(k) > len("shift+x"))


_FIELD = (
    "In a field: type a value with or without its unit (85 kft, 1500 psf, 2.5 MJ/kg); a bare number is in the unit "
    "shown. Enter commits, Escape leaves the value as it was. An empty field takes an optional value back. "
    "A digit on a number in hand opens its field."
)
_LISTS = (
    "Lists and pages have keys of their own, on their last line. The actions above take other keys from the file "
    "keys.toml; the command ductwalk keys prints one to start from."
)
_MARKS = "d marks a default. Values in ( ) are of the previous inputs. Not assessed is never fine."


def accounts(session: Session) -> Body:
    """The audit, the referee, where the thrust potential went, and figures without a value."""

    def body(wide: int) -> list[Line]:
        found = session.figures
        return [line("no walk yet")] if found is None else text_body(_accounts(found, session))(wide)

    return body


def _accounts(found: Figures, session: Session) -> list[str]:
    out = [f"audit {'ok' if found.audit_ok else 'FAILED'}: {found.audit}"]
    out.append(clean(session.referee) or f"Cantera check: not run; {key_of(session.actions, 'referee')} asks")
    if found.reason:
        out += ["", f"no solution: {found.reason}"]
    if found.potentials:
        out += ["", "where the thrust potential went"]
        out += [f"  {r.label}: {quantity(r.value, r.unit, session.system)}" for r in found.potentials]
    missing = [f"  {OUTPUT[key].label if key in OUTPUT else key}: {why}" for key, why in found.why_not.items() if why]
    return out + (["", "figures without a value", *missing] if missing else [])
