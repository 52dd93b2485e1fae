"""A gas in chemical equilibrium: composition follows temperature and pressure."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import lru_cache
from typing import TYPE_CHECKING, Self

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.constants import GAS_CONSTANT, REFERENCE_PRESSURE
from cycle.gas.base import Gas
from cycle.gas.closures import CLOSURES
from cycle.gas.elimination import dot, product, solve_systems
from cycle.gas.frozen import FrozenGas, complete_products, per_mole
from cycle.gas.kernel import Kernel, kernel_of
from cycle.gas.newton import POOL, Columns, iterate
from cycle.gas.species import SpeciesTable, listed_rows, range_of, temperature_functions
from cycle.gas.start import ABSENT, Guess, absent, first_temperature_pressure, on_rayleigh_line, within
from cycle.gas.state import NOT_CONVERGED, State, state_from

if TYPE_CHECKING:
    from cycle.gas.fuels import Fuel

TRACE = 1e-300

HOT_EXPONENT = 1.22
"""Isentropic exponent of burnt gas, for guesses; common practice."""

CARRY_T, CARRY_P = 0.4, 3.0
"""Largest steps of ln T and ln p over which a start is carried by its slopes."""


@dataclass(frozen=True, eq=False)
class Solution:
    """Converged unknowns z, m, ln T, ln p (K + 3, N), flags and iteration counts (N,)."""

    unknowns: Array
    converged: Flags
    iterations: Codes


@dataclass(frozen=True, eq=False)
class Present:
    """The species that a gas can hold of a `whole` table: their own table, and their rows among all species, the basis
    and the inert species. Air in a table made for a fuel has none with hydrogen or carbon: half the work of a step."""

    whole: SpeciesTable
    table: SpeciesTable
    rows: Codes
    basis: Codes
    inert: Codes

    def _kept(self) -> Codes:
        """Rows of `State.potentials`: z and its slopes by ln T and by ln p, each of the basis; ln T, ln p."""
        k = self.whole.basis
        return np.concatenate([self.basis, k + self.basis, 2 * k + self.basis, [3 * k, 3 * k + 1]])

    def narrowed(self, state: State) -> State:
        """A state of the whole table as one of these species; one without potentials as it is."""
        if state.potentials is None:
            return state
        return replace(state, moles=state.moles[self.rows], potentials=state.potentials[self._kept()])

    def widened(self, state: State) -> State:
        """`narrowed` undone: the others are absent."""
        k, n = self.whole.basis, state.temperature.size
        moles, potentials = np.zeros((len(self.whole.names), n)), np.zeros((3 * k + 2, n))
        moles[self.rows] = state.moles
        potentials[:k] = ABSENT
        potentials[self._kept()] = state.potentials
        return replace(state, moles=moles, potentials=potentials)


def _found(amounts: Array) -> tuple[bool, ...]:
    """Which rows are not zero at some point."""
    found: Flags = np.any(amounts, axis=1)
    return tuple(found.tolist())


@lru_cache(maxsize=256)
def present_in(table: SpeciesTable, basis: tuple[bool, ...], inert: tuple[bool, ...]) -> Present:
    """What of a table a gas holds in which some point has these basis and these inert species; O2, whose amount is a
    signed balance, counts as there."""
    found = np.array(basis) | np.array([name == "O2" for name in table.names[: table.basis]])
    reacting = ~(table.in_basis[:, ~found] != 0.0).any(1)
    there = np.concatenate([reacting, np.array(inert, bool)])
    rows = np.flatnonzero(there)
    part = table if there.all() else table.part(rows)
    return Present(table, part, rows, np.flatnonzero(found), np.flatnonzero(inert))


class EquilibriumGas(Gas):
    """Atoms free to react, and inert species beside them.

    table: the species; basis: (K, N) mol/kg, the reacting atoms as moles of basis species, a shortage of oxygen as a
    negative amount of O2; inert: (I, N) mol/kg. Condensed carbon is not a species: see `carbon_activity`. Between 150 and
    200 K the heat capacities are held and the composition is that of equilibrium with them: for air, undissociated.
    The potentials of its states are z of the basis species, `ABSENT` where an element is not there.
    excess_inert: whether fuel that is added beyond what the free oxygen burns stays vapour; otherwise it reacts like the rest.
    """

    def __init__(self, table: SpeciesTable, basis: Array, inert: Array, excess_inert: bool = False) -> None:
        self.table = table
        self.excess_inert = excess_inert
        # A balance that cancels to rounding is an absent element, not a trace of one.
        self.basis = np.where(np.abs(basis) < 1e-12, 0.0, basis)
        self.inert = inert
        self.species = table.names

    @property
    def size(self) -> int:
        """Number of points N."""
        return int(self.basis.shape[1])

    def take(self, index: Codes | Flags) -> Self:
        """The gas of the chosen points."""
        return type(self)(self.table, self.basis[:, index], self.inert[:, index], self.excess_inert)

    def frozen(self, state: State) -> FrozenGas:
        """A gas that keeps the composition of `state` from here on."""
        return FrozenGas(self.table, state.moles)

    def reacting(self) -> EquilibriumGas:
        """This gas itself."""
        return self

    def complete(self) -> FrozenGas:
        """The products of complete combustion of the same atoms: see `complete_products`."""
        return complete_products(self.table, self.basis, self.inert)

    def with_excess_inert(self) -> EquilibriumGas:
        """This gas, in which fuel beyond the free oxygen will stay vapour."""
        return type(self)(self.table, self.basis, self.inert, True)

    def fuelled(self, fuel: Fuel, ratio: Array, burnt: Array) -> EquilibriumGas:
        """The burnt fraction of the fuel joins the reacting atoms, however rich, or with `excess_inert` of the fuel that the free oxygen
        burns; the rest is inert vapour. ValueError where the table was not made for this fuel.
        """
        supplied = ratio / per_mole(self.table, fuel)
        allowed = supplied
        if self.excess_inert:
            allowed = np.minimum(supplied, np.maximum(self.basis[self.table.index["O2"]], 0.0) / fuel.oxygen_need())
        basis = self.basis + self.table.fuel_in_basis[:, None] * (burnt * allowed)
        inert = self.inert.copy()
        inert[-1] += (1.0 - burnt) * allowed + (supplied - allowed)
        return EquilibriumGas(self.table, basis / (1.0 + ratio), inert / (1.0 + ratio), self.excess_inert)

    def guess_heated(self, impulse: Array, flux: Array, total_enthalpy: Array, supersonic: Flags) -> tuple[State, Array]:
        """From the products of complete combustion: see `Gas.guess_heated`."""
        guess = Guess(kernel_of(self.table), self.basis, self.inert)
        with np.errstate(all="ignore"):
            T, volume, distance = on_rayleigh_line(guess, impulse, flux, total_enthalpy, supersonic)
        unknown = np.full(T.shape, np.nan)
        sound_speed = np.sqrt(HOT_EXPONENT * GAS_CONSTANT * guess.total * T)
        state = State(
            T, impulse - flux**2 * volume, 1.0 / volume, unknown, unknown, sound_speed, unknown, unknown, unknown, unknown, unknown,
            unknown, np.zeros((0, T.size)), np.zeros(T.size, np.int64),
        )  # fmt: skip
        return state, distance

    def _at(self, kind: str, targets: tuple[Array, ...], start: State | None) -> State:
        there = present_in(self.table, _found(self.basis), _found(self.inert))
        if there.table is self.table:
            return self.state_of(self.solve(kind, *targets, start=start))
        part = EquilibriumGas(there.table, self.basis[there.basis], self.inert[there.inert])
        return there.widened(part.state_of(part.solve(kind, *targets, start=None if start is None else there.narrowed(start))))

    def solve(self, kind: str, *targets: Array, start: State | None = None) -> Solution:
        """The iteration behind `at`, with its counts; targets (N,). A start that leads nowhere is dropped, unless it
        chooses the branch."""
        found = self._iterate(kind, np.stack(targets), start)
        if start is None or CLOSURES[kind].branched or found.converged.all():
            return found
        lost = np.flatnonzero(~found.converged)
        again = self.take(lost)._iterate(kind, np.stack(targets)[:, lost], None)
        found.unknowns[:, lost], found.converged[lost] = again.unknowns, again.converged
        found.iterations[lost] += again.iterations
        return found

    def _iterate(self, kind: str, targets: Array, start: State | None) -> Solution:
        kernel = kernel_of(self.table)
        usable = np.isfinite(targets).all(0) & np.isfinite(self.basis).all(0) & np.isfinite(self.inert).all(0)
        if start is not None:
            usable &= np.isfinite(start.temperature) & np.isfinite(start.pressure)
        if usable.all() and self.size:
            with np.errstate(all="ignore"):
                return Solution(*iterate(kernel, kind, self.size, FirstGuess(kernel, kind, self, targets, start)))
        nothing = np.full((kernel.basis + 3, self.size), np.nan)
        found = Solution(nothing, np.zeros(self.size, bool), np.zeros(self.size, np.int64))
        where = np.flatnonzero(usable)
        if where.size:
            some = self.take(where)._iterate(kind, targets[:, where], None if start is None else start.take(where))
            found.unknowns[:, where], found.converged[where] = some.unknowns, some.converged
            found.iterations[where] = some.iterations
        return found

    def state_of(self, found: Solution) -> State:
        """Properties of a solution with their analytic derivatives; points without one are flagged."""
        chunks = [slice(low, low + POOL) for low in range(0, max(self.size, 1), POOL)]
        with np.errstate(all="ignore"):
            parts = [_properties(self.table, found.unknowns[:, c], self.basis[:, c], self.inert[:, c]) for c in chunks]
            columns = list(parts[0]) if len(parts) == 1 else [np.concatenate(c, axis=-1) for c in zip(*parts, strict=True)]
            lost = ~found.converged | ~np.isfinite(columns[3] * columns[5])
        code = np.where(lost, NOT_CONVERGED, range_of(columns[0]))
        *fields, potentials = columns
        return state_from([*fields, code, potentials])


def carbon_activity(table: SpeciesTable, state: State) -> Array:
    """Activity of solid carbon (graphite) in an equilibrium state, (N,); above 1 soot would form, which no species of
    the gas stands for, and the state is too optimistic. 0 without carbon; NaN where the state has no potentials.

    From the potentials of CO2 and O2: ln a = ln p_CO2 - ln p_O2 - dG/RT of CO2 -> C + O2, p in bar.
    """
    if state.potentials is None:
        return np.full(state.temperature.shape, np.nan)
    if "CO2" not in table.names[: table.basis]:
        return np.zeros(state.temperature.shape)
    dioxide, oxygen = table.index["CO2"], table.index["O2"]
    free_energy = {name: rows[0] - rows[1] for name in ("C(gr)", "O2", "CO2") for rows in [listed_rows(name)]}
    rows = free_energy["C(gr)"] + free_energy["O2"] - free_energy["CO2"]
    g = rows @ temperature_functions(state.temperature)
    with np.errstate(over="ignore", invalid="ignore"):
        activity: Array = np.exp(state.potentials[dioxide] - state.potentials[oxygen] - g)
    return activity


class FirstGuess:
    """Makes the first columns of a slice of points: from a start where it serves, from complete combustion otherwise."""

    def __init__(self, kernel: Kernel, kind: str, gas: EquilibriumGas, targets: Array, start: State | None) -> None:
        self.kernel, self.kind, self.gas, self.targets, self.start = kernel, kind, gas, targets, start

    def __call__(self, points: slice) -> Columns:
        """Columns of a slice of the points."""
        basis, inert, targets = self.gas.basis[:, points], self.gas.inert[:, points], self.targets[:, points]
        named = dict(zip(CLOSURES[self.kind].targets, targets, strict=True))
        guess = Guess(self.kernel, basis, inert)
        if self.start is None:
            T, ln_p = first_temperature_pressure(self.kind, guess, named)
        else:
            T = named.get("temperature", self.start.temperature[points])
            ln_p = np.log(named.get("pressure", self.start.pressure[points]) / REFERENCE_PRESSURE)
        warm = None if self.start is None else self._warm(points, T, ln_p)
        if warm is None:
            z, m, ln_n = guess.composition(T, ln_p)
        else:
            z, m, ln_n, serves = warm
            if not serves.all():
                cold = guess.composition(T, ln_p)
                z, m, ln_n = (np.where(serves, a, b) for a, b in zip((z, m, ln_n), cold, strict=True))
        unknowns = np.vstack([z, m, np.log(T), ln_p, ln_n])
        mixing = -(inert * np.log(np.maximum(inert, TRACE))).sum(0)
        return Columns(unknowns, np.vstack([basis, inert, inert.sum(0), mixing, absent(self.kernel, basis), targets]))

    def _warm(self, points: slice, T: Array, ln_p: Array) -> tuple[Array, Array, Array, Flags] | None:
        """z, m, ln n of the start, carried to T and p by its own slopes, and where they serve: not where an element has
        appeared or gone. None without potentials."""
        if self.start is None or self.start.potentials is None:
            return None
        kernel, held = self.kernel, self.start.potentials[:, points]
        k = kernel.basis
        z, by_T, by_p, ln_T0, ln_p0 = held[:k], held[k : 2 * k], held[2 * k : 3 * k], held[3 * k], held[3 * k + 1]
        d_T, d_p = within(np.log(T) - ln_T0, -CARRY_T, CARRY_T), within(ln_p - ln_p0, -CARRY_P, CARRY_P)
        gone = absent(kernel, self.gas.basis[:, points])
        serves: Flags = (gone == (z < 0.5 * ABSENT)).all(0) & np.isfinite(held).all(0)
        ln_total = np.log(self.start.moles[:, points].sum(0))
        m = ln_total - ln_p0 + (self.start.volume_by_temperature[points] - 1.0) * d_T + self.start.volume_by_pressure[points] * d_p
        z = z + by_T * d_T + by_p * d_p
        ln_n = product(kernel.nu, z) + m
        ln_n[k:] -= kernel.formation_energy(T)
        return z, m, np.minimum(ln_n, ln_total), serves


def _properties(table: SpeciesTable, unknowns: Array, basis: Array, inert: Array) -> tuple[Array, ...]:
    """State fields in order, `range` left out, potentials last (Gordon and McBride, NASA RP-1311, section 2.5-2.6, in
    these variables)."""
    kernel = kernel_of(table)
    k = kernel.basis
    z, m, ln_T, ln_p = unknowns[:k], unknowns[k], unknowns[k + 1], unknowns[k + 2]
    T, p = np.exp(ln_T), REFERENCE_PRESSURE * np.exp(ln_p)
    th = kernel.thermo(T)
    ln_n = product(kernel.nu, z) + m
    ln_n[k:] -= th.g
    n = np.exp(ln_n)
    amounts, total = np.concatenate([basis, inert]), np.exp(m + ln_p)
    matrix = product(kernel.pairs, n)
    matrix[: k * (k + 2) : k + 2] += absent(kernel, basis)
    matrix[-1] -= total
    nh = n[k:] * th.h
    pull = kernel.formed @ nh
    response = np.zeros((k + 1, 2, T.size))
    np.negative(pull, out=response[:, 0])
    response[k, 1] = total
    solve_systems(matrix.reshape(k + 1, k + 1, -1), response)
    formed = nh.sum(0)
    RT, R = GAS_CONSTANT * T, GAS_CONSTANT
    h = formed + dot(amounts, th.base_h)
    mixing = (inert * np.log(np.maximum(inert, TRACE))).sum(0)
    s = formed + dot(amounts, th.base_s) - dot(basis, z) + inert.sum(0) * m - mixing
    cp_frozen = dot(amounts, th.base_cp) + dot(n[k:], th.cp)
    cp = cp_frozen + dot(nh, th.h) + dot(pull, response[:, 0])
    v_T, v_p = 1.0 + response[k, 0], response[k, 1]
    exponent = -1.0 / (v_p + v_T * v_T * total / cp)
    gas_constant = total * R
    return (
        T, p, p / (total * RT), h * RT, s * R, np.sqrt(exponent * gas_constant * T), exponent,
        cp_frozen / (cp_frozen - total), cp * R, 1.0 / total, v_T, v_p, np.concatenate([n, inert]),
        np.concatenate([z, response[:k, 0], response[:k, 1], ln_T[None], ln_p[None]]),
    )  # fmt: skip
