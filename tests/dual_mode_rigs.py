"""Random rigs of dual-mode ducts, and whether the program and the plain march of `tests.scalar_modes` find the same in them.

`python -m tests.dual_mode_rigs LOW HIGH` compares these seeds and prints where mode or exit impulse differ, and how many agree in what.
"""

from __future__ import annotations

import dataclasses
import math
import sys
from collections import Counter

import numpy as np

import cycle
from tests import scalar_gas, scalar_march, scalar_modes
from tests.random_cases import pick
from tests.random_flowpath import Case, between, loaded

SCALAR_FUELS = {"hydrogen": "H2", "methane": "CH4", "ethylene": "C2H4"}
MODELS = ("constant-gamma", "frozen", "equilibrium")
IMPULSE = 1e-3
"""Relative difference of the exit impulse from which two flows are not the same."""
NAMES = {"none": "no-mode"}
"""What the program calls what the plain march finds, where the names differ."""
HAIR = 1e-4
"""Relative change of the burnt fraction by which a border between modes may be missed."""


def dual_mode_rig(seed: int) -> Case:
    """A rig whose duct opens a little at first and then more, heated about as much as it takes."""
    rng = np.random.default_rng([seed, 41])
    model = pick(rng, MODELS)
    fuel = pick(rng, ("hydrogen", "ethylene"))
    count = int(rng.integers(1, 4))
    x = np.cumsum(rng.uniform(0.2, 0.5, count))
    ratio = np.linspace(1.0, between(rng, 1.3, 3.5), count + 1)[1:] ** rng.uniform(0.7, 1.0)
    x, ratio = np.concatenate([[0.0], x]), np.concatenate([[1.0], ratio])
    if rng.random() < 0.6:
        ahead = between(rng, 0.05, 0.2)
        x, ratio = np.concatenate([[0.0], x + ahead]), np.concatenate([[1.0], ratio])
    first = pick(rng, (0.0, between(rng, 0.02, 0.4) * float(x[-1])))
    places = [first] if rng.random() < 0.6 else [first, first + between(rng, 0.1, 0.4) * float(x[-1])]
    share = 1.0 if len(places) == 1 else between(rng, 0.3, 0.7)
    shares = [share, 1.0 - share]
    injectors = [
        {"x": p, "share": s, "axial_speed": pick(rng, (0.0, 0.0, 600.0)), "length": between(rng, 0.2, 1.0) * float(x[-1])}
        for p, s in zip(places, shares, strict=False)
    ]
    mach = 2.0 + 2.5 * rng.random() ** 1.5
    entry = {"station": "2", "mach": mach, "pressure": between(rng, 4e4, 1e5), "temperature": between(rng, 450.0, 950.0), "area": 0.02}
    burner: Case = {
        "process": "duct", "burnt_fraction": between(rng, 0.75, 1.0), "burning_theta": pick(rng, (3.0, 4.0, 5.5, 7.0, 10.0)),
        "friction_coefficient": pick(rng, (0.0, between(rng, 0.002, 0.004))), "injector": injectors,
        "area": [{"x": float(a), "area_ratio": float(b)} for a, b in zip(x, ratio, strict=True)],
    }  # fmt: skip
    # total temperature may rise by what chokes a constant area (Rayleigh, gamma 1.3), and by more where the duct opens
    square, total = mach**2, entry["temperature"] * (1.0 + 0.15 * mach**2)
    chokes = (1.0 + 1.3 * square) ** 2 / (4.6 * square * (1.0 + 0.15 * square)) - 1.0
    rise = chokes * total * (1.1 + between(rng, 0.6, 2.2) * float(ratio[-1] - 1.0))
    case: Case = {"format": 1, "title": f"dual-mode rig {seed}, invented", "gas": {"model": model}, "entry": entry, "combustor": burner}
    if model == "constant-gamma":
        cp = between(rng, 1050.0, 1250.0)
        case["gas"] |= {"cp_compression": cp, "cp_combustion": cp}
        case["fuel"] = {"temperature": 300.0, "heating_value": 120e6}
        burner["fuel_air_ratio"] = 1200.0 * rise / 120e6
    else:
        case["fuel"] = {"name": fuel, "temperature": pick(rng, (300.0, 500.0))}
        burner["equivalence_ratio"] = min(1.0, rise / 2100.0)
        case["air"] = {"mole_fractions": scalar_gas.AIR}
    return case


