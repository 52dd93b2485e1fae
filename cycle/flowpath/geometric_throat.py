"""The ramjet with a geometric throat: where the terminal shock stands so that a choked throat passes what the inlet takes in.

A supersonic inlet throat (2) opens into a diffuser (to 3) with a normal shock in it; a subsonic burner of constant area follows
(to 4), then an isentropic contraction to a choked throat (5). The shock moves until throat and mass flow agree. Where even the
shock at station 2 leaves too little total pressure, the shock stands ahead of the lip and part of the stream is spilled; its
strength is then held at that of the shock at 2, so that the recovery stays at its critical value (the classical idealisation of a
subcritical inlet: Seddon and Goldsmith, Intake Aerodynamics, from memory). Streams in, streams out, N points at once, any gas.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.flow import isentropic, roots, shocks, states
from cycle.flowpath import expansion
from cycle.flowpath.expansion import blanked, chosen, faults_of, moved, recovery
from cycle.flowpath.stream import SOLVED, STATUS_CODE, Stream

Burner = Callable[[Stream], tuple[Stream, Codes]]
"""Station 3 -> station 4 at constant area, all N points at once, with status codes of `cycle.flowpath.stream`; "choked" is the only
one that moves the shock. It is called with several mass flows: the fuel must follow the air."""

FAULTS: dict[str, str] = {
    "solved": "the throat passes the mass flow",
    "not-supersonic": "the stream at the inlet throat is not supersonic: no terminal shock",
    "diffuser-narrows": "the burner entry is smaller than the inlet throat",
    "throat-too-large": "even with the shock at the burner entry the throat passes more than the mass flow: no shock holds there",
    "throat-too-small": "the throat passes almost nothing of the mass flow",
    "shock-outside": "the shock asked for stands outside the diffuser",
    "choked": "the burner chokes before the throat does: less heat, or a throat smaller than the burner exit",
    "burner": "the burner has no solution: see its own status",
    "out-of-range": "a state left the range of the data (150 to 6000 K)",
    "not-converged": "an iteration ended without an answer: a defect of the program, please report it",
}
"""Why a point has no solution, in words; fault codes count through them."""

MODES: dict[str, str] = {
    "none": "not found: the throat has no solution",
    "supercritical": "terminal shock behind the inlet throat",
    "critical": "terminal shock at the inlet throat",
    "subcritical": "terminal shock ahead of the lip, part of the stream spilled",
}
"""Where the terminal shock stands, in words; mode codes count through them."""

FAULT_NAMES, MODE_NAMES = tuple(FAULTS), tuple(MODES)
_FAULT = {name: i for i, name in enumerate(FAULT_NAMES)}
_MODE = {name: i for i, name in enumerate(MODE_NAMES)}

LEAST_FRACTIONS = (0.02, 0.1, 0.3, 0.6)
"""Captured fractions from which a balance is sought, the first that the burner bears: a wall heat in W is too much for little air."""

_CRITICAL = 1e-9
"""Distance of the throat's capacity from the mass flow within which the shock counts as standing at the inlet throat."""

_MET = 1e-7
"""Relative difference of needed and given throat area within which the shock has found its place."""

_TOLERANCE = 1e-14

_PLACES, _BEYOND = 65, 1.03

_NOISE = 1e-13
"""Relative difference of needed and given throat area at which the search ends: states are known to about that."""


@dataclass(frozen=True, slots=True)
class Matched:
    """A matched throat, each array (N,).

    mode: place in `MODE_NAMES`. fault: place in `FAULT_NAMES`. burner_status: of the burner at the solution. margin: throat
    capacity with the shock at station 2 over the mass flow, less 1; the capacity is that for the burner exit at full mass flow,
    and where the burner chokes on that, the smaller of A5/A3 and the captured fraction stands for it, which joins it at choking.
    holding_margin: throat area needed with the shock at the burner entry over A5, less 1; negative, no shock holds.
    captured_fraction: mass flow taken in over the mass flow at 2. shock_mach; shock_area_ratio: over the area at 2.
    recovery: total pressure at 3 over that ahead of the shock. spilled_flow: kg/s. ahead, behind: the streams about the shock.
    two: station 2, subsonic where the shock stands ahead of the lip. three, four, throat: stations 3, 4 and 5.
    Both margins are kept where a fault leaves them a meaning; all else is NaN with a fault.
    """

    mode: Codes
    fault: Codes
    burner_status: Codes
    margin: Array
    holding_margin: Array
    captured_fraction: Array
    shock_mach: Array
    shock_area_ratio: Array
    recovery: Array
    spilled_flow: Array
    ahead: Stream
    behind: Stream
    two: Stream
    three: Stream
    four: Stream
    throat: Stream


