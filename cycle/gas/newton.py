"""The batched Newton iteration of chemical equilibrium with two closing equations.

The reduced Gibbs iteration (Gordon and McBride, NASA RP-1311, 1994, section 2) with potentials of basis species in
place of those of elements (element potentials: Reynolds, 1986). ln n_j stay unknowns of their own while iterating, which
keeps a poor guess from diverging; eliminating them leaves K + 1 linear equations a point, solved for 1 to 3 right-hand
sides: the residuals at this T and p, the response to ln T, the response to ln p. With these the closure (see
`closures`) takes its step in ln T and ln p.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.constants import GAS_CONSTANT, REFERENCE_PRESSURE
from cycle.gas.closures import CLOSURES, Closure, Local
from cycle.gas.elimination import dot, product, solve_systems
from cycle.gas.kernel import Kernel, Thermo
from cycle.gas.species import FUNCTIONS

POOL = 2048
"""Columns iterated together; as large as still fits the processor's cache."""

MAX_ITERATIONS = 60

ERROR_LEFT = 1e-15
"""Stop when the quadratic error that this step leaves, the sum of x_j (d ln n_j)^2, is below this ..."""

LAST_STEP = 1e-7
"""... and the steps of ln T and ln p, whose error is their square, below this."""

LN_REFERENCE = float(np.log(REFERENCE_PRESSURE))
LN_RATIO = float(np.log(GAS_CONSTANT)) - LN_REFERENCE


@dataclass(slots=True)
class Columns:
    """Points under iteration. unknowns: rows z (K), m, ln T, ln p (p in bar), ln n (reacting). conditions: rows b (K),
    inert amounts, their -sum n ln n, absent (K, 1 where the element is not there), then the closure's targets."""

    unknowns: Array
    conditions: Array

    def put(self, where: Codes, other: Columns, source: slice) -> None:
        """Overwrite the columns `where` by `source` of another set."""
        self.unknowns[:, where] = other.unknowns[:, source]
        self.conditions[:, where] = other.conditions[:, source]

    def keep(self, where: Codes) -> Columns:
        """Only the columns `where`."""
        return Columns(self.unknowns[:, where], self.conditions[:, where])


@dataclass(slots=True)
class View:
    """The columns by name (potentials: z and m), and what follows from them at once: T, n and the total p e^m of `Kernel`'s notation."""

    potentials: Array
    z: Array
    m: Array
    ln_T: Array
    ln_p: Array
    ln_n: Array
    b: Array
    gone: Array
    amounts: Array
    inert: Array
    mixing: Array
    targets: tuple[Array, ...]
    T: Array
    total: Array
    thermo: Thermo


