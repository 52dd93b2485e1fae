"""The stream that the components hand on, and what a component reports of its process."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.gas.base import Gas
from cycle.gas.state import State
from cycle.quantities import STATUSES

STATUS_NAMES = tuple(STATUSES)
STATUS_CODE = {name: i for i, name in enumerate(STATUS_NAMES)}
SOLVED = STATUS_CODE["solved"]


@dataclass(frozen=True, slots=True)
class Stream:
    """N streams at one station: gas, state, velocity m/s, mass_flow kg/s, and the axial share of the momentum."""

    gas: Gas
    state: State
    velocity: Array
    mass_flow: Array
    axial_factor: Array

    @property
    def total_enthalpy(self) -> Array:
        """h + u^2/2, J/kg, (N,)."""
        total: Array = self.state.enthalpy + 0.5 * self.velocity**2
        return total

    @property
    def mach(self) -> Array:
        """(N,)."""
        return self.velocity / self.state.sound_speed

    @property
    def flux(self) -> Array:
        """Mass flow per area, kg/(s m2), (N,)."""
        return self.state.density * self.velocity

    @property
    def area(self) -> Array:
        """m2, (N,)."""
        return self.mass_flow / self.flux

    @property
    def stream_thrust(self) -> Array:
        """Axial momentum and pressure force, N, (N,)."""
        return self.axial_factor * self.mass_flow * self.velocity + self.state.pressure * self.area

    def take(self, index: Codes | Flags) -> Stream:
        """The streams of the chosen points."""
        return Stream(self.gas.take(index), self.state.take(index), self.velocity[index], self.mass_flow[index], self.axial_factor[index])


def stream(gas: Gas, state: State, velocity: Array, mass_flow: Array) -> Stream:
    """A stream without divergence."""
    return Stream(gas, state, velocity, mass_flow, np.ones_like(velocity))


@dataclass(frozen=True, slots=True)
class Booking:
    """What crosses the control surface of a process besides the stream; arrays (N,), zero where nothing does.

    fuel_flow kg/s: fuel that is paid for; mass_added kg/s: fuel mass that joins the stream; fuel_enthalpy J/kg of
    fuel_flow, heat released included at constant gamma; fuel_impulse N axial; wall_heat W out; friction N;
    wall_force N axial pressure force of the walls.
    """

    fuel_flow: Array
    mass_added: Array
    fuel_enthalpy: Array
    fuel_impulse: Array
    wall_heat: Array
    friction: Array
    wall_force: Array

    def take(self, index: Codes | Flags) -> Booking:
        """The bookings of the chosen points."""
        return Booking(*(getattr(self, name)[index] for name in self.__slots__))


@dataclass(frozen=True, slots=True)
class Process:
    """One process from station `start` to `end`; figures: own figures by name, each (N,).

    profile: the flow along the process by name, each (R, N). solves_momentum: whether the process balances axial momentum, so
    that the audit can hold it to that.
    """

    name: str
    start: str
    end: str
    figures: Mapping[str, Array] = field(default_factory=dict)
    booking: Booking | None = None
    solves_momentum: bool = False
    profile: Mapping[str, Array] = field(default_factory=dict)

    def take(self, index: Codes | Flags) -> Process:
        """The process of the chosen points."""
        return Process(
            self.name,
            self.start,
            self.end,
            {k: v[index] for k, v in self.figures.items()},
            None if self.booking is None else self.booking.take(index),
            self.solves_momentum,
            {k: v[:, index] for k, v in self.profile.items()},
        )


@dataclass(frozen=True, slots=True)
class Step:
    """What a component gives back: the stream behind it, its process, and a status code of each point (N,).

    Figures of points whose status is not solved mean nothing and are not shown.
    """

    stream: Stream
    process: Process
    status: Codes


@dataclass(frozen=True, slots=True)
class Steps:
    """Several steps that one solution gives, in order, and what it does to the stream ahead of it.

    captured: share (N,) of the mass flow taken in; all stations ahead carry that much less. replaced: stations ahead whose
    stream this solution changes (a shock expelled from the inlet), in their new state.
    """

    steps: tuple[Step, ...]
    captured: Array | None = None
    replaced: Mapping[str, Stream] = field(default_factory=dict)


def named_status(codes: Codes, names: tuple[str, ...], meaning: Mapping[str, str]) -> Codes:
    """Status codes (N,) of a component's own fault codes; `meaning` renames the faults that are no statuses."""
    table = np.array([STATUS_CODE[meaning.get(name, name)] for name in names])
    return table[codes]


def status_of(state: State, *faults: tuple[Flags, str]) -> Codes:
    """Status codes (N,): the first fault that holds names the point, then the state's own range, then solved."""
    rules = [*faults, (state.range == 3, "not-converged"), (state.range == 2, "out-of-range")]
    code = np.full(state.range.shape, SOLVED)
    for flag, name in reversed(rules):
        code[flag] = STATUS_CODE[name]
    return code