@dataclass(frozen=True, slots=True)
class _Place:
    """The walk from 2 to 5 for one place of the shock."""

    shock: expansion.PassageShock
    three: Stream
    four: Stream
    throat: Stream
    status: Codes

    @property
    def needed(self) -> Array:
        """Area that the choked throat needs, m2 (N,): infinite where the burner chokes, NaN where it has no solution."""
        infinite = self.status == STATUS_CODE["choked"]
        return np.where(infinite, np.inf, np.where(self.status == SOLVED, self.throat.area, np.nan))


@dataclass(frozen=True, slots=True)
class _Engine:
    """What is fixed while the shock moves; lowest: pressure of the stream that has reached the burner entry without a shock, Pa."""

    entering: Stream
    area_3: Array
    burner: Burner
    loss: Array | None
    lowest: Array

    def walk(self, pressure: Array, captured: Array) -> _Place:
        """Shock where the stream ahead of it has `pressure` Pa (N,), the fraction `captured` (N,) of it taken in."""
        shock = expansion.shock_at_pressure(self.entering, pressure)
        taken = self._behind_loss(replace(shock.behind, mass_flow=shock.behind.mass_flow * captured))
        three = moved(taken, expansion.slowed(taken, self.area_3))
        four, status = self.burner(three)
        burnt = states.sonic(four.gas, four.total_enthalpy, four.state.entropy, four.state)
        return _Place(shock, three, four, moved(four, burnt), status)

    def _behind_loss(self, behind: Stream) -> Stream:
        """The diffuser's loss of total pressure, taken at once behind the shock and at about its Mach number."""
        if self.loss is None:
            return behind
        gas, ht = behind.gas, behind.total_enthalpy
        rest = states.rest(gas, ht, behind.state.entropy)
        total = gas.at("hp", ht, rest.pressure * self.loss, start=rest)
        return moved(behind, gas.at("sp", total.entropy, behind.state.pressure * self.loss, start=behind.state))

    def at(self, place: Array) -> _Place:
        """The walk at a place (N,) of the shock: 0 at station 2, 1 at the burner entry, evenly in ln p between; below 0 the shock
        stands ahead of the lip and 1 + place is taken in. The throat area needed rises with it."""
        p = self.entering.state.pressure
        return self.walk(p * (self.lowest / p) ** np.maximum(place, 0.0), 1.0 + np.minimum(place, 0.0))

    def closed_place(self, recovery: Array) -> Array:
        """About the place (N,) of the shock whose total-pressure ratio is `recovery` (N,) of that at station 2: at constant isentropic
        exponent the throat area needed goes with it inversely. NaN where none of the places tried has it. NACA Report 1135, eq. 44, 99."""
        g, mach = self.entering.state.isentropic_exponent, self.entering.mach
        places = np.linspace(0.0, 1.0, _PLACES)[:, None]
        total = isentropic.pressure_ratio(mach, g) * (self.lowest / self.entering.state.pressure) ** places
        kept = np.log(shocks.normal_shock(isentropic.mach_from_pressure_ratio(total, g), g).total_pressure_ratio)
        wanted = kept[0] + np.log(recovery)
        # it falls from place to place
        above, every = (kept > wanted).sum(0) - 1, np.arange(wanted.size)
        inside = (above >= 0) & (above < _PLACES - 1)
        at = np.where(inside, above, 0)
        left, right = kept[at, every], kept[at + 1, every]
        # a little beyond, so that the root lies between this and the end that is known
        return np.where(inside, _BEYOND * (at + (wanted - left) / (right - left)) / (_PLACES - 1), np.nan)

    def faults(self, place: _Place, *rules: tuple[Flags, str], hopeless: Flags | None = None) -> Codes:
        """Fault codes (N,) of a walk: of the inlet, "choked" where `hopeless` (N,), of burner and states, then `rules`."""
        status, entry = place.status, place.three.state.good
        choked, outside = (status == STATUS_CODE[name] for name in ("choked", "out-of-range"))
        unfit = [(~(self.entering.mach > 1.0), "not-supersonic"), (self.area_3 < self.entering.area * (1.0 - 1e-9), "diffuser-narrows")]
        choked = choked & entry if hopeless is None else (choked & entry) | hopeless
        burnt = [(choked, "choked"), (entry & outside, "out-of-range"), (entry & (status != SOLVED), "burner")]
        seen = (place.shock.ahead.state, place.shock.behind.state, place.three.state, place.throat.state)
        good = np.all([state.good for state in seen], axis=0)
        return faults_of(_FAULT, seen, *unfit, *burnt, *((flags & good, name) for flags, name in rules))


