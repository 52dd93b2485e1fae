"""Where it went: accounts of a walk as bars from the first sum to the last, with the pinned walk's numbers beside them."""

from __future__ import annotations

import csv
import io
from collections.abc import Callable
from dataclasses import dataclass

from cycle import noise
from cycle.units import format_number, show
from tui.figures import NAN, Figures, Share
from tui.line import BOLD, DIM, PLAIN, Line, clean, fit, line
from tui.plots import Axis, Chart, Glyphs, Rule, Series, Spot
from tui.session import Session
from tui.views.pictures import pinned_walk, shown_walk

NUMBER = 10
"""Columns of a number."""

PERCENT = 7
"""Columns of the share of the first sum, or of the thrust where the parts are changes."""

LEAST_LABEL, LEAST_BAR = 20, 10
BLOCKS: dict[Glyphs, str] = {"unicode": "█", "ascii": "="}


@dataclass(frozen=True, slots=True)
class Account:
    """One account. name: on the line of tabs; key: as the walk calls it; rows: of a walk; signed: whether the parts are changes, which
    add up to the last row from nothing; else they are taken from the first row."""

    name: str
    key: str
    rows: Callable[[Figures], tuple[Share, ...]]
    signed: bool


ACCOUNTS: tuple[Account, ...] = (
    Account("losses against the ideal engine", "losses", lambda f: f.losses, False),
    Account("thrust potential", "potentials", lambda f: f.potentials, True),
    Account("exergy", "exergy", lambda f: f.exergy, False),
)


@dataclass(frozen=True, slots=True)
class Bar:
    """One row of an account in the unit shown: its words, the number, that of the pinned walk (nan where it has none), and where
    its bar begins and ends. whole: whether it is a sum and no part; change: against the pinned walk."""

    label: str
    value: float
    pinned: float
    start: float
    end: float
    whole: bool
    change: float


def bars(session: Session, account: Account) -> list[Bar]:
    """The rows of an account as bars, those that are nothing in both walks left out; [] where it is not assessed."""
    found, pin = shown_walk(session), pinned_walk(session)
    rows = account.rows(found) if found is not None else ()
    theirs = {r.label: r for r in account.rows(pin)} if pin is not None else {}
    most = noise.largest(_shown(r, session) for r in (*rows, *theirs.values()))
    out: list[Bar] = []
    level = 0.0
    for n, row in enumerate(rows):
        own = _shown(row, session)
        other = theirs.get(row.label)
        pinned = _shown(other, session) if other is not None else NAN
        if account.signed:
            whole = n == len(rows) - 1
            start, end = (0.0, own) if whole else (level, level + own)
        else:
            whole = n == 0 or (account.key == "losses" and n == len(rows) - 1)
            start, end = (0.0, own) if whole else (level, level - own)
        level = end
        if whole or any(noise.settled(v, most) for v in (own, pinned if other is not None else 0.0)):
            sign = 1.0 if whole or account.signed else -1.0
            out.append(Bar(clean(row.label), sign * own, sign * pinned, start, end, whole, noise.settled(sign * (own - pinned), most)))
    return out


def _shown(row: Share, session: Session) -> float:
    return show(row.value, row.unit, session.system)[0]


def unit_of(session: Session, account: Account) -> str:
    """Display unit of an account."""
    found = shown_walk(session)
    rows = account.rows(found) if found is not None else ()
    return show(1.0, rows[0].unit, session.system)[1] if rows else ""


def why_not(session: Session, account: Account) -> str:
    """Why an account has no rows."""
    found = session.figures
    if found is None:
        return "no walk yet"
    if not found.solved:
        return f"no solution: {found.reason}"
    if not found.assessed:
        return "being assessed ..."
    if session.case is not None and session.case.choices.get("start") == "entry":
        return "a rig has no flight thrust: the headline has its stream-thrust gain, the line of each process what it cost"
    return f"not assessed: {found.why_not.get(account.key) or 'a state it needs is out of range'}"