def _plain_case(title: str, burner: Case, areas: tuple[tuple[float, float], ...], injector: tuple[float, float]) -> Case:
    """An equilibrium case with one injector, (x, length) m, of no axial speed."""
    rows = [{"x": x, "area_ratio": ratio} for x, ratio in areas]
    fuel = {"x": injector[0], "length": injector[1], "share": 1.0, "axial_speed": 0.0}
    burner = {"process": "duct", "burnt_fraction": 0.9, "area": rows, "injector": [fuel]} | burner
    return {"format": 1, "title": f"{title}, invented", "gas": {"model": "equilibrium"}, "combustor": burner}


def ethylene_engine(phi: float) -> Case:
    """Mach 4.5, heated far behind the entry: its p3 rises smoothly from the border of the shock train on."""
    areas = ((0.0, 1.0), (0.15, 1.0), (0.5, 1.8), (0.8, 2.2), (1.2, 3.3))
    return _plain_case("ethylene engine", {"equivalence_ratio": phi, "burning_theta": 3.0}, areas, (0.35, 0.7)) | {
        "flight": {"mach": 4.5, "dynamic_pressure": 50e3}, "air": {"mole_fractions": scalar_gas.AIR},
        "inlet": {"kinetic_energy_efficiency": 0.97, "exit_mach": 2.0}, "fuel": {"name": "ethylene", "temperature": 500.0},
        "nozzle": {"ideal": True}, "engine": {"capture_area": 0.3},
    }  # fmt: skip


def hydrogen_engine(theta: float) -> Case:
    """Mach 6.85, burnt within 0.16 m: the throat stands close behind the place where the core fills the duct."""
    areas = ((0.0, 1.0), (0.15, 1.0), (0.43, 1.25), (0.83, 1.8))
    return _plain_case("hydrogen engine", {"equivalence_ratio": 0.9, "burning_theta": theta}, areas, (0.15, 0.16)) | {
        "flight": {"mach": 6.85, "dynamic_pressure": 50e3}, "air": {"mole_fractions": scalar_gas.AIR},
        "inlet": {"kinetic_energy_efficiency": 0.97, "exit_mach": 3.34}, "fuel": {"name": "hydrogen", "temperature": 300.0},
        "nozzle": {"ideal": True}, "engine": {"capture_area": 0.3},
    }  # fmt: skip


def direct_connect_rig(phi: float) -> Case:
    """Vitiated air at Mach 2.2 with friction: a shock train whose core fills the duct ever closer to Mach 1, then a throat."""
    burner = {"equivalence_ratio": phi, "burning_theta": 5.5, "friction_coefficient": 0.004}
    area = 0.25 * math.pi * 0.038**2
    return _plain_case("direct-connect rig", burner, ((0.0, 1.0), (0.13, 1.0), (0.58, 1.86), (0.99, 2.28)), (0.13, 0.23)) | {
        "entry": {"station": "2", "mach": 2.2, "pressure": 60e3, "temperature": 900.0, "area": area},
        "air": {"mole_fractions": {"N2": 0.6, "O2": 0.21, "H2O": 0.14, "CO2": 0.04, "Ar": 0.01}},
        "isolator": {"length": 0.25, "hydraulic_diameter": 0.038, "momentum_thickness": 0.3e-3},
        "fuel": {"name": "ethylene", "temperature": 300.0},
    }  # fmt: skip


def scalar_duct(walk: cycle.Walk, steps: int = 40) -> scalar_march.Duct:
    """The duct of a walk, with the stream that enters it, for the plain march."""
    n, rows, two = walk.case.numbers, walk.case.rows, walk.station["2"]
    name, model = walk.case.choices.get("fuel.name"), walk.case.choices["gas.model"]
    gas: scalar_gas.Perfect | scalar_gas.Burning | scalar_gas.Equilibrium
    if model == "constant-gamma":
        gas = scalar_gas.Perfect(n["gas.cp_combustion"], n["gas.gas_constant"], n["fuel.heating_value"])
    else:
        gas = {"frozen": scalar_gas.Burning, "equilibrium": scalar_gas.Equilibrium}[model](SCALAR_FUELS[name], dict(walk.case.fractions))
    theta = n["combustor.burning_theta"]
    ratio = n.get("combustor.fuel_air_ratio", n.get("combustor.equivalence_ratio", 0.0) * float(walk.performance.stoichiometric_ratio))
    injections = (
        scalar_march.Injection(row["x"], row["share"], row["axial_speed"], theta, row["length"]) for row in rows["combustor.injector"]
    )
    return scalar_march.Duct(
        gas, two.pressure, two.temperature, two.velocity, two.mach, two.mass_flow,
        tuple((row["x"], row["area_ratio"] * two.area) for row in rows["combustor.area"]), tuple(injections),
        ratio, n["combustor.burnt_fraction"], n["fuel.temperature"], n["combustor.friction_coefficient"], steps,
    )  # fmt: skip


