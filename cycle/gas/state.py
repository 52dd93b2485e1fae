"""What every gas model gives back: the thermodynamic state of N points."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, fields, replace
from operator import attrgetter
from typing import Any

import numpy as np

from cycle.arrays import Array, Codes, Flags

INSIDE, EXTRAPOLATED, OUT_OF_RANGE, NOT_CONVERGED = range(4)
"""Values of `State.range`: inside the data, below 200 K with the heat capacity held, outside, Newton gave up."""


@dataclass(frozen=True, slots=True)
class State:
    """Thermodynamic state of N points; every field has shape (N,) but `moles` (S, N) and `potentials` (any, N).

    temperature K, pressure Pa, density kg/m3, enthalpy J/kg, entropy J/(kg K), sound_speed m/s of the gas model
    (equilibrium or frozen), isentropic_exponent (d ln p / d ln rho) at constant entropy, gamma_frozen, specific_heat
    J/(kg K) at constant pressure of the model, molar_mass kg/mol, volume_by_temperature (d ln v / d ln T) at p,
    volume_by_pressure (d ln v / d ln p) at T, moles mol/kg of each species, range: see the codes above.
    `potentials` lets a neighbouring solve start from this state; None where a model needs none.
    """

    temperature: Array
    pressure: Array
    density: Array
    enthalpy: Array
    entropy: Array
    sound_speed: Array
    isentropic_exponent: Array
    gamma_frozen: Array
    specific_heat: Array
    molar_mass: Array
    volume_by_temperature: Array
    volume_by_pressure: Array
    moles: Array
    range: Codes
    potentials: Array | None = None

    @property
    def good(self) -> Flags:
        """(N,) true where the state may be used."""
        return self.range <= EXTRAPOLATED

    def take(self, index: Codes | Flags) -> State:
        """The state of the chosen points, in their order."""
        return state_from(None if v is None else v[..., index] for v in self.values())

    def values(self) -> tuple[Array | None, ...]:
        """All fields in declaration order."""
        found: tuple[Array | None, ...] = _FIELDS(self)
        return found

    def flagged(self, bad: Flags, code: int = NOT_CONVERGED) -> State:
        """The same state with `code` wherever `bad` holds and it was usable so far."""
        return replace(self, range=np.where(bad & (self.range <= EXTRAPOLATED), code, self.range))

    def after(self, *earlier: State) -> State:
        """The same state; where it may not be used, with the range code of the first of the states that it follows from which may not."""
        code = self.range
        for state in reversed(earlier):
            code = np.where(state.good | self.good, code, state.range)
        return replace(self, range=code)


_FIELDS = attrgetter(*(f.name for f in fields(State)))


def state_from(columns: Iterable[Any]) -> State:
    """A state from its fields in declaration order."""
    return State(*columns)


def merge(mask: Flags, first: State, second: State) -> State:
    """Points of `first` where `mask`, of `second` elsewhere; both hold all N points."""
    both = zip(first.values(), second.values(), strict=True)
    return state_from(None if a is None or b is None else np.where(mask, a, b) for a, b in both)


def placed(mask: Flags, first: State, second: State) -> State:
    """A state whose points where `mask` are those of `first`, and elsewhere those of `second`, each in order."""
    both = zip(first.values(), second.values(), strict=True)
    return state_from(None if a is None or b is None else _placed(mask, a, b) for a, b in both)


def _placed(mask: Flags, first: Array, second: Array) -> Array:
    whole = np.empty((*first.shape[:-1], mask.size), first.dtype)
    whole[..., np.flatnonzero(mask)] = first
    whole[..., np.flatnonzero(~mask)] = second
    return whole


def scatter(state: State, index: Codes, part: State) -> State:
    """`state` with the points `index` replaced by those of `part`, in order."""
    both = zip(state.values(), part.values(), strict=True)
    return state_from(None if a is None or b is None else _replaced(a, index, b) for a, b in both)


def _replaced(whole: Array, index: Codes, new: Array) -> Array:
    copy = np.array(whole)
    copy[..., index] = new
    return copy
