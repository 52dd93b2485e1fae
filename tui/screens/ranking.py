"""What moves the walk and what limits it: sensitivities of every input, limits and the way to them."""

from __future__ import annotations

from dataclasses import replace

from cycle.quantities import OUTPUT
from tui.screens.desk import Desk
from tui.session import performance_keys, watched


class Ranking(Desk, inherit_bindings=False):
    """Handlers of these actions."""

    def do_influence(self) -> None:
        """Not there yet."""
        self.put(replace(self.session, note="not there yet"))

    def do_watch(self) -> None:
        """Watch the next headline figure."""
        keys = performance_keys(self.session)
        key = keys[(keys.index(watched(self.session)) + 1) % len(keys)]
        self.put(replace(self.session, watched=key, note=f"watched: {OUTPUT[key].label}"))
