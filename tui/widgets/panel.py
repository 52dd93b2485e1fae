"""A sheet that shows one view of the session."""

from __future__ import annotations

from collections.abc import Callable

from textual.message import Message

from tui.line import Line
from tui.session import Session
from tui.widgets.sheet import Sheet, painted

View = Callable[[Session, int, int], list[Line]]
"""Session, columns, lines -> what to show."""


class Panel(Sheet):
    """Renders a view at its own size."""

    class Resized(Message):
        """The panel has a new size and nothing painted for it yet."""

    def __init__(self, name: str, view: View) -> None:
        super().__init__(id=name)
        self._view = view

    def render_session(self, session: Session) -> None:
        """Show the session."""
        columns, height = self.size
        if columns and height:
            self.show(painted(lambda: self._view(session, columns, height), columns))

    def on_resize(self) -> None:
        """Ask for a paint."""
        self.post_message(self.Resized())
