"""The case file as a strict schema: which tables and keys there are, and of what kind.

The home of pydantic. What a value must be to make sense (ranges, known names,
faces that exist) is checked where the records are built.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Annotated, Any, Literal

from pydantic import (
    BaseModel,
    BeforeValidator,
    ConfigDict,
    Discriminator,
    Field,
    Tag,
    ValidationError,
    model_validator,
)
from pydantic_core import PydanticCustomError

from ..geometry.dimension import FARTHEST
from .mistake import SchemaMistake, told

#: Above all that makes sense: a bed of springs, N/mm3 (1 mm of steel has 2e5), and a
#: mass, g.
STIFFEST, HEAVIEST = 1e9, 1e9


class Table(BaseModel):
    """A table of the case file: unknown keys are refused, kinds are not converted."""

    model_config = ConfigDict(
        strict=True, frozen=True, extra="forbid", allow_inf_nan=False, populate_by_name=True
    )

    @model_validator(mode="before")
    @classmethod
    def _known_keys_only(cls, value: Any) -> Any:
        if not isinstance(value, Mapping):
            raise PydanticCustomError("table", "must be a table")
        known = [field.alias or name for name, field in cls.model_fields.items()]
        for key in value:
            if key not in known:
                raise PydanticCustomError("unknown_key", "{key}", {"key": key, "known": known})
        return value


def _one_or_three(value: Any) -> Any:
    if isinstance(value, Sequence) and not isinstance(value, str):
        if len(value) == 3 and all(map(_is_number, value)):
            return tuple(float(item) for item in value)
    elif _is_number(value):
        return float(value)
    raise PydanticCustomError("one_or_three", "must be a number, or three numbers in a list")


def _point(length: int) -> Any:
    words = {2: "[mm, mm]", 3: "[x, y, z] in mm"}[length]

    def check(value: Any) -> Any:
        good = (
            isinstance(value, Sequence)
            and not isinstance(value, str)
            and len(value) == length
            and all(_is_number(item) and abs(item) <= FARTHEST for item in value)
        )
        if not good:
            raise PydanticCustomError("point", "must be a point {words}", {"words": words})
        return tuple(float(item) for item in value)

    return BeforeValidator(check)


def _is_number(value: Any) -> bool:
    # abs() < 1e300 leaves out nan, infinities and whole numbers too long for a float.
    return isinstance(value, int | float) and not isinstance(value, bool) and abs(value) < 1e300


def _number(value: Any) -> Any:
    if not _is_number(value):
        raise PydanticCustomError("number", "must be a finite number")
    return float(value)


def _as_list(value: Any) -> Any:
    return [value] if isinstance(value, Mapping) else value


def _rows(value: Any) -> Any:
    if isinstance(value, Mapping):
        raise PydanticCustomError("rows", "is a list of tables")
    return value


def _not_one_string(value: Any) -> Any:
    if isinstance(value, str | Mapping):
        raise PydanticCustomError("list_of_faces", "must be a list in square brackets")
    return value


Number = Annotated[float, BeforeValidator(_number)]
Positive = Annotated[float, BeforeValidator(_number), Field(gt=0)]
NumberOrThree = Annotated[float | tuple[float, float, float], BeforeValidator(_one_or_three)]
Point2 = Annotated[tuple[float, float], _point(2)]
Point3 = Annotated[tuple[float, float, float], _point(3)]
Word = Annotated[str, Field(min_length=1)]


class PlaneSelector(Table):
    """All faces in a plane at the body's smallest or largest coordinate."""

    plane: Literal["x", "y", "z"]
    at: Literal["min", "max"]


class BoxSelector(Table):
    """All faces wholly inside a box."""

    box: Annotated[list[Point3], Field(min_length=2, max_length=2)]


class NearSelector(Table):
    """The one face closest to a point."""

    near: Point3


class PatchSelector(Table):
    """A rectangle on a flat face."""

    face: Word
    low: Point2 = Field(alias="from")
    high: Point2 = Field(alias="to")


_KINDS: dict[type, str] = {
    PlaneSelector: "<plane>",
    BoxSelector: "<box>",
    NearSelector: "<near>",
    PatchSelector: "<patch>",
}


def _selector_kind(value: Any) -> str | None:
    if isinstance(value, str):
        return "<name>"
    if isinstance(value, Mapping):
        for key in ("plane", "box", "near"):
            if key in value:
                return f"<{key}>"
        if value.keys() & {"from", "to", "face"}:
            return "<patch>"
    # On the way out the value is one of the tables.
    return _KINDS.get(type(value))


