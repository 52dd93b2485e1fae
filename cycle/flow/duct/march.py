"""The attached march: all panels of N points together, both branches, no shooting.

In conservation form, with the fuel's impulse B taken out (F = p A + m u, continuous but where fuel enters):

    d(F - B)/dx = p A' - Cf (rho u^2/2) P = (A'/A) F - m (A'/A + k) u,   k = Cf P/(2 A).

Shapiro (1953), ch. 8. Each node holds a model of F(u) on its energy line, so its balance is one quadratic in u whose sign
is the branch; the thermodynamic states of all nodes are then solved in one batch and the models renewed.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.flow.duct.layout import Duct, Mixture, flat
from cycle.flow.duct.line import Model, OnLine, at_velocity, model_about_sonic
from cycle.flow.duct.panels import STAGES, Panels, Rule, allot, integral_to, lagrange, radau
from cycle.flow.duct.scan import Scan
from cycle.gas.state import State, scatter

ROUNDS = 9
_SETTLED = 3e-6
"""Relative change of u below which a column is done: the next error is its square."""

_SWEEPS = 12
_SWEPT = 1e-12
_AHEAD = 1e-4
"""The next round's error is about the square of this round's change; its sweeps stop this fraction below it."""

_FIRST_HOPELESS = -0.05
_HOPELESS = -0.005
_FINE = 9
_CHOKES = -1e-7
"""Discriminant of a quadratic, over the square of its middle term, below which there is no flow."""

_SONIC = 1e-14
"""The same, below which the flow is sonic: what is left is rounding, and its root, a hundred millionth, would show."""


@dataclass(frozen=True, eq=False)
class Branch:
    """A march of N points. Rows: the start, then the nodes of each panel in the order marched, (1 + P s, N).

    free: F - B at the rows, N; chokes: (N,) no flow on this branch at the end; reach: (N,) panels from the start that have one; lost:
    (N,) not converged or outside the data.
    """

    panels: Panels
    segment: Codes
    x: Array
    mixture: Mixture
    flow: OnLine
    free: Array
    reach: Codes
    chokes: Flags
    lost: Flags
    rules: list[Rule]
    begin_free: Array

    def take(self, index: Codes) -> Branch:
        """The marches of the chosen points."""
        return Branch(
            self.panels.take(index), self.segment[:, index], self.x[:, index], self.mixture.take(index), self.flow.take(index),
            self.free[:, index], self.reach[index], self.chokes[index], self.lost[index], self.rules,
            self.begin_free[index],
        )  # fmt: skip

    @property
    def passes(self) -> Flags:
        """(N,)."""
        return ~(self.chokes | self.lost)

    @property
    def on_the_way(self) -> Flags:
        """Rows that have a flow, (1 + P s, N)."""
        return _on_the_way(self.reach, self.panels.count)

    @property
    def blocked(self) -> Array:
        """x m of the end of the first panel without a flow, of the last one where all have one, (N,)."""
        at = np.minimum(self.reach, self.panels.count - 1), np.arange(self.reach.size)
        end: Array = self.panels.start[at] + self.panels.length[at]
        return end

    @property
    def sources(self) -> Array:
        """d(F - B)/dx at the nodes, N/m, (P, s, N)."""
        m, flow = self.mixture, self.flow
        return _by_panel((flow.impulse - m.mass_flow * flow.u) / m.area * m.slope - m.mass_flow * m.drag * flow.u)

    @property
    def wall_force(self) -> Array:
        """p A' at the nodes, N/m, (P, s, N)."""
        return _by_panel(self.flow.pressure * self.mixture.slope)

    @property
    def friction(self) -> Array:
        """Wall friction a length at the nodes, N/m, (P, s, N)."""
        m = self.mixture
        return _by_panel(m.mass_flow * m.drag * self.flow.u)

    def integrated(self, values: Array) -> Array:
        """Integral along the march of values (P, s, N), (N,); positive where values are and x rises."""
        weights = np.stack([rule.integral[-1] for rule in self.rules])
        total: Array = np.einsum("ps,psn,pn->n", weights, values, self.panels.length)
        return total

    def integrated_to(self, values: Array, x: Array) -> Array:
        """Integral of values (P, s, N) from the start of the march to x (N,), which lies on its way."""
        start, length = self.panels.start, self.panels.length
        panel = np.maximum((np.sign(length) * (x - start) > 0.0).sum(0) - 1, 0)
        columns = np.arange(x.size)
        size = length[panel, columns]
        part = np.clip((x - start[panel, columns]) / np.where(size == 0.0, 1.0, size), 0.0, 1.0)
        weights = np.stack([rule.integral[-1] for rule in self.rules])
        whole = np.einsum("ps,psn,pn->pn", weights, values, length)
        before = np.cumsum(whole, axis=0) - whole
        first = self.rules[0]
        plain = integral_to(self.rules[-1], part) if len(self.rules) > 1 else integral_to(first, first.parameter(part))
        inside = np.where(panel == 0, integral_to(first, first.parameter(part)), plain)
        total: Array = before[panel, columns] + size * (inside * values[panel, :, columns].T).sum(0)
        return total

    def free_at(self, x: Array) -> Array:
        """F - B, N, at x (N,) on the way."""
        return self.begin_free + self.integrated_to(self.sources, x)

    def place_of_highest_pressure(self) -> tuple[Array, Codes]:
        """x m and segment, (N,), of the largest pressure of an ungraded march: of the polynomials of the panels, sharpened
        by a parabola."""
        p = self.flow.pressure
        t, rule = np.linspace(0.0, 1.0, _FINE), self.rules[-1]
        nodes = _by_panel(p)
        same = self.mixture.brought[:-1:STAGES] == _by_panel(self.mixture.brought)[:, 0]
        begin = np.where(same, p[:-1:STAGES], np.tensordot(lagrange(rule.nodes, np.zeros(())), nodes, (0, 1)))
        values = np.concatenate([begin[:, None], nodes], axis=1)
        weights = lagrange(np.concatenate([[0.0], rule.nodes]), t)
        fine = np.einsum("sk,psn->pkn", weights, values).reshape(-1, self.x.shape[1])
        top = fine.argmax(0)
        middle = np.clip(top % _FINE, 1, _FINE - 2) + top // _FINE * _FINE
        columns = np.arange(top.size)
        before, here, after = fine[middle - 1, columns], fine[middle, columns], fine[middle + 1, columns]
        bend = 2.0 * here - before - after
        shift = np.clip(np.where(bend > 0.0, 0.5 * (after - before) / np.where(bend > 0.0, bend, 1.0), top - middle), -1.0, 1.0)
        panel = middle // _FINE
        part = (middle % _FINE + shift) / (_FINE - 1)
        x = self.panels.start[panel, columns] + part * self.panels.length[panel, columns]
        return x, self.panels.segment[panel, columns]

    def last(self) -> State:
        """States at the end, (N,)."""
        n = self.x.shape[1]
        return self.flow.state.take(np.arange(-n, 0) + self.x.size)

    def error(self) -> Array:
        """Estimate of the discretisation error of F at the end, over F, (N,).

        The Legendre coefficients of the source in a panel fall off geometrically; Radau integration misses those from
        degree 2 s - 1 on, which are extrapolated from the last two.
        """
        high = _legendre_tail()
        terms = np.einsum("pks,psn->pkn", np.stack([high[rule.graded] for rule in self.rules]), self.sources)
        last, before = np.abs(terms[:, 1]), np.abs(terms[:, 0])
        ratio = np.clip(last / np.maximum(before, 1e-300), 0.02, 1.0)
        left = np.abs(self.panels.length) * last * ratio ** (STAGES - 1)
        total: Array = np.where(np.arange(len(left))[:, None] < self.reach, left, 0.0).sum(0) / np.abs(self.flow.impulse[-1])
        return total


