"""What every section of the recipe shares: a closed, strict table whose keys carry their meaning.

The description, unit, limits and default of a key are written in its field and nowhere else:
messages and the listing of keys are made from there.
"""

from __future__ import annotations

from typing import Annotated, Any, TypeGuard

from pydantic import BaseModel, ConfigDict, Discriminator, Field, Tag

NUMBER_TAG, NAME_TAG = "<number>", "<name>"
PAIR_TAG, BY_MATERIAL_TAG = "<pair>", "<by material>"
TAGS = frozenset({NUMBER_TAG, NAME_TAG, PAIR_TAG, BY_MATERIAL_TAG})


class Section(BaseModel):
    """A table of the recipe: frozen, closed, no conversions, no nan and no infinity."""

    model_config = ConfigDict(frozen=True, extra="forbid", strict=True, allow_inf_nan=False)


def number(
    description: str,
    unit: str,
    *,
    default: Any = ...,
    noun: str = "",
    otherwise: str = "",
    **limits: Any,
) -> Any:
    """Field of a number.

    Parameters
    ----------
    description : what the number is
    unit : its unit; "1" for a pure number, "fraction" for a share from 0 to 1
    default : value when the key is absent; required without one
    noun : what a message calls it ("a wavelength"); taken from the unit when empty
    otherwise : what an absent key means when the default is None
    limits : gt, ge, lt, le

    Returns
    -------
    pydantic.fields.FieldInfo
    """
    extra: dict[str, Any] = {"unit": unit, "noun": noun, "otherwise": otherwise}
    return Field(default, description=description, json_schema_extra=extra, **limits)


def entry(
    description: str,
    *,
    default: Any = ...,
    expects: str = "",
    item: str = "",
    unit: str = "",
    otherwise: str = "",
    **limits: Any,
) -> Any:
    """Field of anything but one number: text, choice, list, table.

    Parameters
    ----------
    description : what the key says
    default : value when the key is absent; required without one
    expects : phrase for messages ("two wavelengths [low, high], in nm")
    item : phrase for one value of a table by material
    unit : unit of the numbers inside, if any
    otherwise : what an absent key means when the default says nothing
    limits : min_length, max_length, pattern

    Returns
    -------
    pydantic.fields.FieldInfo
    """
    extra: dict[str, Any] = {
        "unit": unit,
        "expects": expects,
        "item": item,
        "otherwise": otherwise,
    }
    return Field(default, description=description, json_schema_extra=extra, **limits)


def is_number(value: object) -> TypeGuard[float]:
    """Whether a TOML value is a number; true and false are not."""
    return isinstance(value, int | float) and not isinstance(value, bool)


def _number_or_name(value: object) -> str | None:
    if is_number(value):
        return NUMBER_TAG
    return NAME_TAG if isinstance(value, str) else None


def _pair_or_by_material(value: object) -> str | None:
    if isinstance(value, tuple):
        return PAIR_TAG
    return BY_MATERIAL_TAG if isinstance(value, dict) else None


# Letters, marks, digits, punctuation, symbols, blanks: nothing that moves a terminal's cursor.
PRINTABLE = r"^[\p{L}\p{M}\p{N}\p{P}\p{S} ]*$"
Name = Annotated[str, Field(min_length=1, max_length=80, pattern=PRINTABLE)]
Wavelength = Annotated[float, Field(gt=0.0, le=1e6)]
Band = tuple[Wavelength, Wavelength]
Fraction = Annotated[float, Field(ge=0.0, le=1.0)]
Index = Annotated[float, Field(ge=1.0, le=10.0)]
Thickness = Annotated[float, Field(ge=0.0, le=1e6)]
ThicknessPair = tuple[Thickness, Thickness]

IndexOrMaterial = Annotated[
    Annotated[Index, Tag(NUMBER_TAG)] | Annotated[Name, Tag(NAME_TAG)],
    Discriminator(_number_or_name),
]
ThicknessLimits = Annotated[
    Annotated[ThicknessPair, Tag(PAIR_TAG)]
    | Annotated[dict[Name, ThicknessPair], Tag(BY_MATERIAL_TAG)],
    Discriminator(_pair_or_by_material),
]

BAND = "two wavelengths [low, high] above 0, in nm"
MATERIAL = "the name of a material"
INDEX_OR_MATERIAL = "an index from 1 to 10, or the name of a material"
