"""A walk in plain words and tables."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Mapping
from typing import TYPE_CHECKING, Any

from cycle import noise
from cycle.glossary import ENTRY, HEAT_WORDS, PROFILE, QUIET, SHARED, mode_of, no_value, process_figure
from cycle.quantities import CAUSES, INPUT, MODES, OUTPUTS, Input, Output
from cycle.units import display_unit, format_number, show
from tui.tables import Block, Heading, Lines, Table
from tui.views.numbers import LIMIT_FIGURES

if TYPE_CHECKING:
    from cycle.case import Case, Stated
    from cycle.result import Walk

CAUTION = (
    "Preliminary-design estimate; not for hardware, test or flight-safety decisions. Local codes, the test site's rules and "
    "licensed practice govern fuels, hot high-pressure test flow and range safety; the subject may be export-controlled."
)
LEAST_SHOWN = 1e-4
"""Mole fraction from which on a species has a row."""

_ELSEWHERE = {"flight": ("stream_thrust_gain",)}
"""Figures that a case of this start never has and nobody misses."""

_NOTHING = 1e-6
"""Booked force, power or flow, SI, below which nothing crosses."""
_PROFILE_ROWS = 14
_PROFILE_SHOWN = ("x", "pressure", "temperature", "mach", "area", "core_area", "burnt", "total_pressure")


def figure(value: float, dimension: str, system: str, key: str = "") -> str:
    """A value of SI `dimension` as a number in the unit of `system` ("si" or "us"), without the unit."""
    return format_number(show(float(value), dimension, system, key)[0])


def unit_label(dimension: str, system: str, key: str = "") -> str:
    """The unit in which `figure` shows, "" for a ratio."""
    return display_unit(dimension, system, key).label


def with_unit(value: float, dimension: str, system: str, key: str = "") -> str:
    """A value with its unit, as in a sentence."""
    return f"{figure(value, dimension, system, key)} {unit_label(dimension, system, key)}".strip()


def named(label: str, dimension: str, system: str, key: str = "") -> str:
    """A row's name with the unit behind a comma."""
    unit = unit_label(dimension, system, key)
    return f"{label}, {unit}" if unit else label


def walk_blocks(walk: Walk, system: str, referee: bool, more: Iterable[Block] = ()) -> list[Block]:
    """Everything the walk of one point says, as blocks.

    walk: of shape (). system: "si" or "us". referee: whether the referee's line is asked for. more: blocks ahead of the inputs.
    """
    parts: tuple[Callable[[Walk, str], Iterable[Block]], ...] = (
        _opening, _headline, _modes, _stations, _composition, _processes, _own_figures, _along, _potentials, _losses, _exergy, _limits,
    )  # fmt: skip
    blocks = [block for part in parts for block in part(walk, system)]
    return [*blocks, *_checks(walk, referee), *more, *_inputs(walk, system), Heading("Caution"), Lines((CAUTION,))]


def headline_words(walk: Walk) -> str:
    """One sentence: the mode found, or why there is no solution."""
    if walk.status == "solved":
        return f"Solved. Mode {walk.mode}: {MODES[walk.mode]}."
    return f"NO SOLUTION, {walk.status}: {walk.reason}"


def _opening(walk: Walk, system: str) -> Iterable[Block]:
    yield Heading(walk.case.title, 1)
    yield Lines((f"Case {walk.case.name}; gas model {walk.case.choices['gas.model']}.", headline_words(walk)))
    if walk.case.notes:
        yield Lines((f"Notes: {' '.join(walk.case.notes.split())}",))


def _headline(walk: Walk, system: str) -> Iterable[Block]:
    outputs = [o for o in OUTPUTS if o.where == "performance"]
    values = {o.key: float(getattr(walk.performance, o.key)) for o in outputs}
    known = [o for o in outputs if math.isfinite(values[o.key])]
    yield Heading("Performance")
    if known:
        rows = ((o.label, o.symbol, figure(values[o.key], o.unit, system, o.key), unit_label(o.unit, system, o.key)) for o in known)
        yield Table(("", "symbol", "value", "unit"), tuple(rows), left=(1, 3))
    missing = tuple(_missing(walk, [o for o in outputs if o not in known])) if walk.status == "solved" else ("no solution",)
    yield Lines((*missing, *(note.words(system) for note in walk.notes)))


def _modes(walk: Walk, system: str) -> Iterable[Block]:
    sentences = mode_sentences(walk, system)
    if sentences:
        yield Heading("Mode and its margins")
        yield Lines(sentences)