def lines(session: Session, account: Account, wide: int, glyphs: Glyphs) -> list[Line]:
    """The account as a table with bars: label, number, that of the pin, the change, and the bar.

    Parameters: session; account; wide, columns; glyphs, the characters. Returns: lines, the first one the heads.
    """
    rows = bars(session, account)
    pinned = any(b.pinned == b.pinned for b in rows)
    numbers = NUMBER * (3 if pinned else 1) + PERCENT
    sum_of = abs(rows[0].value if not account.signed else rows[-1].value) if rows else NAN
    longest = max((len(b.label) for b in rows), default=0) + 1
    label = max(min(LEAST_LABEL, max(8, wide - NUMBER - 1)), min(longest, wide - numbers - LEAST_BAR))
    room = max(0, wide - label - numbers - 1)
    heads = f"{unit_of(session, account):>{NUMBER}}{'%':>{PERCENT}}" + (f"{'pin':>{NUMBER}}{'change':>{NUMBER}}" if pinned else "")
    low = min([0.0, *(min(b.start, b.end) for b in rows)])
    high = max([0.0, *(max(b.start, b.end) for b in rows)])
    out: list[Line] = [line((" " * label + heads, DIM))]
    for b in rows:
        style = BOLD if b.whole else PLAIN
        change = f"{_number(b.pinned)}{_number(b.change, signed=True)}" if pinned else ""
        words = f"{fit(b.label, label - 1):<{label}}{_number(b.value)}{_percent(b.value, sum_of)}{change} "
        out.append(line((words, style), *_bar(b, low, high, room, glyphs)))
    return out


def _percent(value: float, whole: float) -> str:
    return f"{100.0 * value / whole:{PERCENT}.1f}" if whole else " " * PERCENT


def _number(value: float, signed: bool = False) -> str:
    sign = "+" if signed and value >= 0.0 else ""
    texts = [sign + format_number(value, digits) for digits in (4, 3, 2)] if value == value else ["-"]
    return next((text for text in texts if len(text) < NUMBER), texts[-1]).rjust(NUMBER)


def _bar(b: Bar, low: float, high: float, room: int, glyphs: Glyphs) -> Line:
    """Blanks, then the bar: at least one cell."""
    if room < 2 or high <= low:
        return ()
    first, last = sorted(round((v - low) / (high - low) * room) for v in (b.start, b.end))
    first = min(first, room - 1)
    mark = BLOCKS[glyphs] if b.whole or b.start >= b.end else "+" if glyphs == "ascii" else "▒"
    return line(" " * first, (mark * max(1, last - first), BOLD if b.whole else PLAIN))


def chart(session: Session, account: Account) -> Chart:
    """The account as a chart: what is left behind each process, for a file."""
    rows = bars(session, account)
    x: list[float] = []
    y: list[float] = []
    for n, b in enumerate(rows):
        x += [float(n), float(n + 1)]
        y += [b.end, b.end]
    unit = unit_of(session, account)
    spots = tuple(Spot(n + 0.5, b.end, str(n + 1), f"{b.label} {format_number(b.value, 4)} {unit}".strip()) for n, b in enumerate(rows))
    title = f"{account.name}: {clean(session.case.title) if session.case is not None else ''}"
    rules = (Rule("y", 0.0, "nothing", "place"),) if any(b.end < 0.0 for b in rows) else ()
    return Chart(title, Axis("row of the account"), Axis(account.name, unit, include=(0.0,)),
                 (Series("left behind each row", tuple(x), tuple(y), "now"),), rules, spots)  # fmt: skip


def table_csv(session: Session, account: Account) -> str:
    """The account as comma-separated values: row, number, that of the pin and the change, in the unit shown."""
    out = io.StringIO()
    writer = csv.writer(out)
    unit = unit_of(session, account)
    writer.writerow(["row", *(f"{head}, {unit}" if unit else head for head in ("value", "pinned", "change"))])
    for b in bars(session, account):
        known = b.pinned == b.pinned
        writer.writerow([b.label, repr(b.value), repr(b.pinned) if known else "", repr(b.change) if known else ""])
    return out.getvalue()
