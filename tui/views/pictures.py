"""Pictures of a walk beside the pinned one: along the duct, by station, temperature-entropy and enthalpy-kinetic energy."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

from cycle.glossary import PROFILE
from cycle.quantities import OUTPUT
from cycle.units import show
from tui.figures import Figures
from tui.line import clean
from tui.plots import Axis, Chart, Rule, Series, Spot
from tui.plots.chart import Role
from tui.screens.ducting import process_figure
from tui.session import Session
from tui.views.numbers import quantity
from tui.views.table import ROWS, columns

ALONG = {o.key.removeprefix("profile."): o for o in PROFILE}
DUCT = tuple(key for key in ALONG if key not in ("x", "core_area"))
"""Quantities along the duct; the area is drawn with that of the core."""

NOW, PINNED = "this walk", "pinned walk"
_STRAIGHT = "straight lines join the stations; the path between them is not known from them"


@dataclass(frozen=True, slots=True)
class View:
    """One kind of picture. name: on the line of tabs; items: keys of its quantities, () where there is one picture; here: whether
    a session has it; drawn: the picture of a quantity, with a logarithmic axis or not."""

    name: str
    items: tuple[str, ...]
    here: Callable[[Session], bool]
    drawn: Callable[[Session, str, bool], Chart]


def shown_walk(session: Session) -> Figures | None:
    """The walk that is drawn: of these inputs as far as it goes, None before there is one."""
    return session.figures if session.figures is not None and session.figures.stations else None


def pinned_walk(session: Session) -> Figures | None:
    """The pinned walk, None where it is the one that is drawn."""
    pin, found = session.pin, session.figures
    return None if pin is None or found is None or pin.figures.walk is found.walk else pin.figures


def _walks(session: Session) -> Iterator[tuple[Figures, str, Role]]:
    """The walks to be drawn with label and role."""
    found, pin = shown_walk(session), pinned_walk(session)
    if found is not None:
        yield found, NOW, "now"
    if pin is not None:
        yield pin, PINNED, "pin"


def _title(session: Session, what: str) -> str:
    found = session.figures
    lost = f" (no solution: {found.status})" if found is not None and not found.solved else ""
    return f"{what}: {clean(session.case.title) if session.case is not None else ''}{lost}"


def _axis(label: str, dimension: str, session: Session, key: str = "", log: bool = False) -> Axis:
    return Axis(label, show(1.0, dimension, session.system, key)[1], log)


def _values(values: tuple[float, ...] | list[float], dimension: str, session: Session, key: str = "") -> tuple[float, ...]:
    return tuple(show(v, dimension, session.system, key)[0] for v in values)


def along_duct(session: Session, item: str, log: bool) -> Chart:
    """A quantity along the duct, from its entry on; with the area also that of the core.

    Parameters: session, with a walk of a duct; item, a column of the profile; log, whether the quantity's axis is logarithmic.
    Returns: the chart, with the places where something happens.
    """
    spec = ALONG[item]
    series: list[Series] = []
    for found, label, role in _walks(session):
        if not found.profile:
            continue
        x = _values(found.profile["x"], "length", session)
        series.append(Series(label, x, _values(found.profile[item], spec.unit, session), role))
        if item == "area":
            series.append(Series(f"core, {label}", x, _values(found.profile["core_area"], spec.unit, session)))
    axis = _axis(spec.label, spec.unit, session, log=log)
    if len(series) == 1:
        series = [Series(axis.label, series[0].x, series[0].y, "now")]
    title = _title(session, f"{spec.label} along the duct")
    place = _axis("distance from the burner entry", "length", session)
    return Chart(title, place, axis, tuple(series), tuple(_places(session)), _isolator_start(session, item))


def _isolator_start(session: Session, item: str) -> tuple[Spot, ...]:
    """Station 2 where the isolator begins: what comes between it and the burner is not part of the profile."""
    found, case = shown_walk(session), session.case
    length = case.value("isolator.length") if case is not None else None
    if found is None or not isinstance(length, float) or item not in OUTPUT or found.at("2", item) != found.at("2", item):
        return ()
    place = _values([-length], "length", session)[0]
    return (Spot(place, _values([found.at("2", item)], ALONG[item].unit, session)[0], "2", "station 2, where the isolator begins"),)


def _places(session: Session) -> Iterator[Rule]:
    """Where fuel enters, where the shock train begins, where the core fills the duct, and the thermal throat."""
    found, case = shown_walk(session), session.case
    if found is None or case is None:
        return
    injectors = case.rows.get("combustor.injector", ())
    for row in injectors:
        share = f" {100.0 * row['share']:.3g} %" if len(injectors) > 1 and row.get("share") is not None else ""
        yield _place(row["x"], f"fuel{share}", session)
    train = process_figure(found, "isolator", "train_length")
    if train > 0.0:
        yield _place(-train, "shock train begins", session)
    for key, words in (("reattachment_x", "core fills the duct"), ("throat_x", "thermal throat")):
        at = process_figure(found, "burner", key)
        if at > 0.0:
            yield _place(at, words, session)


def _place(x: float, words: str, session: Session) -> Rule:
    return Rule("x", _values([x], "length", session)[0], f"{words}, {quantity(x, 'length', session.system)}", "place")


def by_station(session: Session, item: str, log: bool) -> Chart:
    """A row of the station table as a line over the stations. Parameters: as for `along_duct`; item, a key of the table."""
    spec = OUTPUT[item]
    walks = list(_walks(session))
    every = columns(session)
    series: list[Series] = []
    spots: list[Spot] = []
    for found, label, role in walks:
        names = [s for s in every if s in found.stations]
        places = tuple(float(every.index(s)) for s in names)
        y = _values([found.at(s, item) for s in names], spec.unit, session, item)
        series.append(Series(label if len(walks) > 1 else spec.label, places, y, role))
        if role == "now":
            spots = [Spot(x, v, s) for x, s, v in zip(places, names, y, strict=True) if v == v]
    title = _title(session, f"{spec.label} by station")
    return Chart(title, Axis("station", names=every), _axis(spec.label, spec.unit, session, item, log), tuple(series), (), tuple(spots))


def _path(session: Session, x: Callable[[Figures, str], float], y: Callable[[Figures, str], float]) -> tuple[list[Series], list[Spot]]:
    """The stations of the walks as paths in a plane, with the numbers of the present one."""
    series: list[Series] = []
    spots: list[Spot] = []
    for found, label, role in _walks(session):
        names = [s for s in columns(session) if s in found.stations]
        points = [(x(found, s), y(found, s)) for s in names]
        series.append(Series(label, tuple(p[0] for p in points), tuple(p[1] for p in points), role))
        if role == "now":
            spots = [Spot(*p, s) for s, p in zip(names, points, strict=True) if p[0] == p[0] and p[1] == p[1]]
    return series, spots


def _at(key: str, session: Session) -> Callable[[Figures, str], float]:
    spec = OUTPUT[key]
    return lambda found, station: show(found.at(station, key), spec.unit, session.system, key)[0]


def temperature_entropy(session: Session, item: str, log: bool) -> Chart:
    """The walk in the plane of entropy and temperature. Parameters: as for `along_duct`; item is not used."""
    series, spots = _path(session, _at("entropy", session), _at("temperature", session))
    axes = [_axis(OUTPUT[k].label, OUTPUT[k].unit, session, k, log and k == "temperature") for k in ("entropy", "temperature")]
    return Chart(_title(session, "temperature and entropy"), axes[0], axes[1], tuple(series), (), tuple(spots), (), (_STRAIGHT,))


def enthalpy_velocity(session: Session, item: str, log: bool) -> Chart:
    """The walk in the plane of kinetic energy and enthalpy, with lines of constant total enthalpy through its first and last
    station. Parameters: as for `along_duct`; item is not used."""

    def kinetic(found: Figures, station: str) -> float:
        return show(0.5 * found.at(station, "velocity") * found.at(station, "velocity"), "specific energy", session.system)[0]

    enthalpy = _at("enthalpy", session)
    series, spots = _path(session, kinetic, enthalpy)
    most = max((x for s in series for x in s.x if x == x), default=0.0)
    found = shown_walk(session)
    names = [s for s in columns(session) if s in found.stations] if found is not None else []
    for station in dict.fromkeys((*names[:1], *names[-1:])):
        assert found is not None
        total = kinetic(found, station) + enthalpy(found, station)
        if total == total:
            series.append(Series(f"total enthalpy of {station}", (0.0, most), (total, total - most)))
    unit = show(1.0, "specific energy", session.system)[1]
    axes = (Axis("kinetic energy u^2/2", unit), Axis(OUTPUT["enthalpy"].label, unit, log))
    return Chart(_title(session, "enthalpy and velocity"), axes[0], axes[1], tuple(series), (), tuple(spots), (), (_STRAIGHT,))


def _has_duct(session: Session) -> bool:
    found = shown_walk(session)
    return found is not None and bool(found.profile)


def _has_walk(session: Session) -> bool:
    return shown_walk(session) is not None


VIEWS: tuple[View, ...] = (
    View("along the duct", DUCT, _has_duct, along_duct),
    View("by station", ROWS, _has_walk, by_station),
    View("T-s", (), _has_walk, temperature_entropy),
    View("h-u2/2", (), _has_walk, enthalpy_velocity),
)


def views(session: Session) -> tuple[View, ...]:
    """The pictures that a session has."""
    return tuple(v for v in VIEWS if v.here(session))


def label_of(view: View, item: str) -> str:
    """Name of a quantity of a kind of picture, "" where it has but one."""
    if not item:
        return ""
    return (ALONG if view.drawn is along_duct else OUTPUT)[item].label
