"""All limits as a list, the closest first, and what is to be known of the one in hand."""

from __future__ import annotations

from typing import TYPE_CHECKING

from cycle.units import respell, show
from tui.actions import key_of
from tui.figures import Margin
from tui.line import BOLD, DIM, Line, clean, fit, line, wrap
from tui.session import Session
from tui.views.numbers import LIMIT_FIGURES, quantity
from tui.views.side import STYLE, by_margin, margin_words

if TYPE_CHECKING:
    from cycle.case import Case
    from cycle.limit_solving import Reached

MARGIN, AGAINST = 17, 30
"""Columns of the margin with its state, and of actual against allowed."""


def limit(session: Session, key: str) -> Margin | None:
    """A limit by its key."""
    found = session.figures
    return next((m for m in found.limits if m.key == key), None) if found is not None else None


def against(m: Margin, system: str) -> str:
    """Actual against allowed, the unit once; "" where nothing is known."""
    key = LIMIT_FIGURES.get(m.key, "")
    actual, allowed = (quantity(v, m.unit, system, 4, key) for v in (m.actual, m.allowed))
    if actual == allowed == "-":
        return ""
    dimension = show(1.0, m.unit, system, key)[1]
    actual = actual if allowed == "-" else actual.removesuffix(f" {dimension}")
    return f"{actual} {'of at most' if m.upper else 'of at least'} {allowed}"


def rows(session: Session, wide: int) -> list[tuple[str, Line]]:
    """All limits with the least margin first, those not assessed last."""
    found = session.figures
    return [(m.key, _row(m, session.system, wide)) for m in by_margin(found)] if found is not None else []


def _row(m: Margin, system: str, wide: int) -> Line:
    side = min(AGAINST, max(0, wide - MARGIN - 24))
    room = max(8, min(wide - MARGIN - side, 46))
    text = fit(clean(m.label), room - 1).ljust(room) + margin_words(m).rjust(MARGIN - 1) + " "
    return line((text, STYLE[m.state]), (fit(f" {against(m, system)}", max(0, wide - len(text))) if side else "", STYLE[m.state]))


def head(session: Session, wide: int) -> list[Line]:
    """The audit, the referee, and why there is no solution."""
    found = session.figures
    if found is None:
        return [line(("no walk yet", DIM))]
    audit = f"audit {'ok' if found.audit_ok else 'FAILED'}: {found.audit}" if found.audit else "audit not made yet"
    out = [line((fit(clean(audit), wide), STYLE["ok" if found.audit_ok else "over"]))]
    out.append(
        line(
            (
                fit(
                    clean(session.referee) or f"Cantera check: not run; {key_of(session.actions, 'referee')} on the main screen asks", wide
                ),
                DIM,
            )
        )
    )
    for note in found.notes:
        out += [line((part, STYLE["near"])) for part in wrap(clean(note.words(session.system)).split(), wide)[:3]]
    if not found.solved:
        out += [line((part, STYLE["over"])) for part in wrap(clean(f"no solution: {found.reason}").split(), wide)[:3]]
    return out


def told(session: Session, key: str, wide: int, state: str) -> list[Line]:
    """The limit in hand: what restores it or why it is not assessed, and what a search of it is doing. state: words of the search."""
    m = limit(session, key)
    if m is None:
        return []
    missing = m.state == "not assessed"
    first = f"{m.label}: {margin_words(m)}{'' if missing else f'; {against(m, session.system)}'}"
    why = f"{'not assessed: ' if missing else ''}{m.restore}"
    return [line((fit(clean(text), wide), style)) for text, style in ((first, BOLD), (why, STYLE["ok"]), (state, DIM))]


def found_words(session: Session, case: Case, found: Reached) -> list[str]:
    """What a search found, in the session's units, each sentence by itself."""
    m, spec, system = limit(session, found.limit), found.input, session.system
    label = m.label if m is not None else found.limit
    value, now = (quantity(v, spec.unit, system, 6, spec.key) for v in (found.value, found.now))
    left = f"{100.0 * found.margin:+.3g} %"
    first = {
        "zero": f"{spec.label} {value} gives margin 0; now {now}",
        "jump": f"At {spec.label} {value} the margin jumps over zero; it is {left} there. Now {now}",
        "edge": f"The limit is not reached: beyond {spec.label} {value} ({left}) {found.words}. Now {now}",
        "none": found.words,
    }[found.kind]
    return [label, first]


def written(case: Case, found: Reached) -> object:
    """The value as an edit takes it, spelled in the unit that the case's own value has."""
    stated = next((s for s in case.inputs() if s.input.key == found.input.key), None)
    return respell(found.value, stated.spelled if stated is not None else None, found.input.unit)


def numbers(session: Session, wide: int, text: str) -> list[tuple[str, Line]]:
    """Number inputs with a value, narrowed down by a text."""
    if session.case is None:
        return []
    out = []
    for s in session.case.inputs():
        words = f"{s.input.label} {s.input.key} {s.input.symbol}"
        if s.input.kind == "number" and isinstance(s.value, int | float) and text.lower() in words.lower():
            value = quantity(float(s.value), s.input.unit, session.system, 6, s.input.key)
            label = fit(clean(s.input.label), 33).ljust(34)
            out.append((s.input.key, line(fit(f"{label}{value.ljust(20)} {s.input.key}", wide))))
    return out
