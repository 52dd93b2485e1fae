"""Every input and output of the model, declared once as plain data.

The case schema, its messages, the form on the screen, the tables, JSON, CSV and the documents are made from these
declarations; nothing else states a unit, a bound, a default or a meaning. Nothing heavy is imported here.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

Kind = Literal["number", "choice", "text", "flag", "fractions"]


@dataclass(frozen=True, slots=True)
class Input:
    """One key of a case file.

    unit: a dimension name of `cycle.units` (SI inside); lower and upper are inclusive bounds in SI, above and below
    exclusive ones. default None: the key is optional, or required where `required`. step: the natural step of an edit.
    follows: the key whose value holds when this one is absent.
    when: (choice, allowed values) pairs that must hold for the key to mean anything.
    """

    key: str
    symbol: str
    label: str
    meaning: str
    unit: str = "ratio"
    kind: Kind = "number"
    lower: float | None = None
    upper: float | None = None
    above: float | None = None
    below: float | None = None
    default: float | str | bool | None = None
    required: bool = False
    follows: str = ""
    step: float = 0.01
    choices: tuple[str, ...] = ()
    when: tuple[tuple[str, tuple[str, ...]], ...] = ()
    source: str = "common practice"

    @property
    def section(self) -> str:
        """Table of the case file that holds the key."""
        return self.key.split(".")[0]

    @property
    def name(self) -> str:
        """The key inside its table."""
        return self.key.split(".", 1)[1]


@dataclass(frozen=True, slots=True)
class Member:
    """One way of saying what a group says: `keys` must all be given, `also` may be."""

    tag: str
    keys: tuple[str, ...]
    also: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Group:
    """Several ways to say one thing; at most one is given. default: the tag that holds when none is."""

    name: str
    meaning: str
    members: tuple[Member, ...]
    required: bool = True
    default: str | None = None
    when: tuple[tuple[str, tuple[str, ...]], ...] = ()


@dataclass(frozen=True, slots=True)
class Output:
    """One emitted figure. unit: a dimension name of `cycle.units`; where: the table it stands in."""

    key: str
    symbol: str
    label: str
    meaning: str
    unit: str = "ratio"
    where: str = "station"
    equation: str = ""
    source: str = "definition"


_REAL = ("frozen", "equilibrium")
_CG = (("gas.model", ("constant-gamma",)),)
_HOT = (("gas.model", _REAL),)
_FLIGHT = (("start", ("flight",)),)
_ENTRY = (("start", ("entry",)),)
_MOMENTUM = (("combustor.process", ("constant-area", "constant-pressure")),)
_LOSS = (("combustor.process", ("pressure-loss",)),)
_LIQUID = (("fuel.identity", ("formula",)), ("fuel.phase", ("liquid",)))
_HEISER = "Heiser and Pratt, Hypersonic Airbreathing Propulsion (1994), from memory"

INPUTS: tuple[Input, ...] = (
    # flight
    Input("flight.mach", "M0", "Mach number", "Flight Mach number, with the sound speed of the case's gas.",
          above=0.0, upper=30.0, step=0.1, when=_FLIGHT),
    Input("flight.speed", "u0", "flight speed", "Flight speed relative to the air.",
          unit="speed", above=0.0, upper=10e3, step=20.0, when=_FLIGHT),
    Input("flight.altitude", "z", "altitude", "Geometric altitude in the U.S. Standard Atmosphere 1976.",
          unit="length", lower=0.0, upper=86e3, step=500.0, when=_FLIGHT, source="NOAA-S/T 76-1562"),
    Input("flight.dynamic_pressure", "q0", "dynamic pressure", "rho0 u0^2/2; the altitude of the standard atmosphere follows.",
          unit="pressure", above=0.0, upper=1e6, step=1e3, when=_FLIGHT),
    Input("flight.pressure", "p0", "ambient pressure", "Ambient static pressure, given with the temperature.",
          unit="pressure", above=0.0, upper=2e6, step=100.0, when=_FLIGHT),
    Input("flight.temperature", "T0", "ambient temperature", "Ambient static temperature, given with the pressure.",
          unit="temperature", lower=150.0, upper=2000.0, step=1.0, when=_FLIGHT),
    Input("flight.temperature_offset", "dT0", "temperature offset", "Added to the standard temperature at unchanged pressure.",
          unit="temperature difference", lower=-60.0, upper=60.0, default=0.0, step=1.0,
          when=(("start", ("flight",)), ("flight.place", ("altitude", "dynamic_pressure")))),
    # entry of a direct-connect rig
    Input("entry.station", "", "entry station", "Station where the rig's stream enters: 2 isolator, 3 burner.",
          kind="choice", unit="none", choices=("2", "3"), default="3", when=_ENTRY),
    Input("entry.mach", "M", "entry Mach number", "Mach number of the entering stream.", above=0.0, upper=10.0, step=0.05,
          required=True, when=_ENTRY),
    Input("entry.pressure", "p", "entry pressure", "Static pressure of the entering stream.", unit="pressure", above=0.0,
          upper=1e8, step=1e3, required=True, when=_ENTRY),
    Input("entry.temperature", "T", "entry temperature", "Static temperature of the entering stream.", unit="temperature",
          lower=150.0, upper=4000.0, step=10.0, required=True, when=_ENTRY),
    Input("entry.area", "A", "entry area", "Flow area of the entering stream.", unit="area", above=0.0, upper=100.0, step=1e-3,
          when=_ENTRY),
    Input("entry.mass_flow", "m", "entry mass flow", "Mass flow of the entering stream.", unit="mass flow", above=0.0, upper=1e5,
          step=0.1, when=_ENTRY),
    # air
    Input("air.mole_fractions", "x", "air composition", "Mole fractions of the entering stream, summing to 1; dry air when absent.",
          kind="fractions", unit="none", when=_HOT, source="U.S. Standard Atmosphere 1976 for the default"),
    Input("air.relative_humidity", "RH", "relative humidity", "Of saturation over liquid water at ambient conditions.",
          lower=0.0, upper=1.0, step=0.05, when=(*_HOT, ("start", ("flight",))),
          source="saturation: Murphy and Koop (2005), Q. J. R. Meteorol. Soc. 131, eq. 10, from memory"),
    # gas
    Input("gas.model", "", "gas model", "constant-gamma: cp and R given; frozen: NASA polynomials, fixed composition; equilibrium.",
          kind="choice", unit="none", choices=("constant-gamma", "frozen", "equilibrium"), default="equilibrium"),
    Input("gas.cp_compression", "cp,c", "cp, compression", "Specific heat from flight to burner entry.", unit="specific heat",
          above=0.0, upper=2e4, default=1004.5, step=1.0, when=_CG),
    Input("gas.cp_combustion", "cp,b", "cp, combustion", "Specific heat in the burner; that of compression when absent.",
          unit="specific heat", above=0.0, upper=2e4, follows="gas.cp_compression", step=1.0, when=_CG, source=_HEISER),
    Input("gas.cp_expansion", "cp,e", "cp, expansion", "Specific heat in the nozzle; that of combustion when absent.",
          unit="specific heat", above=0.0, upper=2e4, follows="gas.cp_combustion", step=1.0, when=_CG, source=_HEISER),
    Input("gas.gas_constant", "R", "gas constant", "Specific gas constant, one for the whole stream.", unit="specific heat",
          above=0.0, upper=5e3, default=287.0, step=0.1, when=_CG),
    Input("gas.fuel_energy", "", "fuel energy balance",
          "full: fuel mass and sensible enthalpy enter; mass-only: mass enters, no enthalpy; neglected: heat per kg of stream.",
          kind="choice", unit="none", choices=("full", "mass-only", "neglected"), default="full", when=_CG,
          source="full: Heiser and Pratt; mass-only: Hill and Peterson; neglected: Mattingly (all from memory)"),
    Input("gas.fuel_mass", "", "fuel mass", "Whether the fuel's mass joins the stream; only a neglected fuel energy may leave it out.",
          kind="choice", unit="none", choices=("counted", "neglected"), default="counted",
          when=(*_CG, ("gas.fuel_energy", ("neglected",)))),
    Input("gas.reference_temperature", "Tref", "reference temperature", "Datum of the heating value in the full fuel energy balance.",
          unit="temperature", lower=0.0, upper=1000.0, default=298.15, step=1.0,
          when=(*_CG, ("gas.fuel_energy", ("full",)))),
    # inlet
    Input("inlet.kinetic_energy_efficiency", "eta_KE", "kinetic-energy efficiency",
          "Kinetic energy the compressed stream would recover at ambient pressure, over the flight value.",
          above=0.0, upper=1.0, step=0.005, when=_FLIGHT, source=_HEISER + ", ch. 5"),
    Input("inlet.adiabatic_efficiency", "eta_c", "adiabatic compression efficiency", "(h2 - hX)/(h2 - h0), X at p0 with the entropy of 2.",
          above=0.0, upper=1.0, step=0.005, when=_FLIGHT, source=_HEISER + ", ch. 4"),
    Input("inlet.diffuser_efficiency", "eta_d", "isentropic diffuser efficiency",
          "Share of the kinetic energy that would compress isentropically to the real total pressure.",
          above=0.0, upper=1.0, step=0.005, when=_FLIGHT, source="Hill and Peterson, from memory"),
    Input("inlet.total_pressure_recovery", "pi_d", "total-pressure recovery", "pt2/pt0.", above=0.0, upper=1.0, step=0.01, when=_FLIGHT),
    Input("inlet.military_recovery", "", "military-specification recovery", "Ram recovery of MIL-E-5008B as a function of M0.",
          kind="flag", unit="none", when=_FLIGHT, source="MIL-E-5008B, from memory"),
    Input("inlet.temperature_ratio", "T2/T0", "temperature ratio", "Static temperature ratio that ends the compression.", above=0.0,
          upper=50.0, step=0.1, when=_FLIGHT),
    Input("inlet.pressure_ratio", "p2/p0", "pressure ratio", "Static pressure ratio that ends the compression.", above=0.0,
          upper=1e5, step=2.0, when=_FLIGHT),
    Input("inlet.exit_mach", "M2", "exit Mach number", "Mach number that ends the compression.", above=0.0, upper=20.0, step=0.05,
          when=_FLIGHT),
    Input("inlet.contraction_ratio", "A0/A2", "contraction ratio", "Area ratio that ends the compression, supersonic.", above=0.0,
          upper=1e3, step=0.5, when=_FLIGHT),
    Input("inlet.chemistry", "", "inlet chemistry", "Composition in the inlet; follows the gas model when absent.", kind="choice",
          unit="none", choices=("frozen", "equilibrium"), follows="gas.model",
          when=(("gas.model", ("equilibrium",)), ("start", ("flight",)))),
    # fuel
    Input("fuel.name", "", "fuel", "A fuel of the built-in list.", kind="choice", unit="none",
          choices=("hydrogen", "methane", "ethylene", "propane", "kerosene", "jp-10")),
    Input("fuel.formula", "", "fuel formula", "Chemical formula of your own fuel (C, H, O, N), such as C10H16.", kind="text", unit="none"),
    Input("fuel.phase", "", "stored phase", "Phase in which the fuel is stored.", kind="choice", unit="none", choices=("gas", "liquid"),
          required=True, when=(("fuel.identity", ("formula",)),)),
    Input("fuel.formation_enthalpy", "DfH", "formation enthalpy", "Standard enthalpy of formation at 298.15 K in the stored phase.",
          unit="molar energy", lower=-5e6, upper=5e6, step=1e3, when=(("fuel.identity", ("formula",)),)),
    Input("fuel.heating_value", "hPR", "lower heating value", "Heat released by complete burning, water as vapour, fuel as stored.",
          unit="specific energy", above=0.0, upper=3e8, step=5e5, when=(("fuel.identity", ("formula", "heating_value")),)),
    Input("fuel.vapour_specific_heat", "cp,f", "fuel specific heat",
          "Specific heat of the fuel's vapour (real gases, needed where fuel stays unburnt) or of the fuel (constant gamma).",
          unit="specific heat", above=0.0, upper=2e4, step=10.0, when=(("fuel.identity", ("formula", "heating_value")),)),
    Input("fuel.liquid_specific_heat", "cp,l", "liquid specific heat", "Specific heat of the stored liquid.", unit="specific heat",
          above=0.0, upper=2e4, required=True, step=10.0, when=_LIQUID),
    Input("fuel.heat_of_vaporisation", "Lv", "heat of vaporisation", "At 298.15 K, of the stored liquid.", unit="specific energy",
          above=0.0, upper=1e7, required=True, step=1e4, when=_LIQUID),
    Input("fuel.standard_entropy", "S0", "standard entropy", "Of the stored phase at 298.15 K and 1 bar; exergy needs it.",
          unit="molar entropy", above=0.0, upper=5e3, step=1.0, when=(("fuel.identity", ("formula",)),)),
    Input("fuel.temperature", "Tf", "fuel temperature", "Total temperature of the fuel as injected.", unit="temperature", lower=15.0,
          upper=1500.0, default=300.0, step=10.0),
    Input("fuel.supply_pressure", "pf", "fuel supply pressure", "Total pressure of the fuel as injected; exergy needs it.",
          unit="pressure", above=0.0, upper=1e9, step=1e5),
    # combustor
    Input("combustor.process", "", "burner process", "What the burner holds: its area, its pressure, or a stated total-pressure ratio.",
          kind="choice", unit="none", choices=("constant-area", "constant-pressure", "pressure-loss"), default="constant-area"),
    Input("combustor.equivalence_ratio", "phi", "equivalence ratio", "Fuel-air ratio over the stoichiometric one.", lower=0.0,
          upper=5.0, step=0.01),
    Input("combustor.fuel_air_ratio", "f", "fuel-air ratio", "Fuel mass flow over captured air mass flow.", lower=0.0, upper=2.0,
          step=0.001),
    Input("combustor.exit_total_temperature", "Tt4", "exit total temperature", "Total temperature at the burner exit; fuel follows.",
          unit="temperature", above=0.0, upper=6000.0, step=10.0),
    Input("combustor.burnt_fraction", "eta_b", "burnt fraction",
          "Fraction that burns of the fuel that the oxygen allows; of all fuel in equilibrium gas.",
          above=0.0, upper=1.0, default=1.0, step=0.005),
    Input("combustor.fuel_axial_speed", "uf", "fuel axial speed", "Axial speed of the fuel at injection; 0 is normal injection.",
          unit="speed", lower=0.0, upper=6e3, step=20.0, when=_MOMENTUM),
    Input("combustor.fuel_axial_speed_ratio", "uf/u3", "fuel axial speed ratio", "Axial speed of the fuel over that of the stream.",
          lower=0.0, upper=2.0, step=0.01, when=_MOMENTUM, source=_HEISER),
    Input("combustor.friction_area_ratio", "CfAw/A3", "friction area ratio", "Skin-friction coefficient times wetted over flow area.",
          lower=0.0, upper=5.0, default=0.0, step=0.01, when=_MOMENTUM, source=_HEISER),
    Input("combustor.wall_heat", "Qw", "wall heat", "Heat that leaves the stream through the burner wall.", unit="power", lower=0.0,
          upper=1e10, default=0.0, step=1e4),
    Input("combustor.pressure_ratio", "pt4/pt3", "total-pressure ratio", "Total pressure behind over before the burner.", above=0.0,
          upper=1.0, step=0.01, required=True, when=_LOSS),
    Input("combustor.exit_area_ratio", "A4/A3", "exit area ratio", "Burner exit area over entry area.", above=0.0, upper=100.0, step=0.05,
          when=_LOSS),
    Input("combustor.exit_mach", "M4", "exit Mach number", "Mach number at the burner exit.", above=0.0, upper=10.0, step=0.01, when=_LOSS),
    Input("combustor.exit_area_over_throat", "A4/A5", "exit area over throat", "Burner exit area over the choked throat's area.", lower=1.0,
          upper=100.0, step=0.05, when=_LOSS),
    # nozzle
    Input("nozzle.chemistry", "", "nozzle chemistry", "Composition in the nozzle: kept from its entry, or shifting in equilibrium.",
          kind="choice", unit="none", choices=("frozen", "shifting"), default="shifting", when=(("gas.model", ("equilibrium",)),)),
    Input("nozzle.throat", "", "nozzle throat", "none, or sized: a choked throat (station 5) that passes the mass flow.", kind="choice",
          unit="none", choices=("none", "sized"), default="none"),
    Input("nozzle.exit_area_over_capture", "A10/Ac", "exit area over capture", "Exit area over the capture area.", above=0.0, upper=1e3,
          step=0.05, when=_FLIGHT),
    Input("nozzle.exit_pressure", "p10", "exit pressure", "Static pressure at the exit.", unit="pressure", above=0.0, upper=1e8,
          step=100.0),
    Input("nozzle.exit_area_ratio", "A10/A4", "exit area ratio",
          "Exit area over the nozzle's entry area, or over its throat where it has one.",
          lower=1.0, upper=1e4, step=0.1),
    Input("nozzle.ideal", "", "ideal exit", "Expansion exactly to ambient pressure.", kind="flag", unit="none", when=_FLIGHT),
    Input("nozzle.velocity_coefficient", "Cv", "velocity coefficient",
          "Exit speed over that of the isentropic expansion to the same pressure.",
          above=0.0, upper=1.0, default=1.0, step=0.005),
    Input("nozzle.expansion_efficiency", "eta_e", "expansion efficiency", "Enthalpy drop over the isentropic drop from the static state.",
          above=0.0, upper=1.0, step=0.005, source=_HEISER),
    Input("nozzle.expansion_efficiency_from_total", "eta_n", "expansion efficiency, total",
          "Enthalpy drop over the isentropic drop from the total state.", above=0.0, upper=1.0, step=0.005),
    Input("nozzle.divergence_factor", "lambda", "divergence factor", "Axial over total exit momentum.", above=0.0, upper=1.0, default=1.0,
          step=0.005),
    Input("nozzle.divergence_angle", "alpha", "divergence half angle", "Half angle of the exit; the factor follows from the shape.",
          unit="angle", lower=0.0, upper=1.0471975511965976, step=0.01, source="Farokhi, Aircraft Propulsion, examples 5.8 and 5.9"),
    Input("nozzle.divergence_shape", "", "divergence shape", "conical (1 + cos a)/2, planar sin(a)/a.", kind="choice", unit="none",
          choices=("conical", "planar"), default="conical", when=(("nozzle.divergence", ("divergence_angle",)),)),
    # engine
    Input("engine.capture_area", "Ac", "capture area", "Area of the captured stream tube at the lip.", unit="area", above=0.0, upper=1e3,
          default=1.0, step=0.01, when=_FLIGHT),
    Input("engine.mode", "", "mode asked for", "auto, or supersonic: no subsonic burner is accepted.", kind="choice", unit="none",
          choices=("auto", "supersonic"), default="auto"),
    # limits: thresholds
    Input("limits.dynamic_pressure_low", "", "corridor, lowest q", "Lowest flight dynamic pressure.", unit="pressure", above=0.0, upper=1e6,
          default=24e3, step=1e3, when=_FLIGHT, source="common practice: 500 lbf/ft2"),
    Input("limits.dynamic_pressure_high", "", "corridor, highest q", "Highest flight dynamic pressure.", unit="pressure", above=0.0,
          upper=1e6, default=96e3, step=1e3, when=_FLIGHT, source="common practice: 2000 lbf/ft2"),
    Input("limits.ignition_temperature", "", "self-ignition temperature", "Lowest static temperature at burner entry.", unit="temperature",
          above=0.0, upper=4000.0, default=1000.0, step=10.0),
    Input("limits.ignition_pressure", "", "self-ignition pressure", "Lowest static pressure at burner entry.", unit="pressure", above=0.0,
          upper=1e7, default=50e3, step=1e3),
    Input("limits.gas_temperature", "", "highest gas temperature", "Highest static temperature allowed anywhere; not assessed when absent.",
          unit="temperature", above=0.0, upper=6000.0, step=50.0),
    Input("limits.nozzle_separation", "", "nozzle separation p10/p0", "Lowest exit over ambient pressure before the stream separates.",
          above=0.0, upper=1.0, default=0.4, step=0.01, when=_FLIGHT, source="Summerfield's criterion, from memory"),
)  # fmt: skip

GROUPS: tuple[Group, ...] = (
    Group("flight.velocity", "flight speed", (Member("mach", ("flight.mach",)), Member("speed", ("flight.speed",))), when=_FLIGHT),
    Group("flight.place", "place of flight",
          (Member("altitude", ("flight.altitude",)), Member("dynamic_pressure", ("flight.dynamic_pressure",)),
           Member("pressure", ("flight.pressure", "flight.temperature"))), when=_FLIGHT),
    Group("entry.size", "size of the stream", (Member("area", ("entry.area",)), Member("mass_flow", ("entry.mass_flow",))), when=_ENTRY),
    Group("air.moisture", "air", (Member("mole_fractions", ("air.mole_fractions",)), Member("relative_humidity",
          ("air.relative_humidity",))),
          required=False, default="standard", when=_HOT),
    Group("inlet.quality", "inlet quality",
          tuple(Member(k, (f"inlet.{k}",)) for k in ("kinetic_energy_efficiency", "adiabatic_efficiency", "diffuser_efficiency",
                                                     "total_pressure_recovery", "military_recovery")), when=_FLIGHT),
    Group("inlet.end", "end of the compression",
          tuple(Member(k, (f"inlet.{k}",)) for k in ("temperature_ratio", "pressure_ratio", "exit_mach", "contraction_ratio")),
                when=_FLIGHT),
    Group("fuel.identity", "fuel",
          (Member("name", ("fuel.name",)),
           Member("formula", ("fuel.formula",), also=("fuel.heating_value",)),
           Member("heating_value", ("fuel.heating_value",)))),
    Group("fuel.energy", "energy of the fuel",
          (Member("formation_enthalpy", ("fuel.formation_enthalpy",)), Member("heating_value", ("fuel.heating_value",))),
          when=(("fuel.identity", ("formula",)),)),
    Group("combustor.heat", "heat addition",
          tuple(Member(k, (f"combustor.{k}",)) for k in ("equivalence_ratio", "fuel_air_ratio", "exit_total_temperature"))),
    Group("combustor.fuel_momentum", "axial momentum of the fuel",
          (Member("fuel_axial_speed", ("combustor.fuel_axial_speed",)), Member("fuel_axial_speed_ratio",
                ("combustor.fuel_axial_speed_ratio",))),
          required=False, default="none", when=_MOMENTUM),
    Group("combustor.exit", "size of the burner exit",
          tuple(Member(k, (f"combustor.{k}",)) for k in ("exit_area_ratio", "exit_mach", "exit_area_over_throat")),
          required=False, default="same-area", when=_LOSS),
    Group("nozzle.exit", "end of the expansion",
          tuple(Member(k, (f"nozzle.{k}",)) for k in ("exit_area_over_capture", "exit_pressure", "exit_area_ratio", "ideal"))),
    Group("nozzle.quality", "quality of the expansion",
          tuple(Member(k, (f"nozzle.{k}",)) for k in ("velocity_coefficient", "expansion_efficiency", "expansion_efficiency_from_total")),
          required=False, default="velocity_coefficient"),
    Group("nozzle.divergence", "divergence of the exit",
          (Member("divergence_factor", ("nozzle.divergence_factor",)), Member("divergence_angle", ("nozzle.divergence_angle",))),
          required=False, default="divergence_factor"),
)  # fmt: skip

LATER: dict[str, str] = {
    "inlet.ramp": "inlet geometry by ramps is not in this version; give one inlet quality and one end of compression",
    "inlet.cone": "inlet geometry by a cone is not in this version; give one inlet quality and one end of compression",
    "inlet.isentropic_ramp": "an isentropic ramp is not in this version; give one inlet quality and one end of compression",
    "inlet.internal_contraction": "the start limit of an internal contraction is not in this version",
    "isolator": "the isolator and its shock train are not in this version; leave the table out (station 3 is station 2)",
    "combustor.process=duct": "the duct march is not in this version; use constant-area, constant-pressure or pressure-loss",
    "combustor.area": "the duct march is not in this version",
    "combustor.injector": "the duct march is not in this version",
    "combustor.burning_theta": "the duct march is not in this version",
    "combustor.wall_temperature": "a wall temperature needs the duct march, which is not in this version; state wall_heat",
    "nozzle.chemistry=frozen-after": "freezing after a station is not in this version; use frozen or shifting",
    "nozzle.throat_area": 'matching a given throat is not in this version; use throat = "sized"',
    "engine.mode=thermal-throat": "engine modes are not in this version; use auto or supersonic",
    "engine.mode=geometric-throat": 'engine modes are not in this version; use auto with nozzle.throat = "sized"',
}
"""Keys, tables and choices of the file format that this version refuses, with the line that says what to do."""

_SUTHERLAND = "Sutherland's law for air, U.S. Standard Atmosphere 1976, eq. 51"

OUTPUTS: tuple[Output, ...] = (
    Output("mach", "M", "Mach number", "Speed over the sound speed of the gas model.", equation="u / a"),
    Output("pressure", "p", "pressure", "Static pressure.", "pressure"),
    Output("temperature", "T", "temperature", "Static temperature.", "temperature"),
    Output("density", "rho", "density", "Static density.", "density", equation="p W / (Ru T)"),
    Output("velocity", "u", "velocity", "Axial speed before the divergence factor.", "speed"),
    Output("sound_speed", "a", "sound speed", "Of the gas model: equilibrium or frozen.", "speed", equation="sqrt(gamma_s p / rho)"),
    Output("total_pressure", "pt", "total pressure", "Pressure of the isentropic rest of the gas model.", "pressure",
           equation="p at (ht, s)"),
    Output("total_temperature", "Tt", "total temperature", "Temperature of the isentropic rest of the gas model.", "temperature",
           equation="T at (ht, s)"),
    Output("enthalpy", "h", "enthalpy", "Elements in their reference state at 298.15 K; cp T at constant gamma.", "specific energy"),
    Output("total_enthalpy", "ht", "total enthalpy", "Enthalpy and kinetic energy.", "specific energy", equation="h + u^2 / 2"),
    Output("entropy", "s", "entropy", "Absolute at 1 bar; about 298.15 K and 1 bar at constant gamma.", "specific heat"),
    Output("area", "A", "flow area", "Area of the stream.", "area", equation="m / (rho u)"),
    Output("area_ratio", "A/A0", "area over capture", "Area over that of station 0 (of the entry, for a rig).", equation="A / A0"),
    Output("mass_flow", "m", "mass flow", "Mass flow of the stream.", "mass flow"),
    Output("stream_thrust", "F", "stream thrust", "Momentum and pressure force.", "force", equation="m u + p A"),
    Output("thrust_potential", "Phi", "thrust potential", "Thrust if the stream expanded from here isentropically to ambient pressure.",
           "force", equation="m u_e - m0 u0", source="Curran and Craig (1973); Riggins (1997)"),
    Output("dynamic_pressure", "q", "dynamic pressure", "Half the density times the square of the speed.", "pressure",
           equation="rho u^2 / 2"),
    Output("unit_reynolds_number", "Re/l", "unit Reynolds number", "Per length, viscosity of air.", "per length",
           equation="rho u / mu", source=_SUTHERLAND),
    Output("gamma_frozen", "gamma", "frozen gamma", "Ratio of frozen specific heats.", equation="cp,f / (cp,f - R)"),
    Output("isentropic_exponent", "gamma_s", "isentropic exponent", "(d ln p / d ln rho) at constant entropy of the model."),
    Output("specific_heat", "cp", "specific heat", "At constant pressure, of the gas model (reacting where it is equilibrium).",
           "specific heat"),
    Output("molar_mass", "W", "molar mass", "Mean molar mass of the stream.", "molar mass"),
    Output("critical_pressure", "p*", "critical pressure", "Pressure where this stream would be sonic, isentropically.", "pressure"),
    Output("critical_temperature", "T*", "critical temperature", "Temperature where this stream would be sonic, isentropically.",
           "temperature"),
    Output("critical_area_ratio", "A/A*", "area over critical", "Area over that of the sonic state of this stream.",
           equation="rho* a* / (rho u)"),
    Output("altitude", "z", "altitude", "Geometric altitude in the standard atmosphere.", "length", "performance",
           source="NOAA-S/T 76-1562"),
    Output("thrust", "F", "uninstalled thrust", "Positive forward; fuel momentum is internal.", "force", "performance",
           "(m u + p A)10 - (m u + p A)0 - p0 (A10 - A0)"),
    Output("installed_thrust", "Fi", "installed thrust", "Uninstalled thrust less additive and spill drag.", "force", "performance",
           "F - D_additive - D_spill"),
    Output("specific_thrust", "F/m0", "specific thrust", "Uninstalled thrust per captured air flow.", "specific thrust",
           "performance", "F / m0"),
    Output("specific_impulse", "Isp", "specific impulse", "Uninstalled thrust per weight flow of fuel, g0 = 9.80665 m/s2.", "time",
           "performance", "F / (g0 mf)"),
    Output("thrust_specific_fuel_consumption", "TSFC", "fuel consumption", "Fuel flow per uninstalled thrust.", "fuel consumption",
           "performance", "mf / F"),
    Output("fuel_flow", "mf", "fuel flow", "Mass flow of fuel.", "mass flow", "performance", "f m0"),
    Output("fuel_air_ratio", "f", "fuel-air ratio", "Fuel flow per captured air flow.", "ratio", "performance", "mf / m0"),
    Output("equivalence_ratio", "phi", "equivalence ratio", "Fuel-air ratio over the stoichiometric one.", "ratio", "performance",
           "f / f_st"),
    Output("stoichiometric_ratio", "f_st", "stoichiometric ratio", "Fuel-air ratio that the oxygen of the air burns completely.", "ratio",
           "performance"),
    Output("heating_value", "LHV", "lower heating value", "298.15 K, water as vapour, fuel as stored.", "specific energy", "performance"),
    Output("overall_efficiency", "eta_o", "overall efficiency", "Thrust power over the fuel's heating value.", "ratio", "performance",
           "F u0 / (mf LHV)"),
    Output("thermal_efficiency", "eta_th", "thermal efficiency", "Gain of kinetic energy over the fuel's heating value.", "ratio",
           "performance", "(m10 u10^2 - m0 u0^2) / (2 mf LHV)"),
    Output("propulsive_efficiency", "eta_p", "propulsive efficiency", "Overall over thermal; can exceed 1 off ambient pressure.", "ratio",
           "performance", "eta_o / eta_th"),
    Output("thrust_coefficient", "CF", "thrust coefficient", "Uninstalled thrust over dynamic pressure and capture area.", "ratio",
           "performance", "F / (q0 Ac)"),
    Output("captured_mass_fraction", "A0/Ac", "captured fraction", "Captured air over what the capture area would take.", "ratio",
           "performance", "A0 / Ac"),
    Output("total_temperature_rise_efficiency", "eta_dT", "temperature-rise efficiency",
           "Total-temperature rise of the burner over that of complete burning of the same fuel.", "ratio", "performance",
           "(Tt4 - Tt3) / (Tt4,complete - Tt3)"),
    Output("nozzle_thrust_coefficient", "Cfg", "nozzle gross thrust coefficient",
           "Gross thrust of the exit over that of isentropic expansion of the burner exit to ambient pressure.", "ratio", "performance",
           "(m u + (p - p0) A)10 / (m10 u_e4)"),
    Output("stream_thrust_gain", "dF", "stream-thrust gain", "Stream thrust at the end of the rig less that at its entry.", "force",
           "performance", "F_end - F_entry"),
    Output("throat_area", "A5", "throat area", "Area of the choked throat.", "area", "performance", "m / (rho* a*)"),
    Output("burner_exit_over_throat", "A4/A5", "burner exit over throat", "Burner exit area over the throat's.", "ratio", "performance",
           "A4 / A5"),
)  # fmt: skip

STATUSES: dict[str, str] = {
    "solved": "every process has a solution",
    "over-compressed": "the compression asked for takes more than the stream's kinetic energy",
    "under-compressed": "the end of the compression asked for lies below the entering state or beyond its sonic limit",
    "choked": "the heat asked for exceeds what the burner passes at Mach 1",
    "no-fuel": "no fuel flow reaches the total temperature asked for",
    "stalled": "the burner stream comes to rest: friction or pressure leaves no momentum",
    "throat-mismatch": "the stream and the nozzle throat do not fit: subsonic without a throat, or supersonic with one",
    "under-expanded": "the exit asked for lies upstream of the nozzle's own entry or throat, or is too small for its losses",
    "mode-refused": "the mode asked for does not fit the stream",
    "no-altitude": "no altitude of the standard atmosphere gives the dynamic pressure asked for at this speed",
    "out-of-range": "a state left the range of the data (150 to 6000 K)",
    "not-converged": "an iteration ended without an answer: a defect of the program, please report it",
}
"""Closed list of the statuses of a point, with the words for each."""

RESTORES: dict[str, str] = {
    "over-compressed": "compress less or fly faster",
    "under-compressed": "compress more",
    "choked": "add less heat, compress less, or let the burner open",
    "no-fuel": "ask for a temperature between that of the entering stream and that of complete burning",
    "stalled": "less friction",
    "throat-mismatch": "nozzle.throat = sized for a subsonic burner, none for a supersonic one",
    "under-expanded": "a larger exit area or a lower exit pressure",
    "mode-refused": "engine.mode = auto, or a supersonic burner entry",
    "no-altitude": "a dynamic pressure that this speed has between 0 and 86 km",
    "out-of-range": "less heat, less compression or a warmer stream",
    "not-converged": "a slightly different input",
}
"""What gives a point of each status its solution back."""

MODES: dict[str, str] = {
    "scramjet": "supersonic through the burner",
    "ramjet-critical": "subsonic burner, throat sized to pass its flow",
    "rig": "direct-connect rig, no flight thrust",
    "none": "not found: the walk has no solution",
}
"""Engine modes that this version finds."""

INPUT = {i.key: i for i in INPUTS}
GROUP = {g.name: g for g in GROUPS}
OUTPUT = {o.key: o for o in OUTPUTS}
SECTIONS = tuple(dict.fromkeys(i.section for i in INPUTS))
