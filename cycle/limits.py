"""How far the walk is from what ends it, and which input moves it away.

A margin is (allowed - actual)/allowed, with the sign reversed for a lower limit: positive is safe. What the case lacks
the data for reads "not assessed" and is never shown as fine.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from cycle.account import injection_pressure, spread
from cycle.arrays import Array, Codes, Flags
from cycle.flow import limits as laws
from cycle.flow.limits import MACH_LOSS_DATA
from cycle.flowpath import assembly, expansion, inlet_limits, isolator_limits
from cycle.flowpath.inlet_geometry import Inlet
from cycle.flowpath.inlet_limits import Bound
from cycle.flowpath.setting import Setting
from cycle.flowpath.stream import Stream
from cycle.gas.species import HIGHEST, LOWEST
from cycle.walk import March

NEAR = 0.1
"""Margin below which a limit is called near; common practice."""

DISSOCIATION = 2200.0
"""Temperature above which a gas without dissociation is out of its range, K; common practice."""


@dataclass(frozen=True, slots=True)
class Limit:
    """One limit of N points: actual and allowed figure (N,), margin (N,), NaN where not assessed.

    upper: whether `allowed` is an upper limit, one for all or (N,). restore: what would give margin back; input: the case key to go to.
    missing: why it is not assessed. note: what is to be known of the limit in any state.
    """

    key: str
    label: str
    actual: Array
    allowed: Array
    unit: str
    upper: bool | Flags
    restore: str
    input: str
    missing: str = ""
    note: str = ""

    @property
    def margin(self) -> Array:
        """(allowed - actual)/allowed, sign reversed for a lower limit."""
        with np.errstate(all="ignore"):
            room = (self.allowed - self.actual) / np.abs(self.allowed)
        return np.where(self.upper, room, -room)


def state_of(margin: float) -> str:
    """ok, near, over, or not assessed."""
    if np.isnan(margin):
        return "not assessed"
    if margin < 0.0:
        return "over"
    return "near" if margin < NEAR else "ok"


def limits(walked: March, largest_heat: Array | None = None, cause: str = "") -> tuple[Limit, ...]:
    """All limits of a march, in fixed order. largest_heat: (N,) the heat input at which the burner chokes, or a duct has no solution any
    more, where solved for; cause: what sets it in a duct."""
    flight = _flight(walked) if walked.named("flight") is not None else ()
    return (
        *flight,
        *_burner(walked),
        _fuel_supply(walked),
        _heat(walked, largest_heat, cause),
        *_hot(walked),
        *_nozzle(walked),
        *_inlet_geometry(walked),
        *_viscous(walked),
        *_modes(walked),
        *_isolator(walked),
    )


def _at(walked: March, station: str, figure: str) -> Array:
    record = walked.stations().get(station)
    if record is None:
        return np.full(walked.setting.size, np.nan)
    return spread(walked, record.index, getattr(record.stream.state, figure))


def _flight(walked: March) -> tuple[Limit, ...]:
    setting, record = walked.setting, walked.records[0]
    q = spread(walked, record.index, 0.5 * record.stream.state.density * record.stream.velocity**2)
    place = setting.choices["flight.place"]
    key = {"altitude": "flight.altitude", "dynamic_pressure": "flight.dynamic_pressure", "pressure": "flight.pressure"}[place]
    return (
        Limit("corridor_low", "flight corridor, lowest q", q, setting["limits.dynamic_pressure_low"], "pressure", False,
              "fly lower or faster", key),
        Limit("corridor_high", "flight corridor, highest q", q, setting["limits.dynamic_pressure_high"], "pressure", True,
              "fly higher or slower", key),
    )  # fmt: skip


def _inlet_key(setting: Setting) -> str:
    if setting.choices["start"] == "entry":
        return "entry.pressure"
    end = setting.choices.get("inlet.end")
    return "flight.mach" if end is None else f"inlet.{end}"


def _burner(walked: March) -> tuple[Limit, ...]:
    setting = walked.setting
    key = _inlet_key(setting)
    entry = key == "entry.pressure"
    hotter = "raise the entry temperature" if entry else "compress more or fly faster"
    denser = "raise the entry pressure" if entry else "compress more or fly lower"
    fast = _entry_mach(walked)
    held = np.where(fast > 1.0, 1.0, np.nan)
    missing = "a subsonic burner has its flameholder" if np.any(fast <= 1.0) else ""
    T3, p3 = (held * _at(walked, "3", figure) for figure in ("temperature", "pressure"))
    goto = "entry.temperature" if entry else key
    lit = [
        Limit("ignition_temperature", "self-ignition, T3", T3, setting["limits.ignition_temperature"], "temperature", False, hotter, goto,
              missing, "a threshold, not a delay"),
        Limit("ignition_pressure", "self-ignition, p3", p3, setting["limits.ignition_pressure"], "pressure", False, denser, key, missing),
    ]  # fmt: skip
    if setting.fuel is not None and set(setting.fuel.atoms) == {"H"}:
        late = np.where(p3 > SLOW_ABOVE, T3, np.nan)
        why = missing or "below 100 kPa hydrogen lights ahead of its second limit"
        lit.append(
            Limit("slow_ignition", "slow ignition of hydrogen, T3", late, SLOW_BELOW * np.ones(setting.size), "temperature", False,
                  f"{hotter}, or burn at a lower pressure", goto, why, "above 100 kPa; a threshold, not a delay"),
        )  # fmt: skip
    return (*lit, _burner_separation(walked, fast))


SLOW_ABOVE, SLOW_BELOW = 100e3, 1050.0
"""Pressure, Pa, from which hydrogen lights slowly, beyond its second explosion limit, and the temperature, K, that ends it; common
practice."""


def _entry_mach(walked: March) -> Array:
    """Mach number at the burner entry, (N,)."""
    record = walked.stations().get("3")
    return np.full(walked.setting.size, np.nan) if record is None else spread(walked, record.index, record.stream.mach)


_NO_SEPARATION = {
    "duct": "a duct has its own limit, the peak of its attached march",
    "constant-pressure": "at constant pressure no pressure rise separates the flow",
    "pressure-loss": "a stated loss of total pressure says nothing of the pressure along the burner",
}


def _burner_separation(walked: March, fast: Array) -> Limit:
    """Pressure rise of a supersonic burner of constant area against what separates its boundary layer: fast, the Mach number at 3 (N,).
    Korkegi (1975), as in a duct."""
    setting, process = walked.setting, walked.setting.choices["combustor.process"]
    rise = np.where(fast > 1.0, _at(walked, "4", "pressure") / _at(walked, "3", "pressure"), np.nan)
    own = setting.get("combustor.separation_limit", np.nan)
    allowed = np.where(np.isnan(own), laws.separation_pressure_ratio(fast), own)
    missing = _NO_SEPARATION.get(process, "a subsonic burner has no supersonic flow to separate" if np.any(fast <= 1.0) else "")
    nothing = np.full(setting.size, np.nan)
    return Limit("burner_separation", "burner separation, p4/p3", nothing if process in _NO_SEPARATION else rise, allowed, "ratio", True,
                 "less heat, or combustor.process = duct with an area that opens", heat_key(setting), missing)  # fmt: skip


def _fuel_supply(walked: March) -> Limit:
    """The pressure against which the fuel enters; its supply stands no lower."""
    setting, given = walked.setting, "fuel.supply_pressure"
    missing = "no fuel enters" if setting.has(given) else f"{given} is not given"
    return Limit("fuel_supply", "fuel supply, burner pressure", injection_pressure(walked), setting.get(given, np.nan), "pressure", True,
                 "a higher fuel.supply_pressure or less compression", given, missing)  # fmt: skip


_HEAT_WORDS = {
    "equivalence_ratio": ("equivalence ratio", "ratio"),
    "fuel_air_ratio": ("fuel-air ratio", "ratio"),
    "exit_total_temperature": ("exit total temperature", "temperature"),
}


def heat_key(setting: Setting) -> str:
    """The case key that says the heat."""
    return f"combustor.{setting.choices['combustor.heat']}"


def heat_words(setting: Setting) -> tuple[str, str]:
    """Label and dimension of the heat input."""
    return _HEAT_WORDS[setting.choices["combustor.heat"]]


def _heat(walked: March, largest: Array | None, cause: str) -> Limit:
    """The largest heat: before thermal choking of a simple burner, before a duct unstarts or has no mode."""
    setting, key = walked.setting, heat_key(walked.setting)
    label, unit = heat_words(setting)
    duct = setting.choices["combustor.process"] == "duct"
    allowed = np.full(setting.size, np.nan) if largest is None else np.where(np.isinf(largest), np.nan, largest)
    if largest is None:
        missing = "solved for when asked"
    else:
        missing = (
            "not reached within the range of the input" if np.isinf(largest).any() or not duct else "not known: the heat is no fuel ratio"
        )
    if not duct:
        less = "less heat, a faster burner entry (less compression), or a larger burner area"
        return Limit("thermal_choking", f"thermal choking, {label}", setting[key], allowed, unit, True, less, key, missing)
    less = "a longer isolator or less heat" if cause == "isolator length" else "less heat, or a larger burner area behind the injection"
    words = f"unstart by {cause}, {label}" if cause else f"unstart, {label}"
    return Limit("unstart_heat", words, setting[key], allowed, unit, True, less, key, missing)


def _hot(walked: March) -> tuple[Limit, ...]:
    setting = walked.setting
    found = [_at(walked, name, "temperature") for name in walked.stations()]
    nothing = np.full(setting.size, np.nan)
    hottest, coldest = np.fmax.reduce([nothing, *found]), np.fmin.reduce([nothing, *found])
    key = heat_key(setting)
    missing = "limits.gas_temperature is not given"
    rows = [
        Limit("gas_temperature", "gas temperature", hottest, setting.get("limits.gas_temperature", np.nan), "temperature", True,
              "less heat or less compression", key, missing),
    ]  # fmt: skip
    whole = np.ones(setting.size)
    if setting.choices["gas.model"] != "equilibrium":
        rows.append(Limit("model_range", "gas without dissociation", hottest, DISSOCIATION * whole, "temperature", True,
                          "use gas.model = equilibrium", "gas.model"))  # fmt: skip
    if not setting.constant_gamma:
        rows += [
            Limit("data_high", "species data, highest T", hottest, HIGHEST * whole, "temperature", True, "less heat", key),
            Limit("data_low", "species data, lowest T", coldest, LOWEST * whole, "temperature", False,
                  "a warmer day or exit", "flight.altitude"),
        ]  # fmt: skip
    return tuple(rows)


def _nozzle(walked: March) -> tuple[Limit, ...]:
    if walked.named("flight") is None or walked.setting.choices["nozzle.exit"] == "absent":
        return ()
    setting = walked.setting
    key = f"nozzle.{setting.choices['nozzle.exit']}"
    station = "9" if walked.reached("9") is not None else "10"
    ambient = _at(walked, "0", "pressure")
    # with a shock inside, the exit has left the state that the two limits speak of
    full, shocked = (walked.figure("nozzle", f"{name}_pressure") for name in ("full_flow", "exit_shock"))
    inside = np.isfinite(shocked)
    behind = np.where(inside, shocked, _behind_exit_shock(walked, station))
    ratio = np.where(inside, full, _at(walked, station, "pressure")) / ambient
    restore = "a smaller exit or a higher exit pressure"
    return (
        Limit("nozzle_separation", f"nozzle separation, p{station}/p0", ratio, setting["limits.nozzle_separation"], "ratio", False,
              restore, key),
        Limit("nozzle_shock", f"shock in the nozzle, p0 over p{station} behind it", ambient / behind, np.ones(setting.size), "ratio", True,
              restore, key, "no supersonic exit"),
    )  # fmt: skip


def _behind_exit_shock(walked: March, station: str) -> Array:
    """Pressure behind a normal shock in the exit plane, Pa (N,); above it in the ambient a shock stands in the nozzle."""
    record = walked.stations().get(station)
    if record is None:
        return np.full(walked.setting.size, np.nan)
    stream, found = record.stream, np.full(record.index.size, np.nan)
    fast = np.flatnonzero(stream.mach > 1.0 - expansion.WEAK)
    if fast.size:
        found[fast] = expansion.shocked(stream.take(fast)).state.pressure
    return spread(walked, record.index, found)


def _share(walked: March, key: str, label: str, margin: Array, restore: str, goto: str, missing: str) -> Limit:
    """A limit that a process gives as a margin: actual is 1 - margin of what is allowed."""
    return Limit(key, label, 1.0 - margin, np.ones(walked.setting.size), "ratio", True, restore, goto, missing)


def _inlet_geometry(walked: March) -> tuple[Limit, ...]:
    """Attached shocks, separation in the inlet and the start of its internal contraction."""
    setting, flight = walked.setting, walked.named("flight")
    if flight is None:
        return ()
    nothing = np.full(setting.size, np.nan)
    lacking = (
        ("attached", "attached inlet shocks", "needs inlet geometry"),
        ("separation", "shock separation in the inlet", "needs inlet geometry"),
        ("start", "inlet start", "needs the internal contraction of an inlet geometry"),
        ("shock_on_lip", "shock on lip, flight Mach number", "needs the inlet's lip"),
    )
    missing = tuple(Limit(k, label, nothing, nothing, "ratio", True, why, "", why) for k, label, why in lacking)
    if setting.choices.get("inlet.quality") != "geometry" or not flight.index.size:
        return missing
    inlet = assembly.solved_inlet(_whole_capture(walked), setting.take(flight.index))
    found = (*inlet_limits.bounds(inlet), *_shock_on_lip(walked, setting.take(flight.index), inlet))
    key = {"ramp": "inlet.ramp.1.angle", "cone": "inlet.cone.half_angle", "isentropic_ramp": "inlet.isentropic_ramp.turning"}
    goto = key[setting.choices["inlet.compression"]]
    words = {"attached": "less turning or a faster flight", "separation": "more and weaker shocks", "start": "less internal contraction",
             "shock_on_lip": "fly slower, or a lip further back or lower: the shock enters the cowl, which is not followed"}  # fmt: skip
    rows = []
    for name, label, why in lacking:
        own = [b for b in found if b.key == name]
        if not own:
            why = "no such shock meets a boundary layer" if name == "separation" else why
            rows.append(Limit(name, label, nothing, nothing, "ratio", True, "", "", why))
            continue
        to = {"start": "inlet.internal_contraction", "shock_on_lip": "flight.mach"}.get(name, goto)
        rows.append(_worst(walked, flight.index, own, label, words[name], to))
    return tuple(rows)


def _shock_on_lip(walked: March, setting: Setting, inlet: Inlet) -> list[Bound]:
    """Whether the first external shock meets the lip or enters the cowl; setting, inlet: of the points in flight."""
    if setting.choices.get("inlet.lip") != "lip":
        return []
    angle = "inlet.cone.half_angle" if setting.choices["inlet.compression"] == "cone" else "inlet.ramp.1.angle"
    return [inlet_limits.shock_on_lip(_whole_capture(walked), inlet, setting[angle], setting["inlet.lip_x"], setting["inlet.lip_y"])]


def _viscous(walked: March) -> tuple[Limit, ...]:
    """The range of the correlation that says the quality of the inlet."""
    if walked.setting.choices.get("inlet.quality") != "viscous_correlation":
        return ()
    two, flight = walked.stations().get("2"), walked.named("flight")
    slowed = np.full(walked.setting.size, np.nan)
    if two is not None and flight is not None:
        slowed = spread(walked, two.index, two.stream.mach / flight.taken(two.index).stream.mach)
    row = isolator_limits.within("viscous_data", "viscous correlation, M2/M0", slowed, MACH_LOSS_DATA, _inlet_key(walked.setting))
    restore = "beyond the data: the efficiency is an extrapolation"
    return (Limit(row.key, row.label, row.actual, row.allowed, "ratio", row.upper, restore, row.input, "no such state"),)


def _worst(walked: March, index: Codes, own: list[Bound], label: str, restore: str, goto: str) -> Limit:
    """Of the bounds of one kind the one with least margin at each point; named in the label where all points agree."""
    margins = np.array([np.where(np.isnan(b.margin), np.inf, b.margin) for b in own])
    which, every = np.argmin(margins, axis=0), np.arange(index.size)
    actual, allowed = (spread(walked, index, np.array([getattr(b, name) for b in own])[which, every]) for name in ("actual", "allowed"))
    stage = own[which[0]].stage if np.all(which == which[0]) else ""
    words = f"{label}, {stage}" if stage else label
    return Limit(own[0].key, words, actual, allowed, own[0].unit, True, restore, goto, "no such state")


def _whole_capture(walked: March) -> Stream:
    """Station 0 with the flow of the whole capture area, as the inlet's geometry takes it."""
    record = walked.records[0]
    stream = record.stream
    area = walked.setting.take(record.index)["engine.capture_area"]
    return replace(stream, mass_flow=stream.flux * area)


