"""The lines on top: the case, the headline figures with their change against the pin, the pin, the limits in words."""

from __future__ import annotations

import os

from cycle.quantities import MODES, OUTPUT
from cycle.units import format_number, show
from tui.figures import DEFECT, NAN, Figures, Margin
from tui.line import BOLD, DIM, NEAR, OVER, PLAIN, Line, clean, fit, line, width, wrap
from tui.session import Session, performance_keys
from tui.views.numbers import LIMIT_FIGURES, difference, figure, quantity, unit

NAMES = {
    "thrust": "thrust",
    "specific_impulse": "Isp",
    "specific_thrust": "per kg air",
    "overall_efficiency": "overall",
    "stream_thrust_gain": "stream-thrust gain",
    "total_temperature_rise_efficiency": "eta_dT",
    "equivalence_ratio": "phi",
}
"""Short names of headline figures; the others go by their label."""


def lines(session: Session, columns: int, height: int) -> list[Line]:
    """Four lines and a rule; fewer where the height is less."""
    if session.case is None:
        return [line((fit(clean(f"ductwalk  {os.path.basename(session.path) or 'new case'}"), columns), BOLD))]
    body = [_title(session, columns), *_figures(session, columns), _limits(session, columns)]
    if height == 1:
        return [_single(session, body[1], columns)]
    if height < 4:
        return [body[i] for i in (1, -1, 0, 2)[:height]]
    if session.failed or height < 5:
        return body[:height]
    words = "" if _rig(session) else fit(f" {_installed(session)} --", columns)
    return [*body, line((words.rjust(columns, "-"), DIM))]


def _single(session: Session, figures: Line, columns: int) -> Line:
    """The only line there is: the headline figures, and before them how many limits are over."""
    found = session.figures
    over = sum(m.state == "over" for m in found.limits) if found is not None and found.solved else 0
    mark = f"OVER {over} " if over else ""
    return line((mark, OVER), *_figures(session, columns - len(mark))[0]) if mark else figures


def _installed(session: Session) -> str:
    """What the thrust above leaves out."""
    value = session.figures.performance.get("installed_thrust", NAN) if session.figures is not None else NAN
    if value != value:
        return "uninstalled; spill drag not assessed"
    told = f"{figure('installed_thrust', value, session.system)} {unit('installed_thrust', session.system)}"
    return f"uninstalled; installed {told}, less additive and spill drag"


def _rig(session: Session) -> bool:
    return session.case is not None and session.case.choices.get("start") == "entry"


def _title(session: Session, columns: int) -> Line:
    case, found = session.case, session.figures
    assert case is not None
    right = _flight(session, found) if found is not None else ""
    mark = f" *{' NOT ON DISK' if session.unkept else ''}" if session.unsaved else ""
    room = columns - width(right) - len(mark) - 2
    left = fit(clean(case.title or case.name), max(room, 8)) + mark
    gap = max(2, columns - width(left) - width(right))
    return line((left, BOLD), " " * gap, right)


def _flight(session: Session, found: Figures) -> str:
    first = next(iter(found.stations), "0")
    state = found.stations.get(first, {})
    parts = [f"M {figure('mach', state.get('mach', float('nan')), session.system, 3)}"]
    key = "dynamic_pressure" if first == "0" else "pressure"
    label = OUTPUT[key].symbol
    parts.append(f"{label} {figure(key, state.get(key, float('nan')), session.system, 3)} {unit(key, session.system)}")
    if first == "0" and session.case is not None and session.case.value("flight.place") != "pressure":
        shown, label = show(found.altitude, "length", session.system, "flight.altitude")
        parts.append(f"z {shown:.1f} {label}")
    return "  ".join([*parts, found.mode if found.mode in MODES and found.solved else "-"])


def _figures(session: Session, columns: int) -> list[Line]:
    found = session.figures
    if found is None:
        return [line("first walk not solved yet"), line("")]
    if not found.solved:
        head = "NO FIGURES" if found.status == DEFECT else "NO SOLUTION"
        words = wrap(clean(f"{head}: {found.reason or found.status}").split(), columns)
        words = [*words[:2], fit(" ".join(words[2:]), columns)]
        return [line((w, OVER)) for w in words]
    return [_headline(session, found, columns), _against(session, columns)]


def _headline(session: Session, found: Figures, columns: int) -> Line:
    """The figures with their changes, in words where they fit, else by symbols."""
    keys = performance_keys(session)
    for digits, by_name in ((3, True), (2, True), (2, False)):
        pairs = [_figure(session, found, key, digits, by_name) for key in keys]
        if _length(pairs) <= columns:
            break
    while len(pairs) > 1 and _length(pairs) > columns:
        pairs.pop()
    return line(*(piece for words, change in pairs for piece in ((words, BOLD), (change + "  ", PLAIN))))


