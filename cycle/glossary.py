"""What a walk says beside its stations and headline figures, declared once as plain data: figures of single processes,
columns of the flow along a duct, limits, and the rows of the accounts.

Keys are "kind.key": the figure "separation_margin" of a process is "process.separation_margin" here. Nothing heavy is
imported here.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import replace
from typing import Any

from cycle.declarations import Output
from cycle.quantities import MODES

_BOOKED = "control surface of the process"
_CURRAN = "Curran and Craig (1973); Riggins (1997)"
_KORKEGI = "Korkegi, AIAA Journal 13 (1975) 534 (from memory)"
_WALTRUP = "Waltrup and Billig (1973), from memory"
_GIVEN = "common practice; the allowed value is an input"


def _process(key: str, label: str, meaning: str, unit: str = "ratio", equation: str = "", source: str = "definition") -> Output:
    return Output(f"process.{key}", "", label, meaning, unit, "process", equation, source)


PROCESS_FIGURES: tuple[Output, ...] = (
    _process("total_pressure_ratio", "total-pressure ratio", "Total pressure behind the process over that ahead of it."),
    _process("pressure_ratio", "pressure ratio", "Static pressure behind the process over that ahead of it."),
    _process("temperature_ratio", "temperature ratio", "Static temperature behind the process over that ahead of it."),
    _process("entropy_rise", "entropy rise", "Specific entropy behind the process less that ahead of it.", "specific heat"),
    _process("thrust_potential_change", "change of thrust potential", "Thrust potential behind the process less that ahead of it.",
             "force", source=_CURRAN),
    _process("wave_angle", "wave angle", "Angle of an external shock to the stream ahead of it; of a cone, to its axis.", "angle",
             source="NACA Report 1135 (1953); Taylor and Maccoll (1933) for the cone"),
    _process("captured_fraction", "captured fraction", "Flow that enters over what the capture area would take."),
    _process("additive_drag", "additive drag", "Axial pressure force on the captured streamtube ahead of the lip.", "force"),
    _process("separated_pressure", "pressure at burner entry", "Wall pressure p3 of the separated zone; p2 where the flow is attached.",
             "pressure"),
    _process("viscous_force", "friction of the inlet", "Stream thrust that the viscous loss at the inlet throat takes.", "force",
             source="momentum at constant area"),
    _process("isolator_height", "isolator height", "Height of the isolator, or its diameter: what the length of a shock train scales with.",
             "length", source="area of station 2 and the stated shape"),
    _process("momentum_thickness", "momentum thickness", "Of the boundary layer at isolator entry.", "length",
             source="as stated; or Schlichting, flat plate, and Eckert (1955), both from memory"),
    _process("momentum_reynolds", "momentum-thickness Reynolds number", "Of the stream ahead of the shock train.",
             equation="rho u theta / mu"),
    _process("train_mach", "Mach number ahead of the train", "Of the stream behind the isolator's friction."),
    _process("core_area_ratio", "core over duct area", "Area of the core over that of the duct at burner entry; 1 where attached."),
    _process("separation_limit", "pressure ratio that separates", "Wall pressure over p2 at which the boundary layer separates.",
             source=_KORKEGI + ", unless combustor.separation_limit is given"),
    _process("attached_peak_pressure_ratio", "peak pressure, attached", "Highest wall pressure of the attached march over p2."),
    _process("separation_margin", "separation margin", "Room of the attached flow below the pressure that separates.",
             equation="1 - attached_peak_pressure_ratio / separation_limit", source=_KORKEGI),
    _process("unstart_margin", "unstart margin",
             "1 less the impulse that the critical flow asks at burner entry over the impulse of station 2; negative: the inlet unstarts."),
    _process("train_length", "shock-train length", "Length of the train that raises p2 to p3; 0 where the flow is attached.", "length",
             source=_WALTRUP),
    _process("isolator_margin", "isolator margin", "Isolator length that the shock train leaves free, over the isolator length.",
             source=_WALTRUP),
    _process("reattachment_x", "core fills the duct at", "Distance from burner entry where the core fills the duct again.", "length"),
    _process("reattachments", "places where the core fits", "Where it would fill the duct and meet the throat's flow; the first counts."),
    _process("throat_x", "thermal throat at", "Distance from burner entry where the flow is critical.", "length",
             source="Shapiro, The Dynamics and Thermodynamics of Compressible Fluid Flow (1953), ch. 8 (from memory)"),
    _process("peak_pressure_ratio", "peak pressure over p2", "Highest wall pressure in the burner over p2."),
    _process("impulse_error", "error of the march", "Estimate of the discretisation error of the exit's stream thrust, over it."),
    _process("throat_margin", "throat margin", "Throat area over the one that passes the flow with the shock at the inlet throat, less 1.",
             source="one-dimensional choked flow; NACA Report 1135 (1953)"),
    _process("shock_mach", "terminal shock Mach number", "Mach number ahead of the terminal normal shock."),
    _process("shock_area_ratio", "terminal shock at area ratio", "Area at the terminal shock over that of station 2."),
    _process("shock_recovery", "terminal shock recovery", "Total pressure behind the terminal shock over that ahead of it."),
    _process("spilled_flow", "spilled flow", "Air that the throat does not pass and the inlet spills.", "mass flow"),
    _process("spilled_entropy", "spilled air, entropy", "Specific entropy behind the expelled shock.", "specific heat"),
    _process("choking_margin", "choking margin", "Room before the burner chokes, as a share of the heat; 0 at Mach 1.",
             source="Shapiro (1953), ch. 7 (from memory)"),
    _process("area_ratio", "area ratio", "Area behind the burner over that ahead of it."),
    _process("burner_exit_over_throat", "burner exit over throat", "Burner exit area over that of the throat."),
    _process("over_expanded", "over-expanded", "1 where the internal nozzle ends below the pressure asked for at the exit."),
    _process("full_flow_pressure", "exit pressure flowing full", "Exit pressure of the nozzle if no shock stood inside.", "pressure"),
    _process("exit_shock_pressure", "pressure behind an exit shock",
             "Pressure behind a normal shock in the exit plane; a higher ambient pressure drives the shock inside.", "pressure",
             source="Shapiro (1953), ch. 5 (from memory)"),
    _process("enthalpy_jump", "enthalpy jump", "Enthalpy that a change of the constant-gamma gas books at constant p, T and u.",
             "specific energy"),
    _process("entropy_jump", "entropy jump", "Entropy that a change of the constant-gamma gas books.", "specific heat"),
    _process("fuel_air_ratio", "fuel-air ratio", "Fuel flow over the air flow that enters the burner."),
    _process("fuel_flow", "fuel flow", "Fuel that enters in this process.", "mass flow", source=_BOOKED),
    _process("mass_added", "mass added", "Fuel mass that joins the stream in this process.", "mass flow", source=_BOOKED),
    _process("fuel_enthalpy", "fuel enthalpy", "Enthalpy that a mass of fuel brings; with its heat at constant gamma.", "specific energy",
             source=_BOOKED),
    _process("fuel_impulse", "fuel impulse", "Axial momentum that the fuel brings.", "force", source=_BOOKED),
    _process("wall_heat", "wall heat", "Heat lost to the wall.", "power", source=_BOOKED),
    _process("friction", "friction", "Friction force of the walls, against the stream.", "force", source=_BOOKED),
    _process("wall_force", "wall force", "Axial pressure force on the stream, of walls and separated zone.", "force", source=_BOOKED),
)  # fmt: skip

MARGINS = ("separation_margin", "isolator_margin", "unstart_margin", "throat_margin")
"""Figures that say how far the mode of the engine is from its end."""

SHARED = ("total_pressure_ratio", "pressure_ratio", "temperature_ratio", "entropy_rise", "thrust_potential_change")
"""Figures that every process has."""

BOOKED = ("fuel_flow", "mass_added", "fuel_enthalpy", "fuel_impulse", "wall_heat", "friction", "wall_force")
"""Figures that are zero where nothing crosses the control surface."""

QUIET = (*BOOKED, "over_expanded")
"""Figures that say nothing where they are zero."""

PROFILE: tuple[Output, ...] = (
    Output("profile.x", "x", "place along the duct", "Distance from the burner entry.", "length", "profile"),
    Output("profile.pressure", "p", "wall pressure", "Static pressure, the same in core and separated zone.", "pressure", "profile"),
    Output("profile.temperature", "T", "temperature", "Static temperature of the core.", "temperature", "profile"),
    Output("profile.velocity", "u", "velocity", "Velocity of the core.", "speed", "profile"),
    Output("profile.mach", "M", "Mach number", "Mach number of the core.", "ratio", "profile"),
    Output("profile.area", "A", "duct area", "Area of the duct.", "area", "profile"),
    Output("profile.core_area", "core", "core area", "Area of the core; that of the duct where the flow is attached.", "area", "profile"),
    Output("profile.burnt", "burnt", "burnt so far", "Share of the fuel injected so far that has burnt.", "ratio", "profile",
           source="Heiser and Pratt (1994), ch. 6, from memory"),
    Output("profile.ratio", "f", "fuel-air ratio", "Fuel injected so far over the air flow.", "ratio", "profile"),
    Output("profile.total_pressure", "pt", "total pressure", "Pressure of the isentropic rest of the core.", "pressure", "profile"),
)  # fmt: skip
"""Columns of the flow along a duct."""

_MARGIN, _ROOM = "1 - actual / allowed", "actual / allowed - 1"


def _limit(key: str, label: str, meaning: str, equation: str = _MARGIN, source: str = _GIVEN) -> Output:
    return Output(f"limit.{key}", "", label, f"Margin, positive is safe. {meaning}", "ratio", "limit", equation, source)


LIMITS: tuple[Output, ...] = (
    _limit("corridor_low", "flight corridor, lowest q", "Dynamic pressure below which an engine is too large for its thrust.", _ROOM),
    _limit("corridor_high", "flight corridor, highest q", "Dynamic pressure above which structure and heating are too severe."),
    _limit("ignition_temperature", "self-ignition, T3",
           "Temperature at a supersonic burner entry at which the fuel lights; a threshold, not a delay.", _ROOM,
           "common practice, by fuel; the allowed value is an input"),
    _limit("ignition_pressure", "self-ignition, p3", "Pressure at a supersonic burner entry at which the fuel lights.", _ROOM),
    _limit("slow_ignition", "slow ignition of hydrogen, T3",
           "Above 100 kPa hydrogen below 1050 K lights slowly, beyond its second explosion limit; a threshold, not a delay.", _ROOM,
           "common practice"),
    _limit("burner_separation", "burner separation, p4/p3",
           "Pressure rise of a supersonic burner of constant area against what separates its boundary layer.",
           source=_KORKEGI + ", unless combustor.separation_limit is given"),
    _limit("fuel_supply", "fuel supply, burner pressure",
           "Burner pressure where the fuel enters against the fuel's supply pressure, below which none can flow."),
    _limit("thermal_choking", "thermal choking", "Heat at which the burner chokes, solved for.",
           source="Shapiro (1953), ch. 7 (from memory)"),
    _limit("unstart_heat", "unstart, heat", "Heat at which a duct has no mode any more, or its train outgrows the isolator."),
    _limit("gas_temperature", "gas temperature", "Hottest station against what the walls stand."),
    _limit("model_range", "gas without dissociation", "Hottest station against where dissociation matters and the model leaves it out."),
    _limit("data_high", "species data, highest T", "Hottest station against the end of the species data.", source="NASA/TP-2002-211556"),
    _limit("data_low", "species data, lowest T", "Coldest station against the start of the species data.", _ROOM, "NASA/TP-2002-211556"),
    _limit("nozzle_separation", "nozzle separation", "Pressure at the nozzle's end over ambient, below which the flow separates.", _ROOM,
           "Summerfield, Foster and Swan (1954), from memory; the allowed value is an input"),
    _limit("nozzle_shock", "shock in the nozzle",
           "Ambient pressure over that behind a normal shock in the end plane of the full-flowing nozzle; above 1 a shock stands inside. A "
           "closed nozzle that ends in a given area is then followed: subsonic at ambient pressure. With an internal area ratio or a given "
           "exit pressure it is not followed: the thrust is still that of full flow.",
           source="Shapiro (1953), ch. 5 (from memory)"),
    _limit("attached", "attached inlet shocks", "Turn of the inlet shock nearest to detaching against the largest that stays attached.",
           source="NACA Report 1135 (1953)"),
    _limit("separation", "shock separation in the inlet", "Pressure ratio of the inlet shock nearest to separating its boundary layer.",
           source=_KORKEGI),
    _limit("start", "inlet start", "Internal contraction of the inlet against the one that swallows its starting shock.",
           source="Kantrowitz and Donaldson, NACA WR L-713 (1945) (from memory)"),
    _limit("shock_on_lip", "shock on lip, flight Mach number",
           "Flight Mach number against the one at which the first external shock meets the lip; above it the shock enters the cowl, "
           "which is not followed.", source="NACA Report 1135 (1953); Taylor and Maccoll (1933) for a cone"),
    _limit("viscous_data", "viscous correlation, M2/M0",
           "Mach number behind the compression over that of flight against what the correlation is drawn for: a limit of the data.",
           "distance from the nearer end over that end", "Waltrup, Billig and Stockbridge (1982), from memory"),
    _limit("duct_separation", "attached burner flow, peak pressure", "Peak pressure of the attached march as a share of what separates.",
           source=_KORKEGI),
    _limit("unstart", "unstart, impulse at burner entry",
           "Impulse that the critical flow asks at burner entry, as a share of that of station 2.", source="momentum balance of the duct"),
    _limit("throat_capacity", "throat capacity, supercritical margin", "What the throat passes with the shock at the inlet throat.",
           source="one-dimensional choked flow; NACA Report 1135 (1953)"),
    _limit("isolator_section", "isolator section, hydraulic diameter",
           "Stated hydraulic diameter over that of the isolator's shape with the area of station 2, or the inverse where that is larger.",
           source="plane geometry; 3 % allowed, common practice"),
    _limit("train_mach", "shock-train data, Mach number",
           "Mach number ahead of the train against what its length was measured at: a limit of the data, not of the engine.",
           "distance from the nearer end over that end", _WALTRUP),
    _limit("train_reynolds", "shock-train data, Reynolds number",
           "Momentum-thickness Reynolds number against what the train's length was measured at: a limit of the data, not of the engine.",
           "distance from the nearer end over that end", _WALTRUP),
    _limit("isolator_length", "isolator length, shock train", "Length of the shock train as a share of the isolator's.", source=_WALTRUP),
)  # fmt: skip


def _border(key: str, label: str, meaning: str) -> Output:
    return Output(f"heat.{key}", "", label, f"{meaning}, solved for, in the unit of the heat input.", "ratio", "heat")


HEAT: tuple[Output, ...] = (
    _border("attached", "heat, attached flow", "Heat up to which the attached flow of a duct stands, nearest to the heat of the case"),
    _border("train", "heat, shock train", "Heat up to which the burner stays supersonic, attached or behind a shock train"),
    _border("unstart", "heat, before unstart", "Heat up to which the duct has a mode and its shock train fits the isolator"),
)
"""Borders of a duct's heat input, the keys of `Walk.heat_limits`."""