def _modes(walked: March) -> tuple[Limit, ...]:
    """Separation in the duct, unstart, isolator length, and what the throat passes."""
    setting, heat = walked.setting, heat_key(walked.setting)
    less = "less heat, or a larger burner area behind the injection"
    rows = []
    separation, unstart = (walked.figure("isolator", f"{name}_margin") for name in ("separation", "unstart"))
    if setting.choices["combustor.process"] == "duct":
        rows += [
            _share(walked, "duct_separation", "attached burner flow, peak pressure", separation, less, heat, "no attached flow"),
            _share(walked, "unstart", "unstart, impulse at burner entry", unstart, less, heat, "no critical section"),
        ]
    if setting.has("nozzle.throat_area"):
        capacity, label = walked.figure("isolator", "throat_margin"), "throat capacity, supercritical margin"
        rows.append(_share(walked, "throat_capacity", label, capacity, "a larger throat or less heat", "nozzle.throat_area", "no match"))
    why = "no shock train" if setting.has("isolator.momentum_thickness") else "needs isolator.momentum_thickness"
    length, longer = walked.figure("isolator", "isolator_margin"), "a longer isolator or less heat"
    rows.append(_share(walked, "isolator_length", "isolator length, shock train", length, longer, "isolator.length", why))
    return tuple(rows)


def _isolator(walked: March) -> tuple[Limit, ...]:
    """The isolator's stated size against its area, and where its shock train lies in the data of its correlation."""
    setting, two = walked.setting, walked.stations().get("2")
    if two is None or not setting.has("isolator.length"):
        return ()
    names = ("train_length", "train_mach", "momentum_reynolds")
    told = {name: walked.figure("isolator", name) for name in names}
    rows = isolator_limits.bounds(setting, spread(walked, two.index, two.stream.area), *(told[name] for name in names))
    return tuple(Limit(r.key, r.label, r.actual, r.allowed, "ratio", r.upper, r.restore, r.input, r.missing) for r in rows)
