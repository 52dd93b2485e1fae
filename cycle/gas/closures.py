"""What closes a thermodynamic state: two scalar equations for the two outer unknowns ln T and ln p.

Each gas model gives, at the present (T, p), its properties and their slopes (`Local`). A row turns them into one
linear equation for the steps d ln T and d ln p; a closure is a pair of rows with the targets they read. So a state from
(h, p), a stagnation state (h, s), a passage of given area (s and energy) and a burner (momentum and energy) are one
Newton iteration with different closing rows. Slopes are those at constant entropy-free composition rules of the model:
an equilibrium gas gives equilibrium slopes.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from cycle.arrays import Array

Row = tuple[Array, Array | float, Array | float]


@dataclass(slots=True)
class Local:
    """Properties at (T, p) and slopes by ln T (suffix _T) and ln p (suffix _p); all (N,), SI."""

    ln_T: Array
    ln_p: Array
    h: Array
    h_T: Array
    h_p: Array | float
    s: Array
    s_T: Array
    s_p: Array
    ln_v: Array
    v_T: Array | float
    v_p: Array | float


def _temperature(at: Local, T: Array) -> Row:
    return np.log(T) - at.ln_T, 1.0, 0.0


def _pressure(at: Local, p: Array) -> Row:
    return np.log(p) - at.ln_p, 0.0, 1.0


def _enthalpy(at: Local, h: Array) -> Row:
    return h - at.h, at.h_T, at.h_p


def _entropy(at: Local, s: Array) -> Row:
    return s - at.s, at.s_T, at.s_p


def _volume(at: Local, v: Array) -> Row:
    return np.log(v) - at.ln_v, at.v_T, at.v_p


def _momentum(at: Local, F: Array, G: Array) -> Row:
    """p + G^2 v = F, the impulse per area at mass flux G."""
    p, gv = np.exp(at.ln_p), G * G * np.exp(at.ln_v)
    return F - p - gv, gv * at.v_T, p + gv * at.v_p


def _energy(at: Local, ht: Array, E: Array) -> Row:
    """h + E^2 v^2 / 2 = ht, the total enthalpy at mass flux E."""
    k = (E * np.exp(at.ln_v)) ** 2
    return ht - at.h - 0.5 * k, at.h_T + k * at.v_T, at.h_p + k * at.v_p


@dataclass(frozen=True, slots=True)
class Closure:
    """Two rows, each with the positions of its targets; `fixes_T`, `fixes_p` say what is known outright;
    `branched`: a subsonic and a supersonic state satisfy it, and the last target is the mass flux that tells them apart."""

    rows: tuple[tuple[Callable[..., Row], tuple[int, ...]], tuple[Callable[..., Row], tuple[int, ...]]]
    targets: tuple[str, ...]
    fixes_T: bool = False
    fixes_p: bool = False
    branched: bool = False

    @property
    def reads_h(self) -> bool:
        """Whether a row needs `Local.h`."""
        return any(row in (_enthalpy, _energy) for row, _ in self.rows)

    @property
    def reads_s(self) -> bool:
        """Whether a row needs `Local.s`."""
        return any(row is _entropy for row, _ in self.rows)

    def step(self, at: Local, targets: tuple[Array, ...]) -> tuple[Array, Array]:
        """Newton steps (d ln T, d ln p), each (N,)."""
        (row_a, take_a), (row_b, take_b) = self.rows
        if self.fixes_p:
            if self.fixes_T:
                zero = np.zeros_like(at.ln_T)
                return zero, zero
            e, e_T, _ = row_a(at, *(targets[i] for i in take_a))
            return e / e_T, np.zeros_like(at.ln_T)
        e1, a11, a12 = row_a(at, *(targets[i] for i in take_a))
        e2, a21, a22 = row_b(at, *(targets[i] for i in take_b))
        det = a11 * a22 - a12 * a21
        return (e1 * a22 - e2 * a12) / det, (a11 * e2 - a21 * e1) / det


CLOSURES: dict[str, Closure] = {
    "tp": Closure(((_temperature, (0,)), (_pressure, (1,))), ("temperature", "pressure"), fixes_T=True, fixes_p=True),
    "hp": Closure(((_enthalpy, (0,)), (_pressure, (1,))), ("enthalpy", "pressure"), fixes_p=True),
    "sp": Closure(((_entropy, (0,)), (_pressure, (1,))), ("entropy", "pressure"), fixes_p=True),
    "vp": Closure(((_volume, (0,)), (_pressure, (1,))), ("volume", "pressure"), fixes_p=True),
    "hv": Closure(((_enthalpy, (0,)), (_volume, (1,))), ("enthalpy", "volume")),
    "hs": Closure(((_enthalpy, (0,)), (_entropy, (1,))), ("enthalpy", "entropy")),
    "ts": Closure(((_temperature, (0,)), (_entropy, (1,))), ("temperature", "entropy")),
    "flux": Closure(((_entropy, (0,)), (_energy, (1, 2))), ("entropy", "total enthalpy", "mass flux"), branched=True),
    "passage": Closure(((_energy, (0, 1)), (_pressure, (2,))), ("total enthalpy", "mass flux", "pressure"), fixes_p=True),
    "momentum": Closure(((_momentum, (0, 1)), (_energy, (2, 3))), ("impulse", "mass flux", "total enthalpy", "energy flux"), branched=True),
}
