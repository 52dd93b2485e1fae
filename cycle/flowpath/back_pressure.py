"""A nozzle that ends in a given pressure: what the walk follows of it, and every regime that a back pressure makes of a nozzle.

Streams in, streams out, N points at once, any gas. A point without a solution carries a fault and NaN.
Shapiro, The Dynamics and Thermodynamics of Compressible Fluid Flow (1953), ch. 5, for the relations (from memory).
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from cycle.arrays import Array, Codes, Flags
from cycle.flow import roots
from cycle.flowpath.expansion import (
    EQUAL,
    FAULT_CODE,
    PassageShock,
    blanked,
    chosen,
    faults_of,
    moved,
    recovery,
    shock_at_pressure,
    slowed,
    widened,
)
from cycle.flowpath.expansion import shocked as behind_shock
from cycle.flowpath.stream import Stream
from cycle.gas.state import State, scatter

REGIMES: dict[str, str] = {
    "unchoked": "subsonic throughout, less than the supplied mass flow passes",
    "shock-in-nozzle": "a normal shock stands between throat and exit",
    "shock-at-exit": "a normal shock stands in the exit plane",
    "over-expanded": "supersonic to the exit, compressed to the back pressure outside",
    "fully-expanded": "supersonic to the exit and at the back pressure there",
    "under-expanded": "supersonic to the exit, expanding on outside",
}
"""What a back pressure makes of a nozzle, in order of falling back pressure; regime codes count through them."""

REGIME_NAMES = tuple(REGIMES)
REGIME_CODE = {name: i for i, name in enumerate(REGIME_NAMES)}

SEPARATION_PRESSURE_RATIO = 0.4
"""Exit over ambient pressure below which an over-expanded stream leaves the wall, a rule of thumb; Summerfield, Foster and Swan,
Jet Propulsion 24 (1954) 319, who give 0.35 to 0.4 (from memory)."""

_TOLERANCE = 1e-14


@dataclass(frozen=True, slots=True)
class Held:
    """A nozzle of given exit area that the ambient pressure holds back, each (N,).

    stream: in the exit plane; the full-flowing one where no shock stands inside. shocked: whether one does. expelled: whether it
    would have to stand ahead of the entry, so that there is no such flow. behind: pressure behind a normal shock in the exit plane of the
    full-flowing nozzle, Pa, NaN where not `shocked`.
    """

    stream: Stream
    shocked: Flags
    expelled: Flags
    behind: Array


@np.errstate(all="ignore")
def held_back(entering: Stream, full: Stream, ambient: Array, follows: Stream | None = None) -> Held:
    """What the ambient pressure leaves of a closed nozzle that would flow full and supersonic.

    entering: the choked throat or the supersonic entry, in the gas of `full`. full: the exit of the full-flowing nozzle, losses
    included. ambient: Pa (N,), NaN for none. follows: where the composition freezes on the way, the stream ahead of that plane, and
    `entering` is the one in the plane.
    Where the ambient pressure exceeds that behind a normal shock in the exit plane the shock stands inside, and the exit is subsonic
    at ambient pressure. Mass flow, total enthalpy, area and pressure leave it one state, wherever the shock stands and whatever is
    lost ahead of it: a loss only moves the shock. So the exit is continuous with that behind a shock in the exit plane, and needs
    neither the place of the shock nor the line to it. The entropy tells whether the shock has a place: it falls as the shock moves
    upstream and is least with the shock in the entering stream, where a throat gives up choking. Where a shock has no place behind
    the freezing plane it stands ahead of it, and the hot slow stream behind it follows to the exit. The subsonic part has no
    losses of its own.
    """
    n = full.velocity.size
    shocked, expelled, behind = np.zeros(n, np.bool_), np.zeros(n, np.bool_), np.full(n, np.nan)
    nothing = Held(full, shocked, expelled, behind)
    tried = np.flatnonzero(ambient > _LEAST_RISE * full.state.pressure * np.maximum(full.mach, 1.0) ** 2)
    if not tried.size:
        return nothing
    front = behind_shock(full.take(tried))
    inside = ambient[tried] > front.state.pressure * (1.0 + EQUAL)
    stands = tried[inside]
    if not stands.size:
        return nothing
    shocked[stands], behind[stands] = True, front.state.pressure[inside]
    exit_ = front.take(inside)
    state, expelled[stands] = _passing(entering.take(stands), exit_, ambient[stands])
    if follows is not None and expelled.any():
        lost = np.flatnonzero(expelled[stands])
        other, expelled[stands[lost]] = _passing(follows.take(stands[lost]), exit_.take(lost), ambient[stands[lost]])
        state = scatter(state, lost, other)
    whole = scatter(full.state, stands, state)
    gas = full.gas
    if follows is not None:
        gas = follows.gas.frozen(whole)
        whole = scatter(whole, stands, gas.take(stands).at("tp", state.temperature, state.pressure).flagged(~state.good))
    velocity = full.velocity.copy()
    velocity[stands] = exit_.flux / whole.density[stands]
    return Held(replace(full, gas=gas, state=whole, velocity=velocity), shocked, expelled, behind)


def _passing(entering: Stream, behind: Stream, pressure: Array) -> tuple[State, Flags]:
    """State (N,) at `pressure` Pa with the total enthalpy and the mass flux of `behind`, in the gas of `entering`; and whether a
    shock in `entering` itself would still make more entropy."""
    state = entering.gas.at("passage", behind.total_enthalpy, behind.flux, pressure, start=behind.state)
    least = behind_shock(entering).state.entropy
    return state, state.entropy < least - _SAME_ENTROPY * np.abs(least)


_LEAST_RISE = 0.9
"""A normal shock raises the pressure at least by the square of the Mach number; a little less is asked, to be sure in any gas."""

_SAME_ENTROPY = 1e-11
"""Relative difference below which two entropies are the same one."""


def separation_margin(exit_pressure: Array, ambient_pressure: Array, threshold: float = SEPARATION_PRESSURE_RATIO) -> Array:
    """How far an exit is from leaving the wall, p9/(threshold p0) - 1, (N,), 1; negative separates.

    exit_pressure, ambient_pressure: Pa (N,). threshold: see `SEPARATION_PRESSURE_RATIO`.
    """
    return exit_pressure / (threshold * ambient_pressure) - 1.0


@dataclass(frozen=True, slots=True)
class Backed:
    """A nozzle against a back pressure, each (N,).

    regime: place in `REGIME_NAMES`, -1 where there is none. exit: the stream in the exit plane, behind the shock in
    "shock-at-exit"; its mass flow is what passes. behind: the stream behind the shock, NaN without one. shock_mach;
    shock_area_ratio over the entry; recovery: total pressure behind over ahead of the shock, 1 without one. passed: mass flow over
    the supplied one. separation_margin: see the function, of the supersonic stream that fills the nozzle. shock_margin: pressure
    behind a normal shock in the exit plane over the back pressure, less 1; negative drives it inside. fault: place in `FAULT_NAMES`.
    """

    regime: Codes
    exit: Stream
    behind: Stream
    shock_mach: Array
    shock_area_ratio: Array
    recovery: Array
    passed: Array
    separation_margin: Array
    shock_margin: Array
    fault: Codes


def against_back_pressure(entering: Stream, exit_area: Array, back_pressure: Array, threshold: float = SEPARATION_PRESSURE_RATIO) -> Backed:
    """What becomes of a sonic or supersonic stream in a widening nozzle that ends in a given pressure; without friction.

    entering: the throat (Mach 1), or a supersonic entry. exit_area: m2 (N,). back_pressure: Pa (N,). threshold: for the margin.
    Regimes in order of falling back pressure: unchoked (only from Mach 1), a normal shock inside, in the exit plane,
    over-, fully and under-expanded. A shock inside is the idealised one; a real over-expanded stream separates first, which the
    separation margin tells. Source: Shapiro (1953), ch. 5 (from memory).
    """
    with np.errstate(all="ignore"):
        full, fits = widened(entering, exit_area)
        at_exit = shock_at_pressure(entering, full.pressure)
        at_entry = shock_at_pressure(entering, entering.state.pressure)
        highest = slowed(at_entry.behind, exit_area)
        regime = _regime(back_pressure, highest.pressure, at_exit.behind.state.pressure, full.pressure)
        inside = _shock_inside(entering, exit_area, back_pressure, full.pressure, regime)
        behind = chosen(regime == REGIME_CODE["shock-in-nozzle"], inside.behind, at_exit.behind)
        ahead = chosen(regime == REGIME_CODE["shock-in-nozzle"], inside.ahead, at_exit.ahead)
        out, passed = _exits(entering, exit_area, back_pressure, full, inside, at_exit, regime)
        kept = recovery(ahead, behind)
    sonic = np.abs(entering.mach - 1.0) < 1e-6
    low = regime == REGIME_CODE["unchoked"]
    fault = faults_of(
        FAULT_CODE, (out.state,), (entering.mach < 1.0 - 1e-6, "subsonic"), (~fits, "upstream"),
        (low & ~sonic, "shock-expelled"), (low & ~(out.velocity > 0.0), "no-flow"),
    )  # fmt: skip
    bad = fault > 0
    shock = ~bad & ((regime == REGIME_CODE["shock-in-nozzle"]) | (regime == REGIME_CODE["shock-at-exit"]))
    return Backed(
        np.where(bad, -1, regime), blanked(out, bad), blanked(behind, ~shock), np.where(shock, ahead.mach, np.nan),
        np.where(shock, ahead.area / entering.area, np.nan), np.where(bad, np.nan, np.where(shock, kept, 1.0)),
        np.where(bad, np.nan, passed), np.where(bad, np.nan, separation_margin(full.pressure, back_pressure, threshold)),
        np.where(bad, np.nan, at_exit.behind.state.pressure / back_pressure - 1.0), fault,
    )  # fmt: skip


def _regime(back: Array, highest: Array, shocked: Array, full: Array) -> Codes:
    """Regime codes (N,) from the exit pressures Pa (N,): shock at the entry, shock in the exit plane, no shock."""
    rules = [
        (back > highest * (1.0 + EQUAL), "unchoked"),
        (back > shocked * (1.0 + EQUAL), "shock-in-nozzle"),
        (back >= shocked * (1.0 - EQUAL), "shock-at-exit"),
        (back > full * (1.0 + EQUAL), "over-expanded"),
        (back >= full * (1.0 - EQUAL), "fully-expanded"),
    ]
    return np.select([r for r, _ in rules], [REGIME_CODE[n] for _, n in rules], REGIME_CODE["under-expanded"]).astype(np.int64)


def _shock_inside(entering: Stream, exit_area: Array, back: Array, full: Array, regime: Codes) -> PassageShock:
    """Shock at which the exit takes the back pressure: the exit pressure falls as the shock moves downstream."""
    wanted = regime == REGIME_CODE["shock-in-nozzle"]
    high = np.log(entering.state.pressure)
    low = np.where(wanted, np.log(full), high)

    def excess(ln_p: Array) -> Array:
        found = slowed(shock_at_pressure(entering, np.exp(ln_p)).behind, exit_area)
        return np.where(wanted, np.log(found.pressure / back), 0.0)

    return shock_at_pressure(entering, np.exp(roots.bracketed(excess, low, high, _TOLERANCE)))


def _exits(
    entering: Stream, area: Array, back: Array, full: State, inside: PassageShock, at_exit: PassageShock, regime: Codes
) -> tuple[Stream, Array]:
    """The stream in the exit plane, and the mass flow that passes over the supplied one (N,)."""
    slow = moved(entering, entering.gas.at("sp", entering.state.entropy, back, start=entering.state))
    passed = np.where(regime == REGIME_CODE["unchoked"], slow.flux * area / entering.mass_flow, 1.0)
    out = moved(entering, full)
    out = chosen(regime == REGIME_CODE["shock-at-exit"], at_exit.behind, out)
    out = chosen(regime == REGIME_CODE["shock-in-nozzle"], moved(inside.behind, slowed(inside.behind, area)), out)
    out = chosen(regime == REGIME_CODE["unchoked"], slow, out)
    return replace(out, mass_flow=entering.mass_flow * passed), passed
