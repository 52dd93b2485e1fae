"""`solve` and the `Walk` it gives back: the public face of the model."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from functools import cached_property, partial
from typing import TYPE_CHECKING, Any

import numpy as np

from cycle import account, emit, heat, noise
from cycle import audit as auditing
from cycle import limits as margins
from cycle.account import spread, usable
from cycle.arrays import Array, ArrayLike, Codes
from cycle.figures import Audit, Figures, Limit, Process, Residual, Row, Station, shaped
from cycle.flowpath import combustor, duct_limits
from cycle.flowpath.setting import setting, why_fixed
from cycle.flowpath.stream import SOLVED, STATUS_NAMES
from cycle.gas.state import State
from cycle.notes import STORAGE, HeatedFuel, Remark, heats_fuel, remarks
from cycle.quantities import CAUSES, OUTPUTS, RESTORES, STATUSES
from cycle.resting import rest
from cycle.walk import RELEASED, March, Record, march, modes
from cycle.why_not import no_figure, no_rows, no_station_figure

if TYPE_CHECKING:
    from cycle.case import Case
    from cycle.referee import Report

PERFORMANCE = tuple(o.key for o in OUTPUTS if o.where == "performance")


class Walk:
    """A solved case: stations, processes, accounts, limits, audit. Dear figures are computed when first asked for."""

    def __init__(self, case: Case, walked: March, shape: tuple[int, ...]) -> None:
        self.case, self.march, self.shape = case, walked, shape

    @property
    def size(self) -> int:
        """Number of points."""
        return self.march.setting.size

    def _words(self, words: list[str]) -> Any:
        return words[0] if self.shape == () else np.array(words, dtype=object).reshape(self.shape)

    @property
    def status(self) -> Any:
        """A key of `quantities.STATUSES`; an object array of them for a batch."""
        return self._words(list(np.array(STATUS_NAMES, dtype=object)[self.march.status]))

    @property
    def mode(self) -> Any:
        """The mode found, a key of `quantities.MODES`; an object array for a batch."""
        return self._words(modes(self.march))

    @property
    def failed_process(self) -> Any:
        """Name of the process without a solution, "" where all have one."""
        return self._words([self.march.chain[i] if i >= 0 else "" for i in self.march.failed])

    @property
    def reason(self) -> Any:
        """Why there is no solution, and what would restore it; "" where there is one."""
        return self._words([self._reason(i) for i in range(self.size)])

    def _reason(self, point: int) -> str:
        code = self.march.status[point]
        if code == SOLVED:
            return ""
        name = STATUS_NAMES[code]
        words = f"{self.march.chain[self.march.failed[point]]}: {STATUSES[name]}"
        if name == "choked" and self.shape == ():
            label, _ = margins.heat_words(self.march.setting)
            if np.isfinite(self._largest):
                words = f"{words}; largest {label} here {self._largest:.4g}"
        if name in ("unstarted", "no-mode") and self.shape == () and self.heat_limits:
            words = f"{words}; {heat.words(self.march, self.heat_limits, self.heat_limit_causes)}"
        return f"{words}; {RESTORES[name]}"

    @cached_property
    def _records(self) -> dict[str, Record]:
        return self.march.stations()

    @cached_property
    def _totals(self) -> dict[str, State]:
        return account.totals(self.march, tuple(self._records)) if self._records else {}

    @cached_property
    def _potentials(self) -> list[Array]:
        return account.potentials(self.march)

    @cached_property
    def _critical(self) -> dict[str, State]:
        return account.criticals(self.march, tuple(self._records)) if self._records else {}

    @cached_property
    def station(self) -> dict[str, Station]:
        """Station name -> figures, along the stream; a station exists if any point reached it."""
        return {name: self._station(name, record) for name, record in self._records.items()}

    def _station(self, name: str, record: Record) -> Station:
        index = record.index
        sources = emit.station_sources(self.march, name, record)

        def total(field: str) -> Callable[[], Array]:
            return lambda: spread(self.march, index, usable(self._totals[name], getattr(self._totals[name], field)))

        def critical(field: str) -> Callable[[], Array]:
            return lambda: spread(self.march, index, usable(self._critical[name], getattr(self._critical[name], field)))

        def over_critical() -> Array:
            sonic = self._critical[name]
            return spread(self.march, index, usable(sonic, sonic.density * sonic.sound_speed / record.stream.flux))

        def potential() -> Array:
            at = next(i for i, r in enumerate(self.march.records) if r is record)
            return noise.settled(self._potentials[at], self._thrust_scale) if self._potentials else np.full(self.size, np.nan)

        sources |= {
            "total_pressure": total("pressure"),
            "total_temperature": total("temperature"),
            "critical_pressure": critical("pressure"),
            "critical_temperature": critical("temperature"),
            "critical_area_ratio": over_critical,
            "thrust_potential": potential,
        }
        order = {o.key: sources[o.key] for o in OUTPUTS if o.where == "station" and o.key in sources}

        def fractions() -> dict[str, Array]:
            x = emit.fractions(record.stream)
            return {species: spread(self.march, index, x[j]) for j, species in enumerate(record.stream.gas.species)}

        return Station(order, self.shape, fractions)

    def why_not_at(self, station: str, key: str) -> str:
        """Why a figure of a station has no value; "" where it has one. In a batch of the first point without one."""
        known = np.isfinite(np.reshape(self.station[station][key], -1))
        if known.all():
            return ""
        record = self._records[station]
        if known[record.index].all():
            return "no solution reaches this station"
        states = self._totals if key.startswith("total_") else self._critical if key.startswith("critical_") else {}
        return no_station_figure(self.march, record, key, states.get(station))

    @cached_property
    def processes(self) -> tuple[Process, ...]:
        """What each component did, in order along the stream."""
        return tuple(
            Process(r.process.name, r.process.name, r.process.start, r.process.end, Figures(self._done(i), self.shape))
            for i, r in enumerate(self.march.records)
            if i > 0
        )

    @cached_property
    def profile(self) -> dict[str, Any]:
        """The flow along the duct by name, x in m from the burner entry: (R,) for one point, (R, *shape) in a batch; NaN behind the
        last row of a point that has fewer. Empty where the burner is no duct."""
        found = emit.profile(self.march)
        return {name: rows[:, 0] if self.shape == () else rows.reshape(-1, *self.shape) for name, rows in found.items()}

    def _done(self, position: int) -> dict[str, Callable[[], Array]]:
        record = self.march.records[position]
        before = self.march.records[position - 1].taken(record.index).stream.state
        after = record.stream.state
        names = (record.process.start, record.process.end)

        def on(values: Callable[[], Array]) -> Callable[[], Array]:
            return lambda: spread(self.march, record.index, values())

        def total_ratio() -> Array:
            first, last = self._total(position - 1, names[0], record.index), self._total(position, names[1], record.index)
            return usable(first, usable(last, last.pressure / first.pressure))

        sources = {
            "total_pressure_ratio": on(total_ratio),
            "pressure_ratio": on(lambda: after.pressure / before.pressure),
            "temperature_ratio": on(lambda: after.temperature / before.temperature),
            "entropy_rise": on(lambda: noise.change(after.entropy, before.entropy)),
        }
        if self._has_potential:
            sources["thrust_potential_change"] = lambda: noise.settled(
                self._potentials[position] - self._potentials[position - 1], self._thrust_scale
            )
        own: dict[str, Callable[[], Array]] = {k: partial(self.march.figure_of, record, k) for k in record.process.figures}
        heated = "fuel_air_ratio" in own and record.process.solves_momentum
        if heated and self.march.setting.choices["combustor.process"] == "constant-area":
            own["choking_margin"] = on(lambda: self._choking_margin(position))
        booking = record.process.booking
        if booking is not None:
            own |= {k: partial(spread, self.march, record.index, getattr(booking, k)) for k in booking.__slots__}
        return sources | own

    def _total(self, position: int, station: str, points: Codes) -> State:
        """Stagnation state of `points` at a station; of the record itself where the station's own figures lie before or behind it."""
        record = self.march.records[position]
        if record.process.name in (RELEASED, "internal compression", "gas change"):
            return rest(record.taken(points).stream)
        return self._totals[station].take(np.searchsorted(self._records[station].index, points))

    def _choking_margin(self, position: int) -> Array:
        """Room left before the burner chokes; the sonic point behind it is dear, so the walk itself does without."""
        record = self.march.records[position]
        setting = self.march.setting.take(record.index)
        entering = self.march.records[position - 1].taken(record.index).stream
        return combustor.choking_margin(combustor.burner_gas(entering, setting), setting, record.process.figures["fuel_air_ratio"])

    @property
    def _has_potential(self) -> bool:
        return self.march.chain[0] == "flight"

    @cached_property
    def _thrust_scale(self) -> Array:
        """The largest stream thrust of each point (N,), N: potentials are differences of these."""
        thrusts = [spread(self.march, r.index, r.stream.stream_thrust) for r in self.march.records]
        return np.asarray(noise.largest(thrusts))

    @cached_property
    def _performance(self) -> dict[str, Array]:
        return account.performance(self.march)

    @cached_property
    def performance(self) -> Figures:
        """The headline figures; NaN where one has no value (`why_not` says why)."""
        nothing = np.full(self.size, np.nan)

        def source(key: str) -> Callable[[], Array]:
            if key == "total_temperature_rise_efficiency":
                return lambda: account.temperature_rise_efficiency(self.march, self._totals)
            if key == "nozzle_thrust_coefficient":
                return lambda: account.nozzle_thrust_coefficient(self.march, self._potentials)
            return lambda: self._performance.get(key, nothing)

        return Figures({key: source(key) for key in PERFORMANCE}, self.shape)

    def why_not(self, key: str) -> str:
        """Why a figure of `performance`, or "losses" or "exergy", has no value; "" where it has one."""
        if key in ("losses", "exergy"):
            found = self.losses if key == "losses" else self.exergy
            return "" if found else no_rows(self.march, key)
        value = self.performance[key]
        if np.all(np.isfinite(value)):
            return ""
        if self.shape == () and self.status != "solved":
            return f"no solution: {self.status}"
        if not self.march.solved.size:
            return "no solution"
        lost = (self.why_not_at(n, "total_temperature") for n in ("3", "4") if key == "total_temperature_rise_efficiency")
        return next((why for why in lost if why), "") or no_figure(self.march, key, self._performance["fuel_flow"])

    def _rows(self, rows: tuple[account.Row, ...]) -> tuple[Row, ...]:
        if any(np.isnan(r.value[self.march.solved]).all() for r in rows if self.march.solved.size):
            return ()
        values = noise.rows([r.value for r in rows])
        return tuple(Row(r.key, r.label, shaped(v, self.shape), r.unit) for r, v in zip(rows, values, strict=True))

    @cached_property
    def potentials(self) -> tuple[Row, ...]:
        """Where the thrust potential went: the rows before the last sum to the last, the thrust."""
        return self._rows(account.potential_rows(self.march, self._potentials))

    @cached_property
    def losses(self) -> tuple[Row, ...]:
        """Ideal thrust, what each process lost in order, thrust; () where not assessed (`why_not("losses")`)."""
        return self._rows(account.losses(self.march, self._totals, self._potentials))

    @cached_property
    def exergy(self) -> tuple[Row, ...]:
        """Exergy brought, then where it went; () where not assessed (`why_not("exergy")`)."""
        return self._rows(account.exergy(self.march))

    @cached_property
    def _largest(self) -> float:
        return np.nan if "3" not in self._records or self._has_duct else heat.largest_before_choking(self.march)

    def largest_heat(self) -> float:
        """Largest value of the heat input before thermal choking, SI; NaN where nothing chokes. One point only."""
        if self.shape != ():
            raise ValueError("largest_heat is solved for one point")
        return self._largest

    @cached_property
    def heat_limits(self) -> dict[str, Any]:
        """The heat input, SI, at which the modes of a duct end: "attached" (no attached flow), "train" (nor a shock train), "unstart" (no
        solution); of each the end nearest to the heat of the case. inf where it is not reached, 0 where the mode stands nowhere, NaN where
        it is not known; empty where the burner is no duct. Solved for when first asked, with the decision of the solution itself."""
        return {name: shaped(value, self.shape) for name, (value, _) in self._heat_ends.items()}

    @property
    def heat_limit_causes(self) -> dict[str, Any]:
        """What sets each of `heat_limits`, a key of `duct_limits.CAUSES`: "separation", "choking", "impulse", "isolator-length", or the
        status beyond; "" where the limit is not reached or not known."""
        return {name: self._words([duct_limits.CAUSES[code] for code in cause]) for name, (_, cause) in self._heat_ends.items()}

    @cached_property
    def _heat_ends(self) -> dict[str, tuple[Array, Codes]]:
        return heat.ends_of_modes(self.march) if self._has_duct else {}

    @cached_property
    def limits(self) -> tuple[Limit, ...]:
        """All limits with their margins; for one point the largest heat is solved for."""
        if self.shape == () and self._has_duct:
            _ = self._heat_ends
        return self.limits_so_far

    @property
    def limits_so_far(self) -> tuple[Limit, ...]:
        """All limits; of a duct, or of a batch, without the largest heat unless `heat_limits` has been asked for."""
        largest, cause = (np.array([self._largest]), "") if self.shape == () and not self._has_duct else (None, "")
        if self.__dict__.get("_heat_ends"):
            largest, codes = self._heat_ends["unstart"]
            cause = CAUSES.get(duct_limits.CAUSES[codes[0]], "") if (codes == codes[0]).all() else ""
        return tuple(self._limit(row) for row in margins.limits(self.march, largest, cause))

    @property
    def _has_duct(self) -> bool:
        return self.march.setting.choices["combustor.process"] == "duct"

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
        """What is to be known of the solution beside its figures; with heated fuel one more solution when first asked for, () in a batch."""
        return () if self.shape != () else (*remarks(self.march, self.performance.overall_efficiency), *self._heated_fuel())

    def _heated_fuel(self) -> tuple[HeatedFuel, ...]:
        burner = self.march.named("burner")
        if burner is None or burner.process.booking is None:
            return ()
        booking = burner.process.booking
        if not heats_fuel(self.march, booking.wall_heat) or not booking.fuel_flow[0] > 0.0:
            return ()
        cold = solve(self.case.replace({"fuel.temperature": STORAGE}))
        now, stored = (float(w.performance.specific_impulse) for w in (self, cold))
        # a balance that leaves the fuel's enthalpy out does not know its temperature
        return () if now == stored else (HeatedFuel(float(self.march.setting["fuel.temperature"][0]), now, stored, str(cold.status)),)

    def emitted(self) -> auditing.Emitted:
        """The figures that the audit reads, of the solved points."""
        return emit.emitted(self.march, self._performance)

    @cached_property
    def audit(self) -> Audit:
        """Residuals of mass, momentum, energy, elements and second law, recomputed from the emitted figures."""
        return self.judge(self.emitted())

    def judge(self, emitted: auditing.Emitted) -> Audit:
        """The audit of given figures: of this walk's own, or of changed ones in a test of the audit."""
        points = emit.audited_points(self.march)
        if not points.size:
            nothing = Residual("nothing emitted", "", 0.0)
            return Audit(True, (), nothing)
        found = auditing.check(emitted)
        worst = max(found, key=lambda r: float(np.max(r.value)) if np.all(np.isfinite(r.value)) else np.inf)
        rows = tuple(Residual(r.law, r.where, shaped(spread(self.march, points, r.value), self.shape)) for r in found)
        top = float(np.max(worst.value))
        return Audit(top <= auditing.LIMIT, rows, Residual(worst.law, worst.where, top))

    def referee(self) -> Report:
        """The states of this walk recomputed by Cantera from their (h, p) or (s, p); slow. Empty at constant gamma."""
        from cycle.referee import report

        return report(self.march)


