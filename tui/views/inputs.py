"""The inputs of the component in hand, the answer line below them, and the line of keys."""

from __future__ import annotations

from rich.style import Style

from cycle.quantities import OUTPUT
from tui.actions import key_of
from tui.items import Item, bounds, in_hand, items, way_label
from tui.line import BOLD, CURSOR, DIM, OVER, PLAIN, UNDERLINE, Line, Piece, clean, fit, line, width, wrap
from tui.rows import others, place_of
from tui.session import Entry, Session
from tui.views import moving
from tui.views.table import ROWS

NARROWEST = 38
"""Columns that one input needs for its label, its value and its mark."""


WITHOUT_CASE = ("browse", "help", "leave")
"""Actions on the line of keys where no case is open."""

LEAST_WORDS = 24
"""Columns that the last words on the input in hand need, lest they be left out."""


def per_row(wide: int) -> int:
    """Inputs side by side in a width."""
    return max(1, wide // NARROWEST)


def lines(session: Session, wide: int, height: int) -> list[Line]:
    """Inputs down the first column, then the next, scrolled so that the one in hand is in sight."""
    here, hand = items(session), in_hand(session)
    if not here:
        words = "no inputs of its own" if session.case is not None else ""
        return [line((words, DIM))]
    across = min(per_row(wide), -(-len(here) // max(1, height)))
    deep = min(height, -(-len(here) // across))
    start = _start(here, hand, across * deep, deep)
    seen = here[start : start + across * deep]
    column = (wide - (across - 1) * 3) // across
    column = min(column, 46)
    out = []
    for y in range(deep):
        pieces: list[Piece] = []
        for x in range(across):
            if (n := x * deep + y) < len(seen):
                pieces += [(" | ", DIM)] if x else []
                pieces += _item(session, seen[n], seen[n] is hand or seen[n] == hand, column)
        out.append(tuple(pieces))
    more = {0: "^" if start else "", deep - 1: "v" if start + len(seen) < len(here) else ""}
    return [_marked(row, more.get(y, ""), across * (column + 3) - 3, wide) for y, row in enumerate(out)]


def _marked(row: Line, mark: str, room: int, wide: int) -> Line:
    """The row with a mark behind it where inputs before or after these are out of sight."""
    if not mark or room >= wide:
        return row
    return (*row, (" " * (room - sum(width(text) for text, _ in row)) + mark, DIM))


def _start(here: tuple[Item, ...], hand: Item | None, page: int, deep: int) -> int:
    """First input shown: whole columns are skipped until the one in hand is in sight."""
    at = here.index(hand) if hand in here else 0
    start = 0
    while at >= start + page:
        start += deep
    return start


def _item(session: Session, item: Item, chosen: bool, column: int) -> list[Piece]:
    held = chosen and session.focus == "inputs"
    entry = session.entry if chosen and session.entry is not None else None
    mark = ">" if held else " "
    if entry is not None:
        return _field(item, entry, column)
    value = clean(item.written)
    room = column - 1 - 2 - min(width(value), 18) - 1
    value = fit(value, column - 3 - min(room, 12))
    flag = " d" if item.default else "  "
    label = fit(item.label, column - 4 - width(value)).ljust(column - 3 - width(value))
    return [(mark, PLAIN), (label, BOLD if held else PLAIN), (value, CURSOR if held else PLAIN), (flag, DIM)]


def _field(item: Item, entry: Entry, column: int) -> list[Piece]:
    """A field open in place: the caret reversed, the whole text underlined; what does not fit scrolls."""
    room = max(6, min(24, column - 10))
    label = fit(entry_label(item, entry), column - room - 2).ljust(column - room - 1)
    text = clean(entry.text) + " "
    start = max(0, entry.caret - room + 2)
    seen = text[start : start + room].ljust(room)
    at = entry.caret - start
    style = CURSOR if entry.fresh and entry.text else UNDERLINE
    caret = seen[at] if at < len(seen) else " "
    fault: list[Piece] = [("!", OVER)] if entry.fault else [(">", PLAIN)]
    return [*fault, (label, BOLD), (seen[:at], style), (caret, CURSOR), (seen[at + 1 :], UNDERLINE)]


def entry_label(item: Item, entry: Entry) -> str:
    """Label of an open field: the input's, or that of the other way that a commit switches to."""
    return way_label(*entry.switch) if entry.switch is not None else item.label


def answer(session: Session, wide: int, height: int) -> list[Line]:
    """What the program says: a fault (the line of keys goes on with it), a note, else the meaning of the input or row."""
    words, style = _words(session, wide * height)
    parts = wrap(clean(words).split(), wide)
    if session.entry is not None and session.entry.fault:
        parts = parts[:1]
    if len(parts) > height > 0:
        parts = [*parts[: height - 1], fit(" ".join(parts[height - 1 :]), wide)]
    return [line((part, style)) for part in parts[:height]]


def _words(session: Session, room: int) -> tuple[str, Style]:
    words, style = _said(session, room)
    return (f"{session.unkept} | {words}", OVER) if session.unkept and style != OVER else (words, style)


def _said(session: Session, room: int) -> tuple[str, Style]:
    if session.entry is not None and session.entry.fault:
        return session.entry.fault, OVER
    if session.faults and session.case is not None:
        return session.faults[0], OVER
    if session.note:
        return session.note, BOLD
    if session.focus == "table":
        return _row_words(session), PLAIN
    return _input_words(session, room), DIM if moving.stale(session) else PLAIN


def _row_words(session: Session) -> str:
    spec = OUTPUT[ROWS[session.row]]
    return f"{spec.label}: {spec.meaning}"


def _input_words(session: Session, room: int) -> str:
    """What a step of the input in hand does, as many figures as leave room for what comes next; then bounds, keys and meaning."""
    hand = in_hand(session)
    if hand is None:
        return ""
    ways, add, remove = (key_of(session.actions, name) for name in ("ways", "add_row", "remove_row"))
    other = f"{ways}: another way to say it" if hand.group is not None or others(hand.key) else ""
    rows = f"{add}, {remove}: a row more, less" if place_of(hand.key) is not None else ""
    if hand.input is None:
        return f"{hand.label}: {hand.written}; {other}"
    moves = [moving.of_input(session, hand.key, figures) for figures in (3, 2, 1)]
    limits = bounds(hand.input, session.system, step=not moves[0])
    rest = [words for words in (rows, limits, other, hand.input.meaning) if words]
    told = next((m for m in moves if width(f"{m} | {rest[0]}") <= room), moves[-1])
    while len(rest) > 1 and width(" | ".join((told, "; ".join(rest)))) - width(rest[-1]) + LEAST_WORDS > room:
        rest.pop()
    return " | ".join(words for words in (told, "; ".join(rest)) if words)


def keys(session: Session, wide: int, height: int) -> list[Line]:
    """The line of keys; inside a field, what closes it."""
    if session.entry is not None and len(rest := wrap(clean(session.entry.fault).split(), wide)) > 1:
        return [line((fit(" ".join(rest[1:]), wide), OVER))]
    if session.entry is not None:
        unit = f"; a bare number is in {session.entry.unit}" if session.entry.unit else ""
        return [line((fit(f"Enter commits  Escape leaves it as it was{unit}", wide), DIM))]
    room, kept = wide + 2, set()
    chosen = session.focus == "inputs"
    without = session.case is None and bool(session.faults or session.note)
    usable = [a for a in session.actions if a.label and (not without or a.name in WITHOUT_CASE)]
    for action in sorted(usable, key=lambda a: a.in_hand if chosen and a.in_hand else a.rank):
        size = len(action.shown) + len(action.label) + 3
        if size <= room:
            kept.add(action.name)
            room -= size
    return [line((fit("  ".join(f"{a.shown} {a.label}" for a in session.actions if a.name in kept), wide), DIM))]
