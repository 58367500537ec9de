"""Bodies of overcurrent devices: held by designation, set, or by the caller's own points."""

from typing import Annotated, Literal

from pydantic import Field, ValidationInfo, model_validator
from pydantic.functional_validators import AfterValidator, BeforeValidator

from faultloop.exchange.fields import WHOLE, Closed, Label, number
from faultloop.protection.breakers import Characteristic, breaker_tables
from faultloop.protection.curves import own_band, refuse_disorder
from faultloop.protection.designations import NO_MOTOR_FUSES
from faultloop.protection.fuses import fuse_families
from faultloop.protection.moulded_case import Settings, refuse_settings


def listed(value: float, values: list[float]) -> float:
    """Refuse a rating that no device has."""
    if value not in values:
        raise ValueError("no device has this rating; expected one of " + ", ".join(f"{v:g}" for v in values))
    return value


def _breaker_ratings() -> list[float]:
    return sorted({rating for table in breaker_tables().values() for rating in table.ratings_a})


def _fuse_ratings() -> list[float]:
    return sorted({rating.rated_current_a for family in fuse_families().values() for rating in family.rating})


def _breaker_rated(value: float, info: ValidationInfo) -> float:
    """Refuse a rating that the characteristic's own standard does not list."""
    table = breaker_tables().get(info.data.get("characteristic", ""))
    return listed(value, table.ratings_a if table else _breaker_ratings())


def _fuse_rated(value: float, info: ValidationInfo) -> float:
    """Refuse a rating that the fuse system has not."""
    family = fuse_families().get(info.data.get("fuse_system", ""))
    return listed(value, [rating.rated_current_a for rating in family.rating] if family else _fuse_ratings())


LetThroughEnergy = Annotated[
    float,
    number("A2*s", most=1e12, positive=True, description="Maker's greatest let-through energy I2t at the board"),
]


class Breaker(Closed):
    """A miniature circuit-breaker, or the overcurrent part of a combined device."""

    kind: Literal["miniature-circuit-breaker"]
    characteristic: Characteristic
    rated_current_a: Annotated[
        float,
        AfterValidator(_breaker_rated),
        Field(
            strict=True,
            allow_inf_nan=False,
            description="Rated current In [A]",
            json_schema_extra=lambda schema: schema.update(enum=_breaker_ratings()),
        ),
    ]
    breaking_capacity_ka: Annotated[float, number("kA", most=1000, description="Icn or Icu")] | None = None
    energy_limiting_class: (
        Annotated[int, Field(strict=True, ge=1, le=3, description="Energy-limiting class as marked"), WHOLE] | None
    ) = None
    let_through_energy_a2s: LetThroughEnergy | None = None
    poles: Annotated[int, Field(strict=True, ge=1, le=4), WHOLE] | None = None


def _no_motor_fuses(category: object) -> object:
    if category == "aM":
        raise ValueError(NO_MOTOR_FUSES)
    return category


class Fuse(Closed):
    """A fuse-link."""

    kind: Literal["fuse"]
    fuse_system: Literal["iec-60269", "bs-88-2", "bs-88-3", "bs-3036", "bs-1361", "bs-1362"]
    utilisation_category: Annotated[
        Literal["gG"] | None,
        BeforeValidator(_no_motor_fuses),
        Field(description="Of fuse-links by IEC 60269; left out for older British ones"),
    ] = None
    rated_current_a: Annotated[
        float,
        AfterValidator(_fuse_rated),
        Field(
            strict=True,
            allow_inf_nan=False,
            description="Rated current In [A]",
            json_schema_extra=lambda schema: schema.update(enum=_fuse_ratings()),
        ),
    ]
    breaking_capacity_ka: Annotated[float, number("kA", most=1000, description="Rated breaking capacity")] | None = None
    let_through_energy_a2s: LetThroughEnergy | None = None
    poles: Annotated[int, Field(strict=True, ge=1, le=4), WHOLE] | None = None

    @model_validator(mode="after")
    def _category_fits(self) -> "Fuse":
        """Refuse a utilisation category on a family that has none."""
        if self.utilisation_category and fuse_families()[self.fuse_system].utilisation_category is None:
            raise ValueError("this fuse system has no utilisation category: leave it out")
        return self