def solve(case: Case, changes: Mapping[str, ArrayLike] | None = None) -> Walk:
    """Walk a case, or a batch of it.

    changes: arrays (SI) for any numeric inputs by key, broadcast together; figures of the walk then have that shape. A
    member of an exactly-one-of group replaces the group. Raises CaseError for unknown keys and values out of bounds; a
    point without a solution never raises: see `Walk.status`.
    """
    arrays: Mapping[str, Array] = {}
    if changes:
        from cycle.case import check_batch

        case, arrays = check_batch(case, changes)
        _same_in_all(case, arrays)
    shape = np.broadcast_shapes(*(a.shape for a in arrays.values()))
    size = int(np.prod(shape, dtype=int))
    flat = {k: np.ascontiguousarray(np.broadcast_to(a, shape)).reshape(size) for k, a in arrays.items()}
    asked = setting(case.numbers, case.choices, case.texts, case.fractions, flat, size)
    return Walk(case, march(asked), shape)


def _same_in_all(case: Case, arrays: Mapping[str, Array]) -> None:
    from cycle.errors import CaseError, Fault

    varied = ((key, why_fixed(key, case.choices)) for key, values in arrays.items() if values.size and np.ptp(values))
    faults = [Fault(case.name, key, why, "several values", "one value") for key, why in varied if why]
    if faults:
        raise CaseError(tuple(faults))
