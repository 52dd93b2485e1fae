"""Peek: the watched figure against the input in hand, or over two inputs as a map."""

from __future__ import annotations

from dataclasses import replace

from tui.screens.desk import Desk


class Peeking(Desk, inherit_bindings=False):
    """Handlers of these actions."""

    def do_peek(self) -> None:
        """Not there yet."""
        self.put(replace(self.session, note="not there yet"))
