"""What the screen needs of a solved walk, taken out in the worker thread as plain numbers.

Some figures of a station are computed when first asked for; asking here keeps that work off the thread that paints.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING, Any

from cycle.quantities import OUTPUTS, RESTORES, STATUSES

if TYPE_CHECKING:
    from cycle.case import Case
    from cycle.limit_solving import Reached
    from cycle.notes import HeatedFuel, Remark
    from cycle.sensitivity import Sensitivities

STATION_KEYS = tuple(o.key for o in OUTPUTS if o.where == "station")
DEAR = ("critical_pressure", "critical_temperature", "critical_area_ratio")
"""Figures of a station that cost about as much as a solve; they come with the assessment."""

ACCOUNTS = ("losses", "exergy")
"""Accounts that need more states; they come with the assessment."""

QUICK = tuple(k for k in STATION_KEYS if k not in DEAR)
PERFORMANCE_KEYS = tuple(o.key for o in OUTPUTS if o.where == "performance")
STATIONS = ("0", "1", "2", "3", "4", "5", "9", "10")
NAN = float("nan")
DEFECT = "internal-error"
"""Status of a case whose solve met a defect of the program."""
LATE_REASONS = ("unstarted", "no-mode")
"""Statuses whose reason names a solved limit, which costs more than the walk; it comes with the assessment."""


@dataclass(frozen=True, slots=True)
class Passage:
    """One process of the walk: name, label, station where it starts and ends, and its figures in SI."""

    name: str
    label: str
    start: str
    end: str
    figures: Mapping[str, float]

    @property
    def mode(self) -> str:
        """The way this process runs, where it tells: the one of its mode figures that holds; "" otherwise."""
        return next((k.removeprefix("mode_") for k, v in self.figures.items() if k.startswith("mode_") and v == 1.0), "")


@dataclass(frozen=True, slots=True)
class Share:
    """One row of an account: label, value in SI, dimension."""

    label: str
    value: float
    unit: str


@dataclass(frozen=True, slots=True)
class Margin:
    """One limit: key, label, state ("ok", "near", "over", "not assessed"), relative margin (positive is safe), actual and
    allowed value in SI, their dimension, whether it is an upper limit, what restores it, and the input to go to."""

    key: str
    label: str
    state: str
    margin: float
    actual: float
    allowed: float
    unit: str
    upper: bool
    restore: str
    input: str


@dataclass(frozen=True, slots=True)
class Figures:
    """A walk of one point as plain numbers (SI, nan where there is no value). altitude: that of the ambient pressure
    in the standard atmosphere, m. `walk` is the walk itself, for the referee and for later questions. assessed: whether
    limits, audit and the dear figures are those of this walk; until then they are of the walk before, or absent. profile: the
    flow along a duct, column -> values from the burner entry on; {} where the burner is none. losses, exergy: rows of these accounts,
    () where they are not assessed; `why_not` then says why. notes: what is to be known beside the figures."""

    status: str
    mode: str
    reason: str
    failed: str
    stations: Mapping[str, Mapping[str, float]]
    fractions: Mapping[str, Mapping[str, float]]
    performance: Mapping[str, float]
    why_not: Mapping[str, str]
    passages: tuple[Passage, ...]
    potentials: tuple[Share, ...]
    altitude: float
    walk: Any
    limits: tuple[Margin, ...] = ()
    notes: tuple[HeatedFuel | Remark, ...] = ()
    audit_ok: bool = False
    audit: str = ""
    assessed: bool = False
    profile: Mapping[str, tuple[float, ...]] = field(default_factory=dict)
    losses: tuple[Share, ...] = ()
    exergy: tuple[Share, ...] = ()

    @property
    def solved(self) -> bool:
        """Whether every process has a solution."""
        return self.status == "solved"

    def at(self, station: str, key: str) -> float:
        """A figure of a station, nan where there is none."""
        return self.stations.get(station, {}).get(key, NAN)


def _audit_words(walk: Any) -> str:
    worst = walk.audit.worst
    return f"worst residual {worst.value:.1e}, {worst.law}, {worst.where}" if worst is not None else "nothing to audit"


def _altitude(pressure: float) -> float:
    from cycle.atmosphere import altitude_of_pressure

    return float(altitude_of_pressure(pressure))


def _quick_reason(walk: Any) -> str:
    """Why there is no solution, without what has to be solved for."""
    status = str(walk.status)
    if status not in LATE_REASONS:
        return str(walk.reason)
    return f"{walk.failed_process}: {STATUSES[status]}; {RESTORES[status]}"


def _profile(walk: Any) -> dict[str, tuple[float, ...]]:
    """The columns of a duct's profile without the rows that have no place."""
    columns = walk.profile
    if not columns:
        return {}
    there = columns["x"] == columns["x"]
    return {name: tuple(values[there].tolist()) for name, values in columns.items()}