def _legendre_tail() -> dict[bool, Array]:
    """Rows that give the last two Legendre coefficients of a panel's integrand from its values at the nodes."""
    found: dict[bool, Array] = {}
    for graded in (False, True):
        rule = radau(graded)
        terms = np.polynomial.legendre.legvander(2.0 * rule.nodes - 1.0, STAGES - 1).astype(np.float64)
        fit = np.asarray(np.linalg.inv(terms), dtype=np.float64)
        found[graded] = fit[-2:] * (2.0 * rule.nodes if graded else 1.0)
    return found


def _rules(count: int, graded: bool) -> list[Rule]:
    """The first panel is graded where the march may start at Mach 1."""
    return [radau(graded)] + [radau(False)] * (count - 1)


def _reach(room: Array, least: float) -> Codes:
    """Panels from the start whose least discriminant, (P, N), is at least `least`, (N,)."""
    count: Codes = np.logical_and.accumulate(room >= least, axis=0).sum(0)
    return count


def _on_the_way(reach: Codes, count: int) -> Flags:
    panel = np.repeat(np.arange(-1, count), [1, *[STAGES] * count])
    return panel[:, None] < reach


def _by_panel(rows: Array) -> Array:
    return rows[1:].reshape(-1, STAGES, rows.shape[1])


