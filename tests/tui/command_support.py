"""Small invented cases and the command as a real process."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]

COMMAND = (sys.executable, "-W", "error", "-m", "tui.commands")

QUICK = """\
format = 1
title = "invented constant-gamma scramjet"

[flight]
mach = 8.0
dynamic_pressure = "50 kPa"

[gas]
model = "constant-gamma"
fuel_energy = "neglected"

[inlet]
kinetic_energy_efficiency = 0.975
temperature_ratio = 4.0

[fuel]
heating_value = "120 MJ/kg"

[combustor]
fuel_air_ratio = 0.010

[nozzle]
ideal = true
"""
"""Solves in an instant and needs no thermochemistry."""

CHOKED = QUICK.replace("fuel_air_ratio = 0.010", "fuel_air_ratio = 0.06")
HOT = """\
format = 1
title = "invented hydrogen scramjet"

[flight]
mach = 8.0
dynamic_pressure = "50 kPa"

[inlet]
kinetic_energy_efficiency = 0.975
pressure_ratio = 60.0

[fuel]
name = "hydrogen"
supply_pressure = "5 MPa"

[combustor]
process = "constant-pressure"
equivalence_ratio = 0.6
burnt_fraction = 0.92

[nozzle]
exit_area_over_capture = 1.5
velocity_coefficient = 0.985

[engine]
capture_area = "0.4 m^2"
"""

RAMJET = """\
format = 1
title = "invented kerosene ramjet"

[flight]
mach = 3.0
altitude = "18 km"

[inlet]
total_pressure_recovery = 0.7
exit_mach = 0.25

[fuel]
name = "kerosene"

[combustor]
process = "pressure-loss"
pressure_ratio = 0.95
equivalence_ratio = 0.5

[nozzle]
throat = "sized"
ideal = true
"""
RIG = """\
format = 1
title = "invented direct-connect rig in vitiated air"

[entry]
station = "3"
mach = 2.4
pressure = "100 kPa"
temperature = "1100 K"
area = "60 cm^2"

[air]
mole_fractions = { N2 = 0.6, O2 = 0.21, H2O = 0.19 }

[fuel]
formula = "C2H4"
phase = "gas"
formation_enthalpy = "52.4 kJ/mol"
vapour_specific_heat = "1.6 kJ/(kg K)"

[combustor]
process = "constant-pressure"
equivalence_ratio = 0.2
"""


DUCT = """\
format = 1
title = "invented dual-mode engine, ramps and a duct"

[flight]
mach = 8.0
dynamic_pressure = "50 kPa"

[inlet]
lip_x = "2.3 m"
lip_y = "0.5 m"
[[inlet.ramp]]
angle = "4 deg"
length = "1.2 m"
[[inlet.ramp]]
angle = "5 deg"
length = "0.6 m"
[[inlet.ramp]]
angle = "6 deg"

[isolator]
length = "0.5 m"
hydraulic_diameter = "0.08 m"
momentum_thickness = "0.6 mm"

[fuel]
name = "hydrogen"

[combustor]
process = "duct"
equivalence_ratio = 0.4
burnt_fraction = 0.9
friction_coefficient = 0.002
[[combustor.area]]
x = 0.0
area_ratio = 1.0
[[combustor.area]]
x = "0.3 m"
area_ratio = 1.0
[[combustor.area]]
x = "1.2 m"
area_ratio = 1.8
[[combustor.injector]]
x = "5 cm"

[nozzle]
exit_area_over_capture = 1.5
velocity_coefficient = 0.985

[engine]
capture_area = "0.4 m^2"
"""
"""Attached at this heat, with a shock train from an equivalence ratio of 1.23, a thermal throat from 1.661, unstarted from 1.679."""

DETACHED = DUCT.replace("mach = 8.0", "mach = 2.0").replace('lip_x = "2.3 m"\nlip_y = "0.5 m"\n', "")
"""Too slow for its turns; without a lip nothing passes in front of the inlet."""

INTERNAL = DUCT.replace("[nozzle]", "[nozzle]\ninternal_area_ratio = 2.0")
"""The same engine with an internal nozzle: it has a station 9."""

DUCT_RIG = """\
format = 1
title = "invented direct-connect duct"

[entry]
station = "2"
mach = 2.5
pressure = "60 kPa"
temperature = "900 K"
area = "0.03 m^2"

""" + DUCT[DUCT.index("[isolator]") : DUCT.index("[nozzle]")]

THROAT = """\
format = 1
title = "invented kerosene ramjet, cone and given throat"

[flight]
mach = 3.0
altitude = "17 km"

[inlet]
cowl_angle = "8 deg"
internal_contraction = 1.25
lip_x = "0.33 m"
lip_y = "0.22 m"
[inlet.cone]
half_angle = "20 deg"

[fuel]
name = "kerosene"

[combustor]
process = "constant-area"
entry_area_ratio = 2.0
equivalence_ratio = 0.5
burnt_fraction = 0.93

[nozzle]
throat_area = "0.112 m^2"
exit_area_ratio = 2.2

[engine]
capture_area = "0.152 m^2"
"""


def environment(folder: Path, **more: str) -> dict[str, str]:
    """The environment of a child: the package found from anywhere, its state in `folder`."""
    kept = {k: v for k, v in os.environ.items() if k not in ("NO_COLOR", "TERM", "COLUMNS")}
    return {**kept, "PYTHONPATH": str(ROOT), "XDG_STATE_HOME": str(folder / "state"), "COLUMNS": "80", **more}


def run(folder: Path, *arguments: str, text: str | None = None, **env: str) -> subprocess.CompletedProcess[str]:
    """The command as a process in `folder`, with `text` on standard input (a pipe, never a terminal)."""
    return subprocess.run(
        [*COMMAND, *arguments],
        input=text or "",
        capture_output=True,
        text=True,
        cwd=folder,
        env=environment(folder, **env),
        timeout=60,
        check=False,
    )


def written(folder: Path, **cases: str) -> Path:
    """Case files NAME.toml in `folder`; returns the folder."""
    for name, text in cases.items():
        (folder / f"{name}.toml").write_text(text, encoding="utf-8")
    return folder