def _shares(rows: Any) -> tuple[Share, ...]:
    return tuple(Share(r.label, float(r.value), r.unit) for r in rows)


def take(walk: Any) -> Figures:
    """Plain numbers of a walk of one point.

    Parameters: walk, a `cycle.Walk` of shape (). Returns: `Figures`.
    """
    stations = {s: {k: float(getattr(walk.station[s], k)) for k in QUICK} for s in STATIONS if s in walk.station}
    performance = {k: float(getattr(walk.performance, k)) for k in PERFORMANCE_KEYS}
    return Figures(
        status=str(walk.status),
        mode=str(walk.mode),
        reason=_quick_reason(walk),
        failed=str(walk.failed_process),
        stations=stations,
        fractions={s: {x: float(v) for x, v in walk.station[s].mole_fractions.items()} for s in stations},
        performance=performance,
        why_not={k: str(walk.why_not(k)) for k, v in performance.items() if v != v},
        passages=tuple(Passage(p.name, p.label, p.start, p.end, {k: float(v) for k, v in p.figures.items()}) for p in walk.processes),
        potentials=_shares(walk.potentials),
        altitude=_altitude(stations.get("0", {}).get("pressure", NAN)),
        walk=walk,
        profile=_profile(walk),
    )


def _margin(m: Any) -> Margin:
    numbers = (float(value) for value in (m.margin, m.actual, m.allowed))
    words = f"{m.restore}; {m.note}" if m.note and m.state != "not assessed" else m.restore
    return Margin(m.key, m.label, m.state, *numbers, m.unit, bool(m.upper), words, m.input)


def assess(figures: Figures) -> Figures:
    """The figures with limits, audit and the dear figures of their walk. Call it in the worker thread."""
    walk = figures.walk
    dear = {s: {k: float(getattr(walk.station[s], k)) for k in DEAR} for s in figures.stations}
    return replace(
        figures,
        reason=str(walk.reason),
        stations={s: {**known, **dear[s]} for s, known in figures.stations.items()},
        limits=_margins(walk),
        notes=tuple(walk.notes),
        why_not={**figures.why_not, **{name: str(walk.why_not(name)) for name in ACCOUNTS}},
        losses=_shares(walk.losses),
        exergy=_shares(walk.exergy),
        audit_ok=bool(walk.audit.ok),
        audit=_audit_words(walk),
        assessed=True,
    )


def _margins(walk: Any) -> tuple[Margin, ...]:
    return tuple(_margin(m) for m in walk.limits_so_far)


def carried(figures: Figures, before: Figures | None) -> Figures:
    """Figures not assessed yet with the assessment of the walk before, so that a fast one does not flicker."""
    if before is None or figures.assessed:
        return figures
    dear = {s: {k: before.at(s, k) for k in DEAR} for s in figures.stations}
    stations = {s: {**known, **dear[s]} for s, known in figures.stations.items()}
    return replace(figures, stations=stations, limits=before.limits, audit_ok=before.audit_ok, audit=before.audit)


def solve(case: Case) -> Figures:
    """Solve a case and take its figures. Call it in the worker thread: the model is imported here."""
    import cycle

    return take(cycle.solve(case))


def defective(words: str) -> Figures:
    """Figures of a case whose solve met a defect of the program: none. words: what is said instead."""
    return Figures(DEFECT, "", words, "", {}, {}, {}, {}, (), (), NAN, None, assessed=True)


def unassessed(figures: Figures, words: str) -> Figures:
    """Figures whose assessment met a defect of the program: nothing of it is known. words: what is said instead."""
    stations = {s: {k: v for k, v in known.items() if k not in DEAR} for s, known in figures.stations.items()}
    every = Margin(DEFECT, "all limits", "not assessed", NAN, NAN, NAN, "none", True, words, "")
    why_not = {**figures.why_not, **dict.fromkeys(ACCOUNTS, words)}
    return replace(figures, stations=stations, limits=(every,), why_not=why_not, audit=words, audit_ok=False, assessed=True)


