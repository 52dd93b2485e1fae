"""Lines of the lists of cases: those of a folder with their figures, those opened last, unsaved work."""

from __future__ import annotations

import os
import time
from collections.abc import Mapping

from cycle.quantities import OUTPUT
from tui.folder import Entry, Solved
from tui.journal import Held
from tui.keeping import Recent
from tui.line import DIM, NEAR, OVER, PLAIN, Line, clean, fit, line, width
from tui.screens.page import text_body
from tui.views.headline import NAMES
from tui.views.numbers import figure, unit

WAITING = "not solved yet"
_MODE, _FIGURE, _WHEN = 22, 11, 12
_FIRST, _LAST = 0.0, 250_000_000_000.0
_LEAST_NAME, _MOST_NAME, _MOST_TITLE = 14, 30, 60


def when(seconds: float) -> str:
    """Day and time, local. seconds: since the epoch."""
    return time.strftime("%Y-%m-%d %H:%M", _local(seconds))


def _local(seconds: float) -> time.struct_time:
    """A file may claim any time; what no calendar holds is shown as the nearest that one does."""
    return time.localtime(max(_FIRST, min(seconds, _LAST)))


def _short(seconds: float) -> str:
    """Day and time of this year, else the day, in 11 columns."""
    then = _local(seconds)
    return time.strftime("%m-%d %H:%M" if then.tm_year == time.localtime().tm_year else "%Y-%m-%d", then)


def _left(text: str, room: int) -> str:
    kept = fit(clean(text), max(0, room - 1))
    return kept + " " * (room - width(kept))


def _rooms(wide: int) -> tuple[int, int]:
    """Columns of the name, which take what the others leave up to a bound, and of the title, which takes the rest."""
    spare = wide - 2 - _MODE - 2 * _FIGURE - _WHEN
    name = max(_LEAST_NAME, min(_MOST_NAME, spare))
    title = spare - name
    return (name, min(title, _MOST_TITLE)) if title >= 12 else (max(_LEAST_NAME, spare), 0)


def heads(wide: int) -> Line:
    """Heads of the columns of a folder."""
    name, title = _rooms(wide)
    words = "  " + _left("case", name) + _left("title", title) + _left("mode or status", _MODE)
    return line((words + "thrust".rjust(_FIGURE) + "Isp".rjust(_FIGURE) + "changed".rjust(_WHEN), DIM))


def row(entry: Entry, solved: Solved | None, here: bool, system: str, wide: int) -> Line:
    """One case of a folder. here: whether it is the one that is open; a star marks unsaved work."""
    name, title = _rooms(wide)
    mark = ">" if here else " "
    start = mark + ("*" if entry.held else " ") + _left(entry.name, name)
    changed = _short(entry.changed).rjust(_WHEN)
    if solved is None:
        return line(start, _left("", title), (_left(WAITING, _MODE) + " " * 2 * _FIGURE, DIM), changed)
    if solved.fault:
        room = wide - width(start) - _WHEN
        return line(start, (_left(solved.fault, room), OVER), changed)
    style = PLAIN if solved.figures is not None else NEAR
    return line(start, _left(solved.title, title), (_left(solved.state, _MODE), style), _two(solved.figures, system), changed)


def _two(figures: Mapping[str, float] | None, system: str) -> str:
    """Thrust and specific impulse in their columns; of a rig its gain, by name."""
    room = 2 * _FIGURE
    if figures is None:
        return " " * room
    words = [f"{figure(key, value, system)} {unit(key, system)}" for key, value in list(figures.items())[:2]]
    if "stream_thrust_gain" in figures:
        return fit(f"gain {words[0]}", room - 1).rjust(room)
    return "".join(fit(w, _FIGURE - 1).rjust(_FIGURE) for w in words)


def told(entry: Entry, solved: Solved | None, here: bool, system: str, wide: int) -> list[Line]:
    """What is known of the case in hand: title, headline figures or what is wrong, notes, unsaved work."""
    out: list[Line] = [line(("-" * wide, DIM))]
    if solved is None:
        return [*out, line(WAITING)]
    if solved.fault:
        more = f" ({solved.faults - 1} more faults)" if solved.faults > 1 else ""
        return [*out, *_styled(f"no case: {solved.fault}{more}", wide, 2), *_work(entry, here, wide)]
    out.append(line(fit(clean(solved.title), wide)))
    if solved.figures is None:
        out += _styled(f"NO SOLUTION: {solved.reason or solved.state}", wide, 2)
    else:
        pairs = solved.figures.items()
        words = (f"{NAMES.get(k, OUTPUT[k].label)} {figure(k, v, system)} {unit(k, system)}".rstrip() for k, v in pairs)
        out.append(line(fit("  ".join(words), wide)))
    notes = text_body([" ".join(solved.notes.split())])(wide)[:2] if solved.notes else []
    return [*out, *(tuple((text, DIM) for text, _ in row) for row in notes), *_work(entry, here, wide)]


def _styled(text: str, wide: int, most: int) -> list[Line]:
    return [tuple((words, OVER) for words, _ in row) for row in text_body([text])(wide)[:most]]


def _work(entry: Entry, here: bool, wide: int) -> list[Line]:
    return [line((fit(f"unsaved work: {work(held, here)}", wide), NEAR)) for held in entry.held[:1]]


def work(held: Held, here: bool = False) -> str:
    """Unsaved work in words. here: whether its case is the one that is open."""
    edits = f"{held.edits} edit{'' if held.edits == 1 else 's'}"
    where = "in this session" if here else "in another session"
    return f"{edits}, {when(held.written)}, {where}" if held.live else f"{edits} left on {when(held.written)}"


def recent_row(recent: Recent | None, path: str, held: Held | None, here: bool, there: bool, wide: int) -> Line:
    """One case opened before, or one with unsaved work."""
    words = work(held, here) if held is not None else f"opened {when(recent.opened)}" if recent is not None else ""
    gone = "" if there else "missing  "
    room = max(10, wide - 46)
    shown = _tail(homely(path), room - 1)
    mark = "*" if held is not None else " "
    told = (fit(words, wide - room - 2 - len(gone)), PLAIN if there else DIM)
    return line(f"{mark} ", shown + " " * (room - width(shown)), (gone, OVER), told)


def homely(path: str) -> str:
    """A path as printed, the home folder as ~."""
    home = os.path.expanduser("~")
    return clean("~" + path[len(home) :] if home != "~" and path.startswith(home + os.sep) else path)


def _tail(text: str, room: int) -> str:
    """A path cut at its start, for its end tells more."""
    while width(text) > room:
        text = "..." + text.removeprefix("...")[1:]
    return text
