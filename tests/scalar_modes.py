"""In which mode a dual-mode duct runs and what leaves it, by trying: attached, then a shock train, then a thermal throat.

A throat is found by shooting downstream only: a separated core at p3 up to the place where it fills the duct, then the attached
subsonic stream, which chokes, or stays subsonic to the exit. Between two p3 that differ in this lies one whose stream passes Mach 1.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from itertools import pairwise

import numpy as np
from scipy.optimize import brentq

from tests.scalar_march import Core, Duct, Place, Row, attached, core, cores

TRIED = 60
"""Pressures tried between that of station 2 and that behind a normal shock there."""


@dataclass(frozen=True)
class Flow:
    """A flow through the duct. pressure, filled, throat: p3 Pa, x_r and x* m, where there are such; impulse N and Mach at the exit."""

    mode: str
    impulse: float
    mach: float
    pressure: float = math.nan
    filled: float = math.nan
    throat: float = math.nan
    margins: dict[str, float] = field(default_factory=dict)


@dataclass(frozen=True)
class Verdict:
    """The mode, the flow in it where it has one, all flows with a thermal throat, and what was tried."""

    mode: str
    flow: Flow | None
    throats: tuple[Flow, ...]
    tried: tuple[str, ...]
    margins: dict[str, float]


def korkegi(mach: float) -> float:
    return 1.0 + 0.3 * mach**2 if mach <= 4.5 else 0.17 * mach**2.5


def _top(x: np.ndarray, y: np.ndarray) -> tuple[float, float]:
    """Place and value of the largest y, by the parabola through it and its neighbours."""
    k = int(np.argmax(y))
    if k in (0, len(y) - 1):
        return float(x[k]), float(y[k])
    a, b, c = np.polyfit(x[k - 1 : k + 2] - x[k], y[k - 1 : k + 2], 2)
    return float(x[k] - 0.5 * b / a), float(c - 0.25 * b * b / a)


def _least_room(rows: list[Row]) -> float:
    """How near Mach 1 a march comes: its impulse over the sonic one, less 1, at the closest."""
    return min(math.sqrt(1.0 + max(row.room, 0.0)) - 1.0 for row in rows) if rows else 0.0


def _leaves(duct: Duct, mode: str, row: Row, **what: float) -> Flow:
    margins = {key: what.pop(key) for key in ("peak", "core_mach", "room") if key in what}
    return Flow(mode, row.impulse, duct.mach_of(row.piece, row.place.x, row.w, row.pressure), margins=margins, **what)


def try_attached(duct: Duct) -> tuple[Flow | None, str, dict[str, float]]:
    rows, choked = attached(duct, 0, 0.0, duct.impulse + duct.pieces[0].kick, True)
    if choked is not None:
        return None, f"attached chokes at {choked:.4f} m", {}
    x, p = np.array([row.place.x for row in rows]), np.array([row.pressure for row in rows])
    piece = np.array([row.piece for row in rows])
    peak = max(_top(x[piece == k], p[piece == k])[1] for k in range(len(duct.pieces)))
    margins = {"peak": peak / (korkegi(duct.mach) * duct.pressure) - 1.0, "room": _least_room(rows)}
    if margins["peak"] > 0.0:
        return None, f"attached separates: peak over limit - 1 is {margins['peak']:.3g}", margins
    return _leaves(duct, "scramjet", rows[-1], **margins), "attached stands", margins


def _fullest(duct: Duct, found: Core) -> tuple[float, int, float]:
    """Largest Ac/A, its piece and place."""
    tops = [_top(np.array([place.x for place in part.places]), fill) for part, fill in zip(duct.pieces, found.fill, strict=True)]
    piece = int(np.argmax([value for _, value in tops]))
    return tops[piece][1], piece, tops[piece][0]


def try_train(duct: Duct) -> tuple[Flow | None, str, dict[str, float]]:
    def lacks(pressure: float) -> float:
        return _fullest(duct, core(duct, pressure))[0] - 1.0

    pressures = np.geomspace(duct.pressure * (1.0 + 1e-6), duct.normal_shock() * (1.0 - 1e-9), 2 * TRIED)
    tops = np.array([_fullest(duct, found)[0] - 1.0 for found in cores(duct, pressures)])
    crossed = np.flatnonzero(tops[:-1] * tops[1:] <= 0.0)
    if crossed.size == 0:
        return None, f"train: no p3 whose core just fills the duct (last Ac/A {tops[-1] + 1.0:.4g})", {"train_fill": tops[-1]}
    a, b = pressures[crossed[0] : crossed[0] + 2]
    p3 = float(brentq(lacks, a, b, xtol=1e-12 * a, rtol=1e-13))
    found = core(duct, p3)
    return _train(duct, found, *_fullest(duct, found)[1:])


def _train(duct: Duct, found: Core, k: int, x: float) -> tuple[Flow | None, str, dict[str, float]]:
    """The flow behind a train whose core just fills the duct at x in piece k."""
    p3, place = found.pressure, _place(duct, k, x)
    momentum = float(np.interp(x, [place.x for place in duct.pieces[k].places], found.momentum[k]))
    mach = duct.mach_of(k, x, (momentum / place.mass_flow) ** 2, p3)
    margins = {"core_mach": mach - 1.0}
    where = f"p3/p2 {p3 / duct.pressure:.6g}, fills at {x:.5g} m, core M {mach:.5g}"
    if mach <= 1.0:
        return None, f"train: core subsonic where it fills the duct: {where}", margins
    rows, choked = attached(duct, k, x, momentum + p3 * place.area, True)
    if choked is not None:
        return None, f"train: chokes at {choked:.4f} m behind it: {where}", margins
    margins["room"] = _least_room(rows)
    return _leaves(duct, "scramjet-shock-train", rows[-1], pressure=p3, filled=x, **margins), f"train stands: {where}", margins


def other_train(duct: Duct, pressure: float) -> Flow | None:
    """The flow behind a core that just fills the duct at a place, whatever it would do further on, were it separated there still."""
    found = core(duct, pressure)
    for k, (part, fill) in enumerate(zip(duct.pieces, found.fill, strict=True)):
        x, top = _top(np.array([place.x for place in part.places]), fill)
        if abs(top - 1.0) < 1e-4:
            return _train(duct, found, k, x)[0]
        if top > 1.0:
            return None
    return None


def _place(duct: Duct, piece: int, x: float) -> Place:
    part = duct.pieces[piece]
    return duct.places(np.array([x]), 0.5 * (part.a + part.b))[0]


@dataclass(frozen=True)
class Shot:
    """What one p3 does. kind: open (the core never fills), fast (it fills, supersonic), chokes, passes; where: x at which it chokes."""

    pressure: float
    kind: str
    filled: float = math.nan
    where: float = math.inf
    rows: tuple[Row, ...] = ()


def shoot(duct: Duct, found: Core) -> Shot:
    """The attached subsonic stream behind a core."""
    pressure = found.pressure
    for k, part in enumerate(duct.pieces):
        over = np.flatnonzero(found.fill[k] >= 1.0)
        if over.size == 0:
            continue
        x, momentum = part.places[int(over[0])].x, float(found.momentum[k][int(over[0])])
        if over[0] > 0:
            x, momentum = _filling(duct, found, k, int(over[0]))
        place = _place(duct, k, x)
        mach = duct.mach_of(k, x, (momentum / place.mass_flow) ** 2, pressure)
        if mach >= 1.0:
            return Shot(pressure, "fast", x)
        rows, choked = attached(duct, k, x, momentum + pressure * place.area, False)
        return Shot(pressure, "passes" if choked is None else "chokes", x, math.inf if choked is None else choked, tuple(rows))
    return Shot(pressure, "open")


def _filling(duct: Duct, found: Core, piece: int, after: int) -> tuple[float, float]:
    """x and core momentum where Ac/A passes 1 between the places after - 1 and after."""
    places = duct.pieces[piece].places
    first = max(0, min(after - 2, len(places) - 4))
    x = np.array([place.x for place in places[first : first + 4]]) - places[after - 1].x
    step = places[after].x - places[after - 1].x
    fill, momentum = (np.polynomial.Polynomial.fit(x, y[piece][first : first + 4], 3) for y in (found.fill, found.momentum))
    if fill(0.0) < 1.0 <= fill(step):
        step = float(brentq(lambda t: fill(t) - 1.0, 0.0, step, xtol=1e-15))
    return places[after - 1].x + step, float(momentum(step))


def at_entry(duct: Duct, share: float = 1.0) -> Shot:
    """Subsonic from the entry on, behind a normal shock there: the strongest p3. share: of the impulse."""
    place = duct.air_place
    w, thermal, room = place.state(share * duct.impulse, False, place.sonic()[0])
    if room < 0.0:
        return Shot(place.pressure(w, thermal), "chokes", 0.0, 0.0)
    rows, choked = attached(duct, 0, 0.0, share * duct.impulse + duct.pieces[0].kick, False)
    return Shot(
        place.pressure(w, thermal), "passes" if choked is None else "chokes", 0.0, math.inf if choked is None else choked, tuple(rows)
    )


@dataclass(frozen=True)
class Passage:
    """A place where a stream may pass Mach 1: the sonic state is driven to it from either side."""

    piece: int
    place: Place


def passages(duct: Duct) -> list[Passage]:
    """Where d(F - F sonic)/dx of the sonic stream goes from below to above 0: inside pieces, at their ends, at the exit."""
    found = []
    slopes = [np.array([_slope(duct, k, place.x) for place in part.places]) for k, part in enumerate(duct.pieces)]
    for k, part in enumerate(duct.pieces):
        enters = k == 0 or part.places[0].mass_flow > duct.pieces[k - 1].places[0].mass_flow
        if slopes[k][0] > 0.0 and (enters or slopes[k - 1][-1] < 0.0):
            found.append(Passage(k, part.places[0]))
        for i in np.flatnonzero((slopes[k][:-1] < 0.0) & (slopes[k][1:] >= 0.0)):
            x = brentq(lambda x, k=k: _slope(duct, k, x), part.places[i].x, part.places[i + 1].x, xtol=1e-9 * duct.end)
            found.append(Passage(k, _place(duct, k, float(x))))
    if slopes[-1][-1] <= 0.0:
        found.append(Passage(len(duct.pieces) - 1, duct.pieces[-1].places[-1]))
    return found


def _slope(duct: Duct, piece: int, x: float) -> float:
    """d(F - F sonic)/dx of the sonic stream; the sonic impulse is a least one, so that u is held in its slope."""
    part = duct.pieces[piece]
    step = 1e-3 * (part.b - part.a)
    middle = min(max(x, part.a + step), part.b - step)
    near = duct.places(np.array([middle - step, middle, middle + step, x]), 0.5 * (part.a + part.b))
    w, thermal, _ = near[3].sonic()
    before, at, after = (place.impulse(w) for place in near[:3])
    slope = 0.5 * (after - before) / step + (x - middle) * (after - 2.0 * at + before) / step**2
    return near[3].force(w, thermal) - slope


def behind(duct: Duct, passage: Passage) -> tuple[list[Row], float | None]:
    """The supersonic march from a passage on."""
    part, x = duct.pieces[passage.piece], passage.place.x
    if x >= duct.end:
        w, thermal, F = passage.place.sonic()
        return [Row(passage.piece, passage.place, w, thermal, F, 0.0)], None
    # a little behind it, where a sonic stream is driven off Mach 1 and makes for the flow through the passage
    start = x + (1e-4 * (part.b - part.a) if x > part.a else 0.0)
    if start >= part.b:
        start = x
    F = _place(duct, passage.piece, start).sonic()[2]
    return attached(duct, passage.piece, start, F * (1.0 + 1e-10), True, throat=True)


def try_throats(duct: Duct) -> tuple[list[Flow], list[str], dict[str, float]]:
    """All flows with a thermal throat."""
    low, high = duct.pressure, duct.normal_shock()
    spread = np.concatenate([np.linspace(0.0, 0.98, TRIED)[1:], 1.0 - np.geomspace(0.015, 1e-8, 12)])
    shots = [shoot(duct, found) for found in cores(duct, low + spread * (high - low))] + [at_entry(duct)]
    flows, tried = [], []
    kinds = [shot.kind for shot in shots]
    tried.append("p3 tried: " + ", ".join(f"{kinds.count(kind)} {kind}" for kind in dict.fromkeys(kinds)))
    ways = passages(duct)
    for a, b in pairwise(shots):
        for one, other in _borders(duct, a, b):
            flow, word = _through(duct, one, other, ways)
            tried.append(word)
            if flow is not None:
                flows.append(flow)
    room = _least_room(list(shots[-1].rows))
    return flows, tried, {"entry_chokes": float(shots[-1].kind == "chokes"), "entry_room": room}


def _differ(duct: Duct, a: Shot, b: Shot) -> bool:
    if not {a.kind, b.kind} <= {"chokes", "passes"}:
        return False
    return a.kind != b.kind or (a.kind == "chokes" and abs(a.where - b.where) > 0.01 * duct.end)


def _borders(duct: Duct, a: Shot, b: Shot) -> list[tuple[Shot, Shot]]:
    """Neighbouring p3 on the two sides of each change of where the stream chokes."""
    differ = _differ(duct, a, b)
    if not differ and a.kind == b.kind:
        return []
    if abs(b.pressure - a.pressure) <= (1e-10 if differ else 1e-8) * b.pressure:
        return [(a, b)] if differ else []
    half = shoot(duct, core(duct, 0.5 * (a.pressure + b.pressure)))
    return _borders(duct, a, half) + _borders(duct, half, b)


def _through(duct: Duct, a: Shot, b: Shot, ways: list[Passage]) -> tuple[Flow | None, str]:
    """The flow between two neighbouring shots, of which one chokes ahead of the other."""
    ahead, on = sorted((a, b), key=lambda shot: shot.where)
    name = f"p3/p2 {on.pressure / duct.pressure:.8g}, fills at {on.filled:.5g} m"
    if abs(a.filled - b.filled) > 1e-3 * duct.end:
        return None, f"throat: {name} or {ahead.filled:.5g} m, the place of filling jumps"
    near = [row for row in on.rows if row.place.x >= ahead.where - 0.02 * duct.end]
    near = near or list(on.rows)
    closest = min(near, key=lambda row: row.room).place.x
    way = min(ways, key=lambda way: abs(way.place.x - closest), default=None)
    if way is None or abs(way.place.x - closest) > 0.05 * duct.end:
        return None, f"throat: {name}, nears Mach 1 at {closest:.5g} m, where there is no passage"
    rows, choked = behind(duct, way)
    if choked is not None:
        return None, f"throat: {name}, at {way.place.x:.5g} m, but chokes behind it at {choked:.5g} m"
    rest = [row for row in rows if row.place.x > way.place.x + 0.1 * duct.end]
    flow = _leaves(
        duct, "ramjet-thermal-throat", rows[-1], pressure=on.pressure, filled=on.filled, throat=way.place.x, room=_least_room(rest)
    )
    return flow, f"throat: {name}, at {way.place.x:.5g} m"


def verdict(duct: Duct) -> Verdict:
    """The mode of a duct: "unstarted", "choked" or "none" where no flow of the three kinds stands."""
    tried, margins = [], {}
    for attempt in (try_attached, try_train):
        flow, word, own = attempt(duct)
        tried.append(word)
        margins |= {f"{attempt.__name__.removeprefix('try_')}_{key}": value for key, value in own.items()}
        if flow is not None:
            return Verdict(flow.mode, flow, (), tuple(tried), margins)
    flows, words, own = try_throats(duct)
    tried += words
    margins |= own
    if flows:
        return Verdict(flows[0].mode, flows[0], tuple(flows), tuple(tried), margins)
    mode = "unstarted" if own["entry_chokes"] else "choked" if any("chokes behind" in word for word in words) else "none"
    return Verdict(mode, None, (), tuple(tried), margins)
