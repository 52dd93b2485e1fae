"""Pictures of the walk: along the duct, temperature-entropy, enthalpy-velocity, and the losses; imported when asked for."""

from __future__ import annotations

from tui.screens.desk import Desk


class Plotting(Desk, inherit_bindings=False):
    """Handlers of these actions."""

    def do_plots(self) -> None:
        """Draw the walk."""
        from tui.screens.plots import PlotsScreen

        self.app.push_screen(PlotsScreen(self))

    def do_went(self) -> None:
        """Show where the thrust went."""
        from tui.screens.went import WentScreen

        self.app.push_screen(WentScreen(self))
