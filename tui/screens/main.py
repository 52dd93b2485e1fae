"""The main screen: the station table as the way around, the inputs of the component in hand below it."""

from __future__ import annotations

import os
from collections.abc import Callable
from dataclasses import replace
from functools import partial
from typing import ClassVar

from textual import events
from textual.app import ComposeResult
from textual.binding import BindingType
from textual.containers import Horizontal

from cycle.errors import CaseError, FileChanged
from tui import figures, items, session
from tui.actions import key_of
from tui.crash import defect
from tui.engine import Result
from tui.line import Line
from tui.screens import ducting, telling
from tui.screens.asking import Asking
from tui.screens.beside import Comparing
from tui.screens.browsing import Browsing
from tui.screens.editing import Editing
from tui.screens.filing import Filing
from tui.screens.overlay import Overlay
from tui.screens.page import Page
from tui.screens.peeking import Peeking
from tui.screens.pinning import Pinning
from tui.screens.plotting import Plotting
from tui.screens.ranking import Ranking
from tui.session import VIEWS, Session
from tui.views import headline, inputs, side, table
from tui.widgets.panel import Panel

NEEDS_NO_CASE = ("leave", "browse", "interrupt", "help", "suspend", "redraw", "units")

EVERYWHERE = ("suspend", "redraw")
"""Actions whose keys work in a field and over every screen, where they type nothing."""

WIDTHS: list[tuple[int, str]] | None = [(0, "-narrow"), (112, "-wide"), (160, "-widest")]
HEIGHTS: list[tuple[int, str]] | None = [(0, "-tiny"), (12, "-short"), (24, "-plain"), (34, "-tall")]
"""Columns and lines from which the screen has a class of its style sheet."""