class Step:
    """One Newton step for a number of columns, and the room it works in, allocated once for the largest number."""

    def __init__(self, kernel: Kernel, closure: Closure, points: int) -> None:
        self.kernel, self.closure = kernel, closure
        self.sides = 1 if closure.fixes_T and closure.fixes_p else 2 if closure.fixes_p else 3
        k, reacting = kernel.basis, kernel.table.reacting
        rows = FUNCTIONS + len(kernel.rows) + 6 * reacting + (k + 1) * (k + 1 + self.sides) + 3
        self.room = np.empty(rows * points)
        self.resize(points)

    def resize(self, points: int) -> None:
        """Lay out the room for fewer columns."""
        k, reacting = self.kernel.basis, self.kernel.table.reacting
        used = 0

        def cut(*shape: int) -> Array:
            nonlocal used
            size = math.prod(shape) * points
            used += size
            return self.room[used - size : used].reshape(*shape, points)

        self.functions, self.thermo = cut(FUNCTIONS), cut(len(self.kernel.rows))
        self.n, self.r, self.nr = cut(reacting), cut(reacting), cut(reacting)
        self.matrix, self.right = cut(k + 1, k + 1), cut(k + 1, self.sides)
        self.nh, self.work = cut(reacting - k), cut(reacting - k)
        self.change = cut(k + 3 + reacting)

    def __call__(self, columns: Columns) -> Flags:
        """Move the unknowns of `columns` in place; (N,) true where they have converged."""
        at = self._view(columns)
        self._distances(at)
        self._assemble(at)
        d_T: Array | float = 0.0
        d_p: Array | float = 0.0
        if self.sides == 1:
            solve_systems(self.matrix, self.right)
        else:
            pull = self._responses(at)
            solve_systems(self.matrix, self.right)
            d_T, d_p = self.closure.step(self._local(at, pull), at.targets)
        self._expand(at, d_T, d_p)
        done = self._limit(at)
        columns.unknowns += self.change
        return done

    def _view(self, columns: Columns) -> View:
        u, c = columns.unknowns, columns.conditions
        k, inert = self.kernel.basis, self.kernel.table.inert
        end = k + inert
        T = np.exp(u[k + 1])
        total: Array = np.exp(u[k] + u[k + 2])
        return View(
            u[: k + 1], u[:k], u[k], u[k + 1], u[k + 2], u[k + 3 :], c[:k], c[end + 1 : end + 1 + k], c[:end], c[k:end].sum(0), c[end],
            tuple(c[end + 1 + k :]), T, total,
            self.kernel.thermo(T, self.functions, self.thermo),
        )  # fmt: skip

    def _distances(self, at: View) -> None:
        """n, and r: how far each ln n_j is from its equilibrium with the potentials."""
        np.exp(at.ln_n, out=self.n)
        r = np.matmul(self.kernel.nu_and_one, at.potentials, out=self.r)
        r[self.kernel.basis :] -= at.thermo.g
        r -= at.ln_n
        np.multiply(self.n, r, out=self.nr)

    def _assemble(self, at: View) -> None:
        """The reduced matrix, and the residuals of the element balances and of the sum of moles."""
        k = self.kernel.basis
        flat = self.matrix.reshape((k + 1) ** 2, -1)
        product(self.kernel.pairs, self.n, flat)
        residual = np.matmul(self.kernel.weights, self.nr)
        residual += self.matrix[k]
        residual[:k] -= at.b
        residual[k] -= at.total - at.inert
        np.negative(residual, out=self.right[:, 0])
        self.matrix[k, k] -= at.total
        flat[: k * (k + 2) : k + 2] += at.gone

    def _responses(self, at: View) -> Array:
        """Right-hand sides of the responses to ln T and ln p; the pull of ln T on the balances is returned."""
        k = self.kernel.basis
        np.multiply(self.n[k:], at.thermo.h, out=self.nh)
        pull: Array = np.matmul(self.kernel.formed, self.nh)
        np.negative(pull, out=self.right[:, 1])
        if self.sides > 2:
            self.right[:k, 2] = 0.0
            self.right[k, 2] = at.total
        return pull

    def _local(self, at: View, pull: Array) -> Local:
        """Properties once the composition has followed to this T and p, and their equilibrium slopes."""
        k, x, th, R = self.kernel.basis, self.right, at.thermo, GAS_CONSTANT
        formed = dot(th.h, self.n[k:] + self.nr[k:]) + dot(pull, x[:, 0])
        cp = dot(th.h, self.nh) + dot(th.cp, self.n[k:]) + dot(pull, x[:, 1]) + dot(at.amounts, th.base_cp)
        m = at.m + x[k, 0]
        s = formed + dot(at.amounts, th.base_s) - dot(at.b, at.z + x[:k, 0]) + at.inert * m + at.mixing
        v_T = 1.0 + x[k, 1]
        local = Local(
            at.ln_T, at.ln_p + LN_REFERENCE, R * at.T * (formed + dot(at.amounts, th.base_h)), R * at.T * cp, 0.0,
            R * s, R * cp, -R * at.total * v_T, LN_RATIO + at.ln_T + m, v_T, -1.0,
        )  # fmt: skip
        if self.sides > 2:
            local.h_p, local.v_p = R * at.T * dot(pull, x[:, 2]), x[k, 2]
        return local

    def _expand(self, at: View, d_T: Array | float, d_p: Array | float) -> None:
        """The change of all unknowns from those of ln T and ln p."""
        k, change, x = self.kernel.basis, self.change, self.right
        change[: k + 1] = x[:, 0]
        for response, step in zip(x.transpose(1, 0, 2)[1:], (d_T, d_p), strict=False):
            change[: k + 1] += response * step
        change[k + 1], change[k + 2] = d_T, d_p
        d = np.matmul(self.kernel.nu_and_one, change[: k + 1], out=change[k + 3 :])
        d += self.r
        if self.sides > 1:
            d[k:] += np.multiply(at.thermo.h, d_T, out=self.work)

    def _limit(self, at: View) -> Flags:
        """Shorten steps that are too long, and say which columns are done once this step is taken.

        ln n_j may grow by 2, a trace by what takes it to a mole fraction of e^-2; ln of the total by 0.4, ln T by 0.25
        and ln p by 2.
        """
        k, change = self.kernel.basis, self.change
        d_T, d_p, d = np.abs(change[k + 1]), np.abs(change[k + 2]), change[k + 3 :]
        size = np.maximum(4.0 * d_T, 0.5 * d_p)
        size = np.maximum(size, 2.5 * np.abs(change[k] + change[k + 2]))
        fast = np.flatnonzero(d.max(0) > 2.0)
        if fast.size:
            room = np.maximum((at.m + at.ln_p)[fast] - 2.0 - at.ln_n[:, fast], 2.0)
            size[fast] = np.maximum(size[fast], (d[:, fast] / room).max(0))
        left = dot(np.multiply(d, self.n, out=self.r), d) < ERROR_LEFT * at.total
        change /= np.maximum(size, 1.0)
        done: Flags = left & (d_T < LAST_STEP) & (d_p < LAST_STEP) & (size <= 1.0)
        return done


