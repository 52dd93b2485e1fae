"""Random rigs whose ducts burn much, and what the plain march of `tests.scalar_modes` says of their modes.

`python -m tests.heavy_rigs LOW HIGH` compares the modes of these seeds and prints how many agree in what.
"""

from __future__ import annotations

import sys
from collections import Counter

import numpy as np

import cycle
from tests import scalar_gas, scalar_modes
from tests.dual_mode_rigs import SCALAR_FUELS, duct_mode, scalar_duct
from tests.random_cases import pick
from tests.random_flowpath import Case, between, loaded


def heavy_rig(seed: int) -> Case:
    """A rig whose duct burns much in little area, plain enough for `tests.scalar_modes`: modes of every kind, many without any."""
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


def confirm(seed: int) -> tuple[str, str, str]:
    """Status and mode that the program finds for a heavy rig, and what the plain march finds: a mode, or why there is none."""
    walk = cycle.solve(loaded(heavy_rig(seed)))
    return walk.status, duct_mode(walk), scalar_modes.verdict(scalar_duct(walk)).mode


def _agree(verdict: tuple[str, str, str]) -> bool:
    _, own, plain = verdict
    return plain in ("unstarted", "choked", "none") if own == "none" else plain == own


def main(low: int, high: int) -> int:
    """Compare the seeds from low to below high; 1 where a mode differs."""
    found = Counter[tuple[str, str, str]]()
    for seed in range(low, high):
        found[verdict := confirm(seed)] += 1
        if not _agree(verdict):
            print(f"{seed}: {verdict}", flush=True)
    for verdict, count in sorted(found.items()):
        status, own, plain = verdict
        print(f"{count:6d}  {status}: {own}{'' if _agree(verdict) else f' AGAINST {plain}'}")
    return int(not all(map(_agree, found)))


if __name__ == "__main__":
    sys.exit(main(int(sys.argv[1]), int(sys.argv[2])))
