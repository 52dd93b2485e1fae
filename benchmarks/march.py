"""The duct march in batches against the same march point by point with Cantera, and its time for one case."""

from __future__ import annotations

import numpy as np

from benchmarks.cantera_march import ATTACHED, FUEL_TEMPERATURE, NONE, THROAT, TRAIN, March, Points, sample
from benchmarks.timing import Row, at_least, at_most, reported, seconds
from cycle.constants import STANDARD_AIR
from cycle.flow.duct.layout import AreaLaw, Injectors, Supply, Walls
from cycle.flow.duct.modes import PANELS
from cycle.flow.duct.panels import STAGES
from cycle.flowpath.duct import Flow, solve_duct
from cycle.flowpath.stream import stream
from cycle.gas.frozen import air_gas
from cycle.gas.fuels import FUELS
from cycle.gas.species import species_table

MANY, FEW, CHECKED = 10_000, 30, 8
SLICES = PANELS * STAGES
MODES = {NONE: "none", ATTACHED: "attached", TRAIN: "shock train", THROAT: "thermal throat"}
REFINED = (200, 400)


def batch(points: Points, panels: int = PANELS) -> Flow:
    """The points by the program."""
    fuel, n = FUELS["hydrogen"], points.mach.size
    gas = air_gas(species_table(tuple(STANDARD_AIR), fuel), STANDARD_AIR, "equilibrium", n)
    state = gas.at("tp", points.temperature, points.pressure)
    u = points.mach * state.sound_speed
    entering = stream(gas, state, u, state.density * u * points.area)
    law = AreaLaw(np.vstack([0.0 * points.length, points.length]), np.vstack([np.ones(n), points.opening]))
    injectors = Injectors([0.0], [1.0], points.speed[None], points.theta[None])
    ratio = points.equivalence * float(fuel.stoichiometric_ratio(STANDARD_AIR))
    supply = Supply(fuel, ratio, fuel.total_enthalpy(FUEL_TEMPERATURE), 0.0, points.burnt)
    return solve_duct(entering, law, injectors, supply, Walls(points.friction), panels=panels)


def loop(points: Points, count: int) -> tuple[np.ndarray, np.ndarray]:
    """Modes and exit impulses of the points one by one with Cantera."""
    march = March()
    found = [march.run(points.take(i), count) for i in range(points.mach.size)]
    return np.array([mode for mode, _ in found]), np.array([impulse for _, impulse in found])


def extrapolated(points: Points) -> tuple[np.ndarray, np.ndarray]:
    """The loop on two fine grids, its second-order error taken out."""
    (modes, coarse), (_, fine) = (loop(points, count) for count in REFINED)
    return modes, fine + (fine - coarse) / ((REFINED[1] / REFINED[0]) ** 2 - 1.0)


def one_of_each(points: Points, flow: Flow) -> dict[str, Points]:
    """A point of each mode, for the time of one case."""
    return {MODES[mode]: points.take(np.flatnonzero(flow.mode == mode)[:1]) for mode in (ATTACHED, TRAIN, THROAT)}


def rows(short: bool = False) -> list[Row]:
    """The bars of the march."""
    many, few, checked = (2000, 10, 4) if short else (MANY, FEW, CHECKED)
    whole, part = sample(many), sample(few, seed=1)
    flow = batch(whole)
    ours, theirs = seconds(lambda: batch(whole), 1) / many, seconds(lambda: loop(part, SLICES), 1) / few
    chosen = np.concatenate([np.flatnonzero(flow.mode == mode)[:checked] for mode in (ATTACHED, TRAIN, THROAT)])
    modes, impulse = extrapolated(whole.take(chosen))
    same = modes == flow.mode[chosen]
    worst = float(np.max(np.abs(impulse / flow.exit.stream_thrust[chosen] - 1.0)[same]))
    finer = batch(whole, 2 * PANELS)
    both = (flow.mode == finer.mode) & (flow.mode != NONE)
    grid = float(np.max(np.abs(flow.exit.stream_thrust / finer.exit.stream_thrust - 1.0)[both]))
    against = "point-by-point Cantera march"
    found = [
        at_least(f"duct, {many} points, {SLICES} slices each: faster by", theirs / ours, "times", 50.0, against),
        reported("duct: time a point", ours * 1e6, "us"),
        reported("the march with Cantera: time a point", theirs * 1e6, "us"),
        at_most("points in another mode", float(np.sum(~same)), f"of {chosen.size}", 0.0, f"{against}, refined"),
        at_most("exit impulse, largest relative difference", worst, "-", 1e-6, f"{against}, refined and extrapolated"),
        at_most("exit impulse, largest change on doubling the panels", grid, "-", 2e-5, "twice the panels"),
        at_most("points in another mode on doubling the panels", float(np.sum(flow.mode != finer.mode)), f"of {many}", 0.0, "twice"),
    ]
    for name, point in one_of_each(whole, flow).items():
        sixty = point.take(np.zeros(60, int))
        alone = seconds(lambda p=point: batch(p), 7)
        found.append(at_most(f"one case, {name}", alone * 1e3, "ms", 100.0, ""))
        found.append(at_most(f"60 points, {name}", seconds(lambda p=sixty: batch(p), 5) / alone, "times one", 4.0, "one point"))
    return found
