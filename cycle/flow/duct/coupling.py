"""What a duct gives its stream that depends on how it runs: heat to a wall of stated temperature, and the hand-over to another
constant-gamma pair at burner entry. Flow and coupling are found in turn."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from cycle.arrays import Array, Codes
from cycle.flow.duct.cooling import first_loss
from cycle.flow.duct.core import behind_handover
from cycle.flow.duct.layout import Cooling, Duct
from cycle.flow.duct.modes import PANELS, solve_once
from cycle.flow.duct.solution import ATTACHED, LOST, MODES, NO_MODE, NONE, THROAT, TRAIN, Solution, merge


def solve_block(
    duct: Duct, separation: Array, asked: str = "auto", panels: int = PANELS, second: bool = False, most: Codes | None = None
) -> Solution:
    """How N ducts run. separation: pressure ratio over p2 that separates (N,); asked: a key of `ASKED`; panels of a march;
    second: whether to look for a shock train where the attached flow stands; most: the last mode that is asked for, code (N,), of ducts
    without a coupling: what a mode is coupled to depends on those behind it."""
    with np.errstate(all="ignore"):
        if np.isfinite(duct.wall_temperature).any():
            return _cooled(first_loss(duct), separation, asked, panels, second)
        return _solved(duct, separation, asked, panels, second, np.full(duct.size, NONE), most)


def _cooled(duct: Duct, separation: Array, asked: str, panels: int, second: bool) -> Solution:
    """The flow and the heat it loses, in turn until the heat stands still; each point stops on its own.

    Near a border the heat of either mode may call for the other. A mode that its own heat has refuted twice does not stand and is not
    tried again: the first time the heat may still be the first guess's.
    """
    assert duct.cooling is not None
    live, lost = np.arange(duct.size), duct.cooling.lost
    mode, least, refuted = np.full(duct.size, len(MODES)), np.full(duct.size, NONE), np.zeros(duct.size, np.bool_)
    handed = np.full(duct.size, np.nan)
    history: list[tuple[Array, Array]] = []
    whole: Solution | None = None
    for _ in range(_COOLING_TURNS):
        part = replace(duct.take(live), cooling=Cooling(duct.cooling.grid.take(live), lost[:, live]))
        found = _solved(part, separation[live], asked, panels, second, least[live], handed=handed[live])
        handed[live] = np.where(found.mode == ATTACHED, np.nan, found.total_enthalpy)
        following = found.lost_heat
        assert following is not None
        # what is booked is the heat that was marched with, so that the energy closes to rounding
        found = replace(found, lost_heat=lost[:, live].copy())
        change = following - lost[:, live]
        moved = np.abs(change).max(0)
        size = part.mass_flow * part.velocity**2
        if whole is None:
            whole = found
        else:
            merge(whole, live, found)
        falls = found.mode > mode[live]
        least[live] = np.where(falls & refuted[live], found.mode, least[live])
        refuted[live] |= falls
        mode[live] = found.mode
        going = (moved > _COOLED * size) & (found.mode != NONE)
        lost[:, live] = _ahead(following, change, history)
        history = [(g[:, going], f[:, going]) for g, f in ((following, change), *history[:1])]
        live = live[going]
        if not live.size:
            break
    assert whole is not None
    whole.status[live], whole.mode[live] = LOST, NONE
    return whole


def _ahead(following: Array, change: Array, history: list[tuple[Array, Array]]) -> Array:
    """The heat (R, N) to march with next: what followed, moved on by as much of the last turns' differences as leaves the least
    change. history: what followed and its change in earlier turns, the latest first. Source: D. G. Anderson, Journal of the ACM
    12 (1965) 547 (from memory)."""
    left, kept = change, list[tuple[Array, Array]]()
    for earlier, its_change in history:
        bend, move = change - its_change, following - earlier
        for b, m in kept:
            share = (bend * b).sum(0) / (b * b).sum(0)
            bend, move = bend - share * b, move - share * m
        kept.append((bend, move))
    for bend, move in kept:
        share = (left * bend).sum(0) / (bend * bend).sum(0)
        share = np.where(np.abs(share) < _FARTHEST, share, 0.0)
        left, following = left - share * bend, following - share * move
    return following


_FARTHEST = 0.3
"""Largest share moved on: the changes of the plain turns shrink by more than this, or the flow changes its mode meanwhile."""

_COOLING_TURNS = 20
_COOLED = 1e-9
"""Change of the heat lost, over m u2^2, at which it stands still."""


def _solved(
    duct: Duct,
    separation: Array,
    asked: str,
    panels: int,
    second: bool,
    least: Codes,
    most: Codes | None = None,
    handed: Array | None = None,
) -> Solution:
    """The flow; where the constant-gamma pair changes at burner entry, with the enthalpy that it has behind the hand-over.

    T is kept there, and depends on p3: what is not attached is solved again until it stands still. A point without a solution is judged
    with the subsonic stream that its impulse allows. handed: total enthalpy behind a hand-over to start from, (N,), NaN: not known.
    """
    last = np.full(duct.size, THROAT)
    whole = solve_once(duct, separation, asked, panels, second, least, last if most is None or duct.entry_heat is not None else most)
    if duct.entry_heat is None:
        return whole
    live = np.flatnonzero(whole.mode != ATTACHED)
    tried, peak = whole.attached.copy(), whole.attached_peak.copy()
    used, moves = duct.total_enthalpy.copy(), np.zeros(duct.size, np.int64)
    before, its_result = np.full((2, duct.size), np.nan)
    for turn in range(_HANDOVERS):
        part, ht = duct.take(live), used[live]
        following = behind_handover(part, whole.pressure_3[live])
        if turn == 0 and handed is not None:
            following = np.where(np.isfinite(handed[live]), handed[live], following)
        going = ~(np.abs(following - ht) <= _HANDED * following)
        slope = (following - its_result[live]) / (ht - before[live])
        ahead = np.where(slope < _STEEPEST, ht + (following - ht) / (1.0 - slope), following)
        if turn:
            before[live], its_result[live] = ht, following
        used[live], live = ahead, live[going]
        if not live.size:
            break
        part = replace(part.take(going), total_enthalpy=ahead[going])
        mode = whole.mode[live]
        merge(whole, live, solve_once(part, separation[live], asked, panels, second, np.maximum(least[live], TRAIN), last[live]))
        moves[live] += whole.mode[live] != mode
    whole.status[live], whole.mode[live] = np.where(moves[live] >= _UNDECIDED, NO_MODE, LOST), NONE
    whole.attached[:], whole.attached_peak[:] = tried, peak
    return whole


_HANDOVERS, _HANDED = 30, 1e-12
"""Turns of the hand-over between two pairs, and change of the total enthalpy over itself at which it stands still."""
_STEEPEST, _UNDECIDED = 0.9, 4
"""Slope of what follows over what was handed on, above which no step ahead is taken; changes of the mode after which none is consistent."""
