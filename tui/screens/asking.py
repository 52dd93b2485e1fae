"""Questions about a figure: what it is, where it stands, and any action by its name."""

from __future__ import annotations

from dataclasses import replace

from tui.screens.desk import Desk


class Asking(Desk, inherit_bindings=False):
    """Handlers of these actions."""

    def do_explain(self) -> None:
        """Not there yet."""
        self.put(replace(self.session, note="not there yet"))

    def do_find(self) -> None:
        """Not there yet."""
        self.put(replace(self.session, note="not there yet"))

    def do_palette(self) -> None:
        """Not there yet."""
        self.put(replace(self.session, note="not there yet"))