def _potential(key: str, label: str, meaning: str) -> Output:
    return Output(f"potential.{key}", "", label, meaning, "force", "potential", source=_CURRAN)


_CHANGE = "Change of thrust potential, Phi behind less Phi ahead of it"
POTENTIALS: tuple[Output, ...] = (
    *(_potential(name.replace(" ", "_"), name, f"{_CHANGE}: {name}.") for name in (
        "inlet", "external compression", "internal compression", "viscous loss", "isolator", "gas change", "composition released",
        "frozen chemistry", "throat", "nozzle", "external expansion")),
    _potential("burner", "burner gain", f"{_CHANGE}: what the heat gives."),
    _potential("divergence", "divergence", "Momentum that leaves sideways."),
    _potential("pressure_mismatch", "under- or over-expansion", "Thrust less the thrust potential of the exit and the divergence."),
    _potential("thrust", "uninstalled thrust", "Sum of the rows before it."),
)  # fmt: skip


def _loss(key: str, label: str, meaning: str) -> Output:
    return Output(f"loss.{key}", "", label, meaning, "force", "loss", source="Riggins (1997)")


_FURTHER = "Ideal thrust lost"
LOSSES: tuple[Output, ...] = (
    _loss("ideal", "ideal thrust", "No losses in the inlet, complete burning at rest, isentropic expansion to ambient pressure."),
    _loss("inlet", "inlet", f"{_FURTHER} by the total pressure that the inlet takes."),
    _loss("viscous_loss", "viscous loss", f"{_FURTHER} by the friction stated for the inlet's throat, beside its shocks."),
    _loss("isolator", "isolator", f"{_FURTHER} by the total pressure that the shock train or terminal shock takes."),
    _loss("composition_released", "composition released",
          f"{_FURTHER} where the composition held by the inlet goes to equilibrium ahead of the burner. Negative: a gas whose "
          "composition is held rests at less total pressure than the same gas in equilibrium: part of the inlet's loss is given back."),
    _loss("incomplete_burning", "incomplete burning", f"{_FURTHER} by fuel that stays unburnt."),
    _loss("burner", "heat at speed, mixing, friction, wall heat", f"{_FURTHER} by burning in motion, injection, friction, wall heat."),
    _loss("nozzle", "nozzle and exit", f"{_FURTHER} by the nozzle, frozen chemistry and an exit off ambient pressure."),
    _loss("thrust", "uninstalled thrust", "Ideal thrust less the losses."),
)  # fmt: skip


