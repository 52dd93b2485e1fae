from __future__ import annotations

import pytest

from cycle.case import Case, loads

PLAIN = """\
# Saltmarsh test article: invented, for demonstration
format = 1
title  = "Saltmarsh, hydrogen"

[flight]                      # a comment on the header
mach = 8.0        # as flown
dynamic_pressure = "50 kPa"

[gas]
model = "equilibrium"

[inlet]
kinetic_energy_efficiency = 0.975   # guess
# a comment between keys
pressure_ratio = 60.0

[fuel]
name = 'hydrogen'
temperature = "300 K"

[combustor]
process = "constant-area"
equivalence_ratio = 0.6
burnt_fraction = 0.92

[nozzle]
exit_area_over_capture = 1.5

[engine]
capture_area = "0.4 m^2"

[study.burner]
outputs = ["specific_impulse", "thrust"]   # of interest
[[study.burner.vary]]
input = "combustor.equivalence_ratio"
from = 0.2
to = 1.0
points = 41
"""

GEOMETRY = """\
format = 1
title = "Narrow lip, invented"

[flight]
mach = 7.0
altitude = "28 km"

[inlet]                     # three waves to the lip
cowl_angle = "14 deg"
lip_x = "1.9 m"
lip_y = "0.52 m"
internal_contraction = 1.4  # to the throat

# the first ramp is long
[[inlet.ramp]]
angle = "8 deg"
length = "0.9 m"            # along the surface

[[inlet.ramp]]
angle = "6 deg"             # no length: the last one
# end of the ramps

[isolator]
length = 0.5
hydraulic_diameter = "8 cm"

[fuel]
name = "ethylene"

[combustor]
equivalence_ratio = 0.5

[nozzle]
ideal = true
"""

DUCT = """\
format = 1
title = "Opening duct, invented"

[flight]
mach = 7.0
dynamic_pressure = "50 kPa"

[inlet]
kinetic_energy_efficiency = 0.97
exit_mach = 3.0

[fuel]
name = "hydrogen"

[combustor]
process = "duct"
equivalence_ratio = 0.5
burning_theta = 2.0

# straight, then opening
[[combustor.area]]
x = 0.0
area_ratio = 1.0
[[combustor.area]]
x = "15 cm"      # corner
area_ratio = 1.0
[[combustor.area]]
x = "90 cm"
area_ratio = 1.9
# to the nozzle
[[combustor.area]]
x = "1.2 m"
area_ratio = 2.8

[[combustor.injector]]
x = 0.0          # at the step
share = 0.6
[[combustor.injector]]
x = "20 cm"
share = 0.4
length = 0.7     # shorter than the duct

[nozzle]
ideal = true
"""

INLINE = """\
format = 1
title = "Opening duct in few lines, invented"
flight = { mach = 7.0, dynamic_pressure = "50 kPa" }
fuel = { name = "hydrogen" } # gas
nozzle = { ideal = true }
inlet = { ramp = [{ angle = "8 deg" }, { angle = "7 deg" }], cowl_angle = "15 deg" }

[combustor]
process = "duct"
equivalence_ratio = 0.5
area = [
    { x = 0.0, area_ratio = 1.0 },      # entry
    { x = "90 cm", area_ratio = 1.9 },  # middle
    { x = "1.2 m", area_ratio = 2.8 },
]
injector = [{ x = 0.0 }]
"""


@pytest.fixture
def text() -> str:
    return PLAIN


@pytest.fixture
def case() -> Case:
    return loads(PLAIN, "saltmarsh")
