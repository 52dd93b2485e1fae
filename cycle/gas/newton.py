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

POOL = 5120
"""Columns iterated together: more leave the processor's cache, fewer spend too much on calling numpy."""

FEW_LEFT = 512
"""Columns left in the pool at which the next points join: fewer would spend most of a step on calling numpy."""

MAX_ITERATIONS = 30

ERROR_LEFT = 1e-14
"""Stop when the quadratic error that this step leaves, the sum of x_j (d ln n_j)^2, is below this ..."""

LAST_STEP = 1e-7
"""... and the steps of ln T and ln p, whose error is their square, below this."""

LN_REFERENCE = float(np.log(REFERENCE_PRESSURE))
LN_RATIO = float(np.log(GAS_CONSTANT)) - LN_REFERENCE


@dataclass(slots=True)
class Columns:
    """Points under iteration. unknowns: rows z (K), m, ln T, ln p (p in bar), ln n (reacting). conditions: rows b (K),
    inert amounts, their sum, their -sum n ln n, absent (K, 1 where the element is not there), then the closure's targets."""

    unknowns: Array
    conditions: Array

    def keep(self, where: Codes) -> Columns:
        """Only the columns `where`."""
        return Columns(self.unknowns[:, where], self.conditions[:, where])

    def joined(self, other: Columns) -> Columns:
        """These columns, then those of `other`."""
        return Columns(np.hstack([self.unknowns, other.unknowns]), np.hstack([self.conditions, other.conditions]))


class View:
    """The rows of `Columns` by name (potentials: z and m), and what a step finds from them first: T, the total p e^m and the
    thermodynamic functions of `Kernel`'s notation."""

    T: Array
    total: Array
    thermo: Thermo

    def __init__(self, kernel: Kernel, columns: Columns) -> None:
        u, c, k = columns.unknowns, columns.conditions, kernel.basis
        inert = k + kernel.table.inert
        self.kernel, self.columns = kernel, columns
        self.potentials, self.z, self.m, self.ln_T, self.ln_p, self.ln_n = u[: k + 1], u[:k], u[k], u[k + 1], u[k + 2], u[k + 3 :]
        self.amounts, self.b = c[:inert], c[:k]
        self.inert, self.mixing, self.gone = c[inert], c[inert + 1], c[inert + 2 : inert + 2 + k]
        self.targets = tuple(c[inert + 2 + k :])

    def evaluate(self, functions: Array, out: Array) -> None:
        """T, total and thermo for the present unknowns, in the room given."""
        self.T = np.exp(self.ln_T)
        self.total = np.exp(self.m + self.ln_p)
        self.thermo = self.kernel.thermo(self.T, functions, out)


