"""How much fuel a duct takes: the largest ratio at which each mode still stands, solved for.

Each limit is the root of a smooth margin of the most demanding critical section (see `cycle.flow.duct.margins`).
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from cycle.arrays import Array
from cycle.flow import limits
from cycle.flow.duct.layout import AreaLaw, Duct, Injectors, Supply, Walls, duct_of
from cycle.flow.duct.margins import Margins, margins
from cycle.flow.duct.modes import PANELS
from cycle.flowpath.stream import Stream

BORDERS: dict[str, Callable[[Margins], Array]] = {
    "attached-chokes": lambda m: m.attached,
    "attached-separates": lambda m: m.separation,
    "train": lambda m: m.train,
    "unstart": lambda m: m.start,
}
"""Margin whose root is each limit."""

_SCAN = 13
_SPREAD = np.array([-0.3, -0.03, -0.003, 0.0, 0.003, 0.03, 0.3])
_SPLIT = len(_SPREAD)
_TURNS = 12
_SETTLED = 1e-9

At = Callable[[Array], tuple[Stream, Supply]]
"""Stream at station 2 and fuel of as many points as there are ratios, (K,): all equal but for the ratio."""


def largest_ratios(
    at: At,
    law: AreaLaw,
    injectors: Injectors,
    walls: Walls,
    upper: float,
    *,
    separation: float | None = None,
    panels: int = PANELS,
) -> dict[str, float]:
    """Largest fuel ratio (as `Supply.ratio`) of one duct before each of `BORDERS`, from upper/500 up to `upper`.

    separation: pressure ratio over p2 that separates, after Korkegi (1975) where None. inf: not reached below `upper`;
    NaN: no margin is known there. Where the attached flow chokes before it separates, "attached-separates" is where it
    chokes.
    """

    def all_margins(ratio: Array) -> Margins:
        duct, mach = _duct(at, ratio, law, injectors, walls)
        limit = limits.separation_pressure_ratio(mach) if separation is None else np.full(ratio.size, separation)
        return margins(duct, limit, panels)

    ratio = upper * np.geomspace(2e-3, 1.0, _SCAN)
    known = _by_name(all_margins(ratio))
    searches = {name: _Search(ratio, margin) for name, margin in known.items()}
    for _ in range(_TURNS):
        probes = {name: search.probes() for name, search in searches.items() if search.open}
        if not probes:
            break
        found = _by_name(all_margins(np.concatenate(list(probes.values()))))
        for i, (name, ratios) in enumerate(probes.items()):
            searches[name].learn(ratios, found[name][i * _SPLIT : (i + 1) * _SPLIT])
    return {name: search.root for name, search in searches.items()}


def _by_name(found: Margins) -> dict[str, Array]:
    return {name: pick(found) for name, pick in BORDERS.items()}


def _duct(at: At, ratio: Array, law: AreaLaw, injectors: Injectors, walls: Walls) -> tuple[Duct, Array]:
    entering, supply = at(ratio)
    duct = duct_of(
        entering.gas, entering.total_enthalpy, entering.velocity, entering.state.pressure, entering.mass_flow,
        entering.area, law, injectors, supply, walls,
    )  # fmt: skip
    return duct, entering.mach


class _Search:
    """First fall of one margin through zero, or into the unknown beyond a choking march, where it is extrapolated."""

    def __init__(self, ratio: Array, margin: Array) -> None:
        self.ratio, self.margin = ratio, margin
        self.root, self.open = float("nan"), False
        if not np.isfinite(margin).any():
            return
        safe = margin >= 0.0
        if not safe[0]:
            self.root = 0.0 if margin[0] < 0.0 else self.root
        elif safe.all():
            self.root = float("inf")
        else:
            self.open = True
            self._aim()

    def _aim(self) -> None:
        bad = int(np.argmax(~(self.margin >= 0.0)))
        self.low, self.high = self.ratio[bad - 1], self.ratio[bad]
        other = bad if np.isfinite(self.margin[bad]) or bad < 2 else bad - 2
        rise = (self.margin[other] - self.margin[bad - 1]) / (self.ratio[other] - self.low)
        guess = self.low - self.margin[bad - 1] / rise if rise < 0.0 else 0.5 * (self.low + self.high)
        self.root = float(np.clip(guess, self.low, self.high))
        self.open = bool(self.high - self.low > _SETTLED * self.high)

    def probes(self) -> Array:
        """Ratios to look at: close about the present guess, wide at the ends of the bracket."""
        side = np.where(_SPREAD < 0.0, self.root - self.low, self.high - self.root)
        found: Array = np.clip(self.root + _SPREAD * side, self.low, self.high)
        return found

    def learn(self, ratio: Array, margin: Array) -> None:
        """Take in what was found there."""
        every, first = np.unique(np.concatenate([self.ratio, ratio]), return_index=True)
        self.ratio, self.margin = every, np.concatenate([self.margin, margin])[first]
        self._aim()
