"""What a request may say, what is refused, and how its bytes are known again."""

import copy
import hashlib
import json
import math
from typing import Any

import pytest
from pydantic import ValidationError

from faultloop import assess, assess_many
from tests.assessment.bodies import RESIDUAL_30, Body, live, readings, request


def altered(path: str, value: Any) -> Body:
    """A sound request with one field set."""
    body = copy.deepcopy(request(readings(zs=live(0.6), times={"1": 25}), residual=RESIDUAL_30))
    *parents, last = path.split("/")
    part: Any = body
    for name in parents:
        part = part[name]
    part[last] = value
    return body


@pytest.mark.parametrize(
    ("path", "value"),
    [
        ("readings/earth_fault_loop_impedence_ohm", 0.6),
        ("readings/earth_fault_loop_impedance_ohm", "0.6"),
        ("readings/earth_fault_loop_impedance_ohm", True),
        ("readings/earth_fault_loop_impedance_ohm", -0.1),
        ("readings/earth_fault_loop_impedance_ohm", math.nan),
        ("readings/earth_fault_loop_impedance_ohm", math.inf),
        ("readings/earth_fault_loop_impedance_ohm", {"value": 0.6, "method": "guess"}),
        ("readings/earth_fault_loop_impedance_ohm", {"value": 0.6, "bound": ">"}),
        ("readings/earth_fault_loop_impedance_ohm", {"bound": "above"}),
        ("readings/residual_operating_time_ms", {"3": 25}),
        ("readings/residual_operating_time_ms", 25),
        ("overcurrent_device/rated_current_a", 33),
        ("overcurrent_device/characteristic", "E"),
        ("overcurrent_device/kind", "wire"),
        ("residual_current_device/rated_residual_operating_current_ma", 31),
        ("residual_current_device/delay", "slow"),
        ("supply/earthing", "TN"),
        ("supply/nominal_voltage_to_earth_v", 0),
        ("circuit/users", "anybody"),
        ("circuit/designated_equipment", "yes"),
        ("rules", "bs-7671:1066"),
        ("policy", {"temperature": "warm"}),
        ("policy", {"coverage": 0.2}),
        ("point/label", ""),
        ("point/label", "a\x00b"),
        ("point/label", "\ud800"),
        ("extra", 1),
    ],
)
def test_what_cannot_be_meant_is_refused_and_its_field_named(path: str, value: Any) -> None:
    with pytest.raises(ValidationError) as caught:
        assess(altered(path, value))
    where = [".".join(str(step) for step in error["loc"]) for error in caught.value.errors()]
    assert any(path.split("/")[0] in place for place in where)


@pytest.mark.parametrize("value", [0.0, 1e-9, 0.00069, 640, 1e7])
def test_an_implausible_reading_is_a_result_and_no_error(value: float) -> None:
    assert assess(altered("readings/earth_fault_loop_impedance_ohm", value))["verdict"] in (
        "fail",
        "undetermined",
    )


def test_a_request_with_nothing_but_a_label_is_answered_with_what_is_missing() -> None:
    answer = assess({"point": {"label": "somewhere"}})
    assert answer["verdict"] == "undetermined"
    assert answer["provenance"]["rules"].startswith("iec-60364:")


def test_no_rows_give_no_answers() -> None:
    assert assess_many([]) == []


def test_the_input_digest_is_that_of_the_canonical_bytes_with_numbers_as_floats() -> None:
    body = {
        "point": {"label": "Prüfpunkt Ω"},
        "supply": {"earthing": "TN-S", "nominal_voltage_to_earth_v": 230.0},
        "readings": {"earth_fault_loop_impedance_ohm": {"value": 0.6, "method": "dead"}},
    }
    text = json.dumps(body, sort_keys=True, separators=(",", ":"), ensure_ascii=False)
    expected = hashlib.sha256(text.encode()).hexdigest()
    assert assess(body)["provenance"]["input_digest"] == expected


def test_whole_numbers_and_key_order_make_no_other_digest() -> None:
    plain = assess(altered("supply/nominal_voltage_to_earth_v", 230))
    body = altered("supply/nominal_voltage_to_earth_v", 230.0)
    assert assess(dict(reversed(body.items()))) == plain


def test_a_stated_default_is_another_input_with_the_same_findings() -> None:
    left_out = assess(request(readings(zs=live(0.6))))
    stated = assess(request(readings(zs=live(0.6, bound="exact"))))
    assert left_out["findings"] == stated["findings"]
    assert left_out["provenance"]["input_digest"] != stated["provenance"]["input_digest"]
