"""What a choice leaves without a meaning comes back when the choice is made back."""

from __future__ import annotations

import pytest

from cycle.case import Case, loads, save
from cycle.errors import CaseError
from tests.case.conftest import PLAIN
from tests.case_files import SHIPPED

VITIATED = {"N2": 0.6, "O2": 0.21, "H2O": 0.19}
AIRS = {"fractions": {"air.mole_fractions": VITIATED}, "humidity": {"air.relative_humidity": 0.4}}


def there_and_back(case: Case, key: str, other: str, more: dict[str, object] | None = None) -> Case:
    return case.replace({key: other, **(more or {})}).replace({key: case.choices[key]})


@pytest.mark.parametrize("air", AIRS.values(), ids=AIRS)
def test_the_gas_model_changed_there_and_back_keeps_the_air(air: dict[str, object]) -> None:
    case = loads(PLAIN).replace({**air, "inlet.chemistry": "frozen", "nozzle.chemistry": "frozen"})
    between = case.replace({"gas.model": "constant-gamma"})
    assert not between.fractions and "air.relative_humidity" not in between.numbers
    assert set(between.aside) >= set(air)
    assert between.replace({"gas.model": "equilibrium"}) == case
    assert not between.replace({"gas.model": "equilibrium"}).aside


def test_both_sides_keep_their_own() -> None:
    case = loads(PLAIN).replace({"air.relative_humidity": 0.4})
    warm = case.replace({"gas.model": "constant-gamma"}).replace({"gas.cp_compression": 1010.0})
    assert there_and_back(warm, "gas.model", "equilibrium") == warm
    assert there_and_back(there_and_back(warm, "gas.model", "frozen"), "gas.model", "equilibrium").value("gas.cp_compression") == 1010.0


@pytest.mark.parametrize("file", sorted(SHIPPED.glob("*.toml")), ids=lambda f: f.stem)
@pytest.mark.parametrize("other", ["constant-gamma", "frozen"])
def test_every_shipped_case_is_itself_again(file: object, other: str) -> None:
    case = loads(file.read_text())  # type: ignore[attr-defined]
    assert there_and_back(case, "gas.model", other) == case


def test_a_burner_process_changed_there_and_back_keeps_its_duct() -> None:
    case = loads((SHIPPED / "tidegate.toml").read_text())
    assert there_and_back(case, "combustor.process", "constant-area") == case


def test_edits_in_between_hold() -> None:
    between = loads(PLAIN).replace({"air.relative_humidity": 0.4}).replace({"gas.model": "constant-gamma"})
    again = between.replace({"combustor.equivalence_ratio": 0.3}).replace({"gas.model": "equilibrium"})
    assert (again.value("combustor.equivalence_ratio"), again.value("air.relative_humidity")) == (0.3, 0.4)


def test_what_was_removed_or_said_anew_does_not_come_back() -> None:
    case = loads(PLAIN).replace({"air.relative_humidity": 0.4})
    assert case.replace({"air.relative_humidity": None, "gas.model": "constant-gamma"}).aside == {}
    between = case.replace({"gas.model": "constant-gamma"})
    anew = between.replace({"gas.model": "equilibrium", "air.mole_fractions": VITIATED})
    assert anew.fractions == VITIATED and "air.relative_humidity" not in anew.numbers and not anew.aside
    other = case.replace({"inlet.exit_mach": 2.5})  # another way to say the end of compression is no choice to be made back
    assert "inlet.pressure_ratio" not in other.aside


def test_what_no_longer_fits_stays_aside_and_the_rest_comes_back() -> None:
    duct = loads((SHIPPED / "tidegate.toml").read_text())
    plain = duct.replace({"combustor.process": "constant-area"})
    assert {"combustor.area", "combustor.injector"} <= set(plain.aside)
    with pytest.raises(CaseError):
        plain.replace({"combustor.process": "duct", "combustor.area": [{"x": 0.0, "area_ratio": 1.0}]})


def test_a_file_has_only_what_means_something(tmp_path) -> None:  # type: ignore[no-untyped-def]
    case = loads(PLAIN).replace({"air.relative_humidity": 0.4}).replace({"gas.model": "constant-gamma"})
    save(case, tmp_path / "a.toml")
    assert "relative_humidity" not in (tmp_path / "a.toml").read_text()