Face = Annotated[
    Annotated[Word, Tag("<name>")]
    | Annotated[PlaneSelector, Tag("<plane>")]
    | Annotated[BoxSelector, Tag("<box>")]
    | Annotated[NearSelector, Tag("<near>")]
    | Annotated[PatchSelector, Tag("<patch>")],
    Discriminator(
        _selector_kind,
        custom_error_type="selector",
        custom_error_message="must be a face name or a selector",
    ),
]
Faces = Annotated[list[Face], BeforeValidator(_not_one_string), Field(min_length=1)]


class MaterialTable(Table):
    """A material by name, by values, or by name with some values of its own."""

    name: Word | None = None
    youngs_modulus_gpa: NumberOrThree | None = None
    shear_modulus_gpa: NumberOrThree | None = None
    poisson_ratio: NumberOrThree | None = None
    density: Number | None = None
    loss_factor: Number | None = None
    expansion_ppm_per_k: Number | None = None
    modulus_slope_ppm_per_k: Number | None = None
    conductivity: Number | None = None
    specific_heat: Number | None = None
    endurance_mpa: Number | None = None


class MountTable(Table):
    """How some faces are held."""

    kind: Literal["clamped", "held", "sliding", "springs", "free"]
    faces: Faces | None = None
    axes: Annotated[list[Literal["x", "y", "z"]], Field(min_length=1, max_length=3)] | None = None
    normal_n_per_mm3: Annotated[Number, Field(ge=0, le=STIFFEST)] | None = None
    tangential_n_per_mm3: Annotated[Number, Field(ge=0, le=STIFFEST)] | None = None


class AttachedMassTable(Table):
    """A mass on a face or round a point of the surface."""

    grams: Annotated[Positive, Field(le=HEAVIEST)]
    face: Face | None = None
    at: Point3 | None = None
    radius: Positive | None = None


class PitchTable(Table):
    """What notes and ratios are told against."""

    a4_hz: Number = 440.0
    reference_mode: Word | None = None


class SurroundingsTable(Table):
    """Where the part sounds."""

    temperature_c: Number = 20.0


class SolveTable(Table):
    """How far and how finely to solve."""

    modes: Annotated[int, Field(ge=1, le=500)] | None = None
    up_to_hz: Positive | None = None
    size: Positive | None = None
    accuracy_cents: Number | None = None


class TargetTable(Table):
    """A wanted pitch of a mode."""

    mode: Word
    note: Word | None = None
    cents: Number | None = None
    hz: Positive | None = None
    ratio: Positive | None = None
    of: Word | None = None
    tolerance_cents: Positive = 1.0
    weight: Positive = 1.0


class MeasuredTable(Table):
    """A measured pitch of a mode."""

    mode: Word
    hz: Positive


class ExpectTable(Table):
    """What an example case must show."""

    mode: Word
    hz: Positive
    tolerance_cents: Positive
    source: Word


class CaseTables(Table):
    """The whole case file."""

    title: Word
    version: int = 1
    shape: dict[str, Any]
    material: MaterialTable
    mount: Annotated[list[MountTable], BeforeValidator(_as_list)] = []
    attached_mass: Annotated[list[AttachedMassTable], BeforeValidator(_rows)] = []
    pitch: PitchTable = PitchTable()
    surroundings: SurroundingsTable = SurroundingsTable()
    solve: SolveTable = SolveTable()
    target: Annotated[list[TargetTable], BeforeValidator(_rows)] = []
    measured: Annotated[list[MeasuredTable], BeforeValidator(_rows)] = []
    expect: Annotated[list[ExpectTable], BeforeValidator(_rows)] = []


def read_tables(document: Mapping[str, Any]) -> CaseTables:
    """Return the tables of a case document, with defaults.

    Raises
    ------
    InputError
        For the first mistake in the order of the file's schema: an unknown or
        missing key, or a value of the wrong kind.
    """
    try:
        return CaseTables.model_validate(document)
    except ValidationError as error:
        first = error.errors(include_url=False)[0]
    raise told(
        SchemaMistake(
            sort=first["type"],
            place=first["loc"],
            text=first["msg"],
            value=first["input"],
            context=first.get("ctx", {}),
        ),
        document,
    )


def plain(table: Table) -> dict[str, Any]:
    """Return a table as the case file would hold it, absent keys left out."""
    return table.model_dump(by_alias=True, exclude_none=True, mode="json")
