"""What a wide terminal shows beside the table: limits by margin, what moves the watched figure, and where the thrust went."""

from __future__ import annotations

from tui.actions import key_of
from tui.figures import Figures, Margin
from tui.line import BOLD, DIM, NEAR, OVER, PLAIN, Line, clean, fit, line
from tui.session import Session
from tui.views import moving
from tui.views.numbers import quantity

STYLE = {"over": OVER, "near": NEAR, "ok": PLAIN, "not assessed": DIM}
LEAST, MOST = 4, 8
"""Lines of the sensitivities, their heading among them."""
FEWEST = 3
"""Lines of the limits."""


def by_margin(found: Figures) -> list[Margin]:
    """Limits with the least margin first, those not assessed last."""
    return sorted(found.limits, key=lambda m: (m.state == "not assessed", m.margin))


def margin_words(limit: Margin) -> str:
    """State of a limit, with its margin in percent where it has one."""
    return limit.state if limit.margin != limit.margin else f"{100.0 * limit.margin:+.1f} % {limit.state}"


def lines(session: Session, wide: int, height: int) -> list[Line]:
    """All three lists: the limits give way where the height is short, then where the thrust went."""
    found = session.figures
    if found is None:
        return []
    why = f"{key_of(session.actions, 'why')} tells"
    limits = _limits(found, why, wide)
    whole = height >= len(limits) + MOST + len(found.potentials) + 1
    went = _went(found, wide, session.system, whole)
    room = max(FEWEST, height - len(went) - LEAST)
    deep = max(LEAST, min(MOST, height - len(went) - len(limits)))
    return [*_cut(found, limits, room, why, wide), *moving.most(session, wide, deep), *went][:height]


def _pair(left: str, right: str, wide: int) -> str:
    return f"| {fit(clean(left), wide - len(right) - 4)}".ljust(wide - len(right)) + right


def _limits(found: Figures, why: str, wide: int) -> list[Line]:
    """A line for each assessed limit, one for all that are not."""
    known = [m for m in by_margin(found) if m.state != "not assessed"]
    rows = [line((_pair(m.label, margin_words(m), wide), STYLE[m.state])) for m in known]
    lost = len(found.limits) - len(known)
    last = [line((_pair(f"not assessed; {why} why", str(lost), wide), DIM))] if lost else []
    return [line(("| limits by margin", BOLD)), *rows, *last]


def _cut(found: Figures, rows: list[Line], room: int, why: str, wide: int) -> list[Line]:
    """The limits in fewer lines: the last one says how many more there are and the worst of their states."""
    if len(rows) <= room:
        return rows
    hidden = by_margin(found)[room - 2 :]
    states = [f"{n} {state}" for state in STYLE if (n := sum(m.state == state for m in hidden))]
    worst = next(state for state in STYLE if any(m.state == state for m in hidden))
    return [*rows[: room - 1], line((fit(f"| and {', '.join(states)}; {why}", wide), STYLE[worst]))]


def _went(found: Figures, wide: int, system: str, whole: bool) -> list[Line]:
    """Where the thrust potential went, a line a process; those that cost nothing only where there is room for the whole."""
    if not found.potentials:
        return []
    least = 1e-9 * max(abs(r.value) for r in found.potentials)
    rows = [line(_pair(r.label, quantity(r.value, r.unit, system), wide)) for r in found.potentials if whole or abs(r.value) > least]
    return [line(("| where the thrust potential went", BOLD)), *rows]
