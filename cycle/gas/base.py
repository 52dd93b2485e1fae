"""The verbs every gas model offers, and the Newton iteration of the models whose composition does not change."""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Callable
from dataclasses import replace
from typing import TYPE_CHECKING, Self

import numpy as np

from cycle.arrays import Array, ArrayLike, Codes, Flags
from cycle.constants import GAS_CONSTANT, REFERENCE_PRESSURE
from cycle.gas.closures import CLOSURES, Local
from cycle.gas.species import COLDEST, HIGHEST
from cycle.gas.state import INSIDE, NOT_CONVERGED, OUT_OF_RANGE, State, scatter

if TYPE_CHECKING:
    from cycle.gas.fuels import Fuel


class Gas(ABC):
    """A gas of N points: what a stream is made of. Immutable; a component never asks which model it holds."""

    species: tuple[str, ...]
    """Names of the rows of `State.moles`; empty at constant gamma."""

    @property
    @abstractmethod
    def size(self) -> int:
        """Number of points N."""

    def at(self, kind: str, *targets: ArrayLike, start: State | None = None) -> State:
        """State of N points from a pair of conditions.

        kind: a key of `CLOSURES`; targets: its quantities, each (N,) or scalar, SI. start: a nearby state of the same
        points; needed by "flux" and "momentum", whose branch (subsonic or supersonic) is that of the start, read from
        its density and sound speed. A point that does not converge, leaves the data or leaves its branch is flagged in
        `State.range`, never raised. ValueError for a closure with branches and no start.
        """
        arrays = tuple(_spread(t, self.size) for t in targets)
        if not CLOSURES[kind].branched:
            return self._blamed(self._at(kind, arrays, start), kind, arrays, start)
        if start is None:
            raise ValueError(f"the closure {kind} has two branches: it needs a state to start from")
        with np.errstate(all="ignore"):
            state = self._at(kind, arrays, start)
            astray = np.flatnonzero(strayed(state, arrays, start))
            if kind == "momentum" and astray.size:
                chosen = tuple(t[astray] for t in arrays)
                back = mirrored(state.take(astray), chosen)
                state = scatter(state, astray, self.take(astray)._at(kind, chosen, back))
            return self._blamed(state.flagged(strayed(state, arrays, start)), kind, arrays, start)

    def _blamed(self, state: State, kind: str, targets: tuple[Array, ...], start: State | None) -> State:
        """The state, out of range instead of not converged where the data end before the targets are met."""
        lost = np.flatnonzero((state.range == NOT_CONVERGED) & np.isfinite(targets).all(0))
        if kind == "ts" and lost.size:  # every temperature has every entropy: only numbers end
            return replace(state, range=np.where((state.range == NOT_CONVERGED) & np.isfinite(targets).all(0), OUT_OF_RANGE, state.range))
        if not lost.size or kind not in BEYOND:
            return state
        gas, cut = self.take(lost), tuple(t[lost] for t in targets)
        fast = np.zeros(lost.size, np.bool_)
        if start is not None and CLOSURES[kind].branched:
            fast = cut[-1] > (start.density * start.sound_speed)[lost]
        with np.errstate(all="ignore"):
            cold, hot = (BEYOND[kind](gas, cut, np.full(lost.size, T), fast) for T in gas.temperatures)
        beyond = (cold < 0.0) & fast if kind == "flux" else cold > 0.0
        code = state.range.copy()
        code[lost[beyond | (hot < 0.0) & ~(fast & (kind == "flux"))]] = OUT_OF_RANGE
        return replace(state, range=code)

    @property
    def temperatures(self) -> tuple[float, float]:
        """The coldest and the hottest temperature of the data, K."""
        return COLDEST, HIGHEST

    @abstractmethod
    def _at(self, kind: str, targets: tuple[Array, ...], start: State | None) -> State:
        """`at` without the care for branches; targets (N,)."""

    @abstractmethod
    def take(self, index: Codes | Flags) -> Self:
        """The gas of the chosen points."""

    @abstractmethod
    def frozen(self, state: State) -> Gas:
        """A gas that keeps the composition of `state` from here on."""

    @abstractmethod
    def fuelled(self, fuel: Fuel, ratio: Array, burnt: Array) -> Gas:
        """This gas after `ratio` kg of fuel per kg of it were added and the fraction `burnt` of that fuel reacts.

        ratio, burnt: (N,). What happens to the rest is the model's: see each model.
        """

    @abstractmethod
    def guess_heated(self, impulse: Array, flux: Array, total_enthalpy: Array, supersonic: Flags) -> tuple[State, Array] | None:
        """A rough state where p + G^2 v = F and h + G^2 v^2/2 = ht, to start "momentum" from without the sonic point, and
        its distance from Mach 1, ((M^2 - 1) / (1 + gamma M^2))^2, negative where the line seems not to reach ht.

        impulse F Pa, flux G kg/(s m2), total_enthalpy ht J/kg, branch, each (N,). Of the state only temperature, pressure,
        density and sound speed count. None for a model whose sonic point costs next to nothing.
        """


