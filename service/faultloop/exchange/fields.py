"""Building blocks of request bodies: closed models, bounded numbers with units, readings."""

from typing import Annotated, Any, Literal

from pydantic import BaseModel, ConfigDict, Discriminator, Field, Tag
from pydantic.functional_validators import AfterValidator, BeforeValidator


class Closed(BaseModel):
    """A request body: a misspelt field is refused, because an ignored measurement can kill."""

    model_config = ConfigDict(extra="forbid", allow_inf_nan=False, populate_by_name=True)


def _storable(text: str) -> str:
    try:
        text.encode("utf-8")
    except UnicodeEncodeError:
        raise ValueError("text must be valid Unicode") from None
    if "\x00" in text:
        raise ValueError("text must not contain the NUL character")
    return text


def _whole(value: Any) -> Any:
    """JSON knows one kind of number: 2.0 is the whole number 2."""
    return int(value) if isinstance(value, float) and value.is_integer() else value


WHOLE = BeforeValidator(_whole)
Label = Annotated[str, Field(min_length=1, max_length=200, pattern=r"^[^\x00]*$"), AfterValidator(_storable)]


def number(unit: str, *, least: float = 0.0, most: float, description: str, positive: bool = False) -> Any:
    """Field of a strict number with its unit, bounded to what can physically be meant."""
    return Field(
        ge=None if positive else least,
        gt=least if positive else None,
        le=most,
        strict=True,
        allow_inf_nan=False,
        description=f"{description} [{unit}]",
        json_schema_extra={"x-unit": unit, "format": "double"},
    )


DATE = r"^\d{4}-(0[1-9]|1[0-2])-(0[1-9]|[12]\d|3[01])$"


class Instrument(Closed):
    """Stated uncertainty of the instrument: percent of reading, and digits of a resolution."""

    percent: Annotated[float, number("%", most=100, description="Part proportional to the reading")]
    digits: Annotated[float, number("1", most=1000, description="Number of digits")]
    resolution: Annotated[float, number("unit of the reading", most=1000, description="One digit")]
    calibration_due: Annotated[str, Field(max_length=10, pattern=DATE)] | None = Field(
        default=None, description="Date until which the calibration holds"
    )
    zero_check: (
        Annotated[
            float,
            number(
                "unit of the reading", least=-1000, most=1000, description="Shown with the leads joined, after nulling"
            ),
        ]
        | None
    ) = None


MethodWord = Literal["no-trip", "high-current", "dead", "calculated", "declared"]
BoundWord = Literal["exact", "above", "below"]


class Reading(Closed):
    """A reading with what makes it mean something."""

    value: Annotated[float, number("unit of the field", most=1e7, description="Value as shown")]
    bound: BoundWord = Field(
        default="exact", description="above: over range, the true value is higher; below: under range"
    )
    method: MethodWord | None = Field(default=None, description="How it was measured")
    state: Label | None = Field(default=None, description="State of the installation, such as disconnected")
    instrument: Instrument | None = None
    conductor_temperature_c: (
        Annotated[float, Field(ge=-40, le=90, strict=True, allow_inf_nan=False, description="[Cel]")] | None
    ) = None
    taken_at: (
        Annotated[str, Field(max_length=40, pattern=r"^\d{4}-\d{2}-\d{2}(T[0-9:.]+(Z|[+-]\d{2}:\d{2}))?$")] | None
    ) = Field(default=None, description="Date, or date and time with offset")


def _shape(value: Any) -> str:
    return "reading" if isinstance(value, (dict, Reading)) else "number"


Plain = Annotated[float, number("unit of the field", most=1e7, description="Value as shown, exact")]
Measured = Annotated[
    Annotated[Plain, Tag("number")] | Annotated[Reading, Tag("reading")],
    Discriminator(_shape),
]
