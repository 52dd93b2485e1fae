"""What moves the walk and what limits it: sensitivities of every input, limits and the way to them."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from cycle.quantities import OUTPUT, input_of
from tui import figures, items
from tui.engine import Result
from tui.line import Line
from tui.screens import telling
from tui.screens.desk import Desk
from tui.screens.page import Answer, Page, text_body
from tui.screens.roster import Choice, Roster, Verb
from tui.session import ASSESSING, Influence, influenced, performance_keys, watched
from tui.views import margins, moving

if TYPE_CHECKING:
    from cycle.case import Case
    from cycle.limit_solving import Reached


@dataclass(frozen=True, slots=True)
class Seeking:
    """A search for the value at which a limit is reached. number: which search of the session it is; case: whose; steps: its pieces, run
    in the worker only; done: how many came back."""

    number: int
    case: Case
    limit: str
    key: str
    steps: Iterator[Reached | None]
    done: int = 0


class Ranking(Desk, inherit_bindings=False):
    """Handlers of these actions."""

    _seeking: Seeking | None = None
    _searches = 0
    _wanted: tuple[str, str] | None = None
    """Limit and input of a search that waits until the limits are those of the case."""

    def do_influence(self) -> None:
        """The list of all inputs by what their step does to the watched figure."""
        verbs = (Verb("enter", "Enter", "go to it"), Verb("g", "g", "graph"), Verb("y", "y", "next figure", stays=True))
        list_ = Roster(
            "What moves it: one step of each input",
            lambda wide, text: _choices(moving.rows(self.session, wide)),
            verbs,
            head=lambda wide: moving.head(self.session, wide),
            told=lambda name, wide: moving.told(self.session, name, wide),
            act=lambda key, name: self._watch_next(),
        )
        self.app.push_screen(list_, self._influence_done)

    def _influence_done(self, chosen: tuple[str, str] | None) -> None:
        key, name = chosen or ("", "")
        if name:
            self._to_input(name)
        if key == "g":
            self.action_do("peek")

    def do_watch(self) -> None:
        """Watch the next headline figure."""
        self._watch_next()
        self.put(replace(self.session, note=f"watched: {OUTPUT[watched(self.session)].label}"))

    def _watch_next(self) -> None:
        keys = performance_keys(self.session)
        self.put(replace(self.session, watched=keys[(keys.index(watched(self.session)) + 1) % len(keys)]))

    def weighed(self, result: Result) -> None:
        """Take sensitivities that came back; stale ones are dropped."""
        new = influenced(self.session, Influence(result.generation, result.value))
        if new is not self.session:
            self.session = new
            self.paint_spaced()
            self.repaint_list()

    def repaint_list(self) -> None:
        """An open list shows what came."""
        if isinstance(self.app.screen, Roster):
            self.app.screen.paint()

    def do_why(self) -> None:
        """The list of limits with the least margin first."""
        verbs = (
            Verb("enter", "Enter", "its input"),
            Verb("s", "s", "solve for the limit", stays=True),
            Verb("o", "o", "by another input", stays=True),
            Verb("a", "a", "accounts", stays=True),
        )
        list_ = Roster(
            "Limits by margin",
            lambda wide, text: _choices(margins.rows(self.session, wide)),
            verbs,
            head=lambda wide: margins.head(self.session, wide),
            told=self._limit_told,
            act=lambda key, name: LIMIT_VERBS[key](self, name),
        )
        self.app.push_screen(list_, self._limits_done)
        self.ask_heat_limits()

    def _limit_told(self, name: str, wide: int) -> list[Line]:
        return margins.told(self.session, name, wide, self._search_words(name))

    @property
    def _limits_known(self) -> bool:
        """Whether the limits listed are those of the case: the one before may have others."""
        found = self.session.figures
        return found is not None and self.session.settled and found.assessed

    def _search_words(self, name: str) -> str:
        search = self._seeking
        if search is not None and search.limit == name:
            return f"solving for {_label(search.key)} at margin 0 ... {search.done} batches of walks done"
        if self._wanted is not None and self._wanted[0] == name:
            return ASSESSING
        goto = margins.limit(self.session, name)
        return (
            f"its input: {_label(goto.input)} ({goto.input})"
            if goto is not None and goto.input
            else "no input of its own; o takes one to solve by"
        )

    def _limits_done(self, chosen: tuple[str, str] | None) -> None:
        self.search_ended()
        key, name = chosen or ("", "")
        goto = margins.limit(self.session, name) if key else None
        if goto is None:
            return
        if not self._to_input(goto.input):
            self.put(replace(self.session, note=f"{goto.label}: no input of its own; {goto.restore}"))

    def accounts(self, name: str) -> None:
        """The page of audit, referee, where the thrust went, and figures without a value."""
        self.app.push_screen(Page("Audit, referee and where the thrust went", telling.accounts(self.session)))

    def solve_limit(self, name: str) -> None:
        """Search for the value of the limit's own input, or of the one in hand, at which its margin is zero."""
        case, goto = self.session.case, margins.limit(self.session, name)
        if case is None or goto is None:
            return
        hand = items.in_hand(self.session)
        asked = (goto.input, hand.key if hand is not None else "")
        numeric = {key for key, _ in margins.numbers(self.session, 0, "")}
        own = next((key for key in asked if key in numeric), "")
        if own:
            self._seek(name, own)
        else:
            self.solve_by(name)

    def solve_by(self, name: str) -> None:
        """Ask by which input to reach the limit, then search along that one."""
        rows = lambda wide, text: _choices(margins.numbers(self.session, wide, text))  # noqa: E731
        list_ = Roster("Reach the limit by which input?", rows, (Verb("enter", "Enter", "solve by it"),), typing=True)
        self.app.push_screen(list_, lambda chosen: self._seek(name, chosen[1]) if chosen and chosen[1] else None)

    def _seek(self, name: str, key: str) -> None:
        case = self.session.case
        assert case is not None
        self._wanted = None if self._limits_known else (name, key)
        if self._wanted is not None or margins.limit(self.session, name) is None:
            self.repaint_list()
            return
        self._searches += 1
        self._seeking = Seeking(self._searches, case, name, key, figures.reaching(case, name, key))
        self._ask_on(self._seeking)
        self.repaint_list()

    def came(self, generation: int, found: figures.Figures) -> None:
        """A walk, or its limits: a search that waited for them begins."""
        super().came(generation, found)
        if self._wanted is not None and self._limits_known:
            self._seek(*self._wanted)

    def _ask_on(self, search: Seeking) -> None:
        self.engine.newest("limit", search.number, lambda: next(search.steps))

    def sought(self, result: Result) -> None:
        """Take a piece of a search: ask for the next one, or show what was found. Pieces of a search left are dropped."""
        search = self._seeking
        if search is None or result.generation != search.number:
            return
        if search.case is not self.session.case:
            self._seeking = None
            return
        if result.value is None:
            self._seeking = replace(search, done=search.done + 1)
            self._ask_on(self._seeking)
        else:
            self._seeking = None
            self.repaint_list()
            self._offer_value(result.value)
            return
        self.repaint_list()

    def _offer_value(self, found: Reached) -> None:
        """Show what a search found, and take it as an edit where that is wanted."""
        case = self.session.case
        assert case is not None
        head, *said = margins.found_words(self.session, case, found)
        takes = (Answer("t", "take", f"take it: {found.input.label}"),) if found.kind in ("zero", "jump") else ()
        answers = (*takes, Answer("l", "", "leave the case as it is"))
        self.app.push_screen(Page(head, text_body(said), answers), lambda name: self._value_answered(found, bool(name)))

    def search_ended(self) -> None:
        """No search goes on."""
        self._seeking = self._wanted = None

    def _value_answered(self, found: Reached, taken: bool) -> None:
        """Take the value found as an edit, or not; the list below shows what holds then."""
        case = self.session.case
        assert case is not None
        if taken:
            self.change(items.completed({"set": {found.input.key: margins.written(case, found)}}, case, {}))
        self.repaint_list()


def _label(key: str) -> str:
    """Label of an input."""
    declared = input_of(key)
    return declared.label if declared is not None else key


def _choices(rows: list[tuple[str, Line]]) -> list[Choice]:
    return [Choice(name, shown) for name, shown in rows]


LIMIT_VERBS: dict[str, Callable[[Ranking, str], None]] = {
    "s": Ranking.solve_limit,
    "o": Ranking.solve_by,
    "a": Ranking.accounts,
}
"""Keys of the list of limits that leave it open -> what they do with the limit in hand."""
