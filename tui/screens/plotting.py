"""Pictures of the walk: along the duct, temperature-entropy, enthalpy-velocity, and the losses."""

from __future__ import annotations

from dataclasses import replace

from tui.screens.desk import Desk


class Plotting(Desk, inherit_bindings=False):
    """Handlers of these actions."""

    def do_plots(self) -> None:
        """Not there yet."""
        self.put(replace(self.session, note="not there yet"))

    def do_went(self) -> None:
        """Not there yet."""
        self.put(replace(self.session, note="not there yet"))
