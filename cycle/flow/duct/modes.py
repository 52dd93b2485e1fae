"""How a duct runs: attached supersonic, with a shock train, or choked thermally; and what it does then.

The three are tried in this order; what was tried is kept. Attached: the supersonic march from the entry never chokes and
its highest pressure does not separate the boundary layer. Shock train: the smallest p3 above p2 at which the separated
core just fills the duct, the core supersonic there and the march behind it unchoked. Thermal throat: both branches from
the critical section, the separated core joining the subsonic one. Else the duct asks for more impulse than arrives.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import fields
from typing import TypeVar

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.flow.duct.cooling import lost_heat
from cycle.flow.duct.core import Train, find_train
from cycle.flow.duct.layout import Duct
from cycle.flow.duct.march import Branch, march, spot
from cycle.flow.duct.profile import profile_of
from cycle.flow.duct.reattach import Miss, miss_along, reattachment, throat_lacks
from cycle.flow.duct.scan import PANELS as SCANNED
from cycle.flow.duct.scan import Scan, scan_of
from cycle.flow.duct.solution import (
    ATTACHED,
    CHOKED,
    CHOKES,
    LOST,
    MODES,
    NO_CORE,
    NO_MODE,
    NO_PRESSURE,
    NO_START,
    NO_THROAT,
    NONE,
    NOT_TRIED,
    OUTSIDE,
    REFUSED,
    SEPARATES,
    SOLVED,
    STANDS,
    STATUSES,
    SUBSONIC,
    THROAT,
    TRAIN,
    TRIED,
    UNSETTLED,
    UNSTARTED,
    Solution,
    nothing_yet,
)  # fmt: skip
from cycle.flow.duct.summits import SMOOTH, Summits
from cycle.flow.duct.throat import CANDIDATES, Throat, candidates, throat
from cycle.gas.state import OUT_OF_RANGE, scatter

__all__ = ["ASKED", "MODES", "PANELS", "STATUSES", "TRIED", "Solution", "Solver", "solve_once"]

PANELS = 12
"""Panels of a march, of four nodes each."""

_SURE = 0.02
"""Momentum lacking at the throat, over the impulse, above which no shock train needs to be looked for."""

_JUDGED = 1e-6
"""Momentum over the impulse to which what lacks is known there: it also tells the search for the largest heat where to look."""

_SUBSONIC = 0.999
"""Square of the Mach number below which a row of the supersonic branch is none: rounding at a throat is less."""

_NEAR_SONIC = 1.2
"""Square of the Mach number below which a march may have less impulse at a critical section than it shows."""

_WIDTH = 0.02
"""Distance over the duct's length from where a march begins, below which a critical section is that one."""

_LEAST = 1e-7
"""Impulse lacking, over that of station 2, that is none."""

_UNSURE = 1e-3
"""Momentum that the core has beyond the critical flow's least, over the impulse of station 2, below which a place may be missed."""

_FURTHER = 5
"""Marches that close in on the place where a subsonic branch chokes, halving the way."""


Kept = TypeVar("Kept", Train, Throat)


