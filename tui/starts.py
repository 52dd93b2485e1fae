"""What another way or another choice needs beside itself: start values from the present walk where it has them.

A case that changes to an inlet by geometry, to a duct or to a lip needs several values at once. They are chosen so that the
walk stays near where it is, and can be edited like any others.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, Any

from tui.figures import NAN, PRESENT, Figures

if TYPE_CHECKING:
    from cycle.case import Case

Changes = dict[str, Any]
Start = Callable[["Case", Figures | None], Changes]

RAMPS, TURN = 3, "5 deg"
"""First ramps, and the turn of each."""
CONE, CURVED = "10 deg", "15 deg"
"""Half angle of a first cone, and turning of a first curved ramp."""
STRETCH = 5.0
"""Length of a first isolator over its hydraulic diameter."""
DUCT = 1.0
"""Length of a first duct, m."""
UNDER = 0.999
"""Height of a first lip over that at which the waves meet."""
COMPRESSION = 4.0
"""Temperature ratio where no walk has one."""
NO_LIP = {"inlet.lip_x": None, "inlet.lip_y": None}


def _known(found: Figures | None, key: str, otherwise: float) -> float:
    """The walk's value of an input, rounded to what a person would write."""
    value = PRESENT[key](found) if found is not None else NAN
    return float(f"{value:.6g}") if value == value else otherwise


def _area(found: Figures | None, station: str, otherwise: float) -> float:
    value = found.at(station, "area") if found is not None else NAN
    return value if value == value else otherwise


def _ramps(case: Case, found: Figures | None) -> Changes:
    """Equal ramps; the lip of another shape goes."""
    dropped = NO_LIP if case.value("inlet.lip") == "lip" else {}
    return {"inlet.ramp": [{"angle": TURN} for _ in range(RAMPS)], **dropped}


def _cone(case: Case, found: Figures | None) -> Changes:
    return {"inlet.cone.half_angle": CONE, **(NO_LIP if case.value("inlet.lip") == "lip" else {})}


def _curved(case: Case, found: Figures | None) -> Changes:
    return {"inlet.isentropic_ramp.turning": CURVED}


def _end(case: Case, found: Figures | None) -> Changes:
    """An inlet by performance needs an end of its compression; one by geometry has none."""
    if case.value("inlet.quality") != "geometry":
        return {}
    return {"inlet.temperature_ratio": _known(found, "inlet.temperature_ratio", COMPRESSION)}


def _lip(case: Case, found: Figures | None) -> Changes:
    """The lip in the waves of the present walk: next to nothing is spilled."""
    outside = next((p.figures for p in found.passages if p.name == "external compression"), {}) if found is not None else {}
    waves = [value for key, value in outside.items() if key.startswith("wave_angle_")]
    if not waves:
        return {}
    return _LIP[str(case.value("inlet.compression"))](case, waves)


def _placed(x: float, y: float) -> Changes:
    """A lip just under where the waves meet, so that no rounding lets them cross in the stream it takes."""
    return {"inlet.lip_x": round(x, 5), "inlet.lip_y": round(UNDER * y, 5)}


def _cone_lip(case: Case, waves: list[float]) -> Changes:
    from math import pi, sqrt, tan

    height = sqrt(case.numbers["engine.capture_area"] / pi)
    return _placed(height / tan(waves[0]), height)


def _ramp_lip(case: Case, waves: list[float]) -> Changes:
    """Where the first two waves of ramps with lengths meet; ramps without get the lengths that bring all waves to the lip, at
    the height that takes the capture area on a width of 1 m."""
    import numpy as np

    from cycle.flow import inlet_shape

    rows = case.rows["inlet.ramp"]
    turns, angles = np.array([[row["angle"]] for row in rows]), np.array(waves)[:, None]
    lengths = [row.get("length", NAN) for row in rows[:-1]]
    if lengths and all(length == length for length in lengths):
        x, y = inlet_shape.lip_of_waves(turns, np.array(lengths)[:, None], angles)
        return _placed(float(x[0]), float(y[0]))
    shape = inlet_shape.shape_on_lip(turns, angles, np.array([case.numbers["engine.capture_area"]]))
    found = inlet_shape.ramp_lengths(shape)[:, 0].tolist()
    return {
        **_placed(float(shape.lip_x[0]), float(shape.lip_y[0])),
        **{f"inlet.ramp.{i}.length": round(length, 5) for i, length in enumerate(found, 1)},
    }


_LIP: dict[str, Callable[[Case, list[float]], Changes]] = {"ramp": _ramp_lip, "cone": _cone_lip}


def _isolator(case: Case, found: Figures | None) -> Changes:
    """A round one of the area of station 2."""
    diameter = (4.0 * _area(found, "2", 0.01) / 3.141592653589793) ** 0.5
    return {"isolator.length": float(f"{STRETCH * diameter:.3g}")}


def _side(case: Case, found: Figures | None) -> Changes:
    """A square one, unless a hydraulic diameter says its sides."""
    known = case.value("isolator.hydraulic_diameter") is not None
    return {} if known else {"isolator.width": float(f"{_area(found, '2', 0.01) ** 0.5:.3g}")}


def _duct(case: Case, found: Figures | None) -> Changes:
    """Straight from the burner's entry area to its exit area, all fuel at the entry."""
    ratio = max(1.0, _known(found, "combustor.exit_area_ratio", 1.0))
    rows = [{"x": 0.0, "area_ratio": 1.0}, {"x": DUCT, "area_ratio": ratio}]
    return {"combustor.area": rows, "combustor.injector": [{"x": 0.0}]}


def _loss(case: Case, found: Figures | None) -> Changes:
    return {"combustor.pressure_ratio": min(1.0, _known(found, "combustor.pressure_ratio", 0.9))}


def _freeze(case: Case, found: Figures | None) -> Changes:
    return {"nozzle.freeze_station": "4"}


def _width(case: Case, found: Figures | None) -> Changes:
    return {"combustor.width": float(f"{_area(found, '3', 0.01) ** 0.5:.3g}")}


STARTS: dict[tuple[str, str], Start] = {
    ("inlet.quality", "geometry"): _ramps,
    ("inlet.quality", "kinetic_energy_efficiency"): _end,
    ("inlet.quality", "adiabatic_efficiency"): _end,
    ("inlet.quality", "diffuser_efficiency"): _end,
    ("inlet.quality", "total_pressure_recovery"): _end,
    ("inlet.quality", "military_recovery"): _end,
    ("inlet.quality", "viscous_correlation"): _end,
    ("inlet.compression", "ramp"): _ramps,
    ("inlet.compression", "cone"): _cone,
    ("inlet.compression", "isentropic_ramp"): _curved,
    ("inlet.lip", "lip"): _lip,
    ("isolator.size", "length"): _isolator,
    ("isolator.shape", "rectangular"): _side,
    ("combustor.process", "duct"): _duct,
    ("combustor.process", "pressure-loss"): _loss,
    ("combustor.section", "planar"): _width,
    ("nozzle.chemistry", "frozen-after"): _freeze,
}
"""(group or choice, tag) -> the changes that go with it."""


def of(case: Case, found: Figures | None, name: str, tag: str) -> Changes:
    """Start values of a way or a choice.

    Parameters: case; found, figures of a solved walk of it, or None; name, of a group or a choice input; tag, the one chosen.
    Returns: key -> value, {} where it needs nothing beside itself, or nothing is known of it.
    """
    start = STARTS.get((name, tag))
    return start(case, found) if start is not None else {}
