"""`solve` and the `Walk` it gives back: the public face of the model."""

from __future__ import annotations

from collections.abc import Mapping
from functools import cached_property, partial
from typing import TYPE_CHECKING, Any

import numpy as np

from cycle import account, emit, heat, noise
from cycle import audit as auditing
from cycle import limits as margins
from cycle.account import spread
from cycle.arrays import Array, ArrayLike, sealed
from cycle.derived import Derived, fractions, performance_sources, process_sources, station_sources
from cycle.figures import Audit, Figures, Limit, Process, Residual, Row, Station, shaped
from cycle.flowpath import duct_limits
from cycle.flowpath.setting import setting, why_fixed
from cycle.flowpath.stream import SOLVED, STATUS_NAMES
from cycle.notes import STORAGE, HeatedFuel, Remark, heats_fuel, remarks
from cycle.quantities import CAUSES, RESTORES, STATUSES
from cycle.walk import March, march, modes
from cycle.why_not import no_figure, no_rows, no_station_figure

if TYPE_CHECKING:
    from cycle.case import Case
    from cycle.referee import Report


class Walk:
    """A solved case: stations, processes, accounts, limits, audit. Dear figures are computed when first asked for; arrays are read-only.
    Can be pickled and copied: the copy gives the same figures, also those that were not asked for before."""

    def __init__(self, case: Case, walked: March, shape: tuple[int, ...]) -> None:
        self.case, self.shape, self._derived = case, shape, Derived(walked)

    def __getstate__(self) -> dict[str, Any]:
        return {name: vars(self)[name] for name in ("case", "shape", "_derived")}

    @property
    def _march(self) -> March:
        return self._derived.march

    @cached_property
    def march(self) -> March:
        """The streams and processes behind the figures."""
        return sealed(self._march)

    @property
    def size(self) -> int:
        """Number of points."""
        return self._march.setting.size

    def _words(self, words: list[str]) -> Any:
        return words[0] if self.shape == () else sealed(np.array(words, dtype=object).reshape(self.shape))

    @property
    def status(self) -> Any:
        """A key of `quantities.STATUSES`; an object array of them for a batch."""
        return self._words(list(np.array(STATUS_NAMES, dtype=object)[self._march.status]))

    @property
    def mode(self) -> Any:
        """The mode found, a key of `quantities.MODES`; an object array for a batch."""
        return self._words(modes(self._march))

    @property
    def failed_process(self) -> Any:
        """Name of the process without a solution, "" where all have one."""
        return self._words([self._march.chain[i] if i >= 0 else "" for i in self._march.failed])

    @property
    def reason(self) -> Any:
        """Why there is no solution, and what would restore it; "" where there is one."""
        return self._words([self._reason(i) for i in range(self.size)])

    def _reason(self, point: int) -> str:
        code = self._march.status[point]
        if code == SOLVED:
            return ""
        name = STATUS_NAMES[code]
        words = f"{self._march.chain[self._march.failed[point]]}: {STATUSES[name]}"
        if name == "choked" and self.shape == ():
            label, _ = margins.heat_words(self._march.setting)
            if np.isfinite(self._derived.largest_heat):
                words = f"{words}; largest {label} here {self._derived.largest_heat:.4g}"
        if name in ("unstarted", "no-mode") and self.shape == () and self.heat_limits:
            words = f"{words}; {heat.words(self._march, self.heat_limits, self.heat_limit_causes)}"
        return f"{words}; {RESTORES[name]}"

    @cached_property
    def station(self) -> dict[str, Station]:
        """Station name -> figures, along the stream; a station exists if any point reached it."""
        of = self._derived
        return {name: Station(station_sources(of, name), self.shape, partial(fractions, of, name)) for name in of.records}

    def why_not_at(self, station: str, key: str) -> str:
        """Why a figure of a station has no value; "" where it has one. In a batch of the first point without one."""
        known = np.isfinite(np.reshape(self.station[station][key], -1))
        if known.all():
            return ""
        record = self._derived.records[station]
        if known[record.index].all():
            return "no solution reaches this station"
        states = self._derived.totals if key.startswith("total_") else self._derived.critical if key.startswith("critical_") else {}
        return no_station_figure(self._march, record, key, states.get(station))

    @cached_property
    def processes(self) -> tuple[Process, ...]:
        """What each component did, in order along the stream."""
        return tuple(
            Process(r.process.name, r.process.name, r.process.start, r.process.end, Figures(process_sources(self._derived, i), self.shape))
            for i, r in enumerate(self._march.records)
            if i > 0
        )

    @cached_property
    def profile(self) -> dict[str, Any]:
        """The flow along the duct by name, x in m from the burner entry: (R,) for one point, (R, *shape) in a batch; NaN behind the
        last row of a point that has fewer. Empty where the burner is no duct."""
        found = emit.profile(self._march)
        return {name: sealed(rows[:, 0] if self.shape == () else rows.reshape(-1, *self.shape)) for name, rows in found.items()}

    @cached_property
    def performance(self) -> Figures:
        """The headline figures; NaN where one has no value (`why_not` says why)."""
        return Figures(performance_sources(self._derived), self.shape)

    def why_not(self, key: str) -> str:
        """Why a figure of `performance`, or "losses" or "exergy", has no value; "" where it has one."""
        if key in ("losses", "exergy"):
            found = self.losses if key == "losses" else self.exergy
            return "" if found else no_rows(self._march, key)
        value = self.performance[key]
        if np.all(np.isfinite(value)):
            return ""
        if self.shape == () and self.status != "solved":
            return f"no solution: {self.status}"
        if not self._march.solved.size:
            return "no solution"
        lost = (self.why_not_at(n, "total_temperature") for n in ("3", "4") if key == "total_temperature_rise_efficiency")
        return next((why for why in lost if why), "") or no_figure(self._march, key, self._derived.performance["fuel_flow"])

    def _rows(self, rows: tuple[account.Row, ...]) -> tuple[Row, ...]:
        if any(np.isnan(r.value[self._march.solved]).all() for r in rows if self._march.solved.size):
            return ()
        values = noise.rows([r.value for r in rows])
        return tuple(Row(r.key, r.label, shaped(v, self.shape), r.unit) for r, v in zip(rows, values, strict=True))

    @cached_property
    def potentials(self) -> tuple[Row, ...]:
        """Where the thrust potential went: the rows before the last sum to the last, the thrust."""
        return self._rows(account.potential_rows(self._march, self._derived.potentials))

    @cached_property
    def losses(self) -> tuple[Row, ...]:
        """Ideal thrust, what each process lost in order, thrust; () where not assessed (`why_not("losses")`)."""
        return self._rows(account.losses(self._march, self._derived.totals, self._derived.potentials))

    @cached_property
    def exergy(self) -> tuple[Row, ...]:
        """Exergy brought, then where it went; () where not assessed (`why_not("exergy")`)."""
        return self._rows(account.exergy(self._march))

    def largest_heat(self) -> float:
        """Largest value of the heat input before thermal choking, SI; NaN where nothing chokes. One point only."""
        if self.shape != ():
            raise ValueError("largest_heat is solved for one point")
        return self._derived.largest_heat

    @cached_property
    def heat_limits(self) -> dict[str, Any]:
        """The heat input, SI, at which the modes of a duct end: "attached" (no attached flow), "train" (nor a shock train), "unstart" (no
        solution); of each the end nearest to the heat of the case. inf where it is not reached, 0 where the mode stands nowhere, NaN where
        it is not known; empty where the burner is no duct. Solved for when first asked, with the decision of the solution itself."""
        return {name: shaped(value, self.shape) for name, (value, _) in self._derived.heat_ends.items()}

    @property
    def heat_limit_causes(self) -> dict[str, Any]:
        """What sets each of `heat_limits`, a key of `duct_limits.CAUSES`: "separation", "choking", "impulse", "isolator-length", or the
        status beyond; "" where the limit is not reached or not known."""
        return {name: self._words([duct_limits.CAUSES[code] for code in cause]) for name, (_, cause) in self._derived.heat_ends.items()}

    @property
    def limits(self) -> tuple[Limit, ...]:
        """All limits with their margins; for one point the largest heat is solved for."""
        if self.shape == () and self._derived.has_duct:
            _ = self._derived.heat_ends
        return self.limits_so_far

    @property
    def limits_so_far(self) -> tuple[Limit, ...]:
        """All limits; of a duct, or of a batch, without the largest heat unless `heat_limits` has been asked for."""
        return self._limits_with_heat if self._derived.known_ends else self._limits_without_heat

    @cached_property
    def _limits_without_heat(self) -> tuple[Limit, ...]:
        alone = self.shape == () and not self._derived.has_duct
        return self._limits(np.array([self._derived.largest_heat]) if alone else None, "")

    @cached_property
    def _limits_with_heat(self) -> tuple[Limit, ...]:
        largest, codes = self._derived.known_ends["unstart"]
        return self._limits(largest, CAUSES.get(duct_limits.CAUSES[codes[0]], "") if (codes == codes[0]).all() else "")

    def _limits(self, largest: Array | None, cause: str) -> tuple[Limit, ...]:
        return tuple(self._limit(row) for row in margins.limits(self._march, largest, cause))

    def _limit(self, row: margins.Limit) -> Limit:
        margin = row.margin
        state = self._words([margins.state_of(float(m)) for m in margin])
        unassessed = bool(np.all(np.isnan(margin)))
        words = row.missing or "no value at this station" if unassessed else row.restore
        return Limit(
            row.key, row.label, shaped(row.actual, self.shape), shaped(row.allowed, self.shape), shaped(margin, self.shape), state,
            row.unit, bool(np.all(row.upper)), words, row.input, row.note,
        )  # fmt: skip

    @cached_property
    def notes(self) -> tuple[HeatedFuel | Remark, ...]:
        """What is to be known of the solution beside its figures; () in a batch. Heated fuel takes one more solution, once."""
        return () if self.shape != () else (*remarks(self._march, self.performance.overall_efficiency), *self._heated_fuel())

    def _heated_fuel(self) -> tuple[HeatedFuel, ...]:
        burner = self._march.named("burner")
        if burner is None or burner.process.booking is None:
            return ()
        booking = burner.process.booking
        if not heats_fuel(self._march, booking.wall_heat) or not booking.fuel_flow[0] > 0.0:
            return ()
        cold = solve(self.case.replace({"fuel.temperature": STORAGE}))
        now, stored = (float(w.performance.specific_impulse) for w in (self, cold))
        # a balance that leaves the fuel's enthalpy out does not know its temperature
        return () if now == stored else (HeatedFuel(float(self._march.setting["fuel.temperature"][0]), now, stored, str(cold.status)),)

    def emitted(self) -> auditing.Emitted:
        """The figures that the audit reads, of the solved points."""
        return sealed(emit.emitted(self._march, self._derived.performance))

    @cached_property
    def audit(self) -> Audit:
        """Residuals of mass, momentum, energy, elements and second law, recomputed from the emitted figures."""
        return self.judge(self.emitted())

    def judge(self, emitted: auditing.Emitted) -> Audit:
        """The audit of given figures: of this walk's own, or of changed ones in a test of the audit."""
        points = emit.audited_points(self._march)
        if not points.size:
            nothing = Residual("nothing emitted", "", 0.0)
            return Audit(True, (), nothing)
        found = auditing.check(emitted)
        worst = max(found, key=lambda r: float(np.max(r.value)) if np.all(np.isfinite(r.value)) else np.inf)
        rows = tuple(Residual(r.law, r.where, shaped(spread(self._march, points, r.value), self.shape)) for r in found)
        top = float(np.max(worst.value))
        return Audit(top <= auditing.LIMIT, rows, Residual(worst.law, worst.where, top))

    def referee(self) -> Report:
        """The states of this walk recomputed by Cantera from their (h, p) or (s, p); slow. Empty at constant gamma."""
        from cycle.referee import report

        return report(self._march)


