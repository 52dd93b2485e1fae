"""python -m benchmarks [--short] [--json] [gas | walks | march | screen ...]: each figure as a ratio with what it is compared to."""

from __future__ import annotations

import argparse
import importlib
import json
import os
import sys
from collections.abc import Callable

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
os.environ.setdefault("OMP_NUM_THREADS", "1")


def _gas(short: bool) -> list[dict[str, object]]:
    module = importlib.import_module("benchmarks.thermochemistry")
    return module.states("hydrogen") if short else module.rows()


def _walks(short: bool) -> list[dict[str, object]]:
    module = importlib.import_module("benchmarks.walks")
    if short:
        return module.rows("hydrogen", 4000, 60, 1)
    return module.rows("hydrogen") + module.rows("ethylene")


def _screen(short: bool) -> list[dict[str, object]]:
    module = importlib.import_module("benchmarks.screen")
    return module.rows(short)


def _march(short: bool) -> list[dict[str, object]]:
    module = importlib.import_module("benchmarks.march")
    return module.rows(short)


PARTS: dict[str, Callable[[bool], list[dict[str, object]]]] = {"gas": _gas, "walks": _walks, "march": _march, "screen": _screen}


def main(argv: list[str] | None = None) -> int:
    """Run the parts asked for, all when none is; 0 even where a bar is missed: a benchmark reports."""
    parser = argparse.ArgumentParser(prog="python -m benchmarks", description=__doc__)
    parser.add_argument("parts", nargs="*", choices=[[], *PARTS], help="which parts (default: all)")
    parser.add_argument("--short", action="store_true", help="fewer points and runs, for continuous integration")
    parser.add_argument("--json", action="store_true", help="rows as JSON")
    options = parser.parse_args(argv)
    from benchmarks.timing import printed

    rows = []
    for name in options.parts or PARTS:
        found = PARTS[name](options.short)
        rows += found
        if not options.json:
            print(printed(found), flush=True)  # type: ignore[arg-type]
    if options.json:
        json.dump(rows, sys.stdout, indent=1)
        print()
    return 0


if __name__ == "__main__":
    sys.exit(main())
