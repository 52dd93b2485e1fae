"""Speed of the gas models against Cantera, in one process. Run: python -m benchmarks.thermochemistry"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from benchmarks.cantera_cycle import CHOKED, FAILED, NOT_COMPRESSED, SOLVED, PointByPoint, Points, sample
from benchmarks.timing import Row, at_least, at_most, printed, ratio, reported, seconds
from cycle.constants import STANDARD_AIR, STANDARD_GRAVITY
from cycle.gas.equilibrium import EquilibriumGas
from cycle.gas.frozen import FrozenGas, air_gas
from cycle.gas.fuels import FUELS
from cycle.gas.species import species_table
from cycle.gas.state import State, scatter

MANY, SUBSAMPLE = 10_000, 300


def products(fuel: str, n: int, seed: int = 1) -> tuple[EquilibriumGas, np.ndarray, np.ndarray]:
    """Burnt gases at equivalence ratios 0.1-1.2, with T 500-3500 K and p 10 kPa-3 MPa."""
    rng = np.random.default_rng(seed)
    chosen = FUELS[fuel]
    air = air_gas(species_table(tuple(STANDARD_AIR), chosen), STANDARD_AIR, "equilibrium", n)
    gas = air.fuelled(chosen, rng.uniform(0.1, 1.2, n) * chosen.stoichiometric_ratio(STANDARD_AIR), np.ones(n))
    assert isinstance(gas, EquilibriumGas)
    return gas, rng.uniform(500.0, 3500.0, n), 10.0 ** rng.uniform(4.0, 6.5, n)


def states(fuel: str = "ethylene") -> list[Row]:
    """(h, p) and (s, p) of 10,000 points against Cantera's time for a subsample of them, which starts from the right
    composition: to its favour."""
    gas, T, p = products(fuel, MANY)
    known = gas.at("tp", T, p)
    solver = PointByPoint(fuel).gas
    rows = []
    for kind, target in (("hp", known.enthalpy), ("sp", known.entropy)):
        moles = known.moles[[gas.table.index[_ours(name)] for name in solver.species_names]]

        def alone(kind: str = kind, target: np.ndarray = target, moles: np.ndarray = moles) -> None:
            for i in range(SUBSAMPLE):
                solver.TPX = 1500.0, p[i], moles[:, i]
                setattr(solver, kind.upper(), (target[i], p[i]))
                solver.equilibrate(kind.upper(), rtol=1e-9)

        share = ratio(lambda kind=kind, target=target: gas.at(kind, target, p), alone, repeats=3) * SUBSAMPLE / MANY
        rows.append(at_most(f"({kind[0]}, p) of {MANY} {fuel} states, time a state", share, "of Cantera's", 1 / 20, "Cantera"))
    return rows


def _ours(name: str) -> str:
    return "C2H2" if name.startswith("C2H2") else name


def times(fuel: str, n: int) -> list[Row]:
    """Time a state and iterations of each kind at n points."""
    gas, T, p = products(fuel, n)
    known = gas.at("tp", T, p)
    mach = np.random.default_rng(2).uniform(1.2, 3.0, n)
    u = mach * known.sound_speed
    G = known.density * u
    near = gas.at("tp", T * 1.05, p * 1.05)
    ht = known.enthalpy + 0.5 * u * u
    jobs: dict[str, tuple[tuple[np.ndarray, ...], State | None]] = {
        "hp": ((known.enthalpy, p), None),
        "sp": ((known.entropy, p), None),
        "vp": ((1.0 / known.density, p), None),
        "hs": ((known.enthalpy, known.entropy), None),
        "momentum": ((p + G * u, G, ht, G), near),
    }
    rows = []
    for kind, (targets, start) in jobs.items():
        t = seconds(lambda k=kind, q=targets, s=start: gas.at(k, *q, start=s), 3 if n > 100 else 25) / n
        rows.append(reported(f"{kind}, {fuel}, N = {n}", t * 1e6, "us a state"))
        counts = gas.solve(kind, *targets, start=start).iterations
        rows.append(reported(f"{kind}, {fuel}, N = {n}: iterations, mean (largest {counts.max()})", float(counts.mean()), "-"))
    return rows


def kernel(fuel: str, points: Points) -> tuple[np.ndarray, np.ndarray]:
    """Codes and specific impulses of the cycle of `cantera_cycle` by five batched solves and the gas verbs alone."""
    chosen, n = FUELS[fuel], points.mach.size
    air = air_gas(species_table(tuple(STANDARD_AIR), chosen), STANDARD_AIR, "frozen", n)
    assert isinstance(air, FrozenGas)
    ambient = air.at("tp", points.temperature, points.pressure)
    u0 = points.mach * ambient.sound_speed
    ht = ambient.enthalpy + 0.5 * u0**2
    reacting = air.reacting()
    slowed = reacting.at("hp", ht - 0.5 * points.efficiency * u0**2, points.pressure)
    entry = reacting.at("sp", slowed.entropy, points.entry_pressure)
    with np.errstate(invalid="ignore"):
        u3 = np.sqrt(2.0 * (ht - entry.enthalpy))
    code = np.where(ht > entry.enthalpy, SOLVED, NOT_COMPRESSED)
    f = points.equivalence_ratio * float(chosen.stoichiometric_ratio(STANDARD_AIR))
    gas = reacting.fuelled(chosen, f, np.ones(n))
    G = entry.density * u3 * (1.0 + f)
    F = points.entry_pressure + entry.density * u3**2
    ht4 = (ht + f * chosen.total_enthalpy(300.0)) / (1.0 + f)
    start, margin = burner_start(gas, G, F, ht4)
    code = np.where((code == SOLVED) & (margin < 0.0), CHOKED, code)
    impulse = np.full(n, np.nan)
    live = np.flatnonzero(code == SOLVED)
    burnt_gas = gas.take(live)
    burnt = burnt_gas.at("momentum", F[live], G[live], ht4[live], G[live], start=start.take(live))
    end = burnt_gas.at("sp", burnt.entropy, points.pressure[live])
    u10 = np.sqrt(2.0 * (ht4[live] - end.enthalpy))
    impulse[live] = ((1.0 + f[live]) * u10 - u0[live]) / (f[live] * STANDARD_GRAVITY)
    code[live[~(burnt.good & end.good)]] = FAILED
    return code, impulse


def burner_start(gas: EquilibriumGas, G: np.ndarray, F: np.ndarray, ht: np.ndarray) -> tuple[State, np.ndarray]:
    """A state near the supersonic end of the burner, and the total enthalpy at which it chokes less ht.

    At M = 1 the volume is v* = g F / ((1 + g) G^2); total enthalpy is stationary there, so one state near it decides, and
    a second where the first is too close to call.
    """
    p = F / 2.22
    v = (F - p) / G**2
    state = gas.at("vp", v, p)
    sonic, curvature, top = _parabola(state, v, F, G)
    close = np.flatnonzero(np.abs(top - ht) < 1e-3 * curvature * sonic**2)
    if close.size:
        v_close = sonic[close]
        again = gas.take(close).at("vp", v_close, (F - G**2 * sonic)[close])
        state = scatter(state, close, again)
        sonic[close], curvature[close], top[close] = _parabola(again, v_close, F[close], G[close])
    v4 = sonic + np.sqrt(np.maximum(top - ht, 0.0) / curvature)
    gas_constant = state.pressure / (state.density * state.temperature)
    for _ in range(2):
        # far from M = 1 the parabola is too crude for p: T from the energy balance, then v from the impulse
        T4 = np.clip(state.temperature + (ht - 0.5 * (G * v4) ** 2 - state.enthalpy) / state.specific_heat, 300.0, 4500.0)
        v4 = (F + np.sqrt(np.maximum(F * F - 4.0 * G * G * gas_constant * T4, 0.0))) / (2.0 * G * G)
    return replace(state, temperature=T4, pressure=F - G * G * v4, density=1.0 / v4), top - ht


def _parabola(state: State, v: np.ndarray, F: np.ndarray, G: np.ndarray) -> tuple[np.ndarray, ...]:
    """Sonic volume, curvature and top of the total enthalpy along the Rayleigh line, exponent held."""
    g = state.isentropic_exponent
    curvature = (g + 1.0) / (2.0 * (g - 1.0)) * G**2
    sonic = g * F / ((1.0 + g) * G**2)
    return sonic, curvature, state.enthalpy + 0.5 * G**2 * v**2 + curvature * (v - sonic) ** 2


def cycles(fuel: str = "hydrogen") -> list[Row]:
    """The simple cycle at 10,000 points and at one, against the point-by-point loop."""
    loop, few = PointByPoint(fuel), sample(200)
    many, one = sample(MANY), sample(1)
    codes, impulses = kernel(fuel, few)
    other_codes, other_impulses = loop.run(few)
    per_point = loop.solves / few.mach.size
    both = (codes == SOLVED) & (other_codes == SOLVED)
    worst = float(np.max(np.abs(impulses[both] / other_impulses[both] - 1.0)))
    gain = 1.0 / (ratio(lambda: kernel(fuel, many), lambda: loop.run(few), 3) * few.mach.size / MANY)
    single = ratio(lambda: kernel(fuel, one), lambda: loop.run(one), 25)
    return [
        at_least(f"simple cycle, {fuel}, {MANY} points: faster by", gain, "times", 100.0, "point-by-point Cantera loop"),
        reported(f"simple cycle, {fuel}: time a point", seconds(lambda: kernel(fuel, many), 3) / MANY * 1e6, "us"),
        reported("equilibrium solves a point in the loop", per_point, "-"),
        at_most(f"simple cycle, {fuel}, one point: time", single, "loop points", 4.0, "one point of the loop"),
        at_most(f"simple cycle, {fuel}: points with another code", float(np.sum(codes != other_codes)), "-", 0.0, "the loop"),
        at_most(f"simple cycle, {fuel}: specific impulse, largest difference", worst, "relative", 1e-6, "the loop"),
    ]


def rows() -> list[Row]:
    """All rows of this benchmark."""
    found = states("ethylene") + states("hydrogen") + cycles("hydrogen") + cycles("ethylene")
    for n in (MANY, 1):
        found += times("hydrogen", n) + times("ethylene", n)
    return found


if __name__ == "__main__":
    print(printed(rows()))
