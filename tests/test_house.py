"""The rules of the house: where imports point, what is imported when, and that public functions say what they take."""

from __future__ import annotations

import importlib
import inspect
import pkgutil
import subprocess
import sys
from pathlib import Path

import pytest

import cycle
from cycle.quantities import GROUPS, INPUT, INPUTS, MODES, OUTPUTS, STATUSES

ROOT = Path(__file__).parents[1]
LONGEST = 400
"""Lines of a file."""


def child(code: str) -> set[str]:
    """Names in sys.modules after `code` in a fresh interpreter."""
    run = subprocess.run(
        [sys.executable, "-c", f"{code}\nimport sys; print(' '.join(sys.modules))"], capture_output=True, text=True, check=True, cwd=ROOT
    )
    return set(run.stdout.split())


def test_import_arrows_point_down() -> None:
    """The contracts of pyproject.toml, held by import-linter."""
    tool = Path(sys.executable).parent / "lint-imports"
    run = subprocess.run([str(tool), "--no-cache"], capture_output=True, text=True, cwd=ROOT)
    assert run.returncode == 0, run.stdout + run.stderr


def test_no_file_is_longer_than_can_be_read_at_once() -> None:
    long = {str(p): n for d in ("cycle", "tui", "tests", "benchmarks") for p in (ROOT / d).rglob("*.py") if (n := lines_of(p)) > LONGEST}
    assert not long


def lines_of(path: Path) -> int:
    return len(path.read_text(encoding="utf-8").splitlines())


def test_importing_the_model_pulls_in_nothing_heavy() -> None:
    loaded = child("import cycle")
    assert not loaded & {"numpy", "scipy", "cantera", "pydantic", "tomlkit", "textual", "rich"}


def test_solving_a_case_needs_neither_cantera_nor_a_terminal() -> None:
    loaded = child("import cycle; w = cycle.solve(cycle.load('cases/saltmarsh.toml')); w.performance.thrust; w.limits; w.audit; w.losses")
    assert not loaded & {"cantera", "textual", "rich", "scipy.optimize"}


def test_inputs_outputs_and_groups_are_declared_once() -> None:
    assert len(INPUT) == len(INPUTS)
    assert len({o.key for o in OUTPUTS}) == len(OUTPUTS)
    members = [key for g in GROUPS for m in g.members for key in m.keys]
    assert set(members) <= set(INPUT)
    assert all(i.meaning.endswith(".") and i.label for i in INPUTS)
    assert all(words and words[0].islower() for words in (*STATUSES.values(), *MODES.values()))


def test_every_emitted_figure_is_declared_and_every_declared_one_emitted() -> None:
    walk = cycle.solve(cycle.load(ROOT / "cases" / "saltmarsh.toml"))
    declared = {where: {o.key for o in OUTPUTS if o.where == where} for where in ("station", "performance")}
    assert set(walk.station["4"]) == declared["station"]
    assert set(walk.performance) == declared["performance"]


def public_functions() -> list[object]:
    found = []
    for info in pkgutil.walk_packages(cycle.__path__, "cycle."):
        module = importlib.import_module(info.name)
        for name, thing in vars(module).items():
            if not name.startswith("_") and inspect.isfunction(thing) and thing.__module__ == info.name:
                found.append(pytest.param(thing, id=f"{info.name}.{name}"))
    return found


@pytest.mark.parametrize("function", public_functions())
def test_public_function_says_what_it_takes(function: object) -> None:
    """Docstring and signature together: no public function without words."""
    assert inspect.getdoc(function)


LAWS = ("isentropic", "shocks", "prandtl_meyer", "cone", "rayleigh", "fanno", "limits")


def laws_of(name: str) -> dict[str, object]:
    module = importlib.import_module(f"cycle.flow.{name}")
    own = {n: f for n, f in vars(module).items() if inspect.isfunction(f) and f.__module__ == module.__name__}
    return {n: f for n, f in own.items() if not n.startswith("_")}


@pytest.mark.parametrize("law", LAWS)
def test_every_law_names_its_parameters_and_a_source(law: str) -> None:
    """House habit 2: each public parameter of a law stands in its docstring; the function or its module names a source."""
    module = inspect.getdoc(importlib.import_module(f"cycle.flow.{law}")) or ""
    for name, function in laws_of(law).items():
        text = inspect.getdoc(function) or ""
        parameters = inspect.signature(function).parameters  # type: ignore[arg-type]
        assert not [p for p in parameters if p not in text], name
        assert "ource" in text + module, name


@pytest.mark.parametrize("path", sorted((ROOT / "cases").glob("*.toml")), ids=lambda p: p.stem)
def test_shipped_case_says_that_it_is_invented(path: Path) -> None:
    text = path.read_text(encoding="utf-8")
    assert "invented" in text
    case = cycle.load(path)
    assert case.title and len(case.notes.strip().splitlines()) >= 2
