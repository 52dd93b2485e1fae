"""The whole program against the point-by-point loop: `cycle.solve` with its headline, and with every account."""

from __future__ import annotations

import numpy as np

import cycle
from benchmarks.cantera_cycle import CHOKED, FAILED, NOT_COMPRESSED, SOLVED, PointByPoint, Points, sample
from benchmarks.timing import Row, at_least, at_most, ratio, reported, seconds

MANY, FEW = 10_000, 200

CASE = """
format = 1
title = "benchmark, invented"
[flight]
mach = 8.0
pressure = 1000.0
temperature = 230.0
[gas]
model = "equilibrium"
[inlet]
kinetic_energy_efficiency = 0.975
pressure_ratio = 60.0
[fuel]
name = "{fuel}"
temperature = 300.0
[combustor]
process = "constant-area"
equivalence_ratio = 0.5
[nozzle]
chemistry = "shifting"
ideal = true
"""

_CODES = {"solved": SOLVED, "over-compressed": NOT_COMPRESSED, "choked": CHOKED}


def case_point() -> Points:
    """The point of `CASE`, for the loop."""
    return Points(*(np.array([v]) for v in (8.0, 230.0, 1000.0, 0.975, 60e3, 0.5)))


def inputs(points: Points) -> dict[str, np.ndarray]:
    """The points as arrays of a batch."""
    return {
        "flight.mach": points.mach,
        "flight.temperature": points.temperature,
        "flight.pressure": points.pressure,
        "inlet.kinetic_energy_efficiency": points.efficiency,
        "inlet.pressure_ratio": points.entry_pressure / points.pressure,
        "combustor.equivalence_ratio": points.equivalence_ratio,
    }


def headline(fuel: str, points: Points) -> tuple[np.ndarray, np.ndarray]:
    """Codes and specific impulses by the public solve."""
    walk = cycle.solve(cycle.loads(CASE.format(fuel=fuel), "benchmark"), inputs(points))
    codes = np.array([_CODES.get(str(s), FAILED) for s in walk.status])
    return codes, walk.performance.specific_impulse


def everything(fuel: str, points: Points) -> object:
    """Headline, stations with their total states, potentials, losses, limits and audit."""
    walk = cycle.solve(cycle.loads(CASE.format(fuel=fuel), "benchmark"), inputs(points))
    stations = [station.total_pressure for station in walk.station.values()]
    return walk.performance.specific_impulse, stations, walk.potentials, walk.losses, walk.limits, walk.audit


def single(fuel: str) -> object:
    """One point through the public solve, as a keystroke asks for it."""
    walk = cycle.solve(cycle.loads(CASE.format(fuel=fuel), "benchmark"))
    return walk.performance.specific_impulse


def rows(fuel: str = "hydrogen", many: int = MANY, few: int = FEW, repeats: int = 3) -> list[Row]:
    """The bars of the simple cycle, through the public face."""
    loop, part, whole = PointByPoint(fuel), sample(few), sample(many)
    codes, impulse = headline(fuel, part)
    other_codes, other_impulse = loop.run(part)
    solves = loop.solves / few
    both = (codes == SOLVED) & (other_codes == SOLVED)
    worst = float(np.max(np.abs(impulse[both] / other_impulse[both] - 1.0)))
    gain = many / few / ratio(lambda: headline(fuel, whole), lambda: loop.run(part), repeats)
    full = many / few / ratio(lambda: everything(fuel, whole), lambda: loop.run(part), repeats)
    one = ratio(lambda: single(fuel), lambda: loop.run(case_point()), 25)
    case = cycle.loads(CASE.format(fuel=fuel), "benchmark")
    keystroke = ratio(lambda: cycle.solve(case).performance.thrust, lambda: loop.run(case_point()), 25)
    against = "point-by-point Cantera loop"
    return [
        at_least(f"cycle.solve, {fuel}, {many} points: faster by", gain, "times", 100.0, against),
        reported(f"the same with total states, accounts, limits and audit ({fuel}): faster by", full, "times", against),
        reported(f"cycle.solve ({fuel}): time a point", seconds(lambda: headline(fuel, whole), repeats) / many * 1e6, "us"),
        reported(f"the loop ({fuel}): time a point", seconds(lambda: loop.run(part), repeats) / few * 1e6, "us"),
        reported("equilibrium solves a point in the loop", solves, "-"),
        at_most(f"one case, {fuel}: cycle.solve", keystroke, "loop points", 4.0, "one point of the loop"),
        reported(f"one case, {fuel}: read, checked and solved", one, "loop points", "one point of the loop"),
        at_most(f"{fuel}: points with another code than the loop", float(np.sum(codes != other_codes)), "-", 0.0, against),
        at_most(f"{fuel}: specific impulse, largest relative difference", worst, "-", 1e-6, against),
    ]