class MainScreen(Editing, Filing, Peeking, Plotting, Ranking, Asking, Pinning, Comparing, Browsing, inherit_bindings=False):
    """Renders the session and sends every action to its handler `do_<name>`."""

    BINDINGS: ClassVar[list[BindingType]] = []
    ready = True
    HORIZONTAL_BREAKPOINTS = WIDTHS
    VERTICAL_BREAKPOINTS = HEIGHTS
    SCOPED_CSS = False
    DEFAULT_CSS = """
    MainScreen { layout: vertical; overflow: hidden; }
    #middle { height: 1fr; }
    #side { width: 40; display: none; }
    .-wide #side, .-widest #side { display: block; }
    .-widest #side { width: 60; }
    #headline { height: 5; } #process { height: 1; } #inputs { height: 5; } #answer { height: 1; } #keys { height: 1; }
    .-tall #inputs { height: 9; } .-tall #answer { height: 2; }
    .-short #headline { height: 3; } .-short #inputs { height: 3; } .-short #keys { display: none; }
    .-tiny #headline { height: 1; } .-tiny #inputs { height: 1; }
    .-tiny #keys { display: none; } .-tiny #process { display: none; }
    """

    def compose(self) -> ComposeResult:
        """One panel a view."""
        yield Panel("headline", headline.lines)
        with Horizontal(id="middle"):
            yield Panel("table", table.lines)
            yield Panel("side", side.lines)
        yield Panel("process", table.process_line)
        yield Panel("inputs", inputs.lines)
        yield Panel("answer", inputs.answer)
        yield Panel("keys", inputs.keys)

    def on_mount(self) -> None:
        """The empty frame first, then the worker, which imports the model."""
        self.app.app_resume_signal.subscribe(self, lambda _: self.do_redraw())
        self.call_after_refresh(self._begin)

    def _begin(self) -> None:
        self.paint_now()
        self.call_after_refresh(self._start)

    def _start(self) -> None:
        self.engine.start()
        self.take_keys()
        self._read()

    def _read(self) -> None:
        """Read the case, or list the cases where a folder was named."""
        if os.path.isdir(self.session.path):
            self.do_browse()
        else:
            self.read_case()

    def paint(self) -> None:
        """Every panel shows its part of the session and repaints what changed."""
        for panel in self.query(Panel):
            panel.render_session(self.session)

    def on_resize(self) -> None:
        """Send everything: a terminal that shrank and grew again has lost what it cut, and its size tells nothing."""
        self.refresh()

    def on_panel_resized(self) -> None:
        """A panel has a new size."""
        self.paint()

    def came_back(self, result: Result) -> None:
        """Take what the worker gave, by the kind of the job. An error that no handler expects is a defect: told, and the screen goes on."""
        if result.error is not None and not isinstance(result.error, EXPECTED.get(result.kind, ())):
            result = replace(result, error=defect(result.error))
        (FAILED if result.error is not None else HANDLERS).get(result.kind, HANDLERS[result.kind])(self, result)
        if result.kind == "read":
            self.tell_keys()

    def walked(self, result: Result) -> None:
        """A solve or an assessment came back."""
        self.came(result.generation, result.value)
        self.repaint_list()

    def not_walked(self, result: Result) -> None:
        """A solve met a defect: the case has no figures; the edit stands, and can be taken back."""
        self._defective(result, "the edit is kept", figures.defective(str(result.error)))

    def not_assessed(self, result: Result) -> None:
        """Limits and audit met a defect: none of them is known."""
        found = self.session.figures
        if found is not None:
            self._defective(result, "limits and audit; the edit is kept", figures.unassessed(found, str(result.error)))

    def _defective(self, result: Result, what: str, found: figures.Figures) -> None:
        if result.generation == self.session.generation:
            self.came(result.generation, found)
            self.repaint_list()
            self.tell_defect(f"{result.error}; {what}")

    def failed(self, result: Result) -> None:
        """What a page or a list asked for met a defect."""
        self.search_ended()
        self.session = replace(self.session, referee="" if result.kind == "referee" else self.session.referee)
        self.tell_defect(f"{result.error}; {WANTED[result.kind]}")
        self.repaint_list()

    def refereed(self, result: Result) -> None:
        """The referee's words came back."""
        if result.generation == self.session.generation:
            more = f"; {key_of(self.session.actions, 'why')} tells the rest"
            self.put(replace(self.session, referee=result.value, note=headline.verdict(result.value) + more))

    def typed(self, event: events.Key) -> None:
        """Take a key: into the field where one is open, else the action it stands for."""
        name = self.asked(event)
        if self.session.entry is not None and not self.everywhere(event):
            self.typed_in_field(self.session.entry, event)
        elif name:
            self.action_do(name)
        elif self.session.case is not None:
            self.typed_over(event)

    def everywhere(self, event: events.Key) -> bool:
        """Whether a key asks for an action that works on every screen."""
        return self.asked(event) in EVERYWHERE and not event.is_printable

    def action_do(self, name: str) -> None:
        """Run an action of `tui.actions`."""
        if self.session.case is not None or name in NEEDS_NO_CASE:
            self.session = replace(self.session, note="", faults=()) if self.session.case is not None else self.session
            handler: Callable[[], None] = getattr(self, f"do_{name}")
            handler()
        elif name == "edit":
            self._read()

    def _walk(self, steps: int) -> None:
        columns = table.columns(self.session)
        at = columns.index(self.session.station) if self.session.station in columns else 0
        self.put(replace(self.session, station=columns[max(0, min(at + steps, len(columns) - 1))]))

    def do_upstream(self) -> None:
        """One station upstream."""
        self._walk(-1)

    def do_downstream(self) -> None:
        """One station downstream."""
        self._walk(1)

    def do_first(self) -> None:
        """The first station."""
        self._walk(-len(table.ROWS))

    def do_last(self) -> None:
        """The last station."""
        self._walk(len(table.ROWS))

    def _move(self, steps: int) -> None:
        if self.session.focus == "table":
            self.put(replace(self.session, row=max(0, min(self.session.row + steps, len(table.ROWS) - 1))))
            return
        here, hand = items.items(self.session), items.in_hand(self.session)
        if hand is not None:
            at = max(0, min(here.index(hand) + steps, len(here) - 1))
            self.put(replace(self.session, inputs={**self.session.inputs, self.session.station: here[at].key}))

    def do_up(self) -> None:
        """The row or input before."""
        self._move(-1)

    def do_down(self) -> None:
        """The next row or input."""
        self._move(1)

    def do_page_up(self) -> None:
        """Rows a page up."""
        self._move(-self._page())

    def do_page_down(self) -> None:
        """Rows a page down."""
        self._move(self._page())

    def _page(self) -> int:
        height = self.query_one("#table", Panel).size.height
        return max(1, height - table.heads(height))

    def do_focus(self) -> None:
        """Between the table and the inputs."""
        self.put(replace(self.session, focus="inputs" if self.session.focus == "table" else "table"))

    def do_table(self) -> None:
        """Back to the table."""
        self.put(replace(self.session, focus="table"))

    def do_interrupt(self) -> None:
        """Say how to leave."""
        self.put(replace(self.session, note=f"{key_of(self.session.actions, 'leave')} leaves; unsaved work is kept"))

    def do_view(self) -> None:
        """Next view of the cells."""
        view = (self.session.view + 1) % len(VIEWS)
        new = replace(self.session, view=view)
        lost = "this walk has no solution" if new.failed else "no walk with a solution is pinned"
        instead = "" if table.changes_shown(new) or not view else f"; figures until then: {lost}"
        self.put(replace(new, note=f"cells: {VIEWS[view]}{instead}"))

    def do_units(self) -> None:
        """The other unit system."""
        self.put(session.toggled(self.session))

    def do_referee(self) -> None:
        """Ask the referee about the present walk."""
        found = self.session.figures
        if found is None or not found.solved or not self.session.settled:
            self.put(replace(self.session, note="no solved walk of these inputs to referee"))
            return
        self.engine.do("referee", self.session.generation, lambda: figures.referee(found))
        self.put(replace(self.session, referee="referee asked ...", note=""))

    def do_duct(self) -> None:
        """The page of the flow along the duct; the heat at the borders of its regimes is solved for when it opens."""
        found = self.session.figures
        case = self.session.case
        if found is None or case is None or case.value("combustor.process") != "duct":
            self.put(replace(self.session, note="no duct: the burner process duct gives one"))
            return
        self.ask_heat_limits()
        body, head = (partial(self._of_duct, view) for view in (ducting.duct_rows, ducting.duct_head))
        page = Page(
            "Along the duct", body, head=head, verbs={"l": lambda: page.leave("plots")}, keys="arrows scroll; l draws it; Escape goes back"
        )
        self.app.push_screen(page, lambda name: self.do_plots() if name == "plots" else None)

    def _of_duct(self, view: Callable[[Session, int], list[Line]], wide: int) -> list[Line]:
        """A part of the duct's page, of the session as it is when it is painted."""
        return view(self.session, wide)

    def bordered(self, result: Result) -> None:
        """Show the heat at which the duct's modes end, in the limits and on the page that waits for it."""
        found, got = self.session.figures, result.value
        if result.generation == self.session.generation and found is not None:
            self.put(replace(self.session, borders=got.ends, figures=replace(found, limits=got.limits)))
            if isinstance(self.app.screen, Overlay):
                self.app.screen.paint()

    def do_help(self) -> None:
        """The page of keys."""
        self.app.push_screen(Page("Keys", telling.keys(self.session, self.key_faults)))

    def do_redraw(self) -> None:
        """Paint everything afresh."""
        self.app.screen.refresh()

    def do_suspend(self) -> None:
        """Suspend to the shell; the journal is on disk already."""
        self.app.action_suspend_process()

    def on_click(self, event: events.Click) -> None:
        """A click on the table or the inputs brings the focus there (the mouse is off over SSH)."""
        if event.widget is not None and event.widget.id in ("table", "inputs"):
            self.put(replace(self.session, focus="table" if event.widget.id == "table" else "inputs"))


