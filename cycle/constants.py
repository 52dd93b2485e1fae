"""Physical constants, each with its source."""

from __future__ import annotations

GAS_CONSTANT = 8.31446261815324
"""Molar gas constant, J/(mol K). CODATA 2018 (exact, from the 2019 SI)."""

STANDARD_GRAVITY = 9.80665
"""Standard acceleration of free fall, m/s2. 3rd CGPM (1901), exact."""

REFERENCE_PRESSURE = 1.0e5
"""Standard-state pressure of all entropies, Pa. IUPAC 1982 (1 bar)."""

REFERENCE_TEMPERATURE = 298.15
"""Enthalpy datum: elements in their reference state at this temperature, K. IUPAC."""

STANDARD_AIR = {"N2": 0.7808, "O2": 0.2095, "Ar": 0.0097}
"""Dry air by mole, carbon dioxide and traces counted as argon; 28.964 kg/kmol.
U.S. Standard Atmosphere 1976, table 3, rounded to four digits."""
