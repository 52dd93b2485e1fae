"""Pictures of the walk: along the duct, temperature-entropy, enthalpy-velocity, and the losses."""

from __future__ import annotations

from tui.screens.desk import Desk
from tui.screens.plots import PlotsScreen
from tui.screens.went import WentScreen


class Plotting(Desk, inherit_bindings=False):
    """Handlers of these actions."""

    def do_plots(self) -> None:
        """Draw the walk."""
        self.app.push_screen(PlotsScreen(self))

    def do_went(self) -> None:
        """Show where the thrust went."""
        self.app.push_screen(WentScreen(self))