HANDLERS: dict[str, Callable[[MainScreen, Result], None]] = {
    "read": MainScreen.was_read,
    "replay": MainScreen.was_replayed,
    "write": MainScreen.was_written,
    "solve": MainScreen.walked,
    "assess": MainScreen.walked,
    "referee": MainScreen.refereed,
    "borders": MainScreen.bordered,
    "beside": MainScreen.fetched,
    "shares": MainScreen.shared,
    "folder": MainScreen.looked,
    "files": MainScreen.filed,
    "keep": MainScreen.pin_kept,
    "explain": MainScreen.explained,
    "influence": MainScreen.weighed,
    "limit": MainScreen.sought,
    "peek": MainScreen.peeked,
    "picture": MainScreen.picture_written,
}
"""Kind of a job -> what takes its result."""

WANTED = {
    "referee": "referee",
    "borders": "modes of the duct",
    "explain": "explanation",
    "influence": "sensitivities",
    "limit": "search for the limit",
}
"""Kind of a job that gives a value only -> what it gives, for the words where it meets a defect."""

FAILED: dict[str, Callable[[MainScreen, Result], None]] = {
    "solve": MainScreen.not_walked,
    "assess": MainScreen.not_assessed,
    **dict.fromkeys(WANTED, MainScreen.failed),
}
"""Kind of a job -> what takes its error; the other kinds have handlers that take both."""

EXPECTED: dict[str, tuple[type[BaseException], ...]] = {
    "read": (CaseError,),
    "write": (CaseError, FileChanged),
    "beside": (CaseError, OSError),
    "folder": (CaseError, OSError),
    "files": (CaseError, FileChanged, OSError),
    "keep": (OSError,),
    "picture": (CaseError,),
    "peek": (CaseError,),
}
"""Kind of a job -> errors that its handler tells the user about."""