def iterate(kernel: Kernel, kind: str, points: int, prepare: Callable[[slice], Columns]) -> tuple[Array, Flags, Codes]:
    """Converge N points of one closure.

    prepare gives the first guesses of a slice of the points, at most `POOL` of them. Returns the converged unknowns z, m,
    ln T, ln p (K + 3, N), a flag and the number of iterations of each point. A pool of columns is iterated; a column
    that is done leaves it unchanged from then on, so no point's answer depends on its neighbours.
    """
    k = kernel.basis
    result = np.full((k + 3, points), np.nan)
    converged, counts = np.zeros(points, bool), np.zeros(points, np.int64)
    queue = Queue(prepare, points)
    pool, live = queue.first()
    age = np.zeros(live.size, np.int64)
    closure = CLOSURES[kind]
    step = Step(kernel, closure, live.size)
    waiting = np.ones(live.size, bool)
    while waiting.any():
        done = step(pool)
        age += 1
        finished = np.flatnonzero(waiting & (done | (age >= MAX_ITERATIONS)))
        if not finished.size:
            continue
        who = live[finished]
        result[:, who] = np.where(done[finished], pool.unknowns[: k + 3, finished], np.nan)
        converged[who], counts[who] = done[finished], age[finished]
        refilled = queue.refill(pool, live, finished)
        age[finished[:refilled]] = 0
        waiting[finished[refilled:]] = False
        left = int(np.count_nonzero(waiting))
        if 0 < left < 0.7 * waiting.size:
            keep = np.flatnonzero(waiting)
            pool, live, age, waiting = pool.keep(keep), live[keep], age[keep], waiting[keep]
            step.resize(left)
    return result, converged, counts


class Queue:
    """Points not yet in the pool; first guesses are made a pool's worth at a time."""

    def __init__(self, prepare: Callable[[slice], Columns], points: int) -> None:
        self.prepare, self.points = prepare, points
        self.next_point = self.ready_from = self.ready_to = 0
        self.ready: Columns | None = None

    def _make(self) -> Columns:
        stop = min(self.next_point + POOL, self.points)
        columns = self.prepare(slice(self.next_point, stop))
        self.ready_from, self.ready_to = 0, stop - self.next_point
        self.first_ready, self.next_point = self.next_point, stop
        return columns

    def first(self) -> tuple[Columns, Codes]:
        """The first pool and the points in it."""
        columns = self._make()
        live = np.arange(self.ready_to)
        self.ready_from = self.ready_to
        return columns, live

    def refill(self, pool: Columns, live: Codes, free: Codes) -> int:
        """Put waiting points into the free columns, as many as there are; the number placed."""
        placed = 0
        while placed < free.size and (self.ready_from < self.ready_to or self.next_point < self.points):
            if self.ready_from == self.ready_to:
                self.ready = self._make()
            assert self.ready is not None
            count = min(free.size - placed, self.ready_to - self.ready_from)
            where, source = free[placed : placed + count], slice(self.ready_from, self.ready_from + count)
            pool.put(where, self.ready, source)
            live[where] = self.first_ready + np.arange(source.start, source.stop)
            self.ready_from += count
            placed += count
        return placed
