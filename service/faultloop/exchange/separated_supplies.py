"""One separating transformer and what hangs on it, as a request of its own; it is judged as an outlet is."""

from collections.abc import Mapping
from typing import Annotated, Any

from pydantic import Field

from faultloop.exchange.fields import Label, number
from faultloop.exchange.overcurrent import OvercurrentDevice
from faultloop.exchange.requests import AssessmentRequest, Circuit, Readings, Ruled
from faultloop.exchange.unearthed import SeparatedSupply
from faultloop.rules.loader import LoadedRules


class SeparatedSupplyRequest(Ruled, SeparatedSupply):
    """One separating transformer: its plate, its outlets, what is plugged in, and what was read of it."""

    label: Label
    location: Label | None = None
    nominal_voltage_between_lines_v: (
        Annotated[float, number("V", most=1000, positive=True, description="Between the poles, nominal")] | None
    ) = None
    frequency_hz: Annotated[float, number("Hz", most=1000, description="Frequency")] | None = None
    circuit: Circuit = Field(default_factory=Circuit, description="The wiring from the transformer to the outlets")
    overcurrent_device: OvercurrentDevice | None = Field(default=None, description="Of the secondary, both poles")
    readings: Readings = Field(default_factory=Readings)


_OF_THE_SUPPLY = frozenset(SeparatedSupply.model_fields)
_POINT, _SUPPLY = ("label", "location"), ("nominal_voltage_between_lines_v", "frequency_hz")


def as_assessment(asked: SeparatedSupplyRequest, stored: Mapping[str, LoadedRules] | None = None) -> AssessmentRequest:
    """The same as the request of an outlet: stored under that form it has the same digest."""
    told = asked.model_dump(mode="json", by_alias=True, exclude_unset=True)
    body: dict[str, Any] = {
        "point": {name: told.pop(name) for name in _POINT if name in told},
        "supply": {"earthing": "separated", **{name: told.pop(name) for name in _SUPPLY if name in told}},
        "separated_supply": {name: told.pop(name) for name in _OF_THE_SUPPLY if name in told},
    }
    return AssessmentRequest.model_validate(body | told, context=stored)
