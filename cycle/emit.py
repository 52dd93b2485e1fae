"""The emitted figures of each station, and the bridge from a march to the audit."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from functools import partial

import numpy as np

from cycle.account import injection_pressure, spread
from cycle.arrays import Array, Codes
from cycle.audit import Crossing, Emitted
from cycle.flowpath.isolator import viscosity
from cycle.flowpath.stream import Stream
from cycle.gas.constant import ConstantGas
from cycle.walk import March, Record

_STATE = (
    "pressure", "temperature", "density", "sound_speed", "enthalpy", "entropy", "gamma_frozen", "isentropic_exponent",
    "specific_heat", "molar_mass",
)  # fmt: skip


def _dynamic_pressure(s: Stream) -> Array:
    return 0.5 * s.state.density * s.velocity**2


def _unit_reynolds_number(s: Stream) -> Array:
    return s.flux / viscosity(s.state.temperature)


_OWN: dict[str, Callable[[Stream], Array]] = {"dynamic_pressure": _dynamic_pressure, "unit_reynolds_number": _unit_reynolds_number}
_STREAM = ("velocity", "mach", "total_enthalpy", "area", "mass_flow", "stream_thrust")


def cheap(stream: Stream) -> dict[str, Callable[[], Array]]:
    """Station figures that need no further state, of the stream's own points."""
    state = {name: partial(getattr, stream.state, name) for name in _STATE}
    own = {name: partial(getattr, stream, name) for name in _STREAM}
    return {**state, **own, **{name: partial(f, stream) for name, f in _OWN.items()}}


def fractions(stream: Stream) -> Array:
    """Mole fractions (S, N)."""
    moles = stream.state.moles
    return moles / moles.sum(0) if moles.shape[0] else moles


def _station(record: Record, points: Codes) -> dict[str, Array]:
    stream = record.taken(points).stream
    figures = {name: make() for name, make in cheap(stream).items()}
    figures["axial_factor"] = stream.axial_factor
    if isinstance(stream.gas, ConstantGas):
        figures["gas_constant"] = stream.gas.gas_constant
    return figures


def audited_points(march: March) -> Codes:
    """The solved points; where there are none, those that came furthest."""
    if march.solved.size or not march.records:
        return march.solved
    return march.records[-1].index


def emitted(march: March, performance: Mapping[str, Array]) -> Emitted:
    """All emitted figures of the points to audit, detached from the solver."""
    points = audited_points(march)
    records = march.stations()
    stations = {name: _station(r, points) for name, r in records.items()}
    x = {name: fractions(r.taken(points).stream) for name, r in records.items()}
    headline = {k: v[points] for k, v in performance.items()} if march.solved.size else {}
    return Emitted(stations, x, march.setting.table, _crossings(march, points), headline)


def _crossings(march: March, points: Codes) -> list[Crossing]:
    nothing = np.zeros(points.size)
    changed: Array | None = None
    found: list[Crossing] = []
    for record in march.records:
        process = record.taken(points).process
        if process.name == "gas change":
            gas = record.taken(points).stream.gas
            changed = gas.cp if isinstance(gas, ConstantGas) else None
        if process.start == process.end:
            continue
        booking = process.booking
        if booking is None:
            found.append(
                Crossing(process.name, process.start, process.end, nothing, nothing, nothing, nothing, nothing, {}, False, True, changed)
            )
        else:
            paid = booking.mass_added > 0.0
            energy = booking.fuel_flow * booking.fuel_enthalpy - booking.wall_heat
            impulse = booking.fuel_impulse - booking.friction + booking.wall_force
            found.append(
                Crossing(
                    process.name, process.start, process.end, booking.mass_added, energy, impulse,
                    np.where(paid, _fuel_entropy(march, points), 0.0),
                    booking.wall_heat, _fuel_atoms(march), process.solves_momentum, False, changed,
                )
            )  # fmt: skip
        changed = None
    return found


def _fuel_atoms(march: March) -> dict[str, float]:
    fuel = march.setting.fuel
    return {} if fuel is None else {e: n / fuel.molar_mass for e, n in fuel.atoms.items()}


def _fuel_entropy(march: March, points: Codes) -> Array:
    """Entropy of the fuel at its supply pressure, or at the burner's where that is not given, J/(kg K).

    Where the supply is too low the fuel cannot enter, which is a limit; the burner is judged as if it came at the burner's pressure.
    """
    setting = march.setting.take(points)
    if setting.fuel is None or setting.constant_gamma:
        return np.full(points.size, np.nan)
    supply = np.fmax(injection_pressure(march)[points], setting.get("fuel.supply_pressure", np.nan))
    return setting.fuel.entropy(setting["fuel.temperature"], supply)


def station_sources(march: March, record: Record) -> dict[str, Callable[[], Array]]:
    """Figures of a station over all points of the march, NaN where a point did not reach it."""
    sources: dict[str, Callable[[], Array]] = {
        key: partial(_over_all, march, record.index, make) for key, make in cheap(record.stream).items()
    }
    return sources | {"area_ratio": partial(_area_ratio, march, record)}


def _over_all(march: March, index: Codes, make: Callable[[], Array]) -> Array:
    return spread(march, index, make())


def _area_ratio(march: March, record: Record) -> Array:
    return spread(march, record.index, record.stream.area / march.records[0].taken(record.index).stream.area)


def profile(march: March) -> dict[str, Array]:
    """The flow along the duct by name, x in m from the burner entry, (R, N): each point's rows by place, NaN behind its last one.
    Empty where the burner is no duct."""
    record = march.named("burner")
    if record is None or not record.process.profile:
        return {}
    x = _once(record.process.profile)
    order, longest = np.argsort(x, axis=0, kind="stable"), int(np.isfinite(x).sum(0).max(initial=0))
    found = {}
    for name, rows in record.process.profile.items():
        found[name] = np.full((longest, march.setting.size), np.nan)
        found[name][:, record.index] = np.take_along_axis(np.where(np.isnan(x), np.nan, rows), order, 0)[:longest]
    return found


def _once(profile: Mapping[str, Array]) -> Array:
    """Places (R, N) of a profile, m, NaN where a row says again what another one says: a march is cut at the end of the core."""
    x = profile["x"]
    order = np.argsort(x, axis=0, kind="stable")
    again = np.zeros(x.shape, np.bool_)
    same = np.ones((max(x.shape[0] - 1, 0), x.shape[1]), np.bool_)
    for rows in profile.values():
        there = np.take_along_axis(rows, order, 0)
        same &= there[1:] == there[:-1]
    np.put_along_axis(again, order[1:], same, 0)
    return np.where(again, np.nan, x)
