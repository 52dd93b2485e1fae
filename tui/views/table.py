"""The station table: rows are quantities, columns are stations, processes label the columns where they end."""

from __future__ import annotations

from cycle import noise
from cycle.quantities import OUTPUT
from cycle.units import show
from tui.figures import NAN, STATION_KEYS, STATIONS, Figures, Passage
from tui.line import BOLD, CURSOR, DIM, PLAIN, Line, Piece, clean, fit, line, wrap
from tui.session import VIEWS, Session, columns_of
from tui.views.numbers import difference, figure, percent, quantity, unit

LEADING = (
    "mach",
    "pressure",
    "temperature",
    "velocity",
    "total_pressure",
    "total_temperature",
    "area_ratio",
    "stream_thrust",
    "thrust_potential",
)
ROWS = (*LEADING, *(k for k in STATION_KEYS if k not in LEADING))
"""Rows of the table in order; the leading ones fit the smallest terminal that shows the whole screen."""

HEADS = {
    "external compression": "external",
    "internal compression": "internal",
    "external expansion": "outside",
    "composition released": "released",
    "frozen chemistry": "frozen",
}
"""Names of processes over their columns where the whole one does not fit."""

NAMES = {"mach": "Mach", "area_ratio": "area / A0", "thrust_potential": "potential"}
SYMBOLS = ("pressure", "temperature", "velocity", "total_pressure", "total_temperature")
STALE = ("( ) as of the previous inputs", "( ) previous inputs", "( ) previous")
DIFFERENCES = {"thrust_potential": ("stream_thrust",)}
"""Rows that are differences of larger figures -> these."""
FEWEST = 2
"""Digits that a cell gives up at most."""
LONG = 1e5
"""Value from which the digits of a whole number find no room in parentheses."""
LEAST, MOST = 9, 12
WHOLE_LABELS, SHORT_LABELS = 21, 17
"""Columns of the labels of an 80-column screen, and the fewest."""


def columns(session: Session) -> tuple[str, ...]:
    """Stations of the table: those of the case, and any more that its walk has."""
    have = {*columns_of(session.case), *(session.figures.stations if session.figures else ())}
    return tuple(s for s in STATIONS if s in have)


def label(key: str, system: str, room: int = 80) -> str:
    """Name and display unit of a row; the symbol stands for a name that leaves the unit no room."""
    name = OUTPUT[key].symbol if key in SYMBOLS else NAMES.get(key, OUTPUT[key].label)
    dimension = unit(key, system)
    whole = f"{name}, {dimension}" if dimension else name
    if len(whole) <= room:
        return whole
    return f"{OUTPUT[key].symbol}, {dimension}" if dimension else OUTPUT[key].symbol


def passages_at(found: Figures | None, station: str) -> list[Passage]:
    """Processes that end at a station, the one that came from another station first."""
    ending = [p for p in found.passages if p.end == station] if found is not None else []
    return sorted(ending, key=lambda p: p.start == p.end)


def _reached(session: Session, station: str) -> str:
    ending = passages_at(session.figures, station) or passages_at(session.good, station)
    if ending:
        return clean(HEADS.get(ending[0].name, ending[0].label))
    first = station == columns(session)[0]
    rig = session.case is not None and session.case.choices.get("start") == "entry"
    return ("entry" if rig else "flight") if first and session.case is not None else ""