class Solver:
    """One block of points under solution. least, most: the first and the last mode that may be taken, codes (N,); those before are
    refuted, those behind are not asked for."""

    def __init__(self, duct: Duct, separation: Array, panels: int, least: Codes, most: Codes) -> None:
        self.duct, self.separation, self.least, self.most = duct, separation, least, most
        self.count = max(panels, duct.grades.shape[0] - 1)
        self.scan = scan_of(duct, self.count * SCANNED // PANELS)
        self.summits = candidates(duct, self.scan)
        self.found = nothing_yet(duct, self.scan, self.count)
        self.open = np.ones(duct.size, np.bool_)
        self.outside: Flags = (scan_range(self.scan) == OUT_OF_RANGE).any(0)

    def part(self, index: Codes) -> tuple[Duct, Scan]:
        """Duct and scan of some points."""
        if np.array_equal(index, np.arange(self.duct.size)):
            return self.duct, self.scan
        return self.duct.take(index), self.scan.take(index)

    def try_attached(self) -> None:
        """Supersonic from the entry to the exit."""
        index = np.flatnonzero(self.open)
        if not index.size:
            return
        duct, scan = self.part(index)
        one = np.ones(index.size)
        run = march(duct, np.zeros(index.size), duct.end, duct.impulse, one, scan, self.count, graded=False)
        x, segment = run.place_of_highest_pressure()
        peak = spot(duct, segment, x, run.free_at(x), one, scan)[1].pressure[0]
        peak = np.maximum(peak, run.flow.pressure.max(0))
        separates = (peak > self.separation[index] * duct.pressure) | (self.least[index] > ATTACHED)
        short = self._short(index, run)
        self.outside[index] |= run.lost & (run.flow.state.range.reshape(run.x.shape) == OUT_OF_RANGE).any(0)
        self.found.attached[index] = np.select([run.lost, run.chokes | short, separates], [UNSETTLED, CHOKES, SEPARATES], STANDS)
        self.found.attached_peak[index] = np.where(run.passes & ~short, peak, np.nan)
        stands = run.passes & ~short & ~separates
        w = index[stands]
        self.found.pressure_3[w], self.found.x_fill[w], self.found.peak[w] = duct.pressure[stands], 0.0, peak[stands]
        self._book(index, stands, ATTACHED, [(run, True)], np.zeros(index.size), duct.pressure, np.zeros(index.size))

    def try_train(self) -> None:
        """Separated core up to where it fills the duct, supersonic from there."""
        index = np.flatnonzero(self.open & (self.least <= TRAIN) & (self.most >= TRAIN))
        index = index[~self._surely_choked(index)] if index.size else index
        looked = self._look_for_train(index)
        if looked is None:
            return
        index, train, run = looked
        stands = self.found.train[index] == STANDS
        w = index[stands]
        self.found.pressure_3[w], self.found.x_fill[w] = train.pressure[stands], train.x[stands]
        self.found.peak[w] = np.maximum(run.flow.pressure.max(0), train.pressure)[stands]
        self._book(index, stands, TRAIN, [(run, True)], train.x, train.pressure, train.friction)

    def look_for_second(self) -> None:
        """Where the attached flow stands: whether a shock train would stand too."""
        self._look_for_train(np.flatnonzero(self.found.mode == ATTACHED))

    def _look_for_train(self, index: Codes) -> tuple[Codes, Train, Branch] | None:
        """Of some points: those with a train whose core is supersonic, the trains, and the marches behind them."""
        if not index.size:
            return None
        duct, scan = self.part(index)
        train = find_train(duct, scan)
        fast = train.found & (train.mach > 1.0)
        self.found.train[index] = np.where(~train.found, NO_PRESSURE, SUBSONIC)
        kept = np.flatnonzero(fast)
        if not kept.size:
            return None
        index, duct, scan, train = index[kept], duct.take(kept), scan.take(kept), _taken(train, kept)
        run = march(duct, train.x, duct.end, train.free, np.ones(kept.size), scan, self.count, graded=False)
        short = self._short(index, run)
        self.found.train[index] = np.select([run.lost, run.chokes | short], [UNSETTLED, CHOKES], STANDS)
        return index, train, run

    def _short(self, index: Codes, run: Branch) -> Flags:
        """Where a march that passes close to Mach 1 has less impulse at a critical section than the flow needs there, (index.size,): the
        march alone tells only to about a thousandth of the heat."""
        short: Flags = run.passes & (run.flow.mach_squared.min(0) < _SUBSONIC)
        near = np.flatnonzero(run.passes & ~short & (run.flow.mach_squared.min(0) < _NEAR_SONIC))
        for rank in range(CANDIDATES if near.size else 0):
            behind = self.summits.x[rank, index[near]] > run.x[0, near] + _WIDTH * self.duct.end[index[near]]
            w = near[self.summits.there[rank, index[near]] & behind]
            if not w.size:
                continue
            duct, scan = self.part(index[w])
            at, cut = self._throat(index[w], duct, scan, rank), run.take(w)
            short[w] |= at.there & (at.x > cut.x[0]) & (cut.free_at(at.x) < at.free - _LEAST * duct.impulse)
        return short

    def _surely_choked(self, index: Codes) -> Flags:
        """Where the throat lacks so much momentum that no shock train reaches past it, (index.size,)."""
        duct, scan = self.part(index)
        first = self._throat(index, duct, scan, 0)
        lacks = throat_lacks(duct, scan, first, _JUDGED) / duct.impulse
        self.found.spare[index] = np.where(first.there, -lacks, np.nan)
        surely: Flags = first.there & (lacks > _SURE)
        return surely

    def _throat(self, index: Codes, duct: Duct, scan: Scan, rank: int) -> Throat:
        tops = Summits(*(getattr(self.summits, f.name)[:, index] for f in fields(Summits)))
        return throat(duct, scan, tops, rank)

    def try_throat(self) -> None:
        """Both ways from the critical section; the candidates in turn until one stands."""
        for rank in range(CANDIDATES):
            index = np.flatnonzero(self.open & self.summits.there[rank] & (self.most >= THROAT))
            if not index.size:
                continue
            duct, scan = self.part(index)
            at = self._throat(index, duct, scan, rank)
            for graded in (False, True):
                part = np.flatnonzero(at.there & ((at.kind != SMOOTH) == graded))
                if part.size:
                    self._from_throat(index[part], duct.take(part), scan.take(part), _taken(at, part), graded)
        nowhere = self.open & (self.found.throat == NOT_TRIED)
        self.found.throat[nowhere] = NO_THROAT

    def _from_throat(self, index: Codes, duct: Duct, scan: Scan, at: Throat, graded: bool) -> None:
        """March down to the exit, and up as far as the core is met: what chokes further up lies in the separated zone."""
        n = index.size
        twice = np.tile(np.arange(n), 2)
        both = march(
            duct.take(twice), np.tile(at.x, 2), np.concatenate([duct.end, np.zeros(n)]), np.tile(at.free, 2),
            np.repeat([1.0, -1.0], n), scan.take(twice), self.count, graded, np.repeat([False, True], n),
        )  # fmt: skip
        down, up = both.take(np.arange(n)), both.take(np.arange(n, 2 * n))
        blocked = np.zeros(n)
        for turn in range(_FURTHER + 1):
            along = miss_along(duct, scan, up)
            short = along.ends & ~up.lost & (turn < _FURTHER)
            w = np.flatnonzero(~short)
            if w.size:
                self._judge(index[w], duct.take(w), scan.take(w), _taken(at, w), down.take(w), up.take(w), along.take(w))
            w = np.flatnonzero(short)
            if not w.size:
                break
            blocked = np.where(up.chokes, up.blocked, blocked)[w]
            index, duct, scan, at, down = index[w], duct.take(w), scan.take(w), _taken(at, w), down.take(w)
            head, one = 0.5 * (along.reached[w] + blocked), np.ones(w.size)
            up = march(duct, at.x, head, at.free, -one, scan, self.count, graded, one > 0.0)

    def _judge(self, index: Codes, duct: Duct, scan: Scan, at: Throat, down: Branch, up: Branch, along: Miss) -> None:
        """What becomes of a critical section whose marches and momentum lacking are known."""
        found, fails = self.found, ~down.passes | self._short(index, down)
        needs = (along.least >= 0.0) & (along.reached < at.x)
        code = np.select([up.lost, needs, fails & down.lost, fails], [UNSETTLED, NO_START, UNSETTLED, CHOKES], NO_CORE)
        needed = duct.impulse + along.least
        runs = np.flatnonzero(code == NO_CORE)
        if runs.size:
            cut, own = duct.take(runs), scan.take(runs)
            below, above, here = up.take(runs), down.take(runs), _taken(at, runs)
            fill = reattachment(cut, own, below, here, along.take(runs))
            good, places = fill.found & ~fill.over, along.rises.sum(0)[runs]
            # so close to unstart, or to a plane in which fuel enters, the rows of a march do not show that the core nowhere has more
            hair = along.least[runs] > -_UNSURE * cut.impulse
            # a core that overfills the duct: unstarted where the subsonic stream of the whole impulse chokes, too
            whole = np.where((fill.over | ~fill.found) & (along.reached[runs] == 0.0), along.bare[0, runs], -1.0)
            lacks = np.where(whole >= 0.0, whole, 0.0)
            unstarts = (whole >= 0.0) | (~fill.found & hair)
            code[runs] = np.select([good, unstarts, ~fill.found & (places > 0)], [STANDS, NO_START, UNSETTLED], NO_CORE)
            needed[runs] = np.where(code[runs] == NO_START, np.maximum(needed[runs], cut.impulse + lacks), needed[runs])
            w = index[runs][good]
            found.pressure_3[w], found.x_fill[w], found.places[w] = fill.pressure[good], fill.x[good], places[good]
            found.peak[w] = np.maximum(fill.pressure, above.flow.pressure.max(0))[good]
            self._book(index[runs], good, THROAT, [(below, False), (above, True)], fill.x, fill.pressure, fill.friction)
        old = found.throat[index]
        first = (code == STANDS) | ~np.isin(old, [STANDS, NO_START, UNSETTLED])
        nearer = (code == NO_START) & ((old != NO_START) | (needed < found.needed[index]))
        takes = np.where(code == NO_START, nearer, first)
        w = index[takes]
        found.throat[w], found.x_throat[w], found.throat_kind[w] = code[takes], at.x[takes], at.kind[takes]
        found.needed[w] = np.where(np.isin(code, [STANDS, NO_START]), needed, np.nan)[takes]

    def _book(self, index: Codes, good: Flags, mode: int, runs: list[tuple[Branch, bool]], fill: Array, p3: Array, friction: Array) -> None:
        """Write down the exit, the forces and the profile of the points where a mode stands."""
        found, w, duct = self.found, index[good], self.duct.take(index)
        if not w.size:
            return
        down = runs[-1][0]
        found.mode[w], found.status[w], self.open[w] = mode, SOLVED, False
        found.velocity[w] = down.flow.u[-1][good]
        found.state = scatter(found.state, w, down.last().take(good))
        segment = (duct.edges[1:-1] < fill).sum(0)
        if duct.cooling is not None:
            assert found.lost_heat is not None
            found.lost_heat[:, w] = lost_heat(duct, [run for run, _ in runs], fill, p3)[:, good]
        force = p3 * (duct.area_at(segment[None], fill[None])[0] - duct.entry_area)
        total, error = friction, np.zeros(index.size)
        for run, whole in runs:
            if whole:
                force, total = force + run.integrated(run.wall_force), total + run.integrated(run.friction)
            else:
                force, total = force - run.integrated_to(run.wall_force, fill), total - run.integrated_to(run.friction, fill)
            error = error + run.error()
        found.wall_force[w], found.friction[w], found.error[w] = force[good], total[good], error[good]
        self._profile(index, good, runs, duct)

    def _profile(self, index: Codes, good: Flags, runs: list[tuple[Branch, bool]], duct: Duct) -> None:
        w, rows = index[good], self.found.rows
        for name, values in profile_of(duct, self.scan, index, good, runs).items():
            rows[name][-len(values) :, w] = values


def _taken(found: Kept, index: Codes) -> Kept:
    return type(found)(*(getattr(found, f.name)[index] for f in fields(found)))


ASKED: dict[str, tuple[Callable[[Solver], None], ...]] = {
    "auto": (Solver.try_attached, Solver.try_train, Solver.try_throat),
    "supersonic": (Solver.try_attached, Solver.try_train),
    "thermal-throat": (Solver.try_throat,),
    "nothing": (),
}
"""What is tried, in order, for the mode asked for."""


def solve_once(duct: Duct, separation: Array, asked: str, panels: int, second: bool, least: Codes, most: Codes) -> Solution:
    """How N ducts run whose wall heat and total enthalpy are known: see `coupling.solve_block`. least, most: see `Solver`."""
    solver = Solver(duct, separation, panels, least, most)
    for attempt in ASKED[asked]:
        attempt(solver)
    if second:
        solver.look_for_second()
    found = solver.found
    unsolved = found.mode == NONE
    lost = (found.throat == UNSETTLED) | (found.attached == UNSETTLED) | (found.train == UNSETTLED) | ~solver.scan.sonic.good.all(0)
    rules = [solver.outside, found.throat == NO_START, lost]
    otherwise = {"supersonic": CHOKED, "thermal-throat": REFUSED}.get(asked, NO_MODE)
    found.status[unsolved] = np.select(rules, [OUTSIDE, UNSTARTED, LOST], otherwise)[unsolved]
    return found


def scan_range(scan: Scan) -> Codes:
    """Range codes of the sonic states, (P n, N)."""
    codes: Codes = scan.sonic.state.range.reshape(scan.segment.shape)
    return codes
