"""The pin, and walks beside each other."""

from __future__ import annotations

from dataclasses import replace

from tui.screens.desk import Desk


class Pinning(Desk, inherit_bindings=False):
    """Handlers of these actions."""

    def do_pin_from(self) -> None:
        """Not there yet."""
        self.put(replace(self.session, note="not there yet"))

    def do_compare(self) -> None:
        """Not there yet."""
        self.put(replace(self.session, note="not there yet"))