def mode_sentences(walk: Walk, system: str) -> tuple[str, ...]:
    """How isolator and burner or throat run, with the margins of the mode and the heat at which it ends; () where nothing is matched."""
    isolator = next((p.figures for p in walk.processes if p.name == "isolator"), {})
    sentences: list[str] = []
    if walk.status == "solved" and "separated_pressure" in isolator:
        sentences += _duct_sentences(walk, isolator, system)
    elif walk.status == "unstarted":
        sentences += _unstarted_sentences(walk)
    if walk.status == "solved" and "throat_margin" in isolator:
        sentences += _throat_sentences(isolator, system)
    if walk.heat_limits:
        sentences.append(heat_sentence(walk.case, walk.heat_limits, walk.heat_limit_causes, system))
    return tuple(sentences)


def _duct_sentences(walk: Walk, isolator: Mapping[str, float], system: str) -> Iterable[str]:
    if walk.mode == "rig":
        mode = mode_of(isolator)
        yield f"The duct runs as {mode}: {MODES[mode]}."
    ratio, share = isolator["pressure_ratio"], 100.0 * isolator["core_area_ratio"]
    yield f"At burner entry p3/p2 is {format_number(ratio)} and the core fills {format_number(share, 3)} % of the duct."
    peak, limit = (format_number(isolator[key], 3) for key in ("attached_peak_pressure_ratio", "separation_limit"))
    attached = "" if math.isnan(isolator["separation_margin"]) else f" (attached peak {peak} p2, {limit} p2 separates)"
    yield f"Separation margin {_margin(isolator, 'separation_margin')}{attached}."
    train = isolator["train_length"]
    length = "" if math.isnan(train) else f" (shock train {with_unit(train, 'length', system)})"
    yield f"Isolator margin {_margin(isolator, 'isolator_margin')}{length}."
    yield f"Unstart margin {_margin(isolator, 'unstart_margin')}."


def _unstarted_sentences(walk: Walk) -> Iterable[str]:
    """The margins at which a duct unstarts, where they are known."""
    for key, words in (("unstart_margin", "Unstart margin"), ("isolator_margin", "Isolator margin")):
        margin = float(walk.march.figure("isolator", key)[0])
        if not math.isnan(margin):
            yield f"{words} {100.0 * margin:+.1f} %."
    limit = float(walk.march.figure("isolator", "separation_limit")[0])
    if not math.isnan(limit):
        yield f"A pressure ratio of {format_number(limit, 3)} separates the attached flow."


def _throat_sentences(isolator: Mapping[str, float], system: str) -> Iterable[str]:
    spilled = with_unit(isolator["spilled_flow"], "mass flow", system)
    yield f"Throat margin {_margin(isolator, 'throat_margin')}; {spilled} of air spilled."
    if not math.isnan(isolator["shock_mach"]):
        mach, ratio, recovery = (format_number(isolator[key]) for key in ("shock_mach", "shock_area_ratio", "shock_recovery"))
        place = "is expelled to station 2" if isolator["spilled_flow"] > 0.0 else f"stands at {ratio} of the area of station 2"
        yield f"The terminal shock {place}; Mach {mach} ahead of it, total-pressure ratio {recovery}."


def _margin(figures: Mapping[str, float], key: str) -> str:
    value = float(figures[key])
    return f"not assessed: {no_value(key)}" if math.isnan(value) else f"{100.0 * value:+.1f} %"


def heat_sentence(case: Case, limits: Mapping[str, float], causes: Mapping[str, str], system: str) -> str:
    """Where the modes of a duct end as its heat rises. limits, causes: `Walk.heat_limits` and `Walk.heat_limit_causes`."""
    entry = INPUT[f"combustor.{case.choices['combustor.heat']}"]
    words = [heat_limit(name, limits[name], entry, system, causes[name]) for name in HEAT_WORDS]
    known = ", ".join(w for w in words if w)
    here = with_unit(case.numbers[entry.key], entry.unit, system, entry.key)
    return f"With rising {entry.label} (here {here}): {known or 'limits not known, the heat is no fuel ratio'}."


def heat_limit(name: str, value: float, entry: Input, system: str, cause: str = "") -> str:
    """One end of a duct's heat in words, "" where it is not known. value: of the input `entry`, SI; cause: what sets it."""
    at, never, always = HEAT_WORDS[name]
    if math.isnan(value):
        return ""
    why = f" ({CAUSES.get(cause, cause)})" if cause else ""
    return never if math.isinf(value) else at.format(with_unit(value, entry.unit, system, entry.key)) + why if value > 0.0 else always


def _along(walk: Walk, system: str) -> Iterable[Block]:
    """A few rows of the flow along the duct, those where something happens among them."""
    marks = profile_marks(walk)
    if not marks:
        return
    declared = {o.key.removeprefix("profile."): o for o in PROFILE}
    shown = [declared[name] for name in _PROFILE_SHOWN]
    heads = tuple(named(o.symbol, o.unit, system) for o in shown)
    rows = []
    for row, mark in marks.items():
        values = (float(walk.profile[name][row]) for name in _PROFILE_SHOWN)
        rows.append((*(figure(v, o.unit, system) for v, o in zip(values, shown, strict=True)), mark))
    yield Heading("Along the duct, from burner entry")
    yield Table((*heads, ""), tuple(rows), left=(len(heads),))