@dataclass(frozen=True, slots=True)
class HeatLimits:
    """The heat input at which the modes of a duct end, SI, and all limits with it."""

    ends: Mapping[str, float]
    limits: tuple[Margin, ...]


def heat_limits(figures: Figures) -> HeatLimits:
    """The heat at which the modes of a duct end. Slow; call it in the worker thread."""
    ends = {name: float(value) for name, value in figures.walk.heat_limits.items()}
    return HeatLimits(ends, _margins(figures.walk))


def influence(figures: Figures) -> Sensitivities:
    """What a step of each input does to the headline figures of a walk. Slow; call it in the worker thread."""
    from cycle.sensitivity import sensitivities

    return sensitivities(figures.walk.case, figures.walk)


def reaching(case: Case, limit: str, key: str) -> Iterator[Reached | None]:
    """Where a limit is just reached along an input, in pieces, see `cycle.limit_solving.search`. Call its steps in the worker thread."""
    from cycle.limit_solving import search

    yield from search(case, limit, key)


def referee(figures: Figures) -> str:
    """The referee's words on a walk. Slow; call it in the worker thread.

    Returns: one line that begins with the verdict, a colon behind it where more follows.
    """
    opinion = figures.walk.referee()
    return str(opinion.words) if opinion else "Cantera check: none at constant gamma"


Present = Callable[[Figures], float]


def _first(key: str) -> Present:
    return lambda f: f.at("0", key)


def _over(key: str, end: str, start: str) -> Present:
    return lambda f: f.at(end, key) / start_value if (start_value := f.at(start, key)) else NAN


def _inverse_area(f: Figures) -> float:
    ratio = f.at("2", "area_ratio")
    return 1.0 / ratio if ratio else NAN


def _entry(key: str) -> Present:
    return lambda f: next(iter(f.stations.values()), {}).get(key, NAN)


def _exit_area_ratio(f: Figures) -> float:
    inlet = f.at("5", "area") if "5" in f.stations else f.at("4", "area")
    return f.at("10", "area") / inlet if inlet else NAN


PRESENT: dict[str, Present] = {
    "flight.mach": _first("mach"),
    "flight.altitude": lambda f: f.altitude,
    "flight.speed": _first("velocity"),
    "flight.dynamic_pressure": _first("dynamic_pressure"),
    "flight.pressure": _first("pressure"),
    "flight.temperature": _first("temperature"),
    "inlet.temperature_ratio": _over("temperature", "2", "0"),
    "inlet.pressure_ratio": _over("pressure", "2", "0"),
    "inlet.total_pressure_recovery": _over("total_pressure", "2", "0"),
    "inlet.exit_mach": lambda f: f.at("2", "mach"),
    "inlet.contraction_ratio": _inverse_area,
    "inlet.internal_contraction": _over("area", "1", "2"),
    "inlet.throat_area": lambda f: f.at("2", "area"),
    "combustor.equivalence_ratio": lambda f: f.performance["equivalence_ratio"],
    "combustor.fuel_air_ratio": lambda f: f.performance["fuel_air_ratio"],
    "combustor.exit_total_temperature": lambda f: f.at("4", "total_temperature"),
    "combustor.exit_area_ratio": _over("area", "4", "3"),
    "combustor.pressure_ratio": _over("total_pressure", "4", "3"),
    "combustor.exit_mach": lambda f: f.at("4", "mach"),
    "combustor.exit_area_over_throat": lambda f: f.performance["burner_exit_over_throat"],
    "nozzle.throat_area": lambda f: f.performance["throat_area"],
    "nozzle.exit_area_over_capture": lambda f: f.at("10", "area_ratio") * f.performance["captured_mass_fraction"],
    "nozzle.exit_pressure": lambda f: f.at("10", "pressure"),
    "nozzle.exit_area_ratio": _exit_area_ratio,
    "fuel.heating_value": lambda f: f.performance["heating_value"],
    "entry.area": _entry("area"),
    "entry.mass_flow": _entry("mass_flow"),
}
"""Input key -> its value in a solved walk, where the walk knows it; it fills another way of saying the same."""