@dataclass(frozen=True, eq=False)
class _Balance:
    """The coefficients of the balance at the rows (1 + P s, N): d(F - B)/dx = a F - b u; brought: B."""

    rules: list[Rule]
    length: Array
    a: Array
    b: Array
    brought: Array
    branch: Array

    def take(self, index: Codes | Flags) -> _Balance:
        return _Balance(self.rules, self.length[:, index], self.a[:, index], self.b[:, index], self.brought[:, index], self.branch[index])


def _balance(rules: list[Rule], panels: Panels, mixture: Mixture, branch: Array) -> _Balance:
    growth = mixture.slope / mixture.area
    return _Balance(rules, panels.length, growth, mixture.mass_flow * (growth + mixture.drag), mixture.brought, branch)


def _sweep(balance: _Balance, model: Model, free: Array, source: Array | None) -> tuple[Array, ...]:
    """Velocities and sources at the rows and the least discriminant of each panel (P, N), all nodes once in the order marched.

    source: of the last sweep, (1 + P s, N), or None.
    """
    u, new = np.empty(balance.a.shape), np.empty(balance.a.shape)
    worst = np.full((len(balance.rules), free.size), np.inf)

    def solve(row: int, step: Array | float, known: Array) -> None:
        alpha = 1.0 - step * balance.a[row]
        middle = known + balance.brought[row] - alpha * model.c0[row]
        q2 = alpha * model.c1[row] + step * balance.b[row]
        q0 = alpha * model.c2[row]
        square = middle * middle
        left = square - 4.0 * q2 * q0
        if row:
            panel = (row - 1) // STAGES
            worst[panel] = np.minimum(worst[panel], left / square)
        u[row] = (middle + balance.branch * np.sqrt(np.where(left > _SONIC * square, left, 0.0))) / (2.0 * q2)
        F = model.c0[row] + model.c1[row] * u[row] + model.c2[row] / u[row]
        new[row] = balance.a[row] * F - balance.b[row] * u[row]

    solve(0, 0.0, free)
    row = 1
    for p, rule in enumerate(balance.rules):
        h, first = balance.length[p], row
        last = new[row - 1] if source is None else source[first : first + STAGES]
        old = rule.rest.sum(1)[:, None] * last if source is None else rule.rest @ last
        for j in range(STAGES):
            known = free + h * (old[j] + rule.sweep[j, :j] @ new[first:row])
            solve(row, h * rule.sweep[j, j], known)
            row += 1
        free = free + h * (rule.integral[-1] @ new[first:row])
    return u, new, worst


def _solved(balance: _Balance, model: Model, free: Array, source: Array | None, tolerance: Array) -> tuple[Array, ...]:
    """Sweeps until the velocities stand still within the tolerance (N,); each column stops on its own."""
    found = _sweep(balance, model, free, source)
    done = np.zeros(free.shape, np.bool_)
    for _ in range(_SWEEPS):
        again = _sweep(balance, model, free, found[1])
        change = np.abs(again[0][1:] / found[0][1:] - 1.0).max(0)
        found = tuple(np.where(done, a, b) for a, b in zip(found, again, strict=True)) if done.any() else again
        done = done | (change < tolerance) | ~np.isfinite(change)
        if done.all():
            break
    return found