def _length(pairs: list[tuple[str, str]]) -> int:
    return sum(len(words) + len(change) + 2 for words, change in pairs) - 2


def _figure(session: Session, found: Figures, key: str, digits: int, by_name: bool) -> tuple[str, str]:
    """One headline figure in words, and its change against the pin with a blank before it."""
    value, system = found.performance[key], session.system
    name = NAMES.get(key, OUTPUT[key].label) if by_name else OUTPUT[key].symbol
    words = f"{name} {figure(key, value, system)} {unit(key, system)}".rstrip()
    if session.pin is None or session.pin.figures is found:
        return words, ""
    return words, f" {difference(key, value, session.pin.figures.performance[key], system, digits)}"


def verdict(words: str) -> str:
    """What the referee said, in short. Parameters: words, all it said, "" before it is asked."""
    first = clean(words.split(":")[0])
    return {"": "Cantera check: not run", "Cantera check": "Cantera check: none"}.get(first, first)


def _against(session: Session, columns: int) -> Line:
    pin = session.pin
    left = f"vs pin: {clean(pin.label)}" if pin is not None else "nothing pinned"
    right = f"{verdict(session.referee)}   {session.system.upper()}"
    left = fit(left, max(columns - len(right) - 2, 10))
    return line(left, " " * max(2, columns - width(left) - len(right)), right)


def audit_words(found: Figures) -> str:
    """The audit in a word or two."""
    return "audit ok" if found.audit_ok else "AUDIT FAILED"


MARGINS = {
    "unstart": "unstart",
    "duct_separation": "burner separation",
    "burner_separation": "burner separation",
    "isolator_length": "isolator",
    "throat_capacity": "throat",
    "attached": "attached shocks",
    "separation": "inlet separation",
    "start": "inlet start",
    "nozzle_shock": "nozzle shock",
}
"""Limits that a process gives as a margin: key, short name. They stand first, the margin in percent behind the name."""


FORMS = ((0, 0, 0), (0, 0, 4), (1, 0, 4), (1, 1, 4), (0, 2, 4), (1, 2, 4), (2, 2, 4), (3, 2, 4), (1, 4, 4), (3, 4, 4), (4, 4, 4))
"""Which words of `_told` stand for the limits over, near and not assessed: the fullest form first."""


def _in_state(found: Figures, state: str) -> list[Margin]:
    """Limits in a state, those of the flowpath's mode first."""
    order = list(MARGINS)
    return sorted((m for m in found.limits if m.state == state), key=lambda m: order.index(m.key) if m.key in order else len(order))


def _name(m: Margin) -> str:
    return MARGINS.get(m.key, m.label)


def _margin(m: Margin) -> str:
    """A limit by its short name, with its margin where it is one."""
    return f"{_name(m)} {format_number(100.0 * m.margin, 2)} %" if m.key in MARGINS else _name(m)


def _against_limit(m: Margin, system: str) -> str:
    """A limit that is over, with its margin, or with figure and limit."""
    actual, allowed = (quantity(v, m.unit, system, key=LIMIT_FIGURES.get(m.key, "")) for v in (m.actual, m.allowed))
    against = f" {actual} {'>' if m.upper else '<'} {allowed}"
    return _margin(m) if m.key in MARGINS else m.label + against


def _first(words: list[str]) -> str:
    return f"{words[0]}, {len(words) - 1} more" if len(words) > 1 else words[0]


def _told(told: list[str], names: list[str]) -> list[str]:
    """Limits in one state, the fullest words first: all told, all by name, the first told, the first by name, how many."""
    return [", ".join(told), ", ".join(names), _first(told), _first(names), str(len(told))] if told else ["none"] * 5


def _limits(session: Session, columns: int) -> Line:
    """Over, near and not assessed limits in words and the audit: the fullest form that fits the width."""
    found = session.figures
    if found is None or not found.audit:
        return line("limits and audit not assessed yet")
    states = [m.state for m in found.limits]
    by_state = {state: _in_state(found, state) for state in ("over", "near", "not assessed")}
    over = _told([_against_limit(m, session.system) for m in by_state["over"]], [_name(m) for m in by_state["over"]])
    near = _told([_margin(m) for m in by_state["near"]], [_name(m) for m in by_state["near"]])
    unknown = _told(*[[_name(m) for m in by_state["not assessed"]]] * 2)
    forms = []
    for x, y, z in FORMS:
        first = f"OVER {over[x]}" if by_state["over"] else "none over"
        forms.append(" | ".join([first, f"near: {near[y]}", f"not assessed: {unknown[z]}", audit_words(found)]))
    words = next((form for form in forms if width(form) <= columns), forms[-1])
    style = OVER if "over" in states or not found.audit_ok else NEAR if "near" in states else PLAIN
    return line((fit(clean(words), columns), style))