class Step:
    """One Newton step for a number of columns, and the room it works in, allocated once for the largest number."""

    def __init__(self, kernel: Kernel, closure: Closure, points: int) -> None:
        self.kernel, self.closure = kernel, closure
        self.reads_h, self.reads_s = closure.reads_h, closure.reads_s
        self.sides = 1 if closure.fixes_T and closure.fixes_p else 2 if closure.fixes_p else 3
        k, reacting = kernel.basis, kernel.table.reacting
        rows = FUNCTIONS + len(kernel.rows) + 6 * reacting + (k + 1) * (k + 1 + self.sides) + 3
        self.room = np.empty(rows * points)
        self.view: View | None = None

    def _lay_out(self, points: int) -> None:
        """Cut the room for so many columns."""
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
        if self.view is None or self.view.columns is not columns:
            self.view = View(self.kernel, columns)
            self._lay_out(columns.unknowns.shape[1])
        at = self.view
        at.evaluate(self.functions, self.thermo)
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
        pulled = (pull[:, None] * x).sum(0)
        # the last row of `pull` is the sum of n h
        formed = pull[k] + dot(self.nh, self.r[k:]) + pulled[0]
        cp = dot(th.h, self.nh) + dot(th.cp, self.n[k:]) + dot(at.amounts, th.base_cp) + pulled[1]
        m, v_T, RT, unread = at.m + x[k, 0], 1.0 + x[k, 1], R * at.T, at.T
        local = Local(
            at.ln_T, at.ln_p + LN_REFERENCE, unread, RT * cp, 0.0, unread, R * cp, -R * at.total * v_T, LN_RATIO + at.ln_T + m, v_T, -1.0
        )
        if self.reads_h:
            local.h = RT * (formed + dot(at.amounts, th.base_h))
        if self.reads_s:
            local.s = R * (formed + dot(at.amounts, th.base_s) - dot(at.b, at.z + x[:k, 0]) + at.inert * m + at.mixing)
        if self.sides > 2:
            local.h_p, local.v_p = RT * pulled[2], x[k, 2]
        return local

    def _expand(self, at: View, d_T: Array | float, d_p: Array | float) -> None:
        """The change of all unknowns from those of ln T and ln p."""
        k, change, x = self.kernel.basis, self.change, self.right
        change[: k + 1] = x[:, 0]
        if self.sides > 1:
            change[: k + 1] += x[:, 1] * d_T
        if self.sides > 2:
            change[: k + 1] += x[:, 2] * d_p
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
        left = dot(np.multiply(d, self.n, out=self.r), d)
        done: Flags = (left < ERROR_LEFT * at.total) & (np.maximum(d_T, d_p) < LAST_STEP)
        long = size > 1.0
        if long.any():
            change /= np.maximum(size, 1.0)
            done &= ~long
        return done


def iterate(kernel: Kernel, kind: str, points: int, prepare: Callable[[slice], Columns]) -> tuple[Array, Flags, Codes]:
    """Converge N points of one closure.

    prepare gives the first guesses of a slice of the points, at most `POOL` of them. Returns the converged unknowns z, m,
    ln T, ln p (K + 3, N), a flag and the number of iterations of each point. A column leaves the pool when it is done;
    when few are left they are joined by the next slice, so that arrays stay long.
    """
    k = kernel.basis
    result = np.empty((k + 3, points))
    converged, counts = np.zeros(points, bool), np.zeros(points, np.int64)
    queue = Queue(prepare, points)
    step = Step(kernel, CLOSURES[kind], min(points, POOL + FEW_LEFT))
    while queue.fill():
        done = step(queue.pool)
        queue.age += 1
        leave = done | (queue.age >= MAX_ITERATIONS)
        if leave.any():
            who = queue.live[leave]
            result[:, who] = queue.pool.unknowns[: k + 3, leave]
            converged[who], counts[who] = done[leave], queue.age[leave]
            queue.keep(~leave)
    result[:, ~converged] = np.nan
    return result, converged, counts


class Queue:
    """The pool of columns, the points `live` in it and how often they were stepped; the points after `next_point` wait."""

    def __init__(self, prepare: Callable[[slice], Columns], points: int) -> None:
        self.prepare, self.points, self.next_point = prepare, points, 0
        self.live, self.age = np.zeros(0, np.int64), np.zeros(0, np.int64)
        self.pool: Columns

    def fill(self) -> bool:
        """Let the next slice in when few columns are left; whether there is anything to iterate."""
        if self.live.size <= FEW_LEFT and self.next_point < self.points:
            new = np.arange(self.next_point, min(self.next_point + POOL, self.points))
            columns = self.prepare(slice(self.next_point, self.next_point + new.size))
            self.pool = self.pool.joined(columns) if self.live.size else columns
            self.live = np.concatenate([self.live, new])
            self.age = np.concatenate([self.age, np.zeros(new.size, np.int64)])
            self.next_point += new.size
        return self.live.size > 0

    def keep(self, stay: Flags) -> None:
        """Only the columns where `stay`."""
        self.live, self.age = self.live[stay], self.age[stay]
        if self.live.size:
            self.pool = self.pool.keep(np.flatnonzero(stay))
