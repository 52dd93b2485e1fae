"""Peek: the watched figure against the input in hand, or over two inputs as a map.

What draws is imported when a picture is asked for: it is not needed for the first paint.
"""

from __future__ import annotations

from dataclasses import replace

from tui.engine import Result
from tui.items import in_hand
from tui.screens.desk import Desk


class Peeking(Desk, inherit_bindings=False):
    """Handlers of these actions."""

    def do_peek(self) -> None:
        """Draw the watched figure against the input in hand."""
        from tui import peek
        from tui.screens.peek import PeekScreen

        start = peek.opened(self.session)
        if start is None:
            self.put(replace(self.session, note=peek.drawable(in_hand(self.session), self.session.actions)))
            return
        self.app.push_screen(PeekScreen(self, start))

    def peeked(self, result: Result) -> None:
        """Hand a piece of a sweep to the peek that waits for it."""
        from tui.screens.peek import PeekScreen

        for screen in self.app.screen_stack:
            if isinstance(screen, PeekScreen):
                screen.solved(result)

    def picture_written(self, result: Result) -> None:
        """Tell the picture that was written where its files are."""
        from tui.screens.picture import Picture

        for screen in self.app.screen_stack:
            if isinstance(screen, Picture):
                screen.was_written(result)
