"""The pydantic schema of a case file, built from `quantities` when the first case is checked; its JSON Schema."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache
from typing import Annotated, Any, Literal

from pydantic import BaseModel, ConfigDict, Field, ValidationError, WrapValidator, create_model
from pydantic.annotated_handlers import GetJsonSchemaHandler
from pydantic.json_schema import JsonSchemaValue
from pydantic_core import CoreSchema, PydanticCustomError

from cycle.case.checking import FORMAT, owner
from cycle.case.rules import bounds, by_fuel, section_of, ways
from cycle.errors import UnitError
from cycle.quantities import GROUPS, INPUTS, SECTIONS, TABLES, Input
from cycle.units import LONGEST, UNITS, read

SPECIES = ("N2", "O2", "Ar", "CO2", "CO", "H2O", "H2", "OH", "H", "O", "N", "NO", "NO2", "N2O", "CH4")
"""Species that an air composition may name."""
LONGEST_TITLE = 200
LONGEST_NOTES = 20_000
_STRICT = ConfigDict(strict=True, extra="forbid", frozen=True, allow_inf_nan=False)


@dataclass(frozen=True, slots=True)
class Problem:
    """One fault as pydantic found it: where (path of keys), kind (pydantic's name of it), its context, what was given."""

    where: tuple[str, ...]
    kind: str
    context: Mapping[str, Any]
    given: object


class _Quantity:
    """Reads a number or text with a unit before the bounds are checked, and says so in the JSON Schema."""

    def __init__(self, dimension: str) -> None:
        self.dimension = dimension

    def __get_pydantic_json_schema__(self, core: CoreSchema, handler: GetJsonSchemaHandler) -> JsonSchemaValue:
        number = handler(core)
        units = [unit for unit in UNITS[self.dimension] if unit]
        text = {"type": "string", "maxLength": LONGEST, "pattern": r"^\s*[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d{1,3})?(\s*\S.*)?$"}
        if units:
            text["description"] = f"number with a unit: {', '.join(units)}"
        return {"anyOf": [number, text]}


def _reader(dimension: str) -> Any:
    def convert(value: Any, check: Any) -> float:
        try:
            number = read(value, dimension)
        except UnitError as error:
            raise PydanticCustomError("unit", "{text}", {"text": error.text, "allowed": error.allowed}) from None
        return float(check(number))

    return WrapValidator(convert)


def _number(entry: Input) -> Any:
    field = Field(gt=entry.over, ge=entry.lower, lt=entry.below, le=entry.upper, multiple_of=1.0 if entry.whole else None)
    return Annotated[float, field, _reader(entry.unit), _Quantity(entry.unit)]


def _choice(entry: Input) -> Any:
    return Literal[entry.choices]


def _text(entry: Input) -> Any:
    return Annotated[str, Field(min_length=1, max_length=40)]


def _flag(entry: Input) -> Any:
    return Literal[True]


def _mole_fractions(entry: Input) -> Any:
    return Annotated[dict[Literal[SPECIES], Annotated[float, Field(ge=0.0, le=1.0)]], Field(min_length=1)]  # type: ignore[valid-type]


def _rows(entry: Input) -> Any:
    fields: dict[str, Any] = {column.key: _field(column) for column in entry.columns}
    row = create_model(_title(entry.key), __config__=_STRICT, __doc__=f"One row of [[{entry.key}]].", **fields)
    return Annotated[list[row], Field(min_length=entry.fewest, max_length=entry.most)]  # type: ignore[valid-type]


_TYPES = {"rows": _rows, "number": _number, "choice": _choice, "text": _text, "flag": _flag, "fractions": _mole_fractions}


def _describe(entry: Input) -> str:
    symbol = f"{entry.symbol}: " if entry.symbol else ""
    default = f" Default: {by_fuel(entry)}." if entry.by_fuel else ""
    return f"{symbol}{entry.meaning} Allowed: {bounds(entry)}.{default}"


def _drop_null_default(schema: dict[str, Any]) -> None:
    if schema.get("default", "") is None:
        del schema["default"]


def _field(entry: Input) -> Any:
    # inputs are required by the rules of a whole case, columns in every row
    if entry.required and "." not in entry.key:
        return _TYPES[entry.kind](entry), Field(description=_describe(entry))
    extra = _drop_null_default if entry.default is None else None
    return _TYPES[entry.kind](entry), Field(entry.default, description=_describe(entry), json_schema_extra=extra)


def _section_words(section: str) -> str:
    return " ".join(f"{ways(group)}." for group in GROUPS if section_of(group) == section) or f"Table [{section}]."


def _title(key: str) -> str:
    """Name of a table's model: "inlet.isentropic_ramp" is InletIsentropicRamp."""
    return "".join(word.capitalize() for word in key.replace("_", ".").split("."))


def _section(section: str) -> type[BaseModel]:
    fields: dict[str, Any] = {i.name: _field(i) for i in INPUTS if i.section == section}
    for inner in (name for name in SECTIONS if name.rpartition(".")[0] == section):
        kind = _section(inner)
        fields[inner.rpartition(".")[2]] = (kind, Field(default_factory=kind))
    return create_model(_title(section), __config__=_STRICT, __doc__=_section_words(section), **fields)


@lru_cache(maxsize=1)
def model() -> type[BaseModel]:
    """The model of a whole case file, made once."""
    fields: dict[str, Any] = {
        "format": (Literal[FORMAT], Field(description=f"Format of the file, {FORMAT}.")),
        "title": (Annotated[str, Field(max_length=LONGEST_TITLE)], Field("untitled", description="One line that names the case.")),
        "notes": (Annotated[str, Field(max_length=LONGEST_NOTES)], Field("", description="Anything worth keeping with the case.")),
    }
    for section in TABLES:
        kind = _section(section)
        fields[section] = (kind, Field(default_factory=kind))
    name = Annotated[str, Field(pattern=r"^[A-Za-z0-9_-]{1,64}$")]
    fields["study"] = (dict[name, dict[str, Any]], Field(default_factory=dict, description="Named studies of the case."))
    return create_model("Case", __config__=_STRICT, __doc__="One case of ductwalk and its studies.", **fields)


def check(document: Mapping[str, Any]) -> tuple[dict[str, object], list[Problem]]:
    """Values of a case file and everything wrong with single ones.

    Parameters: document, nested tables as TOML gives them.
    Returns: key -> value of every key that is given and sound (numbers SI), "title" and "notes" among them; the problems.
    """
    try:
        return _values(model().model_validate(document)), []
    except ValidationError as error:
        problems = [_problem(detail) for detail in error.errors(include_url=False)]
    pruned = _without(document, [p.where for p in problems])
    return _values(model().model_validate({**pruned, "format": FORMAT})), problems


def _problem(detail: Any) -> Problem:
    where = tuple(str(part) for part in detail["loc"] if part != "[key]")
    return Problem(where, detail["type"], detail.get("ctx", {}), detail["input"])


def _without(document: Mapping[str, Any], places: list[tuple[str, ...]]) -> dict[str, Any]:
    """The document without its faulty tables and keys."""
    kept = {name: _copied(table) for name, table in document.items()}
    for *tables, name in {owner(place) for place in places}:
        inside: Any = kept
        for table in tables:
            inside = inside.get(table, {})
        inside.pop(name, None)
    return kept


def _copied(table: Any) -> Any:
    return {name: _copied(part) for name, part in table.items()} if isinstance(table, Mapping) else table


def _values(checked: BaseModel) -> dict[str, object]:
    values: dict[str, object] = {"title": checked.title, "notes": checked.notes}  # type: ignore[attr-defined]
    for section in SECTIONS:
        table = _given(checked, section)
        if table is not None:
            keys = {name: f"{section}.{name}" for name in table.model_fields_set}
            values.update({key: _plain(getattr(table, name)) for name, key in keys.items() if key not in SECTIONS})
    return values


def _given(checked: BaseModel, section: str) -> BaseModel | None:
    """A table of the checked file, None where the file does not have it."""
    table = checked
    for part in section.split("."):
        if part not in table.model_fields_set:
            return None
        table = getattr(table, part)
    return table


def _plain(value: Any) -> Any:
    """Rows as column -> number with the defaults of columns; anything else as it is."""
    if not isinstance(value, list):
        return value
    return [{name: cell for name, cell in row if cell is not None} for row in value]


def json_schema() -> dict[str, Any]:
    """JSON Schema (2020-12) of a case file as plain data, made from the model that checks a case."""
    schema = model().model_json_schema()
    flight = {"if": {"not": {"required": ["entry"]}}, "then": {"properties": _flight_bounds()}}
    return {"$schema": "https://json-schema.org/draft/2020-12/schema", **schema, "allOf": [flight]}


def _flight_bounds() -> dict[str, Any]:
    """What a case in flight, which has no table [entry], bounds more closely."""
    found: dict[str, Any] = {}
    for entry in (i for i in INPUTS if i.flight_upper is not None):
        table = found.setdefault(entry.section, {"properties": {}})
        table["properties"][entry.name] = {"maximum": entry.flight_upper}
    return found