def solve(case: Case, changes: Mapping[str, ArrayLike] | None = None) -> Walk:
    """Walk a case, or a batch of it.

    changes: arrays (SI) for any numeric inputs by key, broadcast together; figures of the walk then have that shape. A
    member of an exactly-one-of group replaces the group. They are copied. Raises CaseError for unknown keys, values out of
    bounds, arrays that hold no plain numbers and shapes that do not broadcast; a point without a solution never raises: see
    `Walk.status`.
    """
    arrays: Mapping[str, Array] = {}
    if changes:
        from cycle.case import check_batch

        case, arrays = check_batch(case, changes)
        _same_in_all(case, arrays)
    shape = np.broadcast_shapes(*(a.shape for a in arrays.values()))
    size = int(np.prod(shape, dtype=int))
    flat = {k: np.ascontiguousarray(np.broadcast_to(a, shape)).reshape(size) for k, a in arrays.items()}
    asked = setting(case.numbers, dict(case.choices), case.texts, case.fractions, flat, size)
    return Walk(case, march(asked), shape)


def _same_in_all(case: Case, arrays: Mapping[str, Array]) -> None:
    from cycle.errors import CaseError, Fault

    varied = ((key, why_fixed(key, case.choices)) for key, values in arrays.items() if values.size and np.ptp(values))
    faults = [Fault(case.name, key, why, "several values", "one value") for key, why in varied if why]
    if faults:
        raise CaseError(tuple(faults))
