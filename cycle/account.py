"""What a walk is worth: thrust, impulse, efficiencies, and which process cost what.

Every function takes a march and gives arrays over all its points (N,), NaN where a point has no value.
Definitions: Curran and Craig (AFAPL-TR-73-38, 1973) and Riggins (J. Propulsion and Power 13, 1997) for thrust potential
and losses; the exergy balance is the second law in the frame of the undisturbed air.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np

from cycle.arrays import Array, Codes
from cycle.constants import STANDARD_GRAVITY
from cycle.flow import states
from cycle.flowpath import assembly, combustor
from cycle.flowpath.stream import Stream
from cycle.flowpath.viscous import VISCOUS
from cycle.gas.base import Gas
from cycle.gas.constant import ConstantGas
from cycle.gas.equilibrium import EquilibriumGas
from cycle.gas.frozen import FrozenGas
from cycle.gas.join import Request, apply_together, solve_together
from cycle.gas.state import State
from cycle.resting import before_burning
from cycle.walk import March, Record, case_gas


@dataclass(frozen=True, slots=True)
class Row:
    """One line of an account: key, label, value (N,), dimension of its unit."""

    key: str
    label: str
    value: Array
    unit: str = "force"


def spread(march: March, index: Codes, values: Array) -> Array:
    """Values of the points `index` as an array over all points, NaN elsewhere."""
    whole = np.full(march.setting.size, np.nan)
    whole[index] = values
    return whole


def injection_pressure(march: March) -> Array:
    """Highest pressure against which the fuel enters, Pa (N,): that of station 3, along a duct the wall's at its injectors; NaN where no
    fuel does."""
    burner, entry = march.named("burner"), march.stations().get("3")
    whole = np.full(march.setting.size, np.nan)
    if burner is None or entry is None or burner.process.booking is None:
        return whole
    pressure, profile = entry.taken(burner.index).stream.state.pressure, burner.process.profile
    places = assembly.cells(march.setting.take(burner.index), "combustor.injector", "x")
    if profile and places is not None:
        along = [_along(profile["x"], profile["pressure"], x) for x in places]
        pressure = np.maximum.reduce(along)
    return spread(march, burner.index, np.where(burner.process.booking.fuel_flow > 0.0, pressure, np.nan))


def _along(x: Array, values: Array, at: Array) -> Array:
    """Values of a profile (R, N) at the places (N,), linear between its rows; the nearest row's beyond them."""
    order = np.argsort(x, axis=0, kind="stable")
    x, values = np.take_along_axis(x, order, 0), np.take_along_axis(values, order, 0)
    row = np.clip((x <= at).sum(0), 1, np.isfinite(x).sum(0) - 1)
    (low, high), (first, last) = (np.take_along_axis(v, np.stack([row - 1, row]), 0) for v in (x, values))
    with np.errstate(invalid="ignore"):  # a point without a solution has no profile
        part = np.clip((at - low) / np.where(high > low, high - low, 1.0), 0.0, 1.0)
        found: Array = first + part * (last - first)
    return found


def usable(state: State, values: Array) -> Array:
    """Values, NaN where the state they come from is out of range or not converged."""
    return np.where(state.good, values, np.nan)


def totals(march: March, names: tuple[str, ...]) -> dict[str, State]:
    """Stagnation state at each of the stations `names`, of the points that reached it."""
    records = march.stations()
    requests = [Request(r.stream.gas, (r.stream.total_enthalpy, r.stream.state.entropy)) for r in (records[n] for n in names)]
    return dict(zip(names, solve_together("hs", requests), strict=True))


def criticals(march: March, names: tuple[str, ...]) -> dict[str, State]:
    """Sonic state of the stream at each of the stations `names`, of the points that reached it."""
    records = march.stations()
    requests = [
        Request(r.stream.gas, (r.stream.total_enthalpy, r.stream.state.entropy), r.stream.state) for r in (records[n] for n in names)
    ]
    return dict(zip(names, apply_together(states.sonic, requests), strict=True))


