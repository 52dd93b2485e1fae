"""Random cases over the full bounds of the JSON Schema, extremes included: drawn from the declarations themselves.

`python -m tests.full_bounds LOW HIGH` judges the cases of these seeds and prints faults with their seed, how many end in which status, and
the slowest. A seed draws either a whole case from the schema, or a plausible one of which some inputs are moved to anywhere within
their bounds. A draw that the rules of a case refuse is drawn again.
"""

from __future__ import annotations

import math
import sys
import time
import warnings
from collections import Counter
from collections.abc import Callable, Mapping
from typing import Any

import numpy as np

import cycle
from cycle.case.case import build
from cycle.case.checking import flatten, nest
from cycle.case.rules import _order, alternatives, groups_of, in_case, resolve
from cycle.errors import CaseError
from cycle.quantities import GROUP, INPUT, INPUTS, Input, Member
from tests.random_cases import pick, random_case
from tests.random_flowpath import DEAR, STATION, Rng, in_order, random_flowpath

TRIES = 200
FORMULAS = ("H2", "CH4", "C2H4", "C3H8", "C12H23", "NH3", "CH4O", "C10H16", "CO", "C", "N2H4", "HCN", "H2O2", "C60", "H", "C2H2")
AIR = ("N2", "O2", "Ar", "CO2", "CO", "H2O", "H2", "OH", "CH4", "NO", "N2O")
Flat = dict[str, Any]


def number(rng: Rng, entry: Input) -> float:
    """A value anywhere within the bounds of an input: even, even in its logarithm, a round one, or at an end."""
    low = entry.lower if entry.lower is not None else entry.above or 0.0
    high = entry.upper if entry.upper is not None else entry.below
    assert high is not None
    if entry.whole:
        return float(rng.integers(int(low), int(high) + 1))
    smallest = max(low, high * 10.0 ** -rng.uniform(1.0, 12.0)) if low <= 0.0 else low
    way = rng.random()
    if way < 0.12:
        return high if entry.upper is not None else float(np.nextafter(high, low))
    if way < 0.24:
        return low if entry.lower is not None else float(pick(rng, (np.nextafter(low, high), 1e-300, 1e-30, 1e-9, smallest)))
    if way < 0.34 and isinstance(entry.default, float):
        return entry.default
    if way < 0.6 or low < 0.0:
        return float(rng.uniform(low, high)) or high
    return float(math.exp(rng.uniform(math.log(smallest), math.log(high))))


def _fractions(rng: Rng) -> dict[str, float]:
    names = ["O2", *rng.choice(AIR, int(rng.integers(0, 6)), replace=False)]
    parts = rng.dirichlet(np.full(len(set(names)), pick(rng, (0.05, 0.5, 3.0))))
    parts = np.maximum(parts, 1e-12)
    return {str(name): float(x) for name, x in zip(dict.fromkeys(names), parts / parts.sum(), strict=True)}


def _row(rng: Rng, entry: Input) -> dict[str, float]:
    columns = [c for c in entry.columns if c.key not in entry.one_of and (c.required or rng.random() < 0.4)]
    chosen = {c.key: number(rng, c) for c in columns}
    if entry.one_of:
        name = pick(rng, entry.one_of)
        chosen[name] = number(rng, next(c for c in entry.columns if c.key == name))
    return chosen


def _rows(rng: Rng, entry: Input) -> list[dict[str, float]]:
    most = entry.most if rng.random() < 0.04 else min(entry.most, 5)
    rows = [_row(rng, entry) for _ in range(int(rng.integers(entry.fewest, most + 1)))]
    if entry.key == "combustor.area":
        return _areas(rng, rows)
    if entry.key == "combustor.injector":
        return _injectors(rng, rows)
    if rng.random() < 0.6:  # steps that a stream may take
        for row in rows:
            row["angle"] *= 0.2
    return [{**row, "length": row.get("length", float(rng.uniform(0.1, 2.0)))} for row in rows]