def _engine(entering: Stream, area_3: Array, burner: Burner, loss: Array | None) -> _Engine:
    area = np.broadcast_to(area_3, entering.velocity.shape)
    lowest = expansion.widened(entering, np.maximum(area, entering.area))[0].pressure
    return _Engine(entering, area, burner, loss, lowest)


def match_throat(
    entering: Stream, area_3: Array, burner: Burner, throat_area: Array, diffuser_pressure_ratio: Array | None = None
) -> Matched:
    """Place of the terminal shock at which a choked throat passes the mass flow.

    entering: station 2, supersonic. area_3: of burner entry and exit, m2 (N,), at least that at 2. burner: see `Burner`.
    throat_area: A5, m2 (N,). diffuser_pressure_ratio: total-pressure ratio of the subsonic diffuser behind the shock, (N,), None
    for no loss. Returns `Matched`.
    Mass, momentum and energy across the shock in the stream's own gas; isentropic before and behind it. The need for throat area
    rises as the shock moves from far ahead of the lip to the burner entry, so that there is one place or none.
    Source: Shapiro (1953), ch. 5, shock and second throat (from memory); critical and supercritical inlet as in Farokhi, Aircraft
    Propulsion, example 5.4.
    """
    target = np.broadcast_to(throat_area, entering.velocity.shape)
    with np.errstate(all="ignore"):
        engine = _engine(entering, area_3, burner, diffuser_pressure_ratio)
        critical, last = (engine.at(np.full(target.shape, place)).needed for place in (0.0, 1.0))
        holding = last / target - 1.0
        spills, margin = critical > target, target / critical - 1.0
        lower, upper = np.where(spills, _least(engine, spills), 0.0), np.where(spills, 0.0, 1.0)
        tried: list[tuple[Array, _Place]] = []

        def miss(place: Array) -> Array:
            tried[:] = [*tried[-1:], (place, engine.at(place))]
            return np.log(tried[-1][1].needed / target)

        at_2 = np.log(critical / target)
        ends = np.where(spills, miss(lower), at_2) if spills.any() else at_2, np.where(spills, at_2, np.log(last / target))
        first = np.where(spills, np.nan, engine.closed_place(critical / target))
        root = roots.bracketed(miss, lower, upper, _TOLERANCE, enough=_NOISE, first=first, ends=ends)
        end = np.where(np.isnan(critical), 0.0, np.where(spills, lower, upper))
        place = np.where(np.abs(margin) <= _CRITICAL, 0.0, np.where(np.isfinite(root), root, end))
        overloaded = np.minimum(target / engine.area_3, 1.0 + place) - 1.0
        walk = next((walk for at, walk in tried if np.array_equal(at, place)), None) or engine.at(place)
        return _matched(engine, target, place, walk, np.where(np.isinf(critical), overloaded, margin), holding)


def _least(engine: _Engine, spills: Flags) -> Array:
    """Place of the least captured flow (N,) with which the burner has a solution, of the points that spill."""
    least = np.full(spills.shape, LEAST_FRACTIONS[-1])
    if spills.any():
        for fraction in reversed(LEAST_FRACTIONS[:-1]):
            needed = engine.at(np.full(spills.shape, fraction - 1.0)).needed
            least = np.where(np.isfinite(needed), fraction, least)
    return least - 1.0