def thrust(march: March) -> Array:
    """Uninstalled thrust, N: (m u + p A)10 - (m u + p A)0 - p0 (A10 - A0)."""
    points = march.solved
    end, start = march.reached("10"), march.named("flight")
    if end is None or start is None:
        return np.full(march.setting.size, np.nan)
    return spread(march, points, _force(end.taken(points).stream, start.taken(points).stream))


def _force(out: Stream, free: Stream) -> Array:
    force: Array = out.stream_thrust - free.stream_thrust - free.state.pressure * (out.area - free.area)
    return force


def performance(march: March) -> dict[str, Array]:
    """The headline figures by their keys of `quantities.OUTPUTS`, cheap: no state is solved."""
    setting, points = march.setting, march.solved
    nothing = np.full(setting.size, np.nan)
    found = {"stoichiometric_ratio": setting.stoichiometric_ratio, "heating_value": setting.heating_value}
    flight = march.named("flight")
    if flight is not None and "altitude" in flight.process.figures:
        found["altitude"] = spread(march, flight.index, flight.process.figures["altitude"])
    burner = march.named("burner")
    if burner is None:
        return found
    first = march.records[0]
    booking = burner.process.booking
    assert booking is not None
    air = spread(march, burner.index, first.stream.mass_flow[np.searchsorted(first.index, burner.index)])
    fuel = spread(march, burner.index, booking.fuel_flow)
    found |= {"fuel_flow": fuel, "fuel_air_ratio": fuel / air, "equivalence_ratio": fuel / air / setting.stoichiometric_ratio}
    throat = march.named("throat")
    if throat is not None:
        found["throat_area"] = spread(march, throat.index, throat.stream.area)
        found["burner_exit_over_throat"] = spread(march, throat.index, throat.process.figures["burner_exit_over_throat"])
    if march.chain[0] == "entry":
        last = march.records[-1].taken(points).stream
        entered = march.records[0].taken(points).stream
        return found | {"stream_thrust_gain": spread(march, points, last.stream_thrust - entered.stream_thrust)}
    nozzle = march.reached("10")
    if nozzle is None:
        return found | {"thrust": nothing}
    out, free = nozzle.taken(points).stream, march.records[0].taken(points).stream
    with np.errstate(all="ignore"):
        force = spread(march, points, _force(out, free))
        heat = fuel * setting.heating_value
        gain = out.mass_flow * out.velocity**2 - free.mass_flow * free.velocity**2
        thermal = spread(march, points, gain) / (2.0 * heat)
        overall = force * spread(march, points, free.velocity) / heat
        q = 0.5 * free.state.density * free.velocity**2
        derived = {
            "thrust": force,
            "installed_thrust": force - external_drag(march),
            "specific_thrust": force / air,
            "specific_impulse": force / (STANDARD_GRAVITY * fuel),
            "thrust_specific_fuel_consumption": fuel / force,
            "thermal_efficiency": thermal,
            "propulsive_efficiency": overall / thermal,
            "overall_efficiency": overall,
            "thrust_coefficient": force / (spread(march, points, q) * setting["engine.capture_area"]),
            "captured_mass_fraction": spread(march, points, free.area) / setting["engine.capture_area"],
        }
    no_fuel = {k: np.where(fuel > 0.0, v, np.nan) for k, v in derived.items() if k in _NEEDS_FUEL}
    return found | derived | no_fuel


def external_drag(march: March) -> Array:
    """Additive and spill drag, N, (N,): NaN where the case has no lip geometry to know them by."""
    inlet, diffuser = march.named("external compression"), march.named("isolator")
    if inlet is None:
        return np.full(march.setting.size, np.nan)
    drag = spread(march, inlet.index, inlet.process.figures["additive_drag"])
    if diffuser is None or "spilled_flow" not in diffuser.process.figures:
        return drag
    return drag + _spill_drag(march, diffuser)