def _areas(rng: Rng, rows: list[dict[str, float]]) -> list[dict[str, float]]:
    """Places that rise, one way to say the area, perimeters in all rows or in none."""
    longest = float(10.0 ** rng.uniform(-3.0, 3.0))
    places = np.sort(rng.uniform(0.0, longest, len(rows)))
    ratio, around = rng.random() < 0.8, rng.random() < 0.15
    opening = np.cumprod(rng.uniform(0.9, 1.5, len(rows)))
    for k, row in enumerate(rows):
        row["x"] = float(places[k])
        row.pop("area", None), row.pop("area_ratio", None), row.pop("perimeter", None)
        wild = rng.random() < 0.1
        if ratio:
            row["area_ratio"] = float(rng.uniform(0.01, 50.0)) if wild else float(opening[k])
        else:
            row["area"] = float(10.0 ** rng.uniform(-4.0, 2.5))
        if around:
            row["perimeter"] = float(10.0 ** rng.uniform(-2.0, 2.0))
    if rng.random() < 0.5 and ratio:
        rows[0] |= {"x": 0.0, "area_ratio": 1.0}
    return rows


def _injectors(rng: Rng, rows: list[dict[str, float]]) -> list[dict[str, float]]:
    share = rng.dirichlet(np.full(len(rows), 2.0))
    for row, part, place in zip(rows, share, np.sort([r["x"] for r in rows]), strict=True):
        row |= {"x": float(place), "share": float(part)}
    rows[-1]["share"] = max(0.0, 1.0 - math.fsum(r["share"] for r in rows[:-1]))
    return rows


def value(rng: Rng, entry: Input, choices: Mapping[str, str | None]) -> Any:
    made: dict[str, Callable[[], Any]] = {
        "number": lambda: number(rng, in_case(entry, choices)),
        "flag": lambda: True,
        "text": lambda: str(pick(rng, FORMULAS)),
        "choice": lambda: str(pick(rng, entry.choices)),
        "fractions": lambda: _fractions(rng),
        "rows": lambda: _rows(rng, entry),
    }
    return made[entry.kind]()


def _given(rng: Rng, member: Member, choices: Mapping[str, str | None]) -> Flat:
    extra = tuple(key for key in member.also if rng.random() < 0.3)
    return {key: value(rng, INPUT[key], choices) for key in (*member.keys, *extra)}


def from_schema(rng: Rng) -> Flat:
    """A case drawn from the declarations alone, key -> value: choices and groups in their order, then numbers."""
    start = "entry" if rng.random() < 0.3 else "flight"
    choices: dict[str, str | None] = {"start": start}
    bare = start == "entry" and rng.random() < 0.6
    found: Flat = {}
    for name in _order():
        declared = GROUP.get(name) or INPUT[name]
        if any(choices.get(other, "") not in allowed for other, allowed in declared.when) or (bare and name.startswith("nozzle.")):
            continue
        if name in GROUP:
            group = GROUP[name]
            tag = pick(rng, alternatives(group, choices))
            if not group.required and rng.random() < 0.5:
                tag = group.default or tag
            choices[name] = tag
            members = [m for m in group.members if m.tag == tag]
            if members:
                found |= _given(rng, pick(rng, members), choices)
        elif name not in found and not any(name in m.keys for g in groups_of().get(name, ()) for m in g.members):
            if INPUT[name].required or rng.random() < 0.5:
                found[name] = choices[name] = value(rng, INPUT[name], choices)
            else:
                choices[name] = str(INPUT[name].default_in(choices) or "")
        else:
            choices[name] = str(found.get(name, INPUT[name].default or ""))
    return found | _numbers(rng, found, bare)


def _numbers(rng: Rng, found: Flat, bare: bool) -> Flat:
    resolved = resolve(found)
    more: Flat = {}
    share = rng.random()
    for entry in INPUTS:
        if entry.key not in resolved.applicable or entry.key in found or entry.kind != "number" or (bare and entry.section == "nozzle"):
            continue
        optional_way = any(not any(entry.key in m.also for m in g.members) for g in groups_of().get(entry.key, ()))
        if entry.required or (not optional_way and rng.random() < 0.5 * share):
            more[entry.key] = value(rng, entry, resolved.choices)
    return more


def moved(rng: Rng, base: Mapping[str, Any]) -> Flat:
    """A plausible case of which some inputs are anywhere within their bounds."""
    flat: Flat = {key: part for key, part in flatten(base).items() if key in INPUT}
    resolved = resolve(flat)
    able = [key for key in resolved.applicable if INPUT[key].kind in ("number", "rows", "fractions")]
    able = [k for k in sorted(able) if k in flat or not groups_of().get(k)]
    for key in rng.choice(able, min(len(able), int(rng.integers(1, 5))), replace=False):
        flat[str(key)] = value(rng, INPUT[str(key)], resolved.choices)
    return flat


