"""Nozzle flow beyond one plain expansion: composition that freezes on the way, an internal and an external part; and the normal
shock in a passage, which a nozzle shares with a diffuser.

Streams in, streams out, N points at once, any gas. A point without a solution carries a fault and NaN.
Shapiro, The Dynamics and Thermodynamics of Compressible Fluid Flow (1953), ch. 4 and 5, for the one-dimensional relations.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.flow import gas_shocks, isentropic, states
from cycle.flowpath.stream import Stream
from cycle.gas.state import NOT_CONVERGED, OUT_OF_RANGE, State, merge, state_from

FAULTS: dict[str, str] = {
    "solved": "the expansion has a solution",
    "subsonic": "a subsonic stream enters a passage that only widens",
    "supersonic": "a supersonic stream enters a passage that only narrows",
    "upstream": "the end asked for lies upstream of the entry, or is too small for the losses",
    "exit-shrinks": "the end of the external expansion is smaller than the end of the internal nozzle",
    "no-flow": "the back pressure is not below the total pressure, or asks the stream to slow down",
    "shock-expelled": "the back pressure drives the shock out of the nozzle's supersonic entry",
    "out-of-range": "a state left the range of the data (150 to 6000 K)",
    "not-converged": "an iteration ended without an answer: a defect of the program, please report it",
}
"""Why a point has no solution, in words; fault codes count through them."""

FAULT_NAMES = tuple(FAULTS)
FAULT_CODE = {name: i for i, name in enumerate(FAULT_NAMES)}

EQUAL = 1e-9
"""Relative difference below which two pressures or areas are the same one."""

NEARLY_SONIC = 0.9
"""Mach number of kept composition above which a stream that is sonic in its own gas may stand."""

WEAK = 1e-7
"""Excess over Mach 1 below which a shock changes nothing that double precision could show."""


def faults_of(names: dict[str, int], seen: tuple[State, ...], *rules: tuple[Flags, str]) -> Codes:
    """Fault codes (N,): the first of `rules` (flags (N,), name) that holds, then what the states `seen`, in order along the stream, say
    of their range, then 0.

    names: code of each fault name, "out-of-range" and "not-converged" among them.
    """
    ranges = [(s.range == code, name) for s in seen for code, name in ((NOT_CONVERGED, "not-converged"), (OUT_OF_RANGE, "out-of-range"))]
    every = [*rules, *ranges]
    return np.select([flags for flags, _ in every], [names[name] for _, name in every], 0).astype(np.int64)


def blanked(given: Stream, bad: Flags) -> Stream:
    """The stream with NaN, and its state flagged, where `bad` (N,) holds."""
    empty = state_from(
        None if v is None else np.full_like(v, np.nan if v.dtype.kind == "f" else NOT_CONVERGED) for v in given.state.values()
    )
    u, m, axial = (np.where(bad, np.nan, v) for v in (given.velocity, given.mass_flow, given.axial_factor))
    return Stream(given.gas, merge(bad, empty, given.state), u, m, axial)


def moved(entering: Stream, state: State) -> Stream:
    """The stream in another state (N,) of the same total enthalpy."""
    return replace(entering, state=state, velocity=states.velocity(entering.total_enthalpy, state))


def widened(entering: Stream, area: Array) -> tuple[State, Flags]:
    """Isentropic supersonic state (N,) that fills `area` m2 (N,), and whether there is one: the entry must be sonic or faster,
    and not larger than `area`."""
    flux = np.minimum(entering.mass_flow / area, entering.flux)
    state = states.expanded_to_flux(entering.gas, entering.total_enthalpy, entering.state.entropy, flux, entering.state)
    return state, (area >= entering.area * (1.0 - EQUAL)) & (entering.mach >= 1.0 - EQUAL)


def slowed(entering: Stream, area: Array) -> State:
    """Isentropic subsonic state (N,) of a subsonic stream that has widened to `area` m2 (N,); not converged where it would have
    to pass Mach 1. Started from the area relation at constant isentropic exponent (NACA Report 1135, eq. 80)."""
    g, mach = entering.state.isentropic_exponent, np.minimum(entering.mach, 1.0)
    ratio = isentropic.area_ratio(mach, g) * area / entering.area
    slow = isentropic.subsonic_mach(np.maximum(ratio, 1.0), g)
    relative = (1.0 + 0.5 * (g - 1.0) * mach**2) / (1.0 + 0.5 * (g - 1.0) * slow**2)
    gas, s = entering.gas, entering.state.entropy
    guess = gas.at("sp", s, entering.state.pressure * relative ** (g / (g - 1.0)), start=entering.state)
    return gas.at("flux", s, entering.total_enthalpy, entering.mass_flow / area, start=guess)


@dataclass(frozen=True, slots=True)
class PassageShock:
    """A normal shock in a widening passage: the streams ahead of it and behind it."""

    ahead: Stream
    behind: Stream


def shock_at_pressure(entering: Stream, pressure: Array) -> PassageShock:
    """Normal shock where the supersonic stream has expanded without loss to `pressure` Pa (N,).

    entering: sonic or supersonic. A shock at Mach 1 changes nothing. Where the stream is subsonic at that pressure its state is
    handed on as it is. Source: Rankine-Hugoniot, see `cycle.flow.gas_shocks`.
    """
    ahead = moved(entering, entering.gas.at("sp", entering.state.entropy, pressure, start=entering.state))
    return PassageShock(ahead, shocked(ahead))


def shocked(ahead: Stream) -> Stream:
    """The stream (N,) behind a normal shock; itself where it is not supersonic. Source: see `cycle.flow.gas_shocks`."""
    front = gas_shocks.normal_shock(ahead.gas, ahead.state, ahead.velocity)
    none = ahead.mach < 1.0 + WEAK
    return replace(ahead, state=merge(none, ahead.state, front.state), velocity=np.where(none, ahead.velocity, front.velocity))


@dataclass(frozen=True, slots=True)
class Line:
    """How a stream expands: its state (N,) at a pressure Pa (N,), and at an area m2 (N,) with whether there is one."""

    at_pressure: Callable[[Stream, Array], State]
    at_area: Callable[[Stream, Array], tuple[State, Flags]]


def _isentropic_pressure(entering: Stream, pressure: Array) -> State:
    return entering.gas.at("sp", entering.state.entropy, pressure, start=entering.state)


ISENTROPIC = Line(_isentropic_pressure, widened)


def _end_pressure(entering: Stream, value: Array, line: Line) -> tuple[State, Flags]:
    return line.at_pressure(entering, value), value <= entering.state.pressure * (1.0 + EQUAL)


def _end_area(entering: Stream, value: Array, line: Line) -> tuple[State, Flags]:
    return line.at_area(entering, value)


_END: dict[str, Callable[[Stream, Array, Line], tuple[State, Flags]]] = {"pressure": _end_pressure, "area": _end_area}


def _plane_mach(entering: Stream, value: Array, last: Stream) -> State:
    mach = np.clip(value, entering.mach, np.maximum(last.mach, entering.mach))
    return states.at_mach(entering.gas, entering.total_enthalpy, entering.state.entropy, mach, entering.state)


def _plane_area(entering: Stream, value: Array, last: Stream) -> State:
    area = np.clip(value * entering.area, entering.area, np.maximum(last.area, entering.area))
    return widened(entering, area)[0]


_PLANE: dict[str, Callable[[Stream, Array, Stream], State]] = {"mach": _plane_mach, "area_ratio": _plane_area}


@dataclass(frozen=True, slots=True)
class Freezing:
    """Where the composition freezes and what comes of it.

    plane: the stream there, its gas frozen from here on; exit: the end of the expansion in that gas; before_exit (N,): whether
    the plane asked for lies ahead of the end (else the composition follows all the way, and `plane` is the lossless end);
    fault (N,): place in `FAULT_NAMES`.
    """

    plane: Stream
    exit: Stream
    before_exit: Flags
    fault: Codes


def frozen_after(entering: Stream, by: str, value: Array, end: str, end_value: Array, line: Line = ISENTROPIC) -> Freezing:
    """Expansion whose composition follows to a plane and is kept from there on.

    entering: the stream in its own gas. by: "mach", the Mach number of the following composition, or "area_ratio", over the
    entering area (the entry must then be sonic or faster); value (N,), infinite for never; a plane upstream of the entry is the
    entry. end: "pressure" Pa or "area" m2; end_value (N,). line: the expansion behind the plane; up to the plane it is lossless,
    so that a loss counted from the total state covers the whole drop. KeyError for another `by` or `end`.
    Sound speeds from the plane on are those of the kept composition. Sudden freezing: Bray, Journal of Fluid Mechanics 6 (1959) 1
    (from memory); where the plane lies is the caller's.
    """
    with np.errstate(all="ignore"):
        shifting, fits = _END[end](entering, end_value, ISENTROPIC)
        last = moved(entering, shifting)
        state = _PLANE[by](entering, value, last)
        before = {"mach": value < last.mach, "area_ratio": value * entering.area < last.area}[by]
        gas = entering.gas.frozen(state)
        kept = moved(replace(entering, gas=gas), gas.at("tp", state.temperature, state.pressure))
        # rounding must not put the plane behind the end it stands for
        limit = np.minimum(end_value, kept.state.pressure) if end == "pressure" else np.maximum(end_value, kept.area)
        final, reached = _frozen_end(kept, end, limit, before, line)
        out = moved(kept, final)
    slow = (entering.mach < 1.0 - EQUAL) & ("area" in (by.removesuffix("_ratio"), end))
    fault = faults_of(FAULT_CODE, (shifting, state, final), (slow, "subsonic"), (~(fits & reached), "upstream"))
    return Freezing(blanked(kept, fault > 0), blanked(out, fault > 0), before, fault)


def _frozen_end(kept: Stream, end: str, value: Array, before: Flags, line: Line) -> tuple[State, Flags]:
    """The end in the kept gas. Right at Mach 1 the kept composition is a little subsonic: it is on its way through the throat."""
    if end == "pressure":
        return _END[end](kept, value, line)
    state, fits = line.at_area(kept, value)
    if line is ISENTROPIC:
        fits = fits | (before & (kept.mach > NEARLY_SONIC) & state.good & (value >= kept.area))
    return state, fits


@dataclass(frozen=True, slots=True)
class TwoPart:
    """Internal nozzle to station 9, external expansion to 10.

    over_expanded (N,): the internal nozzle ends below the pressure asked for at 10, nothing expands outside and 10 is 9;
    fault (N,): place in `FAULT_NAMES`.
    """

    nine: Stream
    ten: Stream
    over_expanded: Flags
    fault: Codes


def two_part(
    entering: Stream,
    area_9: Array,
    end: str,
    end_value: Array,
    line: Line = ISENTROPIC,
    outside: Line | None = ISENTROPIC,
    from_throat: bool = False,
) -> TwoPart:
    """Expansion to the end of the internal nozzle, then outside it to the end on which thrust is booked.

    entering: sonic or supersonic. area_9: m2 (N,). end: "pressure" Pa or "area" m2 of station 10; end_value (N,). line: the
    expansion inside. outside: the expansion from 9 on; None continues `line` from the entry, so that its loss covers the whole
    drop. from_throat: the entry is a choked throat, a little subsonic where its composition is kept from there. KeyError for another
    `end`.
    """
    with np.errstate(all="ignore"):
        inner, fits = line.at_area(entering, area_9)
        nine = moved(entering, inner)
        area = nine.area * (1.0 - EQUAL)
        over = (inner.pressure < end_value * (1.0 - EQUAL)) if end == "pressure" else np.zeros(fits.shape, np.bool_)
        start, law = (entering, line) if outside is None else (nine, outside)
        outer, goes = _END[end](start, np.minimum(end_value, inner.pressure) if end == "pressure" else end_value, law)
        outer = merge(over, inner, outer)
        ten = moved(entering, outer)
    shrinks = (end == "area") & (end_value < area)
    slow = entering.mach < (NEARLY_SONIC if from_throat else 1.0 - EQUAL)
    fault = faults_of(
        FAULT_CODE, (inner, outer), (slow, "subsonic"), (~fits, "upstream"), (shrinks, "exit-shrinks"), (~(goes | over), "upstream")
    )
    return TwoPart(blanked(nine, fault > 0), blanked(ten, fault > 0), over & (fault == 0), fault)


def chosen(first: Flags, one: Stream, other: Stream) -> Stream:
    """Points of `one` where `first`, of `other` elsewhere, both of the same gas."""
    columns = (np.where(first, getattr(one, k), getattr(other, k)) for k in ("velocity", "mass_flow", "axial_factor"))
    return Stream(one.gas, merge(first, one.state, other.state), *columns)


def recovery(ahead: Stream, behind: Stream) -> Array:
    """Total pressure of `behind` over that of `ahead`, (N,), 1."""
    rest = [states.rest(s.gas, s.total_enthalpy, s.state.entropy).pressure for s in (ahead, behind)]
    return rest[1] / rest[0]


@dataclass(frozen=True, slots=True)
class Convergent:
    """A convergent nozzle, each (N,): the stream at its exit, which the exit area is sized for; whether that is sonic; margin,
    critical over back pressure less 1, positive where choked; fault: place in `FAULT_NAMES`."""

    exit: Stream
    choked: Flags
    margin: Array
    fault: Codes


def convergent(entering: Stream, back_pressure: Array) -> Convergent:
    """Isentropic nozzle that only narrows, from a subsonic stream to the back pressure or to Mach 1, whichever comes first.

    entering: subsonic. back_pressure: Pa (N,). `exit.area` passes the mass flow; a given area A passes A/exit.area of it.
    Source: Shapiro (1953), ch. 4 (from memory).
    """
    with np.errstate(all="ignore"):
        s, ht = entering.state.entropy, entering.total_enthalpy
        critical = states.sonic(entering.gas, ht, s, entering.state)
        choked = critical.pressure >= back_pressure
        free = entering.gas.at("sp", s, back_pressure, start=entering.state)
        out = moved(entering, merge(choked, critical, free))
    fast = entering.mach > 1.0 + EQUAL
    back = back_pressure > entering.state.pressure * (1.0 + EQUAL)
    fault = faults_of(FAULT_CODE, (out.state,), (fast, "supersonic"), (back, "no-flow"))
    return Convergent(
        blanked(out, fault > 0), choked & (fault == 0), np.where(fault > 0, np.nan, critical.pressure / back_pressure - 1.0), fault
    )