def _spill_drag(march: March, diffuser: Record) -> Array:
    """Momentum that the spilled air has lost once it is back at ambient pressure; see `geometric_throat.spill_drag`."""
    figures, points = diffuser.process.figures, diffuser.index
    free = march.records[0].taken(points).stream
    p0 = free.state.pressure
    entropy = np.where(figures["spilled_flow"] > 0.0, figures["spilled_entropy"], free.state.entropy)
    out = free.gas.at("sp", entropy, p0)
    lost = free.velocity - states.velocity(free.total_enthalpy, out)
    return spread(march, points, usable(out, figures["spilled_flow"] * lost))


_NEEDS_FUEL = (
    "specific_impulse", "thrust_specific_fuel_consumption", "thermal_efficiency", "propulsive_efficiency", "overall_efficiency",
)  # fmt: skip


def _potential_gas(record: Record, march: March) -> Gas:
    upstream = record.process.name in ("flight", "inlet", "external compression", "internal compression", VISCOUS, "isolator", "entry")
    return case_gas(record.stream.gas, march.setting) if upstream else record.stream.gas


def potentials(march: March) -> list[Array]:
    """Thrust potential behind each record of the march, N, each (N,): m u_e - m0 u0 after isentropic expansion to p0."""
    if march.named("flight") is None:
        return []
    requests = []
    for record in march.records:
        p0 = march.ambient_pressure(record.index)
        entropy = record.stream.state.entropy
        requests.append(Request(_potential_gas(record, march), (entropy, p0)))
    found = []
    for record, state in zip(march.records, solve_together("sp", requests), strict=True):
        free = march.records[0].taken(record.index).stream
        with np.errstate(invalid="ignore"):
            u = np.sqrt(2.0 * np.maximum(record.stream.total_enthalpy - state.enthalpy, 0.0))
        value = record.stream.mass_flow * u - free.mass_flow * free.velocity
        found.append(spread(march, record.index, usable(state, value)))
    return found


def nozzle_thrust_coefficient(march: March, potential: list[Array]) -> Array:
    """Gross thrust of the exit over that of an isentropic expansion of the burner exit to ambient pressure; (N,)."""
    nozzle, points = march.reached("10"), march.solved
    if nozzle is None or not potential or not points.size:
        return np.full(march.setting.size, np.nan)
    burner = next(i for i, r in enumerate(march.records) if r.process.name == "burner")
    out, free = nozzle.taken(points).stream, march.records[0].taken(points).stream
    gross = out.stream_thrust - free.state.pressure * out.area
    ideal = potential[burner][points] + free.mass_flow * free.velocity
    return spread(march, points, gross / ideal)


_POTENTIAL_LABELS = {"burner": "burner gain"}


CLOSED = 1e-9
"""Share of the stream thrust below which a potential is rounding: as the audit."""


def potential_rows(march: March, potential: list[Array]) -> tuple[Row, ...]:
    """Where the thrust potential went, process by process to the thrust; the rows sum to it. For solved points."""
    nozzle = march.reached("10")
    if not potential or nozzle is None:
        return ()
    changes: dict[str, Array] = {}
    for record, before, after in zip(march.records[1:], potential[:-1], potential[1:], strict=True):
        changes[record.process.name] = changes.get(record.process.name, 0.0) + (after - before)
    rows = [Row(name.replace(" ", "_"), _POTENTIAL_LABELS.get(name, name), value) for name, value in changes.items()]
    points = march.solved
    # hot ambient air enters with its stated composition: what it gains on the way to equilibrium is there from the start
    own = np.nan_to_num(np.abs(potential[0])) > CLOSED * spread(march, points, nozzle.taken(points).stream.stream_thrust)
    if own.any():
        rows = [Row("freestream", "freestream off equilibrium", potential[0]), *rows]
    out = nozzle.taken(points).stream
    sideways = spread(march, points, (out.axial_factor - 1.0) * out.mass_flow * out.velocity)
    force = thrust(march)
    return (
        *rows,
        Row("divergence", "divergence", sideways),
        Row("pressure_mismatch", "under- or over-expansion", force - potential[-1] - sideways),
        Row("thrust", "uninstalled thrust", force),
    )