def duct_mode(walk: cycle.Walk) -> str:
    """The mode of a walk's duct; "none" where it has none."""
    figures = next((p.figures for p in walk.processes if p.name == "isolator"), None)
    if walk.status != "solved" or figures is None:
        return "none"
    return next(key.removeprefix("mode_") for key, value in figures.items() if key.startswith("mode_") and value == 1.0)


@dataclasses.dataclass(frozen=True)
class Comparison:
    """What both find in one duct.

    outcome: "agrees"; "differs"; "border", where a hair's change of the burnt fraction makes them agree; "other train", where the program
    has a train that fills the duct ahead of the plain march's; "status", where neither has a mode and they name it otherwise.
    """

    outcome: str
    status: str
    own: str
    plain: scalar_modes.Verdict
    impulse: float
    """Exit impulse of the program over that of the plain march, less 1; NaN where one has none."""

    def __str__(self) -> str:
        flow, words = self.plain.flow, f"{self.outcome}: {self.status}, {self.own}, against {self.plain.mode}"
        if flow is not None:
            words += f"; impulse {self.impulse:.2g}, p3 {flow.pressure:.6g} Pa, x_r {flow.filled:.4g}, x* {flow.throat:.4g} m"
        more = "" if len(self.plain.throats) < 2 else f"; {len(self.plain.throats)} throats"
        return words + more + "; " + "; ".join(self.plain.tried)


def _apart(own: str, impulse: float, plain: scalar_modes.Verdict) -> float:
    """Difference of the exit impulse to the nearest flow of the plain march in the same mode; NaN where there is none."""
    flows = [flow for flow in (plain.flow, *plain.throats) if flow is not None and flow.mode == own]
    return min((impulse / flow.impulse - 1.0 for flow in flows), key=abs, default=float("nan"))


def _same(own: str, impulse: float, plain: scalar_modes.Verdict) -> bool:
    return own == "none" if plain.flow is None else abs(_apart(own, impulse, plain)) < IMPULSE


def compare(walk: cycle.Walk) -> Comparison:
    """A walk with a dual-mode duct against the plain march."""
    own, duct = duct_mode(walk), scalar_duct(walk)
    impulse = walk.station["4"].stream_thrust if own != "none" else float("nan")
    plain = scalar_modes.verdict(duct)
    outcome = "agrees" if _same(own, impulse, plain) else _excuse(walk, own, impulse, duct)
    if outcome == "agrees" and own == "none" and walk.status != NAMES.get(plain.mode, plain.mode):
        outcome = "status"
    return Comparison(outcome, walk.status, own, plain, _apart(own, impulse, plain))


def _excuse(walk: cycle.Walk, own: str, impulse: float, duct: scalar_march.Duct) -> str:
    if own == "scramjet-shock-train":
        other = scalar_modes.other_train(duct, walk.station["3"].pressure)
        if other is not None and abs(impulse / other.impulse - 1.0) < IMPULSE:
            return "other train"
    near = (dataclasses.replace(duct, burnt=duct.burnt * (1.0 + change)) for change in (-HAIR, HAIR))
    return "border" if any(_same(own, impulse, scalar_modes.verdict(one)) for one in near) else "differs"


def main(low: int, high: int) -> int:
    """Compare the seeds from low to below high; 1 where something differs."""
    found = Counter[tuple[str, str, str, str]]()
    for seed in range(low, high):
        walk = cycle.solve(loaded(dual_mode_rig(seed)))
        one = compare(walk)
        found[one.outcome, one.status, one.own, one.plain.mode] += 1
        if one.outcome != "agrees" or len(one.plain.throats) > 1:
            print(f"{seed}, {walk.case.choices['gas.model']}: {one}", flush=True)
    for (outcome, status, own, plain), count in sorted(found.items()):
        print(f"{count:6d}  {outcome}  {status}: {own}, {plain}")
    return int(any(outcome == "differs" for outcome, *_ in found))


if __name__ == "__main__":
    sys.exit(main(int(sys.argv[1]), int(sys.argv[2])))
