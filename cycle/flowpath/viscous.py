"""Friction of an inlet by geometry: a loss of total pressure at its throat, beside that of the shocks."""

from __future__ import annotations

import numpy as np

from cycle.arrays import Array
from cycle.flow import states
from cycle.flowpath.setting import Setting
from cycle.flowpath.stream import Process, Step, Stream, status_of

VISCOUS = "viscous loss"
"""Name of the process, from station 2 to itself."""


def _entropy(throat: Stream, setting: Setting, ambient: Array) -> Array:
    """Entropy behind the loss, J/(kg K) (N,): of a share of the total pressure, or of the kinetic energy at ambient pressure."""
    gas, h = throat.gas, throat.total_enthalpy
    if setting.has("inlet.viscous_recovery"):
        total = states.rest(gas, h, throat.state.entropy)
        return gas.at("hp", h, setting["inlet.viscous_recovery"] * total.pressure).entropy
    expanded = gas.at("sp", throat.state.entropy, ambient)
    return gas.at("hp", h - setting["inlet.viscous_efficiency"] * (h - expanded.enthalpy), ambient).entropy


@np.errstate(all="ignore")
def loss(throat: Stream, setting: Setting, ambient: Array) -> Step:
    """The supersonic stream of the inlet throat behind its friction.

    throat: station 2 behind the shocks. ambient: Pa (N,). Mass, energy and area are kept, the entropy rises and the impulse falls by the
    force of the wall. over-contracted: the throat does not pass the stream any more.
    """
    entropy, h = _entropy(throat, setting, ambient), throat.total_enthalpy
    critical = states.sonic(throat.gas, h, entropy, throat.state)
    state, passes = states.at_flux(throat.gas, h, entropy, throat.flux, np.ones(h.shape, np.bool_), critical)
    behind = Stream(throat.gas, state, states.velocity(h, state), throat.mass_flow, throat.axial_factor)
    process = Process(VISCOUS, "2", "2", {"viscous_force": throat.stream_thrust - behind.stream_thrust})
    return Step(behind, process, status_of(state, (~passes, "over-contracted")))