def one_pair(march: March) -> bool:
    """Whether h and s have one datum from flight to exit: true but for several constant-gamma pairs."""
    return not any(r.process.name == "gas change" for r in march.records)


def _complete(march: March, burnt_fraction: Array, points: Codes) -> tuple[Gas, Array, Array]:
    """Gas, total enthalpy and mass flow of fuel and air burnt to `burnt_fraction` at rest, nothing lost to the wall."""
    burner = march.named("burner")
    assert burner is not None
    before = march.named("isolator")
    entering = (march.records[0] if before is None else before).taken(points).stream
    setting = march.setting.take(points)
    zero = np.zeros(points.size)
    ideal = replace(
        setting,
        numbers={**setting.numbers, "combustor.burnt_fraction": burnt_fraction, "combustor.wall_heat": zero},
    )
    ratio = burner.taken(points).process.figures["fuel_air_ratio"]
    mixed = combustor.mix(combustor.burner_gas(entering, setting), ideal, ratio)
    return mixed.gas, mixed.total_enthalpy, mixed.mass_flow


def losses(march: March, total: Mapping[str, State], potential: list[Array]) -> tuple[Row, ...]:
    """Losses against the ideal engine, N: ideal thrust, what each process took in order, thrust. For solved points.

    I_k is the thrust with the real processes up to k and the rest ideal: complete burning at rest without loss of total
    pressure, then isentropic expansion to p0 in the case's gas. Riggins (1997). A composition that the inlet held rests at less
    pressure than one in equilibrium: its release is a row of its own, a gain.
    """
    points, stations = march.solved, march.stations()
    if not points.size or not potential or "10" not in stations or not one_pair(march):
        return ()
    setting = march.setting.take(points)
    one, own = np.ones(points.size), setting["combustor.burnt_fraction"]
    free = march.records[0].taken(points).stream
    p0 = free.state.pressure
    labels, at_rest = before_burning(march, total, points)
    cases = [*((p, one) for p in at_rest), (at_rest[-1], own)]
    mixtures = [_complete(march, burnt, points) for _, burnt in cases]
    hot = solve_together("hp", [Request(g, (h, p)) for (p, _), (g, h, _) in zip(cases, mixtures, strict=True)])
    cold = solve_together("sp", [Request(g, (s.entropy, p0)) for s, (g, _, _) in zip(hot, mixtures, strict=True)])
    with np.errstate(invalid="ignore"):
        ideal = [
            usable(a, usable(b, m * np.sqrt(2.0 * (h - b.enthalpy)))) - free.mass_flow * free.velocity
            for a, b, (_, h, m) in zip(hot, cold, mixtures, strict=True)
        ]
    position = next(i for i, r in enumerate(march.records) if r.process.name == "burner")
    steps = [*ideal, potential[position][points], thrust(march)[points]]
    labels += [
        ("incomplete_burning", "incomplete burning"), ("burner", "heat at speed, mixing, friction, wall heat"),
        ("nozzle", "nozzle and exit"),
    ]  # fmt: skip
    lost = [Row(k, label, spread(march, points, a - b)) for (k, label), a, b in zip(labels, steps[:-1], steps[1:], strict=True)]
    return (
        Row("ideal", "ideal thrust", spread(march, points, steps[0])),
        *lost,
        Row("thrust", "uninstalled thrust", spread(march, points, steps[-1])),
    )


