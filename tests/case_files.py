"""Cases that tests stand on: those of the tests, whose figures they may quote, and the shipped ones."""

from __future__ import annotations

from pathlib import Path

OWN = Path(__file__).resolve().parent / "cases"
SHIPPED = Path(__file__).resolve().parents[1] / "cases"


def case_file(name: str) -> Path:
    """The file of a case: one of the tests' own where there is one of that name, else a shipped one."""
    own = OWN / f"{name}.toml"
    return own if own.exists() else SHIPPED / f"{name}.toml"