def _label_room(session: Session, wide: int) -> int:
    """Columns of the labels: fewer where that brings every station into sight."""
    room = min(WHOLE_LABELS if wide < 100 else 30, wide // 2)
    need = LEAST * len(columns(session))
    return SHORT_LABELS if wide - room < need <= wide - SHORT_LABELS else room


def _shown_columns(session: Session, room: int) -> tuple[tuple[str, ...], int]:
    """Stations that fit beside the labels with the one in hand among them, and the width of each.

    They turn by pages, so that most moves of the cursor leave them where they are.
    """
    every = columns(session)
    whole = room // LEAST >= len(every)
    room -= 0 if whole else 2
    fit_in = len(every) if whole else max(1, room // LEAST)
    at = every.index(session.station) if session.station in every else 0
    start = min(at - at % fit_in, len(every) - fit_in)
    return every[start : start + fit_in], max(1, min(MOST, room // fit_in))


def heads(height: int) -> int:
    """Lines of heads in a height: the processes are left out where it is short."""
    return 2 if height > 3 else 1


def first_row(session: Session, body: int) -> int:
    """The first row shown of `body` rows, so that the one under the cursor is in sight."""
    if session.row < body:
        return 0
    return min(session.row - body + 1, max(0, len(ROWS) - body))


def lines(session: Session, wide: int, height: int) -> list[Line]:
    """Heads and as many rows as the height allows; what is wrong with a file that is no case."""
    if session.case is None and session.faults:
        return _faults(session, wide, height)
    room = _label_room(session, wide)
    shown, column = _shown_columns(session, wide - room)
    body = max(1, height - heads(height))
    top = first_row(session, body)
    keys = ROWS[top : top + body]
    part = f"rows {top + 1}-{top + len(keys)}/{len(ROWS)}" if len(keys) < len(ROWS) else ""
    part = part if len(part) < room else f"{top + 1}/{len(ROWS)}"
    gap = min(3, room - 8 - len(part))
    where = f"station{' ' * gap}{part}".rstrip() if gap > 0 else part or "station"
    if changes_shown(session):
        where = VIEWS[session.view].replace("against the pin", "vs pin")
    stale = next(words for words in STALE if len(words) < room or words == STALE[-1])
    reached = stale if session.failed and session.good is not None else "component"
    head: list[Line] = [
        line((fit(reached, room).ljust(room), DIM), *((_head(_reached(session, s), column), DIM) for s in shown)),
        line(
            (_more(where, session, shown, room), PLAIN), *_stations(session, shown, column), (" >" if _beyond(session, shown) else "", DIM)
        ),
    ]
    return [*head[-heads(height) :], *(_row(session, i + top, k, shown, column, room) for i, k in enumerate(keys))][:height]


def _faults(session: Session, wide: int, height: int) -> list[Line]:
    """What is wrong with a file that is no case: as many faults as there is room for, whole, and how many more there are."""
    told = [clean(fault.removeprefix(f"{session.path}: ")) for fault in session.faults]
    out: list[str] = []
    for n, fault in enumerate(told):
        part = wrap(fault.split(), wide)
        left = len(told) - n
        if n and len(out) + len(part) > height - (left > 1):
            return [line(p) for p in out[: height - 1]] + [line((f"and {left} more: ductwalk check {clean(session.path)} tells all", BOLD))]
        out += part
    return [line(p) for p in out[:height]]


def _beyond(session: Session, shown: tuple[str, ...]) -> bool:
    """Whether stations downstream of those shown are out of sight."""
    return shown[-1] != columns(session)[-1]


def _more(where: str, session: Session, shown: tuple[str, ...], room: int) -> str:
    """The words before the stations, with a mark where some upstream are out of sight."""
    hides = shown[0] != columns(session)[0]
    return fit(where, room - 2 * hides).ljust(room - 2 * hides) + ("< " if hides else "")


def _head(text: str, column: int) -> str:
    return fit(text, column - 1).rjust(column)


def _stations(session: Session, shown: tuple[str, ...], column: int) -> list[Piece]:
    pieces: list[Piece] = []
    for s in shown:
        if s == session.station:
            text = f"[ {s} ]"
            pieces += [(" " * max(0, column - len(text)), PLAIN), (text, CURSOR)]
        else:
            pieces.append((s.rjust(column), BOLD))
    return pieces


def _row(session: Session, index: int, key: str, shown: tuple[str, ...], column: int, room: int) -> Line:
    here = session.focus == "table" and index == session.row
    pieces: list[Piece] = [(fit(label(key, session.system, room - 1), room - 1).ljust(room), BOLD if here else PLAIN)]
    for s in shown:
        text, style = _cell(session, key, s, column - 1)
        if here and s == session.station:
            pieces += [(" " * (column - len(text)), PLAIN), (text, CURSOR)]
        else:
            pieces.append((text.rjust(column), style))
    return tuple(pieces)


def _cell(session: Session, key: str, station: str, room: int) -> Piece:
    """Text of a cell, with as many digits as have room; a value of the last good walk stands dimmed in parentheses where the present
    one has none."""
    found = session.figures
    if found is None:
        return "", PLAIN
    stale = station not in found.stations and session.failed and session.good is not None
    texts = [_text(session, found, key, station, fewer, stale) for fewer in range(FEWEST + 1)]
    return next((text for text in texts if len(text) <= room), fit(texts[-1], room)), DIM if stale else PLAIN


def _text(session: Session, found: Figures, key: str, station: str, fewer: int, stale: bool) -> str:
    if stale and session.good is not None:
        value = settled(session.good, station, key)
        text = figure(key, value, session.system, 4 - fewer)
        if fewer == FEWEST and abs(value) >= LONG:
            text = f"{show(value, OUTPUT[key].unit, session.system, key)[0]:.1e}".replace("e+0", "e")
        return f"({text})" if text != "-" else "-"
    return _viewed(session, key, station, settled(found, station, key), fewer)


def settled(found: Figures, station: str, key: str) -> float:
    """A figure of a station, zero where it is round-off beside those of the other stations, or beside what it is a difference of."""
    value = found.at(station, key)
    keys = (key, *DIFFERENCES.get(key, ()))
    return float(noise.settled(value, noise.largest(found.at(s, k) for k in keys for s in found.stations)))


def changes_shown(session: Session) -> bool:
    """Whether the cells are changes: figures stand there as such where either walk has no solution or nothing is pinned."""
    found, pin = session.figures, session.pin
    return session.view > 0 and found is not None and found.solved and pin is not None and pin.figures.solved


def _viewed(session: Session, key: str, station: str, value: float, fewer: int) -> str:
    if not changes_shown(session):
        return figure(key, value, session.system, 4 - fewer)
    base = settled(session.pin.figures, station, key) if session.pin is not None else NAN
    return difference(key, value, base, session.system, 3 - fewer) if session.view == 1 else percent(value, base)


def process_line(session: Session, wide: int, height: int) -> list[Line]:
    """One line on the process that led to the station in hand: what it cost."""
    found = session.figures
    ending = passages_at(found, session.station)
    if found is None:
        return [line(("-" * wide, DIM))]
    if not ending:
        lost = session.failed and session.station not in found.stations
        stale = "; figures in ( ) as of the previous inputs" if session.good is not None else ""
        words = f"not reached by these inputs{stale}" if lost else "freestream" if session.station == "0" else "entry conditions"
        return [line((fit(words, wide), DIM))]
    first, *others = ending
    own, costs = told(first, session.system), _costs(first, session.system)
    lead = 1 if own else 2
    parts = [*own, *costs[:lead], *(f"{clean(p.label)} {_costs(p, session.system)[0]}" for p in others), *costs[lead:]]
    head = f"{first.start} to {first.end}, {clean(first.label)}: "
    return [line(fit(head + wrap(parts, wide - len(head), " | ")[0], wide))]


COSTS = (
    ("thrust_potential_change", "potential", "force", "+"),
    ("total_pressure_ratio", "pt ratio", "ratio", ""),
    ("entropy_rise", "entropy", "specific heat", "+"),
    ("temperature_ratio", "T ratio", "ratio", ""),
    ("choking_margin", "to choking", "ratio", "+"),
)
"""Figures of a process on its line: key, words, dimension, sign."""


def _costs(passage: Passage, system: str) -> list[str]:
    out = []
    for key, words, dimension, sign in COSTS:
        value = passage.figures.get(key, NAN)
        if value == value:
            out.append(f"{words} {sign if value >= 0 else ''}{quantity(value, dimension, system)}")
    return out or ["no figures"]


TOLD: dict[str, tuple[tuple[str, str, str], ...]] = {
    "external compression": (("captured_fraction", "captured", "ratio"), ("additive_drag", "additive drag", "force")),
    "isolator": (
        ("shock_mach", "shock at Mach", "ratio"),
        ("spilled_flow", "spilled", "mass flow"),
        ("train_length", "train", "length"),
    ),
    "burner": (
        ("peak_pressure_ratio", "peak p/p2", "ratio"),
        ("throat_x", "throat at", "length"),
    ),
}
"""What a process did beside its cost: figures by name of the process, with words and dimension."""

RUNS = {
    "scramjet": "attached",
    "scramjet-shock-train": "shock train",
    "ramjet-thermal-throat": "thermal throat",
}
"""Ways a duct runs, short."""


def told(passage: Passage, system: str) -> list[str]:
    """What a process did: how it runs, pressure rise, places."""
    out = []
    if passage.mode:
        pressures = quantity(passage.figures["pressure_ratio"], "ratio", system, 3)
        out = [RUNS.get(passage.mode, passage.mode), f"p{passage.end}/p{passage.start} {pressures}"]
    for key, words, dimension in TOLD.get(passage.name, ()):
        value = passage.figures.get(key, NAN)
        if value == value and not (value == 0.0 and key in ("spilled_flow", "train_length")):
            out.append(f"{words} {quantity(value, dimension, system, 3)}")
    return out