def temperature_rise_efficiency(march: March, total: Mapping[str, State]) -> Array:
    """Total-temperature rise of the burner over that of complete burning of the same fuel, at its exit total pressure."""
    burner = march.named("burner")
    if burner is None or not burner.index.size or not one_pair(march):
        return np.full(march.setting.size, np.nan)
    points = burner.index
    gas, h, _ = _complete(march, np.ones(points.size), points)
    after = total["4"]
    stations = march.stations()
    before = total["3"].take(np.searchsorted(stations["3"].index, points))
    full = gas.at("hp", h, after.pressure, start=after)
    with np.errstate(all="ignore"):
        rise = (after.temperature - before.temperature) / (full.temperature - before.temperature)
    warms = full.temperature > before.temperature
    return spread(march, points, np.where(full.good & after.good & before.good & warms, rise, np.nan))


@dataclass(frozen=True, slots=True)
class _Dead:
    enthalpy: Array
    entropy: Array


def _dead_state(out: Stream, free: Stream) -> _Dead:
    """The exhaust burnt out at ambient temperature and pressure, water as vapour."""
    gas = out.gas
    if isinstance(gas, FrozenGas | EquilibriumGas):
        gas = gas.complete()
    state = gas.at("tp", free.state.temperature, free.state.pressure)
    return _Dead(state.enthalpy, state.entropy)


def exergy(march: March) -> tuple[Row, ...]:
    """Exergy balance of the solved points, W: what fuel and air bring, then where it goes; sides are equal.

    b = h - T0 s; m_f b_f + m_0 b_0 - m_10 b_dead + m_f u0^2/2 = thrust u0 + T0 S_gen + m_10 (b_10 - b_dead)
    + m_10 (u_10 - u_0)^2/2 - (p_10 - p_0) A_10 u_0, with the wall heat and the divergence as rows of their own. The
    fuel's supply pressure, no less than the burner's, and standard entropy are needed; at constant gamma its exergy is what
    it brings above the dead state.
    """
    points, nozzle, burner = march.solved, march.reached("10"), march.named("burner")
    if not points.size or nozzle is None or burner is None or march.named("flight") is None or not one_pair(march):
        return ()
    setting = march.setting.take(points)
    free, out = march.records[0].taken(points).stream, nozzle.taken(points).stream
    booking = burner.taken(points).process.booking
    assert booking is not None
    T0, p0, u0 = free.state.temperature, free.state.pressure, free.velocity
    dead = _dead_state(out, free)
    if isinstance(out.gas, ConstantGas):
        fuel_entropy = dead.entropy
    elif setting.fuel is not None and setting.has("fuel.supply_pressure"):
        supply = setting["fuel.supply_pressure"]
        enters = ~(injection_pressure(march)[points] > supply)
        fuel_entropy = np.where(enters, setting.fuel.entropy(setting["fuel.temperature"], supply), np.nan)
    else:
        return ()
    if np.isnan(fuel_entropy).all():
        return ()
    added = booking.mass_added
    made = out.mass_flow * out.state.entropy - free.mass_flow * free.state.entropy - added * fuel_entropy
    b_dead = dead.enthalpy - T0 * dead.entropy
    b_out = out.state.enthalpy - T0 * out.state.entropy
    brought_fuel = booking.fuel_flow * booking.fuel_enthalpy - added * T0 * fuel_entropy
    brought_air = free.mass_flow * (free.state.enthalpy - T0 * free.state.entropy)
    force = thrust(march)[points]
    axial = out.axial_factor * out.velocity
    rows = (
        ("input", "fuel and air above the dead state", brought_fuel + brought_air - out.mass_flow * b_dead + 0.5 * added * u0**2),
        ("thrust_power", "thrust power", force * u0),
        ("entropy_made", "entropy made", T0 * made),
        ("exhaust", "hot exhaust", out.mass_flow * (b_out - b_dead)),
        ("wake", "kinetic energy of the wake", 0.5 * out.mass_flow * (out.velocity - u0) ** 2),
        ("divergence", "divergence", out.mass_flow * u0 * (out.velocity - axial)),
        ("pressure_mismatch", "exit pressure", -(out.state.pressure - p0) * out.area * u0),
        ("wall_heat", "wall heat", booking.wall_heat),
    )
    return tuple(Row(k, label, spread(march, points, value), "power") for k, label, value in rows)
