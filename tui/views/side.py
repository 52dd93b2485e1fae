"""What a wide terminal shows beside the table: limits by margin and where the thrust went."""

from __future__ import annotations

from tui.figures import Figures, Margin
from tui.line import BOLD, DIM, NEAR, OVER, PLAIN, Line, clean, fit, line
from tui.session import Session
from tui.views.numbers import quantity

STYLE = {"over": OVER, "near": NEAR, "ok": PLAIN, "not assessed": DIM}


def by_margin(found: Figures) -> list[Margin]:
    """Limits with the least margin first, those not assessed last."""
    return sorted(found.limits, key=lambda m: (m.state == "not assessed", m.margin))


def margin_words(limit: Margin) -> str:
    """State of a limit, with its margin in percent where it has one."""
    return limit.state if limit.margin != limit.margin else f"{100.0 * limit.margin:+.1f} % {limit.state}"


def lines(session: Session, wide: int, height: int) -> list[Line]:
    """Both lists, the limits cut first where the height is short."""
    found = session.figures
    if found is None:
        return []
    went = _went(found, wide, session.system)
    room = max(3, height - len(went) - 1)
    return [*_limits(found, wide)[:room], line(""), *went][:height]


def _pair(left: str, right: str, wide: int) -> str:
    return f"| {fit(clean(left), wide - len(right) - 4)}".ljust(wide - len(right)) + right


def _limits(found: Figures, wide: int) -> list[Line]:
    rows = [line((_pair(m.label, margin_words(m), wide), STYLE[m.state])) for m in by_margin(found)]
    return [line(("| limits by margin", BOLD)), *rows]


def _went(found: Figures, wide: int, system: str) -> list[Line]:
    if not found.potentials:
        return []
    rows = [line(_pair(r.label, quantity(r.value, r.unit, system), wide)) for r in found.potentials]
    return [line(("| where the thrust potential went", BOLD)), *rows]
