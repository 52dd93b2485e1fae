"""The pin: any walk may be the one that changes are shown against. It is kept on disk for the next session."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

from tui import keeping, session, sources
from tui.engine import Result
from tui.line import clean
from tui.screens.fetching import Fetching, trouble
from tui.session import Pin
from tui.sources import AS_LOADED, Found, Source


class Pinning(Fetching, inherit_bindings=False):
    """Handlers of the pin."""

    _pins = 0

    def case_left(self) -> None:
        """A pin asked for the case before is not wanted any more."""
        super().case_left()
        self._pins += 1

    def case_read(self, got: Any) -> None:
        """Bring the kept pin back behind the first solve, and note the case as opened."""
        super().case_read(got)
        path, kept = self.session.path, got.pin
        if kept is not None:
            self._pin_from(lambda: (sources.kept(kept),), "the pin kept for this case is dropped")
        if path:
            self.fetching.ask(lambda: keeping.remember(path), lambda *_: None)

    def case_named(self) -> None:
        """The pin goes with the case to its new file."""
        super().case_named()
        self._pin_to_keep()

    def do_pin(self) -> None:
        """Pin the present walk."""
        self._pins += 1
        before = self.session.pin
        self.put(session.pinned(self.session))
        if self.session.pin is not before:
            self._pin_to_keep()

    def do_pin_from(self) -> None:
        """Ask which other walk to pin."""
        self.choose("Pin for changes to be shown against", self._pin_source)

    def _pin_source(self, source: Source) -> None:
        self.put(replace(self.session, note=f"{clean(source.label)} is being solved to be pinned ..."))
        self._pin_from(lambda: sources.fetch(source), "not pinned", keep=source.label != AS_LOADED or source.kind != "session")

    def _pin_from(self, job: Callable[[], tuple[Found, ...]], failing: str, keep: bool | None = None) -> None:
        """Fetch walks in the worker and pin one. keep: whether to keep it on disk, to forget the one kept, or neither (None)."""
        self._pins += 1
        asked = self._pins

        def then(found: tuple[Found, ...] | None, error: BaseException | None) -> None:
            if asked != self._pins or self.session.case is None:
                return
            if found is None:
                assert error is not None
                self._pin_failed(f"{failing}: {clean(trouble(error))}", keep)
            else:
                self.one_of(found, lambda one: self._pin_taken(one, failing, keep))

        self.fetching.ask(job, then)

    def _pin_failed(self, note: str, keep: bool | None) -> None:
        self.put(replace(self.session, note=note))
        if keep is None:
            self._pin_forgotten()

    def _pin_forgotten(self) -> None:
        """No pin is kept for this case any more."""
        path = self.session.path
        if path:
            self.engine.do("keep", 0, lambda: keeping.drop_pin(path))

    def _pin_taken(self, found: Found, failing: str, keep: bool | None) -> None:
        if not found.figures.solved:
            self._pin_failed(f"{failing}: {clean(found.label)} has no solution: {clean(found.figures.reason)}", keep)
            return
        pin = Pin(found.label, found.case, found.figures, found.stored, chosen=keep is not False)
        note = f"pinned: {clean(found.label)}" if keep is not None else self.session.note
        self.put(replace(self.session, pin=pin, note=note))
        if keep:
            self._pin_to_keep()
        elif keep is False:
            self._pin_forgotten()

    def _pin_to_keep(self) -> None:
        """Keep the pin on disk, where the user chose it; that of a case without a file waits until it has one."""
        pin, path = self.session.pin, self.session.path
        if path and pin is not None and pin.chosen:
            self.engine.do("keep", 0, lambda: sources.keep(path, pin))

    def pin_kept(self, result: Result) -> None:
        """Say where the pin is not kept."""
        if result.error is not None:
            self.put(replace(self.session, note=f"the pin is not kept for the next session: {trouble(result.error)}"))
