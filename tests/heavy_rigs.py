"""Random rigs whose ducts burn much, and what the plain march of `tests.scalar_march` says of their modes.

`python -m tests.heavy_rigs LOW HIGH` compares the modes of these seeds and prints how many agree in what.
"""

from __future__ import annotations

import sys
from collections import Counter

import numpy as np

import cycle
from tests import scalar_gas, scalar_march
from tests.random_cases import pick
from tests.random_flowpath import Case, between, loaded

SCALAR_FUELS = {"hydrogen": "H2", "methane": "CH4", "ethylene": "C2H4"}


def heavy_rig(seed: int) -> Case:
    """A rig whose duct burns much in little area, plain enough for `tests.scalar_march`: modes of every kind, many without any."""
    rng = np.random.default_rng(seed)
    count = int(rng.integers(1, 4))
    x, ratio = np.cumsum(rng.uniform(0.2, 0.6, count)), np.cumprod(rng.uniform(1.0, 1.7, count))
    frozen = rng.random() < 0.4
    gas: Case = {"model": "frozen"} if frozen else {"model": "constant-gamma", "cp_compression": 1100.0}
    places = np.sort(rng.uniform(0.0, 0.5 * x[-1], int(rng.integers(1, 3)))) * (rng.random() < 0.7)
    places = np.unique(places)
    share = 1.0 / places.size
    injectors = [{"x": float(p), "share": share, "axial_speed": pick(rng, (0.0, 800.0)), "length": between(rng, 0.3, 1.2)} for p in places]
    case: Case = {
        "format": 1, "title": f"heavy rig {seed}, invented", "gas": gas,
        "entry": {"station": "2", "mach": between(rng, 2.0, 3.8), "pressure": 6e4, "temperature": between(rng, 500.0, 900.0), "area": 0.02},
        "fuel": {"temperature": 300.0} | ({"name": pick(rng, tuple(SCALAR_FUELS))} if frozen else {"heating_value": 120e6}),
        "combustor": {
            "process": "duct", "burnt_fraction": between(rng, 0.8, 1.0), "burning_theta": between(rng, 1.5, 5.0),
            "friction_coefficient": pick(rng, (0.0, 0.002)), "injector": injectors,
            "area": [{"x": 0.0, "area_ratio": 1.0}, *({"x": float(a), "area_ratio": float(b)} for a, b in zip(x, ratio, strict=True))],
        } | ({"equivalence_ratio": between(rng, 0.3, 0.98)} if frozen else {"fuel_air_ratio": between(rng, 0.008, 0.04)}),
    }  # fmt: skip
    return case | ({"air": {"mole_fractions": scalar_gas.AIR}} if frozen else {})


def scalar_duct(walk: cycle.Walk) -> scalar_march.Duct:
    """The duct of a walk of `heavy_rig`, with the stream that enters it, for the plain march."""
    n, rows, two = walk.case.numbers, walk.case.rows, walk.station["2"]
    name = walk.case.choices.get("fuel.name")
    gas = (
        scalar_gas.Burning(SCALAR_FUELS[name])
        if name
        else scalar_gas.Perfect(n["gas.cp_combustion"], n["gas.gas_constant"], n["fuel.heating_value"])
    )
    theta = n["combustor.burning_theta"]
    ratio = n.get("combustor.fuel_air_ratio", n.get("combustor.equivalence_ratio", 0.0) * float(walk.performance.stoichiometric_ratio))
    injections = (
        scalar_march.Injection(row["x"], row["share"], row["axial_speed"], theta, row["length"]) for row in rows["combustor.injector"]
    )
    return scalar_march.Duct(
        gas, two.pressure, two.temperature, two.velocity, two.mach, two.mass_flow,
        tuple((row["x"], row["area_ratio"] * two.area) for row in rows["combustor.area"]), tuple(injections),
        ratio, n["combustor.burnt_fraction"], n["fuel.temperature"], n["combustor.friction_coefficient"],
    )  # fmt: skip


def duct_mode(walk: cycle.Walk) -> str:
    """The mode of a rig's duct; "none" where it has none."""
    figures = next((p.figures for p in walk.processes if p.name == "isolator"), None)
    if walk.status != "solved" or figures is None:
        return "none"
    return next(key.removeprefix("mode_") for key, value in figures.items() if key.startswith("mode_") and value == 1.0)


def confirm(seed: int) -> tuple[str, str, str]:
    """Status and mode that the program finds for a heavy rig, and the mode that the plain march finds."""
    walk = cycle.solve(loaded(heavy_rig(seed)))
    return walk.status, duct_mode(walk), scalar_march.mode(scalar_duct(walk))


def main(low: int, high: int) -> int:
    """Compare the seeds from low to below high; 1 where a mode differs."""
    found = Counter[tuple[str, str, str]]()
    for seed in range(low, high):
        found[verdict := confirm(seed)] += 1
        if verdict[1] != verdict[2]:
            print(f"{seed}: {verdict}", flush=True)
    for (status, own, plain), count in sorted(found.items()):
        print(f"{count:6d}  {status}: {own}{'' if own == plain else f' AGAINST {plain}'}")
    return int(any(own != plain for _, own, plain in found))


if __name__ == "__main__":
    sys.exit(main(int(sys.argv[1]), int(sys.argv[2])))
