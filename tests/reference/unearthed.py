"""Outlets of separated and IT supplies in few words, and the point at which an answer turns."""

from collections.abc import Callable, Iterable
from typing import Any

import numpy as np

from faultloop import assess, assess_many

Body = dict[str, Any]
RULES = ("iec-60364", "bs-7671")
LEAD = {"length_m": 3, "area_mm2": 1.5}
PART, EVERY = 1e-7, 16  # how near a turning point is found, and by how many outlets at a time


def exact(value: float, **more: Any) -> Body:
    """A reading without uncertainty."""
    return {"value": value, "instrument": {"percent": 0, "digits": 0, "resolution": 0.001}, **more}


FLOATS = {"contact_current_l1_ma": exact(0.2), "contact_current_l2_ma": exact(0.2)}


def breaker(designation: str) -> Body:
    """A miniature circuit-breaker such as B16."""
    kind = "miniature-circuit-breaker"
    return {"kind": kind, "characteristic": designation[0], "rated_current_a": float(designation[1:])}


def item(protection_class: str = "I", **more: Any) -> Body:
    """An item with a lead and no filter."""
    return {"protection_class": protection_class, "lead": LEAD, "filter_capacitance_nf": 0, **more}


def bench(
    readings: Body | None = None,
    volts: float | None = 230,
    rules: str = "iec-60364",
    transformer: Body | None = None,
    **supply: Any,
) -> Body:
    """A separated outlet with one item, nothing between its windings, by cold conductors unless told otherwise."""
    plate: Body = {"rated_power_va": 1000, "primary_voltage_v": 230, "secondary_voltage_v": 230}
    plate |= {"short_circuit_voltage_percent": 6, "short_circuit_tolerance_percent": 0}
    plate |= {"interwinding_capacitance_nf": 0, **(transformer or {})}
    told: Body = {"outlets": 1, "items": [item()], "earth_contacts": "unconnected", "wiring_length_m": 0, **supply}
    between = {} if volts is None else {"nominal_voltage_between_lines_v": volts}
    return {
        "point": {"label": "bench"},
        "supply": {"earthing": "separated", "frequency_hz": 50, **between},
        "separated_supply": {"transformer": plate, **told},
        "overcurrent_device": breaker("B6"),
        "readings": FLOATS if readings is None else readings,
        "rules": rules,
        "policy": {"temperature": "none"},
    }


def insulated(readings: Body, role: str = "final", device: Body | None = None, **told: Any) -> Body:
    """An IT outlet of 230/400 V without a neutral, unless told otherwise; `rules`, `supply` and `it_supply` add."""
    supply = {"earthing": "IT", "nominal_voltage_to_earth_v": 230, "nominal_voltage_between_lines_v": 400}
    supply |= {"phases": 3, "frequency_hz": 50, **told.get("supply", {})}
    monitor = {"fitted": True, "set_point_kohm": 50, "alarm_tested": True}
    it_supply = {"neutral_distributed": False, "exposed_parts": "together", "insulation_monitor": monitor}
    return {
        "point": {"label": "outlet"},
        "supply": supply,
        "it_supply": it_supply | told.get("it_supply", {}),
        "circuit": {"role": role, "feeds": "fixed-equipment"},
        "overcurrent_device": device or breaker("B16"),
        "readings": readings,
        "rules": told.get("rules", "iec-60364"),
        "policy": {"temperature": "none"},
    }


def found(answer: Body, check: str) -> Body:
    """One finding of an answer."""
    one: Body = next(finding for finding in answer["findings"] if finding["check"] == check)
    return one


def finding(body: Body, check: str) -> Body:
    """One finding on an outlet."""
    return found(assess(body), check)


def quantity(body: Body, name: str) -> Any:
    """One reported quantity of an outlet."""
    return assess(body)["quantities"][name]


def verdict(check: str, *wanted: str) -> Callable[[Body], bool]:
    """Whether a check ends in one of the verdicts."""
    return lambda answer: found(answer, check)["verdict"] in wanted


def without(condition: str) -> Callable[[Body], bool]:
    """Whether an answer does not carry a condition."""
    return lambda answer: condition not in {told["condition"] for told in answer["conditions"]}


def turning_point(outlet: Callable[[float], Body], holds: Callable[[Body], bool], low: float, high: float) -> float:
    """Greatest value at which something still holds of the answer: it does at `low` and no longer at `high`.

    Asked just below and just above until the two lie within a ten-millionth; every outlet asked on the way has to agree
    that there is one turning point.
    """
    assert [holds(answer) for answer in assess_many([outlet(low), outlet(high)])] == [True, False]
    while high - low > PART * high:
        between = np.linspace(low, high, EVERY + 2)[1:-1].tolist()
        held = [holds(answer) for answer in assess_many([outlet(value) for value in between])]
        turns = held.index(False) if False in held else len(held)
        assert not any(held[turns:]), "it turns more than once"
        ends = [low, *between, high]
        low, high = ends[turns], ends[turns + 1]
    return low


def greatest_number(outlet: Callable[[int], Body], holds: Callable[[Body], bool], numbers: Iterable[int]) -> int:
    """Greatest of some numbers at which something holds; it must fail beyond."""
    asked = list(numbers)
    held = [holds(answer) for answer in assess_many([outlet(number) for number in asked])]
    turns = held.index(False)
    assert not any(held[turns:])
    return asked[turns - 1]
