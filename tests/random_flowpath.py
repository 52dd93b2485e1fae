"""Random valid flowpaths: inlets by geometry, ducts with sections and injectors, given throats, isolators, rigs, nozzles in parts.

`python -m tests.random_flowpath LOW HIGH` judges the cases of these seeds and prints how many end in which status.
"""

from __future__ import annotations

import math
import sys
import warnings
from collections import Counter
from typing import Any

import numpy as np
import tomlkit

import cycle
from cycle.quantities import MODES, STATUSES
from tests.random_cases import FUELS, pick

Rng = np.random.Generator
Case = dict[str, Any]

TWIN = 1e-9
"""Relative difference allowed between a point and its twin in a batch: of the same order as the audit's limit."""
SONIC = 2e-7
"""The same where the stream is sonic to a millionth: there the state follows from the square root of what rounding leaves."""
CLOSED = 1e-9
"""Relative to the size of the rows, as the audit; a stated wall temperature is iterated to about 1e-11 of the energy."""
STATION = (
    "mach", "pressure", "temperature", "density", "velocity", "sound_speed", "enthalpy", "entropy", "total_enthalpy", "area", "mass_flow",
    "stream_thrust",
)  # fmt: skip
DEAR = ("total_pressure", "total_temperature", "critical_pressure", "critical_area_ratio")
PERFORMANCE = ("thrust", "specific_thrust", "thrust_coefficient", "captured_mass_fraction")


def between(rng: Rng, low: float, high: float) -> float:
    return float(rng.uniform(low, high))


def _flight(rng: Rng, low: float, high: float) -> Case:
    mach = {"mach": between(rng, low, high)}
    places = (
        {"dynamic_pressure": between(rng, 25e3, 90e3)},
        {"pressure": between(rng, 500.0, 9e3), "temperature": between(rng, 215.0, 260.0)},
    )
    return mach | pick(rng, (*places, {"altitude": between(rng, 15e3, 34e3), "temperature_offset": between(rng, -10.0, 10.0)}))


def _gas(rng: Rng, model: str) -> Case:
    if model != "constant-gamma":
        return {"model": model}
    energy = pick(rng, ("full", "full", "mass-only", "neglected"))
    found = {"model": model, "fuel_energy": energy}
    if energy == "neglected":
        found["fuel_mass"] = pick(rng, ("counted", "neglected"))
    return found | pick(rng, ({}, {"cp_combustion": 1150.0}, {"cp_combustion": 1250.0, "cp_expansion": 1180.0}))


def _fuel(rng: Rng, model: str) -> Case:
    found = {"temperature": between(rng, 270.0, 600.0), "supply_pressure": 5e6}
    if model == "constant-gamma" and rng.random() < 0.3:
        return found | {"heating_value": between(rng, 40e6, 120e6)}
    return found | {"name": pick(rng, (*FUELS, "hydrogen"))}


def _by_performance(rng: Rng, flight: float) -> Case:
    """A throat Mach number of about four tenths of the flight's: what a duct takes without much fuel."""
    quality = pick(rng, ({"kinetic_energy_efficiency": between(rng, 0.95, 0.985)}, {"total_pressure_recovery": between(rng, 0.25, 0.7)}))
    mach = float(np.clip(flight * between(rng, 0.38, 0.6), 1.6, 5.0))
    return quality | pick(rng, ({"exit_mach": mach}, {"exit_mach": mach}, {"contraction_ratio": between(rng, 4.0, 12.0)}))


def _wave(mach: float, turn: float) -> float:
    """Weak oblique shock, gamma 1.4, to a few thousandths of a radian: good enough to place a lip near it."""
    angle = math.asin(1.0 / mach)
    for _ in range(60):
        s = (mach * math.sin(angle)) ** 2
        given = math.atan2(2.0 * (s - 1.0), math.tan(angle) * (mach**2 * (1.4 + math.cos(2.0 * angle)) + 2.0))
        angle += 0.5 * (turn - given)
    return angle


def _ramps(rng: Rng, flight: float) -> Case:
    turns = rng.uniform(0.05, 0.13, int(rng.integers(1, 4)))
    lengths = rng.uniform(0.4, 1.2, turns.size)
    found: Case = {"ramp": [{"angle": float(a), "length": float(b)} for a, b in zip(turns, lengths, strict=True)]}
    if rng.random() < 0.6:
        across, along = (float(np.sum(lengths * f(np.cumsum(turns)))) for f in (np.sin, np.cos))
        first = _wave(flight * between(rng, 0.9, 1.15), float(turns[0]))
        found |= {"lip_x": along, "lip_y": max(along * math.tan(first), 1.05 * across)}
    return found


