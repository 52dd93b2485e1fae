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


@pytest.fixture
def text() -> str:
    return PLAIN


@pytest.fixture
def case() -> Case:
    return loads(PLAIN, "saltmarsh")
