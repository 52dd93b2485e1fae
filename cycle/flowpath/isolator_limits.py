"""What an isolator's inputs and the correlation of its shock train are held to."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from cycle.arrays import Array, Flags
from cycle.flow import limits
from cycle.flowpath import isolator
from cycle.flowpath.setting import Setting

AGREES = 1.03
"""Ratio of a stated to the actual hydraulic diameter that counts as the same duct; common practice."""

_EXTRAPOLATED = "beyond the data: the length of the train is an extrapolation"


@dataclass(frozen=True, slots=True)
class Held:
    """One limit of N points, the fields as those of `cycle.limits.Limit`; all ratios."""

    key: str
    label: str
    actual: Array
    allowed: Array
    upper: bool | Flags
    restore: str
    input: str
    missing: str = ""


def bounds(setting: Setting, area: Array, length: Array, mach: Array, reynolds: Array) -> list[Held]:
    """The stated hydraulic diameter, and Mach and Reynolds number ahead of the shock train.

    setting: with an isolator. area: of station 2, m2. length: of the train, m. mach, reynolds: ahead of it, 1. All (N,), NaN where they are
    not known. Returns one `Held` a limit; the correlation is assessed where a train stands.
    Source: plane geometry; the span of the data as in `limits.SHOCK_TRAIN_DATA`.
    """
    rows = [_section(setting, area)] if setting.has("isolator.hydraulic_diameter") else []
    data, there = limits.SHOCK_TRAIN_DATA[setting.choices["isolator.shape"]], np.where(length > 0.0, 1.0, np.nan)
    return [
        *rows,
        within("train_mach", "shock-train data, Mach number", there * mach, data.mach, "flight.mach"),
        within("train_reynolds", "shock-train data, Reynolds number", there * reynolds, data.reynolds, "isolator.momentum_thickness"),
    ]


def _section(setting: Setting, area: Array) -> Held:
    stated, own = setting["isolator.hydraulic_diameter"], isolator.section(setting, area).hydraulic_diameter
    # no rectangle is rounder than the square
    own = np.where(np.isnan(own), np.sqrt(area), own)
    numbers = f"{stated[0]:.4g} m stated, {own[0]:.4g} m by shape and area: " if stated.size == 1 else ""
    return Held(
        "isolator_section", "isolator section, hydraulic diameter", np.maximum(stated / own, own / stated), np.full(area.shape, AGREES),
        True, f"{numbers}leave isolator.hydraulic_diameter out", "isolator.hydraulic_diameter",
    )  # fmt: skip


def within(key: str, label: str, value: Array, span: limits.Span, goto: str) -> Held:
    """A value that the data of a correlation span, held to the end that it is nearer to.

    key, label: of the limit. value: (N,), NaN where it is not known. span: of the data. goto: the input that moves it. Source: definition.
    """
    upper = 1.0 - value / span.high < value / span.low - 1.0
    allowed = np.where(np.isnan(value), np.nan, np.where(upper, span.high, span.low))
    return Held(key, label, value, allowed, upper, _EXTRAPOLATED, goto, "no shock train, or its length is not known")