def _cone(rng: Rng, flight: float) -> Case:
    half = between(rng, 0.12, 0.3)
    found: Case = {"cone": {"half_angle": half}}
    if rng.random() < 0.5:
        found |= {"lip_x": 1.0, "lip_y": math.tan(0.6 * _wave(flight, half) + 0.4 * half)}
    return found


def _isentropic(rng: Rng, flight: float) -> Case:
    wedge = {"first_wedge": between(rng, 0.05, 0.15)} if rng.random() < 0.5 else {}
    return {"isentropic_ramp": {"turning": between(rng, 0.05, 0.25)} | wedge}


def _by_geometry(rng: Rng, flight: float) -> Case:
    found: Case = pick(rng, (_ramps, _ramps, _cone, _isentropic))(rng, flight)
    found |= pick(rng, ({}, {"cowl_angle": between(rng, 0.0, 0.15)}))
    return found | pick(rng, ({}, {"internal_contraction": between(rng, 1.0, 1.6)}))


def _inlet(rng: Rng, flight: float) -> Case:
    return (_by_performance if rng.random() < 0.5 else _by_geometry)(rng, flight)


def _isolator(rng: Rng) -> Case:
    own = {"length": between(rng, 0.2, 2.0), "hydraulic_diameter": between(rng, 0.03, 0.2)}
    own |= pick(rng, ({}, {"momentum_thickness": between(rng, 1e-4, 2e-3), "shape": pick(rng, ("circular", "rectangular"))}))
    apart = np.random.default_rng(int(1e9 * own["length"]))  # leaves what is drawn behind it as it was
    if own.get("shape") == "rectangular":
        own |= pick(apart, ({}, {"width": between(apart, 0.1, 1.0)}, {"height": between(apart, 0.03, 0.2)}))
    if "momentum_thickness" not in own:
        own |= pick(apart, ({}, {"boundary_layer_length": between(apart, 0.3, 5.0)}))
    return own | pick(apart, ({}, {}, {"friction_coefficient": between(apart, 5e-4, 6e-3)}))


def _heat(rng: Rng, most: float, total: float) -> Case:
    """Fuel, or an exit total temperature somewhat above `total` K, that of the flight."""
    ways = ({"equivalence_ratio": between(rng, 0.0, most)}, {"fuel_air_ratio": between(rng, 0.0, 0.02 * most)})
    return pick(rng, (*ways, *ways, {"exit_total_temperature": min(total * between(rng, 1.05, 1.5), 5500.0)}))


def _sections(rng: Rng, capture: float) -> list[Case]:
    """Two to five sections, opening along the duct but for a waist now and then; some tables start behind the burner entry."""
    count = int(rng.integers(1, 5))
    x = np.cumsum(rng.uniform(0.1, 0.6, count))
    ratio = np.cumprod(rng.uniform(1.05, 1.9, count) * (0.93 if rng.random() < 0.1 else 1.0))
    rows = [{"x": float(a), "area_ratio": float(b)} for a, b in zip(x, ratio, strict=True)]
    if count == 1 or rng.random() < 0.7:
        rows.insert(0, {"x": 0.0, "area_ratio": 1.0})
    if rng.random() < 0.08:
        rows[-1] = {"x": rows[-1]["x"], "area": capture * between(rng, 0.2, 0.6)}
    if rng.random() < 0.15:
        rows = [row | {"perimeter": between(rng, 0.5, 2.0)} for row in rows]
    return rows


def _injectors(rng: Rng, end: float) -> list[Case]:
    places = np.sort(rng.uniform(0.0, 0.6 * end, int(rng.integers(1, 4))))
    share = rng.dirichlet(np.full(places.size, 3.0))
    rows: list[Case] = [{"x": float(x), "share": float(s)} for x, s in zip(places, share, strict=True)]
    rows[-1]["share"] = 1.0 - math.fsum(row["share"] for row in rows[:-1])
    for row in rows:
        row |= pick(rng, ({}, {"axial_speed": between(rng, 0.0, 1500.0)})) | pick(rng, ({}, {"length": between(rng, 0.2, 1.5)}))
    return rows


def _wall(rng: Rng, friction: float) -> Case:
    ways: list[Case] = [{}, {"wall_heat": between(rng, 0.0, 2e5)}, {"wall_heat_fraction": between(rng, 0.0, 0.2)}]
    return pick(rng, [*ways, {"wall_temperature": between(rng, 500.0, 1300.0)}] if friction else ways)


