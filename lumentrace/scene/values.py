"""The kinds of values that a scene file holds, and what all of its tables have in common."""

from collections.abc import Callable
from typing import Annotated, Any, Literal

from pydantic import (
    AfterValidator,
    BaseModel,
    BeforeValidator,
    ConfigDict,
    Discriminator,
    Field,
    model_validator,
)
from pydantic_core import PydanticCustomError

from lumentrace import units
from lumentrace.scene.names import NAME, RULE, is_name

SHORTEST_NM, LONGEST_NM = 100, 100_000
FARTHEST = 1e15  # a larger number is a slip, and its square may overflow


class Form(BaseModel):
    """A table. Its keys are checked before its values: a wrong key is mostly a misspelt one."""

    model_config = ConfigDict(
        extra="forbid",
        frozen=True,
        model_title_generator=lambda model: model.__name__.removesuffix("Form").lower(),
    )

    @model_validator(mode="before")
    @classmethod
    def _keys(cls, data: Any) -> Any:
        if not isinstance(data, dict):
            return data
        known = {field.alias or name: field for name, field in cls.model_fields.items()}
        for name in data:
            if name not in known:
                raise PydanticCustomError("unknown_key", "", {"key": name, "known": list(known)})
        for name, field in known.items():
            if field.is_required() and name not in data:
                needed = {"key": name, "needed": field.description}
                raise PydanticCustomError("missing_key", "", needed)
        return data


def key(description: str, *default: Any, **more: Any) -> Any:
    """A key of a table, with the text that editors show; required where no default is given."""
    return Field(*default, description=description, **more)


def one_of(*keys: str) -> dict[str, Any]:
    """Tells editors that one of the keys is needed, and only one."""
    return {"oneOf": [{"required": [name]} for name in keys]}


def _to_whole(value: Any) -> Any:
    """2e6 is a whole number, too."""
    if isinstance(value, float) and value.is_integer():
        return int(value)
    return value


def whole(least: int, most: int) -> Any:
    """The type of whole numbers from `least` to `most`."""
    return Annotated[int, Field(strict=True, ge=least, le=most), BeforeValidator(_to_whole)]


def _direction(vector: tuple[float, float, float]) -> tuple[float, float, float]:
    if not any(vector):
        raise ValueError("a direction must have a length")
    return vector


def _wavelength(nm: float) -> float:
    if not SHORTEST_NM <= nm <= LONGEST_NM:
        raise ValueError(f"wavelengths run from {SHORTEST_NM} nm to {LONGEST_NM} nm (100 um)")
    return nm


def _name(text: str) -> str:
    if not is_name(text):
        raise ValueError(RULE)
    return text


def _memory(text: str) -> int:
    try:
        return units.bytes_of(text)
    except ValueError:
        names = ", ".join(units.MEMORY)
        raise ValueError(f'write a number and one of {names}, as in "2 GiB"') from None


def _path(text: str) -> str:
    if not text:
        raise ValueError("the name of a file is needed")
    if "\\" in text or not text.isprintable():
        raise ValueError("write paths with / between folders, not with a backslash")
    return text


_REAL = {"strict": True, "allow_inf_nan": False}

Number = Annotated[float, Field(**_REAL, ge=-FARTHEST, le=FARTHEST)]
Positive = Annotated[float, Field(**_REAL, gt=0, le=FARTHEST)]
NotNegative = Annotated[float, Field(**_REAL, ge=0, le=FARTHEST)]
Share = Annotated[float, Field(**_REAL, ge=0, le=1)]
_BAND = {"minimum": SHORTEST_NM, "maximum": LONGEST_NM}
Wavelength = Annotated[float, Field(**_REAL, json_schema_extra=_BAND), AfterValidator(_wavelength)]
Count = whole(1, 10**15)
EventCount = whole(1, 2**31 - 1)
Seed = whole(0, 2**63 - 1)
Priority = whole(-(10**9), 10**9)
Yes = Annotated[bool, Field(strict=True)]
Text = Annotated[str, Field(strict=True)]
Name = Annotated[
    str, Field(strict=True, json_schema_extra={"pattern": NAME}), AfterValidator(_name)
]
FilePath = Annotated[str, Field(strict=True), AfterValidator(_path)]
Memory = Annotated[str, Field(strict=True), AfterValidator(_memory)]  # bytes, once read
Point = tuple[Number, Number, Number]
Direction = Annotated[Point, AfterValidator(_direction)]
Size = tuple[Positive, Positive]
Length = Literal[units.LENGTHS]


def _form_of(value: Any) -> str | None:
    """The mark of a value's form, for values that may have several."""
    for kind, mark in ((str, "<word>"), (dict, "<table>"), (list, "<list>")):
        if isinstance(value, kind):
            return mark
    return None


def copies_of(value: Any) -> str | None:
    """The mark of a row or a ring of copies."""
    if not isinstance(value, dict):
        return None
    return "<grid>" if "step" in value or isinstance(value.get("count"), list) else "<ring>"


def either(needed: str, form: Callable[[Any], str | None] = _form_of) -> Discriminator:
    """Chooses among forms by what was found; `needed` tells what to write where none fits."""
    return Discriminator(form, custom_error_type="form", custom_error_message=needed)