def _spread(value: ArrayLike, size: int) -> Array:
    array = np.asarray(value, dtype=np.float64)
    return array if array.shape == (size,) else np.broadcast_to(array, (size,))


class FixedGas(Gas):
    """A thermally perfect gas of fixed composition: subclasses give enthalpy, entropy and cp as functions of T."""

    gas_constant: Array
    """R of each point, J/(kg K), (N,)."""
    composition: Array
    """mol/kg, (S, N)."""

    @abstractmethod
    def caloric(self, temperature: Array) -> tuple[Array, Array, Array]:
        """h J/kg, s at the reference pressure J/(kg K), cp J/(kg K) at T (N,); each (N,)."""

    @abstractmethod
    def range_of(self, temperature: Array) -> Codes:
        """Range code of each temperature (N,)."""

    @property
    def size(self) -> int:
        """Number of points N."""
        return int(self.gas_constant.shape[0])

    def frozen(self, state: State) -> Gas:
        """This gas itself."""
        return self

    def guess_heated(self, impulse: Array, flux: Array, total_enthalpy: Array, supersonic: Flags) -> None:
        """None: at fixed composition T of the sonic point follows from p and v."""

    def _at(self, kind: str, targets: tuple[Array, ...], start: State | None) -> State:
        closure = CLOSURES[kind]
        named = dict(zip(closure.targets, targets, strict=True))
        shape = (self.size,)
        T = np.broadcast_to(named.get("temperature", 1000.0 if start is None else start.temperature), shape)
        p = np.broadcast_to(named.get("pressure", REFERENCE_PRESSURE if start is None else start.pressure), shape)
        if kind == "vp":
            T = named["volume"] * p / self.gas_constant
        if kind == "ts":
            with np.errstate(all="ignore"):
                p = REFERENCE_PRESSURE * np.exp((self.caloric(T)[1] - named["entropy"]) / self.gas_constant)
        if kind == "hv":
            p = self.gas_constant * T / named["volume"]
        with np.errstate(all="ignore"):
            ln_T, ln_p, done = self._iterate(kind, np.log(T), np.log(p), targets)
            return self._state(np.where(done, np.exp(ln_T), np.nan), np.exp(ln_p), done)

    def _iterate(self, kind: str, ln_T: Array, ln_p: Array, targets: tuple[Array, ...], turns: int = 60) -> tuple[Array, Array, Flags]:
        closure, R = CLOSURES[kind], self.gas_constant
        done = np.full(ln_T.shape, closure.fixes_T and closure.fixes_p)
        over = done.copy()
        for turn in range(turns):
            if over.all():
                break
            if turn == _LONG and over.any():
                left = np.flatnonzero(~over)
                rest = self.take(left)._iterate(kind, ln_T[left], ln_p[left], tuple(t[left] for t in targets), turns - turn)
                for whole, part in zip((ln_T, ln_p, done), rest, strict=True):
                    whole[left] = part
                break
            h, s0, cp = self.caloric(np.exp(ln_T))
            at = Local(
                ln_T, ln_p, h, cp * np.exp(ln_T), 0.0, s0 - R * (ln_p - np.log(REFERENCE_PRESSURE)), cp, -R,
                np.log(R) + ln_T - ln_p, 1.0, -1.0,
            )  # fmt: skip
            d_T, d_p = closure.step(at, targets)
            size = np.maximum(np.abs(d_T) / 0.7, np.abs(d_p) / 1.5)
            scale = np.where(over | ~np.isfinite(size), 0.0, 1.0 / np.maximum(size, 1.0))
            ln_T, ln_p = ln_T + np.where(scale > 0.0, d_T * scale, 0.0), ln_p + np.where(scale > 0.0, d_p * scale, 0.0)
            done |= ~over & (np.abs(d_T) < 3e-9) & (np.abs(d_p) < 3e-9)
            over |= done | ~np.isfinite(size) | (np.abs(ln_T - _MIDDLE) > _FAR_OFF)
        return ln_T, ln_p, done

    def _state(self, T: Array, p: Array, done: Flags) -> State:
        h, s0, cp = self.caloric(T)
        R = self.gas_constant
        gamma, one = cp / (cp - R), np.ones_like(T)
        code = np.where(done & np.isfinite(T * p * h), self.range_of(T), NOT_CONVERGED)
        return State(
            T, p, p / (R * T), h, s0 - R * np.log(p / REFERENCE_PRESSURE), np.sqrt(gamma * R * T), gamma, gamma, cp,
            GAS_CONSTANT / R, one, -one, self.composition, code,
        )  # fmt: skip