def _total(mach: float, static: float = 225.0) -> float:
    """About the total temperature of a stream, K."""
    return static * (1.0 + 0.18 * mach**2)


def _duct(rng: Rng, capture: float, total: float) -> Case:
    sections = _sections(rng, capture)
    friction = pick(rng, (0.0, between(rng, 5e-4, 4e-3)))
    found = {
        "process": "duct", **_heat(rng, 0.7, total), "burnt_fraction": between(rng, 0.7, 1.0), "area": sections,
        "injector": _injectors(rng, sections[-1]["x"]), "friction_coefficient": friction, "burning_theta": between(rng, 1.0, 8.0),
        **_wall(rng, friction),
    }  # fmt: skip
    if "perimeter" not in sections[0]:
        found |= pick(rng, ({}, {"section": "planar", "width": between(rng, 0.3, 1.5)}))
    found |= pick(rng, ({}, {"burning_length": between(rng, 0.3, 1.5)}))
    return found | pick(rng, ({}, {}, {"separation_limit": between(rng, 1.5, 6.0)}, {"slices": pick(rng, (8, 16, 48))}))


def _at_rest_burner(rng: Rng, total: float) -> Case:
    """A subsonic burner of a stated process, with the friction and the fuel momentum that it may have."""
    process = pick(rng, ("constant-area", "constant-area", "constant-pressure"))
    found = {"process": process, **_heat(rng, 0.8, total), "burnt_fraction": between(rng, 0.7, 1.0), "wall_heat": between(rng, 0.0, 1e5)}
    return found | pick(rng, ({}, {"fuel_axial_speed": between(rng, 0.0, 400.0)})) | {"friction_area_ratio": between(rng, 0.0, 0.05)}


def _ends(rng: Rng, rig: bool, area: float) -> Case:
    """End of the expansion, behind an internal part of `area` times the nozzle's entry or throat."""
    ways: list[Case] = [{"exit_pressure": between(rng, 300.0, 4e3)}, {"exit_area_ratio": area * between(rng, 1.5, 8.0)}]
    return pick(rng, ways if rig else [*ways, {"ideal": True}, {"exit_area_over_capture": between(rng, 1.2, 2.5)}])


def _nozzle(rng: Rng, equilibrium: bool, throat: bool, rig: bool) -> Case:
    quality = pick(rng, ({}, {"velocity_coefficient": 0.985}, {"expansion_efficiency": 0.94}, {"expansion_efficiency_from_total": 0.96}))
    spread = pick(rng, ({}, {"divergence_factor": 0.985}, {"divergence_angle": 0.15, "divergence_shape": "conical"}))
    internal = between(rng, 1.05, 2.0) if rng.random() < 0.35 else None
    found = quality | spread | _ends(rng, rig, internal or 1.0)
    if equilibrium:
        found |= pick(rng, ({"chemistry": "shifting"}, {"chemistry": "frozen"}, {"chemistry": "frozen-after"}))
    if found.get("chemistry") == "frozen-after":
        places: tuple[Case, ...] = ({"freeze_station": "5" if throat else "4"}, {"freeze_area_ratio": between(rng, 1.0, 2.5)})
        found |= pick(rng, (*places, {"freeze_mach": between(rng, 1.2, 3.5)}))
    if internal is not None and not {"freeze_mach", "freeze_area_ratio"} & set(found):
        found["internal_area_ratio"] = internal
    return found


def _throat_friction(inlet: Case, mach: float) -> Case:
    """Friction at the throat of an inlet by geometry now and then; leaves what is drawn behind it as it was."""
    apart = np.random.default_rng(int(1e9 * mach))
    if not {"ramp", "cone", "isentropic_ramp"} & set(inlet):
        return {}
    ways: tuple[Case, ...] = ({}, {}, {"viscous_recovery": between(apart, 0.6, 1.0)}, {"viscous_efficiency": between(apart, 0.97, 1.0)})
    return pick(apart, ways)


def _duct_engine(rng: Rng, model: str) -> Case:
    flight = _flight(rng, 4.0, 11.0)
    capture = between(rng, 0.05, 0.8)
    case = {"flight": flight, "inlet": _inlet(rng, flight["mach"]), "combustor": _duct(rng, capture, _total(flight["mach"]))}
    case["inlet"] |= _throat_friction(case["inlet"], flight["mach"])
    if rng.random() < 0.5:
        case["isolator"] = _isolator(rng)
    case["nozzle"] = _nozzle(rng, model == "equilibrium", False, False)
    mode = pick(rng, (*["auto"] * 8, "supersonic", "thermal-throat"))
    return _round_lip(case | {"engine": {"capture_area": capture, "mode": mode}})


