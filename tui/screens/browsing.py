"""The cases of a folder."""

from __future__ import annotations

from dataclasses import replace

from tui.screens.desk import Desk


class Browsing(Desk, inherit_bindings=False):
    """Handlers of these actions."""

    def do_browse(self) -> None:
        """Not there yet."""
        self.put(replace(self.session, note="not there yet"))