def _exergy(key: str, label: str, meaning: str) -> Output:
    return Output(f"exergy.{key}", "", label, meaning, "power", "exergy", source="second law in the frame of the undisturbed air")


EXERGY: tuple[Output, ...] = (
    _exergy("input", "fuel and air above the dead state", "Exergy that fuel and air bring; sum of the rows behind it."),
    _exergy("thrust_power", "thrust power", "Thrust times flight speed."),
    _exergy("entropy_made", "entropy made", "Ambient temperature times the entropy made in the engine."),
    _exergy("exhaust", "hot exhaust", "Exergy of the exhaust above its dead state."),
    _exergy("wake", "kinetic energy of the wake", "Kinetic energy of the exhaust in the frame of the undisturbed air."),
    _exergy("divergence", "divergence", "Work that the sideways momentum of the exhaust does not do."),
    _exergy("pressure_mismatch", "exit pressure", "Work of the exit's pressure off ambient."),
    _exergy("wall_heat", "wall heat", "Heat lost to the walls."),
)  # fmt: skip

ENTRIES: tuple[Output, ...] = (*PROCESS_FIGURES, *PROFILE, *LIMITS, *HEAT, *POTENTIALS, *LOSSES, *EXERGY)
ENTRY = {entry.key: entry for entry in ENTRIES}