def _round_lip(case: Case) -> Case:
    """The lip of a cone is the circle of its capture area."""
    inlet = case["inlet"]
    if "cone" in inlet and "lip_y" in inlet:
        scale = math.sqrt(case["engine"]["capture_area"] / math.pi) / inlet["lip_y"]
        inlet |= {key: scale * inlet[key] for key in ("lip_x", "lip_y")}
    return case


def _duct_rig(rng: Rng, model: str) -> Case:
    entry: Case = {
        "station": "2",
        "mach": between(rng, 2.0, 4.0),
        "pressure": between(rng, 3e4, 2e5),
        "temperature": between(rng, 450.0, 1000.0),
    }
    area = between(rng, 0.005, 0.05)
    case: Case = {"entry": entry | {"area": area}, "combustor": _duct(rng, 5.0 * area, _total(entry["mach"], entry["temperature"]))}
    if rng.random() < 0.5:
        case["isolator"] = _isolator(rng)
    return case if rng.random() < 0.5 else case | {"nozzle": _nozzle(rng, model == "equilibrium", False, True)}


def _given_throat(rng: Rng, model: str) -> Case:
    flight = _flight(rng, 2.2, 4.5)
    capture = between(rng, 0.1, 0.8)
    inlet = pick(rng, ({"kinetic_energy_efficiency": between(rng, 0.9, 0.96)}, {"total_pressure_recovery": between(rng, 0.5, 0.85)}))
    case = {
        "flight": flight, "inlet": inlet | {"exit_mach": between(rng, 1.15, 1.7)},
        "combustor": _at_rest_burner(rng, _total(flight["mach"])) | {"entry_area_ratio": between(rng, 1.2, 2.5)},
        "nozzle": _nozzle(rng, model == "equilibrium", True, False) | {"throat_area": capture * between(rng, 0.35, 0.85)},
    }  # fmt: skip
    return case | {"engine": {"capture_area": capture, "mode": pick(rng, ("auto", "auto", "geometric-throat"))}}


def _normal_shock(rng: Rng, model: str) -> Case:
    flight = _flight(rng, 2.5, 4.5)
    inlet = _by_geometry(rng, flight["mach"]) | {"terminal_shock": True}
    nozzle = _nozzle(rng, model == "equilibrium", True, False) | {"throat": "sized"}
    burner = _at_rest_burner(rng, _total(flight["mach"]))
    engine = {"capture_area": between(rng, 0.1, 0.8)}
    return _round_lip({"flight": flight, "inlet": inlet, "combustor": burner, "nozzle": nozzle, "engine": engine})


def random_flowpath(seed: int) -> Case:
    """A valid case of this seed, as the tables of its file."""
    rng = np.random.default_rng(seed)
    model = pick(rng, ("constant-gamma", "frozen", "equilibrium"))
    engine = pick(rng, (_duct_engine, _duct_engine, _duct_engine, _given_throat, _normal_shock, _duct_rig))
    case = {"format": 1, "title": f"random flowpath {seed}, invented", "gas": _gas(rng, model), "fuel": _fuel(rng, model)}
    case |= engine(rng, model)
    if "heating_value" in case["fuel"] and "equivalence_ratio" in case["combustor"]:
        case["combustor"]["fuel_air_ratio"] = 0.03 * case["combustor"].pop("equivalence_ratio")
    if model == "equilibrium" and "inlet" in case and rng.random() < 0.2:
        case["inlet"]["chemistry"] = "frozen"
    return case


def loaded(case: Case) -> cycle.Case:
    return cycle.loads(tomlkit.dumps(case), str(case["title"]))


def _blanks(walk: cycle.Walk) -> list[str]:
    """Figures of a solved point that are not numbers."""
    found = [f"nan: {k} at {name}" for name, s in walk.station.items() for k in (*STATION, *DEAR) if not math.isfinite(s[k])]
    if "0" in walk.station:
        found += [f"nan: {key}" for key in PERFORMANCE if not math.isfinite(walk.performance[key])]
    for name, rows in walk.profile.items():
        first = int(np.argmax(np.isfinite(rows)))
        if not np.isfinite(rows[first:]).all():
            found.append(f"nan: profile {name}")
    return found