_LONG = 8
"""Turns of the iteration after which only what is left is iterated on."""
_MIDDLE, _FAR_OFF = 7.0, 14.0
"""ln T in K, and the distance from it at which an iteration leads nowhere."""


def _by_entropy(gas: Gas, T: Array, entropy: Array) -> State:
    return gas._at("ts", (T, entropy), None)


def _by_pressure(gas: Gas, T: Array, pressure: Array) -> State:
    return gas._at("tp", (T, pressure), None)


def _energy(state: State, flux: Array) -> Array:
    energy: Array = state.enthalpy + 0.5 * (flux / state.density) ** 2
    return energy


def _on_line(gas: Gas, targets: tuple[Array, ...], T: Array, fast: Flags) -> Array:
    """Total enthalpy of the line p + G^2 v = F at T over the one asked for; NaN where the line is not that warm."""
    F, G, ht, E = targets
    state = _by_pressure(gas, T, F)
    for _ in range(2):
        root = np.sqrt(F**2 - 4.0 * G**2 * state.pressure / state.density)
        state = _by_pressure(gas, T, F - 0.5 * (F + np.where(fast, root, -root)))
    return _energy(state, E) - ht


BEYOND: dict[str, Callable[[Gas, tuple[Array, ...], Array, Flags], Array]] = {
    "hp": lambda gas, t, T, fast: _by_pressure(gas, T, t[1]).enthalpy - t[0],
    "sp": lambda gas, t, T, fast: _by_pressure(gas, T, t[1]).entropy - t[0],
    "vp": lambda gas, t, T, fast: 1.0 / _by_pressure(gas, T, t[1]).density - t[0],
    "hs": lambda gas, t, T, fast: _by_entropy(gas, T, t[1]).enthalpy - t[0],
    "passage": lambda gas, t, T, fast: _energy(_by_pressure(gas, T, t[2]), t[1]) - t[0],
    "flux": lambda gas, t, T, fast: _energy(_by_entropy(gas, T, t[0]), t[2]) - t[1],
    "momentum": _on_line,
}
"""What the last target lacks at a temperature (N,) K where the others are met: of one sign at both ends of the data where it is met
nowhere between. At given flux energy falls with the temperature on the supersonic branch."""


def strayed(state: State, targets: tuple[Array, ...], start: State) -> Flags:
    """(N,) true where a state of a branched closure is on the other side of M = 1 than its start.

    The mass flux is the last target. Within 1 % of sonic the start belongs to both branches, within 0.1 % the state.
    """
    before = targets[-1] / (start.density * start.sound_speed) - 1.0
    now = targets[-1] / (state.density * state.sound_speed) - 1.0
    off: Flags = (before * now < 0.0) & (np.abs(before) > 0.01) & (np.abs(now) > 1e-3)
    return off


def mirrored(state: State, targets: tuple[Array, ...]) -> State:
    """A start for "momentum" on the other branch: v reflected at the sonic v* = g/(g+1) F/G^2 of exponent g.

    Along p + G^2 v = F total enthalpy is a parabola in v about v* at constant exponent (the Rayleigh line).
    """
    F, G = targets[0], targets[1]
    g, v = state.isentropic_exponent, 1.0 / state.density
    v_other = np.maximum(2.0 * g / (g + 1.0) * F / G**2 - v, 0.02 * v)
    p = np.maximum(F - G**2 * v_other, 0.02 * F)
    T = state.temperature * p * v_other / (state.pressure * v)
    return replace(state, temperature=T, pressure=p, density=1.0 / v_other)


def inside_everywhere(temperature: Array) -> Codes:
    """Range codes of a model that holds at every temperature."""
    return np.full(temperature.shape, INSIDE)