def _matched(engine: _Engine, target: Array, place: Array, walk: _Place, margin: Array, holding: Array) -> Matched:
    """What the shock at `place` (N,) gives: `walk`."""
    ahead, behind = walk.shock.ahead, walk.shock.behind
    miss = walk.needed / target - 1.0
    open_ = ~(np.abs(miss) <= _MET)
    # the need jumps to infinity from at most A3 where the burner chokes: a larger throat finds no place there
    hopeless = (target >= engine.area_3 * (1.0 - _MET)) & (holding >= 0.0)
    fault = engine.faults(
        walk, ((place == 1.0) & (miss < -_MET), "throat-too-large"), ((place < 0.0) & (miss > _MET), "throat-too-small"),
        (open_, "not-converged"), hopeless=hopeless,
    )  # fmt: skip
    bad = fault > 0
    captured = 1.0 + np.minimum(place, 0.0)
    before = replace(behind, mass_flow=walk.three.mass_flow)
    two = chosen(place < 0.0, moved(before, expansion.slowed(before, engine.entering.area)), engine.entering)
    mode = np.select([bad, place == 0.0, place > 0.0], [_MODE["none"], _MODE["critical"], _MODE["supercritical"]], _MODE["subcritical"])

    def figure(value: Array) -> Array:
        return np.where(bad, np.nan, value)

    return Matched(
        mode.astype(np.int64), fault, walk.status, margin, holding, figure(captured), figure(ahead.mach),
        figure(ahead.area / engine.entering.area), figure(recovery(ahead, walk.three)),
        figure(engine.entering.mass_flow * (1.0 - captured)), blanked(ahead, bad), blanked(behind, bad), blanked(two, bad),
        blanked(walk.three, bad), blanked(walk.four, bad), blanked(walk.throat, bad),
    )  # fmt: skip


@dataclass(frozen=True, slots=True)
class Sized:
    """Throat area m2 (N,), NaN where there is none, and fault (N,), place in `FAULT_NAMES`."""

    area: Array
    fault: Codes


def _for_shock(engine: _Engine, value: Array) -> tuple[_Place, Array, list[tuple[Flags, str]]]:
    inlet = engine.entering
    state, fits = expansion.widened(inlet, value * inlet.area)
    beyond = value * inlet.area > engine.area_3 * (1.0 + 1e-9)
    return engine.walk(state.pressure, np.ones_like(value)), np.ones_like(value), [(~fits | beyond, "shock-outside")]


def _for_margin(engine: _Engine, value: Array) -> tuple[_Place, Array, list[tuple[Flags, str]]]:
    return engine.at(np.zeros_like(value)), 1.0 + value, [(~(value > -1.0), "throat-too-small")]


_SIZED_BY: dict[str, Callable[[_Engine, Array], tuple[_Place, Array, list[tuple[Flags, str]]]]] = {
    "shock_area_ratio": _for_shock,
    "margin": _for_margin,
}


def size_throat(
    entering: Stream, area_3: Array, burner: Burner, by: str, value: Array, diffuser_pressure_ratio: Array | None = None
) -> Sized:
    """Throat area of a design point at full capture.

    entering, area_3, burner, diffuser_pressure_ratio: as in `match_throat`, at the design point. by: "shock_area_ratio", the shock
    stands where the area is this multiple of that at 2, 1 to A3/A2; or "margin", see `Matched`. value: (N,), 1. Returns `Sized`.
    KeyError for another `by`. Source: as `match_throat`.
    """
    asked = np.broadcast_to(value, entering.velocity.shape)
    with np.errstate(all="ignore"):
        engine = _engine(entering, area_3, burner, diffuser_pressure_ratio)
        walk, factor, rules = _SIZED_BY[by](engine, asked)
        fault = engine.faults(walk, *rules)
        return Sized(np.where(fault > 0, np.nan, walk.needed * factor), fault)


def spill_drag(flight: Stream, behind: Stream, spilled_flow: Array) -> Array:
    """Drag of the air that a normal shock ahead of the lip spills, N (N,): an estimate by its momentum.

    flight: station 0. behind: the stream behind the shock, as in `Matched`. spilled_flow: kg/s (N,).
    The spilled air has crossed the same shock as the captured one; it then expands without further loss to ambient pressure p0 and
    leaves along the flight direction at u: drag = spilled_flow (u0 - u). A momentum balance of the spilled stream tube far behind
    the engine (wave drag from the wake's entropy: Oswatitsch, Gas Dynamics (1956), from memory). It leaves out that the shock
    weakens away from the lip (too high) and what the lip fails to give back in suction (too low). NaN where the spilled air cannot
    reach ambient pressure.
    """
    with np.errstate(all="ignore"):
        out = behind.gas.at("sp", behind.state.entropy, flight.state.pressure, start=behind.state)
        drag: Array = spilled_flow * (flight.velocity - states.velocity(behind.total_enthalpy, out))
    return np.where(out.good, drag, np.nan)