def profile_marks(walk: Walk) -> dict[int, str]:
    """At most 14 rows of the duct's profile, evenly spaced but for those that stand for themselves -> what is there."""
    if not walk.profile:
        return {}
    x, pressure = ([float(v) for v in walk.profile[name]] for name in ("x", "pressure"))
    placed = [i for i, place in enumerate(x) if math.isfinite(place)]
    burner = next(p.figures for p in walk.processes if p.name == "burner")
    marks = {placed[0]: "", placed[-1]: "", max(placed, key=lambda i: pressure[i]): "peak"}
    for key, words in (("reattachment_x", "core fills"), ("throat_x", "throat")):
        at = float(burner[key])
        if math.isfinite(at) and at > x[placed[0]]:
            nearest = min(placed, key=lambda i: abs(x[i] - at))
            marks[nearest] = f"{marks[nearest]}, {words}" if marks.get(nearest) else words
    spare = _PROFILE_ROWS - len(marks)
    for k in range(1, spare + 1):
        target = x[placed[0]] + (x[placed[-1]] - x[placed[0]]) * k / (spare + 1)
        marks.setdefault(min(placed, key=lambda i: abs(x[i] - target)), "")
    return dict(sorted(marks.items()))


def _missing(walk: Walk, outputs: Iterable[Output]) -> Iterable[str]:
    """One sentence a reason, naming the figures that lack a value for it."""
    reasons: dict[str, list[str]] = {}
    for output in outputs:
        if output.key in _ELSEWHERE.get(walk.case.choices["start"], ()):
            continue
        reasons.setdefault(walk.why_not(output.key), []).append(output.label)
    return (f"No value for {', '.join(labels)}: {reason}" for reason, labels in reasons.items())


def reached_through(walk: Walk) -> dict[str, str]:
    """Station name -> the label of the process that ends there; the first station is where the stream enters."""
    labels = {p.end: p.label for p in walk.processes if p.start != p.end}
    first = "flight" if walk.case.choices["start"] == "flight" else "entry"
    return {name: labels.get(name, first if i == 0 else "") for i, name in enumerate(walk.station)}


def _stations(walk: Walk, system: str) -> Iterable[Block]:
    reached = reached_through(walk)
    rows = [("station", *walk.station)]
    for output in (o for o in OUTPUTS if o.where == "station"):
        values = [float(getattr(s, output.key)) for s in walk.station.values()]
        if any(math.isfinite(v) for v in values):
            cells = (figure(v, output.unit, system, output.key) for v in noise.rows(values))
            rows.append((named(output.label, output.unit, system, output.key), *cells))
    yield Heading("Stations")
    yield Table(("component", *reached.values()), tuple(rows))
    yield from _missing_at_stations(walk)


def _missing_at_stations(walk: Walk) -> Iterable[Block]:
    """One sentence a reason: the figures and the stations that lack a value for it; a rig's thrust potential is not missed."""
    found: dict[str, tuple[dict[str, None], dict[str, None]]] = {}
    for output in (o for o in OUTPUTS if o.where == "station"):
        for name, station in walk.station.items():
            flies = output.key != "thrust_potential" or walk.case.choices["start"] == "flight"
            if flies and math.isnan(float(getattr(station, output.key))):
                labels, names = found.setdefault(walk.why_not_at(name, output.key), ({}, {}))
                labels[output.label] = names[name] = None
    if found:
        yield Lines(tuple(f"No value for {', '.join(a)} at station {', '.join(b)}: {why}" for why, (a, b) in found.items()))


def _composition(walk: Walk, system: str) -> Iterable[Block]:
    names = dict.fromkeys(x for s in walk.station.values() for x in s.mole_fractions)
    rows = []
    for name in names:
        values = [float(s.mole_fractions.get(name, math.nan)) for s in walk.station.values()]
        if any(v >= LEAST_SHOWN for v in values):
            rows.append((name, *("-" if math.isnan(v) else format_number(v) if v >= LEAST_SHOWN else "0.0" for v in values)))
    if rows:
        yield Heading(f"Mole fractions ({LEAST_SHOWN:g} and more)")
        yield Table(("station", *walk.station), tuple(rows))


def _processes(walk: Walk, system: str) -> Iterable[Block]:
    rows = [("stations", *(f"{p.start} to {p.end}" for p in walk.processes))]
    for key in SHARED:
        declared = ENTRY[f"process.{key}"]
        values = noise.rows([float(p.figures.get(key, math.nan)) for p in walk.processes])
        cells = (figure(v, declared.unit, system) for v in values)
        rows.append((named(declared.label, declared.unit, system), *cells))
    if walk.processes:
        yield Heading("What each process did")
        yield Table(("process", *(p.label for p in walk.processes)), tuple(rows))


