"""Random valid cases for the property tests: every model, inlet quality, end, burner process and nozzle exit."""

from __future__ import annotations

from typing import Any

import numpy as np

FUELS = ("hydrogen", "methane", "ethylene", "propane", "kerosene", "jp-10")
QUALITIES = {
    "kinetic_energy_efficiency": (0.94, 0.99),
    "adiabatic_efficiency": (0.86, 0.96),
    "diffuser_efficiency": (0.9, 0.99),
    "total_pressure_recovery": (0.2, 0.9),
    "military_recovery": None,
}
Case = dict[str, dict[str, Any]]


def pick(rng: np.random.Generator, options: Any) -> Any:
    options = list(options)
    return options[int(rng.integers(len(options)))]


def _flight(rng: np.random.Generator) -> dict[str, Any]:
    speed = {"mach": float(rng.uniform(2.0, 12.0))}
    if rng.random() < 0.2:
        speed = {"speed": float(rng.uniform(700.0, 3600.0))}
    place: dict[str, Any] = pick(
        rng,
        (
            {"altitude": float(rng.uniform(12e3, 38e3)), "temperature_offset": float(rng.uniform(-15.0, 15.0))},
            {"dynamic_pressure": float(rng.uniform(25e3, 95e3))},
            {"pressure": float(rng.uniform(300.0, 2e4)), "temperature": float(rng.uniform(200.0, 300.0))},
        ),
    )
    return {**speed, **place}


def _inlet(rng: np.random.Generator, fast: bool) -> dict[str, Any]:
    quality = pick(rng, QUALITIES)
    bounds = QUALITIES[quality]
    found: dict[str, Any] = {quality: True if bounds is None else float(rng.uniform(*bounds))}
    if not fast:
        return {**found, "exit_mach": float(rng.uniform(0.1, 0.4))}
    ends = (
        {"pressure_ratio": float(rng.uniform(8.0, 90.0))},
        {"temperature_ratio": float(rng.uniform(2.0, 5.0))},
        {"exit_mach": float(rng.uniform(1.3, 4.0))},
        {"contraction_ratio": float(rng.uniform(2.0, 12.0))},
    )
    return {**found, **pick(rng, ends)}


def _combustor(rng: np.random.Generator, fast: bool) -> dict[str, Any]:
    process = pick(rng, ("constant-area", "constant-pressure", "pressure-loss"))
    heat = pick(
        rng,
        (
            {"equivalence_ratio": float(rng.uniform(0.0, 1.5 if fast else 1.0))},
            {"fuel_air_ratio": float(rng.uniform(0.0, 0.03))},
            {"exit_total_temperature": float(rng.uniform(1500.0, 2800.0))},
        ),
    )
    found = {"process": process, **heat, "burnt_fraction": float(rng.uniform(0.6, 1.0)), "wall_heat": float(rng.uniform(0.0, 2e4))}
    if process == "pressure-loss":
        found["pressure_ratio"] = float(rng.uniform(0.3, 0.98))
        return found | pick(rng, ({}, {"exit_area_ratio": float(rng.uniform(1.0, 3.0))}, {"exit_mach": float(rng.uniform(0.3, 0.9))}))
    momentum = ({}, {"fuel_axial_speed": float(rng.uniform(0.0, 900.0))}, {"fuel_axial_speed_ratio": float(rng.uniform(0.0, 0.8))})
    return found | pick(rng, momentum) | {"friction_area_ratio": float(rng.uniform(0.0, 0.1))}


def _nozzle(rng: np.random.Generator, throat: bool, equilibrium: bool) -> dict[str, Any]:
    exits = (
        {"ideal": True},
        {"exit_pressure": float(rng.uniform(200.0, 8e3))},
        {"exit_area_ratio": float(rng.uniform(1.2, 12.0))},
        {"exit_area_over_capture": float(rng.uniform(0.8, 2.5))},
    )
    quality = pick(rng, ({}, {"velocity_coefficient": 0.98}, {"expansion_efficiency": 0.92}, {"expansion_efficiency_from_total": 0.95}))
    spread = pick(rng, ({}, {"divergence_factor": 0.985}, {"divergence_angle": 0.2, "divergence_shape": "planar"}))
    chemistry = {"chemistry": pick(rng, ("frozen", "shifting"))} if equilibrium else {}
    return {**pick(rng, exits), **quality, **spread, **chemistry, "throat": "sized" if throat else "none"}


def _gas(rng: np.random.Generator, model: str) -> dict[str, Any]:
    if model != "constant-gamma":
        return {"model": model}
    energy = pick(rng, ("full", "mass-only", "neglected"))
    found = {"model": model, "cp_compression": 1004.5, "gas_constant": 287.0, "fuel_energy": energy}
    if energy == "neglected":
        found["fuel_mass"] = pick(rng, ("counted", "neglected"))
    return found | pick(rng, ({}, {"cp_combustion": 1250.0, "cp_expansion": 1250.0}, {"cp_combustion": 1300.0, "cp_expansion": 1200.0}))


def random_case(seed: int) -> Case:
    """A valid case of this seed, as the tables of its file."""
    rng = np.random.default_rng(seed)
    model = pick(rng, ("constant-gamma", "frozen", "equilibrium", "equilibrium"))
    fast = rng.random() < 0.65
    combustor = _combustor(rng, fast)
    if combustor.get("exit_mach"):
        fast = False
    case: Case = {
        "flight": _flight(rng),
        "gas": _gas(rng, model),
        "inlet": _inlet(rng, fast),
        "fuel": {"name": pick(rng, FUELS), "temperature": float(rng.uniform(250.0, 500.0)), "supply_pressure": 5e6},
        "combustor": combustor,
        "nozzle": _nozzle(rng, not fast, model == "equilibrium"),
        "engine": {"capture_area": float(rng.uniform(0.02, 2.0))},
    }
    if model != "constant-gamma" and rng.random() < 0.2:
        case["air"] = {"relative_humidity": float(rng.uniform(0.0, 1.0))}
    if model == "equilibrium" and rng.random() < 0.3:
        case["inlet"]["chemistry"] = "frozen"
    return case


def written(case: Case, title: str = "random, invented") -> str:
    """The case as the text of its file."""
    lines = ["format = 1", f'title = "{title}"']
    for table, keys in case.items():
        lines += ["", f"[{table}]"]
        for key, value in keys.items():
            text = str(value).lower() if isinstance(value, bool) else f'"{value}"' if isinstance(value, str) else repr(value)
            lines.append(f"{key} = {text}")
    return "\n".join(lines) + "\n"
