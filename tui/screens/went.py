"""The screen of the losses: from the ideal thrust to this one, by process."""

from __future__ import annotations

from collections.abc import Callable
from typing import ClassVar

from tui import writing
from tui.line import BOLD, CURSOR, PLAIN, Line, clean, fit, line, wrap
from tui.plots import Chart, Grid
from tui.plots.svg import svg
from tui.screens.desk import Desk
from tui.screens.picture import Picture
from tui.views import went


class WentScreen(Picture):
    """Shows an account of the session's walk as bars and numbers."""

    KEYS: ClassVar[dict[str, str]] = {
        "left": "do_before", "right": "do_next", "tab": "do_next", "shift+tab": "do_before", "t": "do_units", "w": "do_write",
        **{str(n + 1): "do_pick" for n in range(len(went.ACCOUNTS))},
    }  # fmt: skip
    WORDS = "left right account  t units  w file  Esc back"

    def __init__(self, desk: Desk) -> None:
        super().__init__(desk)
        found = desk.session.figures
        none = found is not None and found.assessed and not found.losses and bool(found.potentials)
        self._at = 1 if none else 0

    @property
    def account(self) -> went.Account:
        """The account in hand."""
        return went.ACCOUNTS[self._at]

    def drawn(self) -> list[Chart | Grid]:
        """The account as it goes to a file."""
        return [went.chart(self.desk.session, self.account)] if went.bars(self.desk.session, self.account) else []

    def head(self, wide: int) -> list[Line]:
        """The accounts, the one in hand marked, and the case."""
        case = self.desk.session.case
        tabs = [(f" {n + 1} {a.name} ", CURSOR if n == self._at else PLAIN) for n, a in enumerate(went.ACCOUNTS)]
        return [line(*tabs), line((fit(clean(case.title) if case is not None else "", wide), BOLD))]

    def body(self, wide: int, lines: int) -> list[Line]:
        """The table with its bars, or why there is none."""
        if not went.bars(self.desk.session, self.account):
            return [line(part) for part in wrap(clean(went.why_not(self.desk.session, self.account)).split(), wide)][:lines]
        return went.lines(self.desk.session, self.account, wide, self.glyphs)[:lines]

    def files(self) -> tuple[str, Callable[[], tuple[str, str]]] | None:
        """The account as a chart, and its rows."""
        session, account = self.desk.session, self.account
        if not went.bars(session, account):
            return None
        name = writing.plain_name(session.case.name if session.case is not None else "", account.key)
        return name, lambda: (svg(went.chart(session, account)), went.table_csv(session, account))

    def do_next(self) -> None:
        """The next account."""
        self._at = (self._at + 1) % len(went.ACCOUNTS)

    def do_before(self) -> None:
        """The account before."""
        self._at = (self._at - 1) % len(went.ACCOUNTS)

    def do_pick(self) -> None:
        """The account of the number typed."""
        self._at = int(self.key) - 1