def _own_figures(walk: Walk, system: str) -> Iterable[Block]:
    """Figures that only some processes have; those that can say nothing by being zero only where they are not."""
    rows = []
    for process in walk.processes:
        name = process.label
        for key, value in process.figures.items():
            declared = process_figure(key)
            if declared is None or key in SHARED or math.isnan(value) or (key in QUIET and abs(value) < _NOTHING):
                continue
            rows.append((name, declared.label, figure(value, declared.unit, system), unit_label(declared.unit, system)))
            name = ""
    if rows:
        yield Heading("Figures of single processes")
        yield Table(("process", "", "value", "unit"), tuple(rows), left=(1, 3))


def _rows(rows: Iterable[Any], system: str) -> Table:
    rows = tuple(rows)
    cells = ((r.label, figure(float(r.value), r.unit, system), unit_label(r.unit, system)) for r in rows)
    return Table(("", "value", "unit"), tuple(cells), left=(2,))


def _potentials(walk: Walk, system: str) -> Iterable[Block]:
    if walk.potentials:
        yield Heading("Where the thrust comes from and goes (changes of thrust potential)")
        yield _rows(walk.potentials, system)


def _assessed(title: str, name: str) -> Callable[[Walk, str], Iterable[Block]]:
    def part(walk: Walk, system: str) -> Iterable[Block]:
        rows = getattr(walk, name)
        yield Heading(title)
        yield _rows(rows, system) if rows else Lines((f"Not assessed: {walk.why_not(name)}",))

    return part


_losses = _assessed("Losses against the ideal engine", "losses")
_exergy = _assessed("Exergy", "exergy")


def _limits(walk: Walk, system: str) -> Iterable[Block]:
    ordered = sorted(walk.limits, key=lambda limit: (math.isnan(limit.margin), limit.margin))
    yield Heading("Limits, least margin first")
    yield Lines(tuple(limit_words(limit, system) for limit in ordered) or ("none apply",))


def limit_words(limit: Any, system: str) -> str:
    """A limit as a sentence: its state, what is, what is allowed, the margin, and where it matters what would restore it."""
    if limit.state == "not assessed":
        return f"not assessed: {limit.label}: {limit.restore}"
    actual, allowed = (with_unit(v, limit.unit, system, LIMIT_FIGURES.get(limit.key, "")) for v in (limit.actual, limit.allowed))
    bound = "at most" if limit.upper else "at least"
    note = f" ({limit.note})" if limit.note else ""
    words = f"{_STATES[limit.state]}: {limit.label}: {actual}, {bound} {allowed}{note}, margin {100 * limit.margin:+.1f} %"
    return words if limit.state == "ok" else f"{words}; to restore it: {limit.restore}"


_STATES = {"ok": "ok", "near": "near", "over": "OVER"}


def _checks(walk: Walk, referee: bool) -> Iterable[Block]:
    sentences = [audit_words(walk)]
    if referee:
        words = walk.referee().words
        sentences.append(f"{words[0].upper()}{words[1:]}.")
    yield Heading("Audit")
    yield Lines(tuple(sentences))


def audit_words(walk: Walk) -> str:
    """The audit as a sentence with its worst residual."""
    audit = walk.audit
    if not audit.rows:
        return "Audit: nothing to check, no process was solved."
    worst = audit.worst
    verdict = "ok" if audit.ok else "FAILED"
    return f"Audit {verdict}: largest relative residual {float(worst.value):.1e} ({worst.law}, {worst.where}), allowed 1e-9."


def _inputs(walk: Walk, system: str) -> Iterable[Block]:
    stated = [s for s in walk.case.inputs() if s.value is not None]
    yield Heading("Inputs as solved (d: default, not stated in the case)")
    yield Table(("", "value", "unit", ""), tuple(_input_row(s, system) for s in stated), left=(2, 3))


def _input_row(stated: Stated, system: str) -> tuple[str, str, str, str]:
    entry, mark = stated.input, "" if stated.given else "d"
    return entry.key, input_text(entry, stated.value, system), _input_unit(entry, system), mark


def _input_unit(entry: Input, system: str) -> str:
    return unit_label(entry.unit, system, entry.key) if entry.kind == "number" else ""


def input_text(entry: Input, value: Any, system: str) -> str:
    """The value of an input without its unit: a number, a word, yes or no, or fractions; "-" for None."""
    if value is None:
        return "-"
    if entry.kind == "number":
        return figure(value, entry.unit, system, entry.key)
    if isinstance(value, Mapping):
        return ", ".join(f"{name} {format_number(x)}" for name, x in value.items())
    return ("yes" if value else "no") if isinstance(value, bool) else str(value)
