"""From a sized walk to the fixed flowpath that it amounts to: a new case whose areas, angles and lengths no longer follow the flight.

Performance inlets end at an area, nozzles and throats get areas, ducts square metres, inlets by geometry a lip. What has no fixed
geometry of its own is refused with the reason. Nothing is taken on trust: the fixed case is solved and must return the sized walk.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator

import numpy as np

from cycle.arrays import Array
from cycle.case import Case, loads
from cycle.case.document import edited
from cycle.case.schema import LONGEST_TITLE
from cycle.errors import CaseError, Fault
from cycle.flow import inlet_shape
from cycle.result import Walk, solve
from cycle.units import format_number

Changes = dict[str, object]
"""Key of an input -> new value, as `Case.replace` takes them."""
Refusal = tuple[str, str, str, str]
"""Key, what is wrong, given, allowed."""

SAME = 1e-6
"""Relative difference up to which a station of the fixed case is that of the sized one: far above rounding, far below another solution."""

_SUFFIX = " (fixed)"
_COMPARED = ("pressure", "temperature", "velocity", "area")


def fixed_case(walk: Walk) -> Case:
    """The fixed flowpath of a sized walk, as a new case that can be flown at other conditions.

    walk: one solved point (shape ()). What becomes fixed: a performance inlet's end (`inlet.contraction_ratio`), the lip, ramp lengths
    and throat area of an inlet by geometry, a sized throat (`nozzle.throat_area`; the terminal shock then finds its own
    place), the burner exit, duct areas (m2), the nozzle exit, the entry of a rig. The x = 0 row of a duct stays that of its entry.
    Flown slower than where its waves meet the lip, an inlet by geometry keeps its throat area; faster, waves pass into the cowl and
    the model's throat narrows with the stream at the lip.
    Returns: the case, without a path, `text` ready for a file; the walk's own case where nothing is left to fix.
    Errors: CaseError, one line a reason, where the walk has several points or no solution, where a part of it has no fixed geometry,
    or where the fixed case does not return the sized walk within 1e-6.
    Source: definitions of the areas, A = m/(rho u); plane geometry for the lip.
    """
    case = walk.case
    _raise(case, _unsolved(walk))
    _raise(case, (r for rule in _REFUSALS for r in rule(walk)))
    changes: Changes = {}
    for part in _PARTS:
        changes |= part(walk)
    if not changes:
        return case
    fixed = _new_case(case, {**changes, "title": _title(case), "notes": _notes(walk)})
    _raise(case, _differs(walk, solve(fixed)))
    return fixed


def _raise(case: Case, refusals: Iterator[Refusal]) -> None:
    faults = [Fault(case.path or case.name, *r) for r in refusals]
    if faults:
        raise CaseError(faults)


def _new_case(case: Case, changes: Changes) -> Case:
    """The changed case, read back from its own text: it belongs to no file yet."""
    name = case.name if case.name == "-" else f"{case.name}-fixed"
    return loads(edited(case.text, case.replace(changes)), name)


def _title(case: Case) -> str:
    return case.title[: LONGEST_TITLE - len(_SUFFIX)] + _SUFFIX


def _notes(walk: Walk) -> str:
    case = walk.case
    name = "" if case.name == "-" else f" ({case.name})"
    line = f'Fixed flowpath of "{case.title}"{name}, sized at {_condition(walk)}.'
    return "\n".join(part for part in (case.notes.rstrip(), line, _lip_note(walk)) if part) + "\n"


def _condition(walk: Walk) -> str:
    first = next(iter(walk.station.values()))
    air = f"{format_number(first.pressure, 5)} Pa, {format_number(first.temperature, 5)} K"
    return f"Mach {format_number(first.mach, 5)}, {air}"


def _lip_note(walk: Walk) -> str:
    return "The lip is where the waves of that condition put it." if _lip(walk) else ""


# what is refused


def _unsolved(walk: Walk) -> Iterator[Refusal]:
    if walk.shape != ():
        yield "", "a flowpath is fixed at one point", f"{walk.size} points", "one"
    elif walk.status != "solved":
        yield "", f"there is no walk to fix: {walk.reason}", walk.status, "a solved case"


def _open_burner(walk: Walk) -> Iterator[Refusal]:
    if walk.case.choices["combustor.process"] == "constant-pressure":
        text = "the area of a constant-pressure burner follows its heat: it has no fixed shape"
        yield "combustor.process", text, "constant-pressure", "constant-area, pressure-loss or duct"


def _through_sonic(walk: Walk) -> Iterator[Refusal]:
    end = walk.case.choices.get("combustor.exit", "same-area")
    if end == "same-area":
        return
    before, behind = walk.station["3"].mach, walk.station["4"].mach
    if (before > 1.0) != (behind > 1.0):
        given = f"Mach {format_number(before)} to {format_number(behind)}"
        yield f"combustor.{end}", "the burner passes Mach 1 on the way: its areas do not say where", given, "one side of Mach 1"


def _subsonic_end(walk: Walk) -> Iterator[Refusal]:
    end = walk.case.choices.get("inlet.end")
    if end is not None and walk.station["2"].mach <= 1.0:
        text = "a contraction holds only a supersonic end: behind a shock the throat decides the Mach number"
        yield (
            f"inlet.{end}",
            text,
            f"Mach {format_number(walk.station['2'].mach)} at 2",
            "above 1, or an inlet by geometry with terminal_shock",
        )


def _unmatched_throat(walk: Walk) -> Iterator[Refusal]:
    """A given throat moves a shock between the stations 2 and 3: it needs a supersonic stream at 2 and no duct."""
    choices = walk.case.choices
    if choices.get("nozzle.throat") != "sized" or _terminal(walk.case) or list(_subsonic_end(walk)):
        return
    given = "a rig" if choices["start"] == "entry" else f"combustor.process = {choices['combustor.process']}"
    yield "nozzle.throat", "a throat can be given only behind a supersonic inlet throat", given, "an inlet by geometry with terminal_shock"


def _no_lip(walk: Walk) -> Iterator[Refusal]:
    case = walk.case
    if case.choices.get("inlet.compression") == "isentropic_ramp":
        text = "a curved ramp has no lip: what it captures away from its own Mach number is not known"
        yield "inlet.isentropic_ramp.turning", text, "isentropic_ramp", "ramp or cone"
    if case.choices.get("inlet.compression") != "ramp" or case.choices["inlet.lip"] == "lip":
        return
    lengths = _lengths(case)
    if lengths and None in lengths and any(lengths):
        text = "some ramps have a length and others none"
        yield "inlet.ramp", text, f"{len(lengths) - lengths.count(None)} of {len(lengths)}", "all but the last, or none"
    elif not all(math.isfinite(v) for v in _lip(walk).values() if isinstance(v, float)):
        yield (
            "inlet.ramp",
            "the first wave meets no other ahead of the lip",
            "these lengths",
            "longer ramps, or inlet.lip_x and inlet.lip_y",
        )


_REFUSALS: tuple[Callable[[Walk], Iterator[Refusal]], ...] = (
    _open_burner, _through_sonic, _subsonic_end, _unmatched_throat, _no_lip,
)  # fmt: skip


# what is fixed


def _terminal(case: Case) -> bool:
    return case.choices.get("inlet.terminal") == "terminal_shock"


def _end_of_compression(walk: Walk) -> Changes:
    end = walk.case.choices.get("inlet.end", "contraction_ratio")
    if end == "contraction_ratio":
        return {}
    return {"inlet.contraction_ratio": walk.station["0"].area / walk.station["2"].area}


def _lengths(case: Case) -> list[float | None]:
    """Lengths of all ramps but the last, m."""
    return [ramp.get("length") for ramp in case.rows["inlet.ramp"][:-1]]


def _waves(walk: Walk, count: int) -> Array:
    """Wave angles from the stream ahead of each, (count, 1), rad."""
    figures = next(p.figures for p in walk.processes if p.name == "external compression")
    return np.array([[figures[f"wave_angle_{k + 1}"]] for k in range(count)])


def _ramp_lip(walk: Walk) -> Changes:
    """Lip of given ramps, or lip and ramps whose waves all meet: as wide as the planar duct, or square."""
    case = walk.case
    turns, known = np.array([[ramp["angle"]] for ramp in case.rows["inlet.ramp"]]), [v for v in _lengths(case) if v is not None]
    waves = _waves(walk, len(turns))
    if known:
        x, y = inlet_shape.lip_of_waves(turns, np.array(known)[:, None], waves)
        return {"inlet.lip_x": float(x[0]), "inlet.lip_y": float(y[0])}
    capture = case.numbers["engine.capture_area"]
    height = capture / case.numbers.get("combustor.width", math.sqrt(capture))
    shape = inlet_shape.shape_on_lip(turns, waves, np.array([height]))
    lengths = {f"inlet.ramp.{k}.length": float(v[0]) for k, v in enumerate(inlet_shape.ramp_lengths(shape), 1)}
    return {**lengths, "inlet.lip_x": float(shape.lip_x[0]), "inlet.lip_y": height}


def _cone_lip(walk: Walk) -> Changes:
    """Lip on the shock of the cone, on a circle of the capture area."""
    radius = math.sqrt(walk.case.numbers["engine.capture_area"] / math.pi)
    return {"inlet.lip_x": radius / math.tan(float(_waves(walk, 1)[0, 0])), "inlet.lip_y": radius}


_LIP: dict[str, Callable[[Walk], Changes]] = {"ramp": _ramp_lip, "cone": _cone_lip}


def _lip(walk: Walk) -> Changes:
    choices = walk.case.choices
    return _LIP[choices["inlet.compression"]](walk) if choices.get("inlet.lip") == "none" else {}


def _inlet_throat(walk: Walk) -> Changes:
    if walk.case.choices.get("inlet.quality") != "geometry" or "inlet.throat_area" in walk.case.numbers:
        return {}
    return {"inlet.throat_area": walk.station["2"].area}


def _burner_exit(walk: Walk) -> Changes:
    if walk.case.choices.get("combustor.exit", "same-area") in ("same-area", "exit_area_ratio"):
        return {}
    return {"combustor.exit_area_ratio": walk.station["4"].area / walk.station["3"].area}


def _duct_areas(walk: Walk) -> Changes:
    rows = walk.case.rows.get("combustor.area", ())
    open_ = {n: row["area_ratio"] for n, row in enumerate(rows, 1) if "area_ratio" in row and row["x"] > 0.0}
    return {f"combustor.area.{n}.area": ratio * _duct_entry(walk) for n, ratio in open_.items()}


def _duct_entry(walk: Walk) -> float:
    """Area of the duct where it begins, m2: at 3 the stream may be the core of a separated flow."""
    area: float = walk.station["2" if "2" in walk.station else "3"].area
    return area


def _throat(walk: Walk) -> Changes:
    if walk.case.choices.get("nozzle.throat") != "sized":
        return {}
    return {"nozzle.throat_area": walk.station["5"].area, "inlet.terminal_shock": None}


def _exit(walk: Walk) -> Changes:
    case, end = walk.case, walk.case.choices["nozzle.exit"]
    in_flight = case.choices["start"] == "flight"
    key = "nozzle.exit_area_over_capture" if in_flight else "nozzle.exit_area_ratio"
    if end == "absent" or f"nozzle.{end}" == key:
        return {}
    return {key: walk.station["10"].area / (case.numbers["engine.capture_area"] if in_flight else walk.station["4"].area)}


def _entry(walk: Walk) -> Changes:
    if walk.case.choices.get("entry.size") != "mass_flow":
        return {}
    return {"entry.area": walk.station[walk.case.choices["entry.station"]].area}


_PARTS: tuple[Callable[[Walk], Changes], ...] = (
    _entry, _end_of_compression, _lip, _inlet_throat, _burner_exit, _duct_areas, _throat, _exit,
)  # fmt: skip


def _differs(walk: Walk, again: Walk) -> Iterator[Refusal]:
    """The first station where the fixed case is not the sized one; station 2 lies ahead of a terminal shock that found its place."""
    if again.status != "solved":
        yield "", f"the fixed flowpath has no solution at its own design point: {again.reason}", again.status, "a solved case"
        return
    if any("exit_shock_pressure" in p.figures for p in again.processes) and walk.case.choices["nozzle.exit"] == "exit_pressure":
        given = format_number(walk.case.numbers["nozzle.exit_pressure"])
        yield "nozzle.exit_pressure", "at its own area the ambient pressure drives a shock into the nozzle", given, "a higher exit pressure"
        return
    moved = {"2"} if _terminal(walk.case) else set()
    for name in (n for n in walk.station if n not in moved):
        for key in _COMPARED:
            sized, fixed = walk.station[name][key], again.station[name][key]
            if not abs(fixed - sized) <= SAME * abs(sized):
                given = f"{key} at {name} {format_number(fixed, 8)} in place of {format_number(sized, 8)}"
                yield "", "the fixed flowpath has another solution at its design point", given, "the sized walk"
                return
