"""Total pressure along the flowpath, process by process: what the losses against the ideal engine are counted by."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from cycle.arrays import Array, Codes
from cycle.flow import states
from cycle.flowpath.stream import Stream
from cycle.flowpath.viscous import VISCOUS
from cycle.gas.state import State
from cycle.walk import RELEASED, March


def rest(stream: Stream) -> State:
    """Stagnation state of a stream, (N,)."""
    return states.rest(stream.gas, stream.total_enthalpy, stream.state.entropy)


def before_burning(march: March, total: Mapping[str, State], points: Codes) -> tuple[list[tuple[str, str]], list[Array]]:
    """Processes from flight to burner entry, and the total pressures between them.

    total: stagnation states at the stations, of the points that reached them. points: those asked for. Returns key and label of
    each process, and one pressure more than these, Pa (N,). Friction at the inlet throat and the release of a held composition are
    processes of their own where they are.
    """
    stations, names = march.stations(), ["0", "2", "3"]
    pressures = [total[n].take(np.searchsorted(stations[n].index, points)).pressure for n in names]
    labels = [("inlet", "inlet"), ("isolator", "isolator")]
    released = march.named(RELEASED)
    if released is not None:
        place = names.index(released.process.end)
        pressures.insert(place + 1, rest(released.taken(points).stream).pressure)
        labels.insert(place, (RELEASED.replace(" ", "_"), RELEASED))
    shocks = march.named("internal compression")
    if shocks is not None and march.named(VISCOUS) is not None:
        pressures.insert(1, rest(shocks.taken(points).stream).pressure)
        labels.insert(1, (VISCOUS.replace(" ", "_"), VISCOUS))
    return labels, pressures