class MouldedCaseSettings(Closed):
    """Settings as read on the breaker, in ampere; the time setting of the overload release promises nothing."""

    overload_current_a: Annotated[float, number("A", most=6300, positive=True, description="Ir")]
    overload_time_s: Annotated[float, number("s", most=3600, positive=True, description="tr")] | None = None
    short_time_current_a: Annotated[float, number("A", most=100_000, positive=True, description="Isd")] | None = None
    short_time_greatest_s: (
        Annotated[float, number("s", most=10, positive=True, description="Greatest time at tsd that the maker states")]
        | None
    ) = None
    instantaneous_current_a: Annotated[float, number("A", most=100_000, positive=True, description="Ii")] | None = None

    def told(self) -> Settings:
        """What the band is made of."""
        return Settings(
            self.overload_current_a, self.short_time_current_a, self.short_time_greatest_s, self.instantaneous_current_a
        )


class MouldedCase(Closed):
    """A moulded-case circuit-breaker as it is set."""

    kind: Literal["moulded-case-circuit-breaker"]
    rated_current_a: Annotated[float, number("A", most=6300, positive=True, description="Rated current In")]
    settings: MouldedCaseSettings
    breaking_capacity_ka: Annotated[float, number("kA", most=1000, description="Icn or Icu")] | None = None
    let_through_energy_a2s: LetThroughEnergy | None = None
    poles: Annotated[int, Field(strict=True, ge=1, le=4), WHOLE] | None = None

    @model_validator(mode="after")
    def _settings_fit(self) -> "MouldedCase":
        """Refuse settings that cannot stand on one breaker."""
        refuse_settings(self.rated_current_a, self.settings.told())
        return self


class OwnCurvePoint(Closed):
    """One point of the caller's own curve."""

    current_a: Annotated[float, number("A", most=1_000_000, positive=True, description="Current, r.m.s.")]
    time_s: Annotated[float, number("s", most=1_000_000, positive=True, description="Operating time")]


def _in_order(points: list[OwnCurvePoint]) -> list[OwnCurvePoint]:
    refuse_disorder([(point.current_a, point.time_s) for point in points])
    return points


class OwnCurvePoints(Closed):
    """Edges of a curve: currents rise and times fall from point to point, and nothing between them is promised."""

    greatest: Annotated[
        list[OwnCurvePoint],
        Field(min_length=1, max_length=64, description="At this current or above it operates within the time"),
        AfterValidator(_in_order),
    ]
    least: Annotated[
        list[OwnCurvePoint],
        Field(max_length=64, description="At this current or below it does not operate within the time"),
        AfterValidator(_in_order),
    ] = Field(default_factory=list)

    def edges(self) -> tuple[list[tuple[float, float]], list[tuple[float, float]]]:
        """Greatest and least times as pairs of current and time."""
        greatest, least = ([(p.current_a, p.time_s) for p in edge] for edge in (self.greatest, self.least))
        return greatest, least


class OwnCurve(Closed):
    """A device by the caller's own points, such as a maker's; the service cannot vouch for them."""

    kind: Literal["curve"]
    rated_current_a: Annotated[float, number("A", most=6300, positive=True, description="Rated current or setting")]
    source: Annotated[Label, Field(description="Where the points were read: document, edition, figure")]
    points: OwnCurvePoints
    breaking_capacity_ka: Annotated[float, number("kA", most=1000, description="Icn or Icu")] | None = None
    let_through_energy_a2s: LetThroughEnergy | None = None
    poles: Annotated[int, Field(strict=True, ge=1, le=4), WHOLE] | None = None

    @model_validator(mode="after")
    def _band_holds(self) -> "OwnCurve":
        """Refuse edges that contradict the rated current or each other."""
        own_band(self.rated_current_a, *self.points.edges())
        return self


OvercurrentDevice = Annotated[Breaker | MouldedCase | Fuse | OwnCurve, Field(discriminator="kind")]
