"""What moves the walk: the sensitivities in words, on the answer line, in the side pane and as a list of all inputs."""

from __future__ import annotations

from typing import TYPE_CHECKING

from cycle import noise
from cycle.quantities import OUTPUT
from tui.figures import NAN
from tui.line import BOLD, DIM, PLAIN, Line, clean, fit, line, wrap
from tui.session import Session, watched
from tui.views.headline import NAMES
from tui.views.numbers import difference, figure, offset, percent, quantity, unit

if TYPE_CHECKING:
    from cycle.sensitivity import Sensitivities, Sensitivity

SIDES = {"above": "above only", "below": "below only"}
"""Sides of a change that is none about the value -> words."""
SIGNS = {"above": "^", "below": "v"}
_LEGEND = "^ v one side only  ~ mode changes"
TOLD = 4
"""Lines on the input in hand, at most."""
STEP, FIGURE, LABEL = 13, 11, 16
"""Columns of a step and of a change, and the fewest of a label."""


def found(session: Session) -> Sensitivities | None:
    """The sensitivities to show, None before the first."""
    return session.influence.found if session.influence is not None else None


def stale(session: Session) -> bool:
    """Whether the sensitivities to show are of the case before."""
    return session.influence is not None and session.influence.generation != session.generation


def why_none(session: Session, known: Sensitivities) -> str:
    """Why no input has a sensitivity: the walk's own reason where it has no solution."""
    walk = session.figures
    lost = walk is not None and not walk.solved and not stale(session)
    return f"no sensitivities: no solution: {walk.reason}" if walk is not None and lost else f"no sensitivities: {known.why_not}"


def name(key: str) -> str:
    """Short name of a headline figure."""
    return NAMES.get(key, OUTPUT[key].label)


def step(row: Sensitivity, system: str) -> str:
    """The step of an input, signed, with its unit."""
    return offset(row.step, row.input.unit, system, row.input.key)


def change(known: Sensitivities, row: Sensitivity, key: str, system: str) -> str:
    """What the step gives of a figure, signed, without its unit; "-" where nothing is told."""
    base, moved = known.base.get(key, NAN), _of(row, key)
    return difference(key, base + noise.settled(moved, base, noise.STEP), base, system)


def _of(row: Sensitivity, key: str) -> float:
    return row.changes.get(key, NAN)


def marks(row: Sensitivity) -> str:
    """Where a change is one-sided or goes over a change of mode, "" where it is neither."""
    said = [SIDES.get(row.side, ""), "mode changes" if row.modes else ""]
    return ", ".join(s for s in said if s)


def of_input(session: Session, key: str, figures: int = 3) -> str:
    """What the step of an input gives of the first figures, or why that is not known; "" before there are sensitivities and where the
    input has none."""
    known = found(session)
    if known is None:
        return ""
    if known.why_not:
        return why_none(session, known)
    row = known.row(key)
    if row is None:
        why = known.left_out.get(key, "")
        return f"not varied: {why}" if why else ""
    if row.side == "none":
        return f"{step(row, session.system)} not told: {row.reason}"
    told = [
        f"{name(k)} {change(known, row, k, session.system)} {unit(k, session.system)}".rstrip()
        for k in known.outputs[:figures]
        if _of(row, k) == _of(row, k)
    ]
    mark = f" ({marks(row)})" if marks(row) else ""
    return f"{step(row, session.system)}{mark}: {', '.join(told)}"


def most(session: Session, wide: int, deep: int) -> list[Line]:
    """The inputs that move the watched figure most, under a heading; as many lines as asked for whatever is known."""
    key, known = watched(session), found(session)
    heading = f"| what moves {name(key)} most"
    whole = f"{heading}, {unit(key, session.system)}".rstrip(", ")
    out = [line((whole if len(whole) <= wide else fit(heading, wide), DIM if stale(session) else BOLD))]
    if known is not None and known.why_not:
        out += [line((f"| {part}", DIM)) for part in wrap(clean(why_none(session, known)).split(), wide - 2)]
    for row in known.ranked(key)[: deep - len(out)] if known is not None else ():
        right = change(known, row, key, session.system) + (f" {SIGNS[row.side]}" if row.side in SIGNS else "") if known else ""
        right += " ~" if row.modes else ""
        left = f"| {fit(clean(row.input.label), wide - len(right) - 5 - len(step(row, session.system)))} {step(row, session.system)}"
        out.append(line(left.ljust(wide - len(right)) + right))
    return [*out, *[line("|")] * (deep - len(out))][:deep]