MET = 1e-9
"""Relative difference allowed between what was asked of the burner and what it does: as the audit."""


def _unmet(walk: cycle.Walk) -> list[str]:
    """The heat that was asked for, where the walk has another."""
    heat = walk.case.choices["combustor.heat"]
    asked = walk.case.numbers[f"combustor.{heat}"]
    found = walk.station["4"].total_temperature if heat == "exit_total_temperature" else walk.performance[heat]
    wrong = [] if walk.performance.fuel_flow >= 0.0 else [f"fuel flow {walk.performance.fuel_flow:.4g}"]
    return wrong if abs(found - asked) <= MET * asked else [*wrong, f"asked for {heat} {asked:.10g}, found {found:.10g}"]


def _open_accounts(walk: cycle.Walk) -> list[str]:
    """Accounts whose rows do not sum to what they should."""
    found = []
    for name, parts, whole in (
        ("potentials", walk.potentials[:-1], walk.potentials[-1:]),
        ("losses", walk.losses[1:], walk.losses[:1]),
        ("exergy", walk.exergy[1:], walk.exergy[:1]),
    ):
        if whole and not abs(math.fsum(r.value for r in parts) - whole[0].value) <= CLOSED * math.fsum(abs(r.value) for r in parts):
            found.append(f"{name} do not close")
    return found


def in_order(walk: cycle.Walk) -> list[str]:
    """What is wrong with the walk of one point whatever it was asked: names, iterations, audit; heat and accounts where it is solved."""
    found = [] if walk.status in STATUSES and walk.mode in MODES else [f"unknown: {walk.status}, {walk.mode}"]
    if walk.status == "not-converged":
        found.append(f"not converged: {walk.failed_process}")
    if not walk.audit.ok:
        found.append(f"audit: {walk.audit.worst.law}, {walk.audit.worst.where}: {walk.audit.worst.value:.3g}")
    return found + _unmet(walk) + _open_accounts(walk) if walk.status == "solved" else found


def one_point(walk: cycle.Walk) -> list[str]:
    """What is wrong with the walk of one point of a plausible flowpath."""
    found = in_order(walk)
    if walk.status == "solved":
        return found + _blanks(walk)
    last = "4" if walk.case.choices["nozzle.exit"] == "absent" else "10"
    if not walk.reason or last in walk.station or not math.isnan(walk.performance.thrust):
        found.append(f"unsolved ({walk.status}) with an end or without a reason")
    return found


def twins(walk: cycle.Walk, seed: int) -> list[str]:
    """How the point differs from itself among strangers in a batch."""
    rng = np.random.default_rng(seed)
    keys = [key for key in ("combustor.burnt_fraction", "flight.mach", "entry.mach") if key in walk.case.numbers]
    batch = cycle.solve(walk.case, {key: walk.case.numbers[key] * np.array([1.0, *rng.uniform(0.9, 1.0, 3)]) for key in keys})
    found = [] if batch.status[0] == walk.status and batch.mode[0] == walk.mode else [f"twin: {batch.status[0]}, {batch.mode[0]}"]
    for name, station in walk.station.items():
        for key in STATION:
            one, other = station[key], batch.station[name][key][0]
            size = abs(one) + (abs(station.total_enthalpy) if key in ("enthalpy", "total_enthalpy") else 0.0)
            if not abs(one - other) <= (SONIC if abs(station.mach - 1.0) < 1e-6 else TWIN) * size:
                found.append(f"twin: {key} at {name} by {abs(one - other) / size:.2g}")
    return found


def judge(seed: int) -> tuple[str, str, list[str]]:
    """Status and mode of the case of a seed, and everything that is wrong with it."""
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        walk = cycle.solve(loaded(random_flowpath(seed)))
        return walk.status, walk.mode, one_point(walk) + twins(walk, seed)


def main(low: int, high: int) -> int:
    """Judge the seeds from low to below high; 1 where a fault was found."""
    statuses, modes, faults = Counter[str](), Counter[str](), 0
    for seed in range(low, high):
        status, mode, wrong = judge(seed)
        statuses[status] += 1
        modes[mode] += 1
        faults += bool(wrong)
        for words in wrong:
            print(f"{seed}: {status}: {words}", flush=True)
    print(f"{high - low} cases, {faults} with faults; {dict(statuses.most_common())}; {dict(modes.most_common())}")
    return int(faults > 0)


if __name__ == "__main__":
    sys.exit(main(int(sys.argv[1]), int(sys.argv[2])))