def march(
    duct: Duct, begin: Array, end: Array, free: Array, branch: Array, scan: Scan, count: int, graded: bool, partly: Flags | None = None
) -> Branch:
    """March N points from begin to end (N,), m, on the supersonic (branch +1) or subsonic (-1) side.

    free: F - B at begin, N (N,); scan: sonic states of the same points; count: panels, at least the stretches between grades on the way;
    graded: whether the march may start at or near Mach 1. end may lie upstream of begin. partly: (N,) points whose panels ahead of the
    first one that chokes are solved all the same.
    """
    partly = np.zeros(free.shape, np.bool_) if partly is None else partly
    panels = allot(duct.edges, duct.grades, begin, end, count)
    rules = _rules(count, graded)
    x, segment = _rows(rules, panels)
    mixture = duct.mixture(segment, x)
    balance = _balance(rules, panels, mixture, branch)
    impulse, velocity = scan.sonic_at(segment, x)
    model = model_about_sonic(impulse, velocity)
    u, source, worst = _solved(balance, model, free, None, np.full(free.shape, 1e-2))
    reach = _reach(worst, _FIRST_HOPELESS)
    hopeless = (reach == 0) | ~partly & (reach < count)
    done = hopeless.copy()
    u = np.where(_on_the_way(np.where(partly, reach, count), count), u, velocity)
    flow = _states(mixture, u, model, scan.near(segment, x))
    tolerance = np.full(free.shape, 1e-5)
    for _ in range(ROUNDS):
        live = np.flatnonzero(~done)
        if not live.size:
            break
        part, cut = mixture.take(live), flow.take(live)
        bal = balance.take(live)
        refit = cut.model(part.mass_flow)
        new, src, room = _solved(bal, refit, free[live], source[:, live], tolerance[live])
        reach = _reach(room, _HOPELESS)
        there = _on_the_way(np.where(partly[live], reach, count), count)
        new = np.where(there, new, velocity[:, live])
        change = np.where(there, np.abs(new / u[:, live] - 1.0), 0.0)[1:].max(0)
        tolerance[live] = np.clip(_AHEAD * change**2, _SWEPT, tolerance[live])
        renewed = _states(part, new, refit, cut.state)
        flow = renewed if live.size == free.size else _widen(flow, renewed, live)
        u[:, live], source[:, live], worst[:, live] = new, src, room
        hopeless[live] |= (reach == 0) | ~partly[live] & (reach < count)
        done[live] = (change < _SETTLED) | ~np.isfinite(change) | hopeless[live]
    reach = _reach(worst, _CHOKES)
    chokes = hopeless | (reach < count)
    there = _on_the_way(reach, count)
    unknown = ~hopeless & np.isnan(worst[np.minimum(reach, count - 1), np.arange(reach.size)])
    lost = (partly | ~chokes) & (~done | ~(flow.good | ~there).all(0)) | unknown
    return Branch(panels, segment, x, mixture, flow, flow.impulse - mixture.brought, reach, chokes, lost, rules, free)


def spot(
    duct: Duct, segment: Codes, x: Array, free: Array, branch: Array, scan: Scan, near: OnLine | None = None
) -> tuple[Mixture, OnLine, Flags]:
    """The attached flow of F - B = free (N,) N at the places x (N,) m of a segment: mixture and state, (1, N), and whether
    it was found. near: the flow of the same ducts and branch at places nearby, to start from."""
    mixture = duct.mixture(segment[None], x[None])
    start: State = scan.near(segment[None], x[None]) if near is None else near.state
    model = model_about_sonic(*scan.sonic_at(segment[None], x[None])) if near is None else near.model(mixture.mass_flow)
    F = free + mixture.brought
    done = np.zeros(x.shape, np.bool_)
    flow, u = None, None
    for _ in range(ROUNDS):
        middle = F - model.c0
        left = middle**2 - 4.0 * model.c1 * model.c2
        new = (middle + branch * np.sqrt(np.maximum(left, 0.0))) / (2.0 * model.c1)
        if u is not None:
            change = np.abs(new / u - 1.0)[0]
            new = np.where(done, u, new)
            done |= change < _SETTLED
        u = new
        flow = _states(mixture, u, model, start)
        if done.all():
            break
        start, model = flow.state, flow.model(mixture.mass_flow)
    assert flow is not None
    return mixture, flow, done & flow.good[0]


def _rows(rules: list[Rule], panels: Panels) -> tuple[Array, Codes]:
    places = np.stack([rule.places for rule in rules])
    x = panels.start[:, None] + places[:, :, None] * panels.length[:, None]
    n = x.shape[-1]
    x = np.concatenate([panels.start[:1], x.reshape(-1, n)])
    segment = np.concatenate([panels.segment[:1], np.repeat(panels.segment, STAGES, axis=0)])
    return x, segment


def _states(mixture: Mixture, u: Array, model: Model, start: State) -> OnLine:
    p = (model(u) - mixture.mass_flow * u) / mixture.area
    return at_velocity(mixture, u, start, np.maximum(p, 100.0))


def _widen(flow: OnLine, part: OnLine, live: Codes) -> OnLine:
    columns = [getattr(flow, k).copy() for k in ("u", "mach_squared", "impulse")]
    for column, k in zip(columns, ("u", "mach_squared", "impulse"), strict=True):
        column[:, live] = getattr(part, k)
    return OnLine(columns[0], scatter(flow.state, flat(len(flow.u), flow.u.shape[1], live), part.state), columns[1], columns[2])