HEAT_WORDS: dict[str, tuple[str, str, str]] = {
    "attached": ("attached to {}", "attached throughout", "no attached flow"),
    "train": ("shock train to {}", "supersonic throughout", "no supersonic burner"),
    "unstart": ("unstart at {}", "no unstart", "no heat at which it runs"),
}
"""Ends of the modes of a duct: words for a value, for one that is not reached, and for 0."""

_FLAG = "mode_"
_NUMBERED = re.compile(r"(wave_angle)_(\d+)")


_NO_STATE = "a state it needs is out of range"
_NO_VALUE = {
    "unstart_margin": "no critical section",
    "throat_x": "no critical section",
    "reattachments": "no thermal throat",
    "train_length": "no shock train, or isolator.momentum_thickness is not given",
    "isolator_margin": "no shock train, or isolator.momentum_thickness is not given",
    "additive_drag": "needs the inlet's lip",
    "attached_peak_pressure_ratio": "no attached flow",
    "separation_margin": "no attached flow",
    "throat_margin": "the burner has no solution with the shock at the inlet throat",
    "shock_mach": "no shock stands in the diffuser",
    "shock_area_ratio": "no shock stands in the diffuser",
    "shock_recovery": "no shock stands in the diffuser",
    "spilled_entropy": "nothing is spilled",
    "full_flow_pressure": "no shock stands in the nozzle",
    "exit_shock_pressure": "no shock stands in the nozzle",
    "choking_margin": "nothing chokes",
}


def no_value(key: str) -> str:
    """Why a figure of a process has no value. Parameters: key, as in `Process.figures`."""
    return _NO_VALUE.get(key, _NO_STATE)


def process_figure(key: str) -> Output | None:
    """The declaration of a figure of `Process.figures`; numbered ones carry their number in the label.

    Parameters: key, as there. Returns: None for the flags that say a mode (see `mode_of`) and for an unknown key.
    """
    found = _NUMBERED.fullmatch(key)
    if found is None:
        return ENTRY.get(f"process.{key}")
    declared = ENTRY[f"process.{found[1]}"]
    return replace(declared, label=f"{declared.label} {found[2]}")


def mode_of(figures: Mapping[str, Any]) -> str:
    """The mode that a process of one point found by itself, a key of `quantities.MODES`; "" where it found none.

    Parameters: figures, of the process by key (`Process.figures`).
    """
    found = next((k.removeprefix(_FLAG) for k, v in figures.items() if k.startswith(_FLAG) and v == 1.0), "none")
    if found == "none":
        return ""
    return found if found in MODES else f"ramjet-{found}"