def _outputs(known: Sensitivities, key: str, wide: int) -> tuple[str, ...]:
    """Figures with a column of their own, the watched one among them."""
    count = max(1, min(len(known.outputs), (wide - LABEL - STEP - 4) // FIGURE, 3 if wide < 100 else 4))
    first = known.outputs[:count]
    return first if key in first else (*first[:-1], key)


def _room(known: Sensitivities, key: str, wide: int) -> tuple[int, int]:
    """Columns of the label and of the bar."""
    left = wide - STEP - FIGURE * len(_outputs(known, key, wide)) - 3
    label = min(left, 34 if wide >= 100 else 26)
    return label, left - label - 1


def rows(session: Session, wide: int) -> list[tuple[str, Line]]:
    """All inputs with the watched figure's largest change first, those without a value last."""
    key, known = watched(session), found(session)
    if known is None:
        return []
    ranked = known.ranked(key)
    largest = max((abs(v) for r in ranked if (v := _of(r, key)) == v), default=0.0)
    return [(row.input.key, _row(known, row, key, wide, session.system, largest)) for row in ranked]


def _row(known: Sensitivities, row: Sensitivity, key: str, wide: int, system: str, largest: float) -> Line:
    label, bar = _room(known, key, wide)
    text = fit(clean(row.input.label), label - 1).ljust(label) + fit(step(row, system), STEP - 1).rjust(STEP - 1) + " "
    told = "".join(fit(change(known, row, k, system), FIGURE - 1).rjust(FIGURE) for k in _outputs(known, key, wide))
    mark = f" {SIGNS.get(row.side, ' ')}{'~' if row.modes else ' '}"
    size = abs(_of(row, key))
    part = round(bar * size / largest) if bar > 0 and largest > 0.0 and size == size else 0
    return line((text + told + mark + ("=" * part if bar > 1 else ""), DIM if row.side == "none" else PLAIN))


def head(session: Session, wide: int) -> list[Line]:
    """What the list shows, the heads of its columns, and what is left out of it."""
    key, known = watched(session), found(session)
    if known is None:
        return [line(("sensitivities are being solved ...", DIM))]
    if known.why_not:
        return [line((part, BOLD)) for part in wrap(clean(why_none(session, known)).split(), wide)]
    label, _ = _room(known, key, wide)
    outputs = _outputs(known, key, wide)
    first = "of the inputs before ..." if stale(session) else f"by {name(key)}"
    names = [(fit(name(k) if len(name(k)) < FIGURE else OUTPUT[k].symbol, FIGURE - 1).rjust(FIGURE), k) for k in outputs]
    units = "".join(fit(unit(k, session.system), FIGURE - 1).rjust(FIGURE) for k in outputs)
    return [
        *[line((part, DIM)) for part in wrap(left_out(known).split(), wide)[:2]],
        line(
            (fit(first, label - 1).ljust(label) + "one step".rjust(STEP - 1) + " ", DIM),
            *((n, BOLD if k == key else PLAIN) for n, k in names),
        ),
        line((fit(_LEGEND, label + STEP - 1).ljust(label + STEP) + units, DIM)),
    ]


def left_out(known: Sensitivities) -> str:
    """Inputs that are not varied, with the reason, those of one section together."""
    groups: dict[str, list[str]] = {}
    for key, why in known.left_out.items():
        section, _, rest = key.partition(".")
        groups.setdefault(why, []).append(f"{section}.*" if section == "limits" else f"{section}.{rest}")
    said = [f"{', '.join(dict.fromkeys(keys))} ({why})" for why, keys in groups.items()]
    return f"not varied: {'; '.join(said)}" if said else ""


def told(session: Session, key: str, wide: int) -> list[Line]:
    """The input in hand: its value, what the step gives of the watched figure, and what is to be known of that change."""
    known, system, output = found(session), session.system, watched(session)
    row = known.row(key) if known is not None else None
    if known is None or row is None:
        return []
    value = quantity(row.value, row.input.unit, system, 6, row.input.key)
    if row.side == "none":
        said = (f"{row.input.label} {value}, step {step(row, system)}: no change told", row.reason)
        return [line(part) for text in said for part in wrap(clean(text).split(), wide)][:TOLD]
    base = known.base[output]
    said = change(known, row, output, system)
    part = percent(base + _of(row, output), base)
    of = f"{figure(output, base, system)} {unit(output, system)}".rstrip()
    first = f"{row.input.label} {value}, {step(row, system)}: {name(output)} {said} of {of} ({part} %)"
    jump = f"the mode changes: {', '.join(row.modes)} (below, here, above)" if row.modes else ""
    second = "; ".join(s for s in (SIDES.get(row.side, ""), row.reason, jump) if s) or row.input.meaning
    return [line((part, style)) for text, style in ((first, BOLD), (second, PLAIN)) for part in wrap(clean(text).split(), wide)][:TOLD]