def _gases(rng: Rng, flat: Flat) -> Flat:
    """Constant-gamma pairs that are gases, the least and the largest exponent among them."""
    if flat.get("gas.model") != "constant-gamma":
        return flat
    constant = flat.setdefault("gas.gas_constant", 287.0)
    for key in ("gas.cp_compression", "gas.cp_combustion", "gas.cp_expansion"):
        if key in flat or key == "gas.cp_compression":
            gamma = pick(rng, (1.05, 5.0 / 3.0, 1.4, rng.uniform(1.05, 5.0 / 3.0), rng.uniform(1.2, 1.4)))
            flat[key] = min(2e4, constant * gamma / (gamma - 1.0))
    return flat


def full_case(seed: int) -> tuple[cycle.Case, int]:
    """A valid case of this seed, and how many draws the rules refused."""
    rng = np.random.default_rng([seed, 9])
    whole = rng.random() < 0.35
    for tries in range(TRIES):
        flat = from_schema(rng) if whole else moved(rng, pick(rng, (random_case, random_flowpath))(int(rng.integers(1 << 30))))
        flat = _gases(rng, flat)
        try:
            return build({"format": 1, "title": f"full bounds {seed}, invented", **nest(flat)}, "a random case"), tries
        except CaseError:
            continue
    raise AssertionError(f"seed {seed}: no draw is a case")


def wrong(walk: cycle.Walk) -> list[str]:
    """What is wrong with the walk of one point."""
    found = in_order(walk)
    for name, station in walk.station.items():
        for key in (*STATION, *DEAR):
            if not math.isfinite(station[key]) and not walk.why_not_at(name, key):
                found.append(f"nan without a reason: {key} at {name}")
            if not math.isfinite(station[key]) and key in STATION:
                found.append(f"nan: {key} at {name}")
    for key in walk.performance:
        if not math.isfinite(walk.performance[key]) and not walk.why_not(key):
            found.append(f"nan without a reason: {key}")
    if walk.status == "solved":
        if "0" in walk.station and not math.isfinite(walk.performance.thrust):
            found.append("nan: thrust")
    elif not walk.reason:
        found.append(f"{walk.status} without a reason")
    for limit in walk.limits:
        if limit.state == "not assessed" and not limit.restore:
            found.append(f"limit {limit.key} not assessed without a reason")
    for rows in (walk.losses, walk.exergy, walk.potentials):
        found += [f"nan: row {row.key}" for row in rows if not math.isfinite(row.value)]
    return found


def judge(seed: int) -> tuple[str, int, float, list[str]]:
    """Status of the case of a seed, draws refused, CPU seconds, everything that is wrong with it."""
    case, tries = full_case(seed)
    begun = time.process_time()
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        try:
            walk = cycle.solve(case)
            status, found = walk.status, wrong(walk)
        except Exception as error:
            import traceback

            place = traceback.extract_tb(error.__traceback__)[-1]
            status, found = "exception", [f"{type(error).__name__}: {error} ({place.filename.rpartition('/')[2]}:{place.lineno})"]
    return status, tries, time.process_time() - begun, found


def main(low: int, high: int) -> int:
    """Judge the seeds from low to below high; 1 where a fault was found."""
    statuses, faults, refused, slow = Counter[str](), 0, 0, list[tuple[float, int, str]]()
    for seed in range(low, high):
        status, tries, seconds, found = judge(seed)
        statuses[status] += 1
        refused += tries
        faults += bool(found)
        slow = sorted([*slow, (round(seconds, 2), seed, status)], reverse=True)[:20]
        for words in found:
            print(f"{seed}: {status}: {words}", flush=True)
    print(f"{high - low} cases, {refused} draws refused, {faults} with faults; {dict(statuses.most_common())}")
    print("slowest, CPU s:", *(f"{seconds} ({seed}, {status})" for seconds, seed, status in slow))
    return int(faults > 0)


if __name__ == "__main__":
    sys.exit(main(int(sys.argv[1]), int(sys.argv[2])))
