"""Every field that a request may carry changes the answer, or is named as not used: a new field must be put here."""

import copy
from typing import Any

import pytest
from pydantic import BaseModel

from faultloop import assess
from faultloop.exchange import requests as rq
from tests.assessment.bodies import RESIDUAL_30, Body, copper, live, readings, request

SIZES = {"line_conductor": copper(2.5), "protective_conductor": copper(1.5)}
# A value of each field that must make a difference to the body below.
FIELDS: dict[str, dict[str, Any]] = {
    "supply": {
        "earthing": "TN-S",
        "current": "dc",
        "nominal_voltage_to_earth_v": 120,
        "nominal_voltage_between_lines_v": 230,
        "frequency_hz": 60,
        "phases": 3,
        "means_of_earthing": {"evidence": "clamp loose", "state": "lost"},
        "declared_prospective_current_ka": 16,
        "source": "generator",
    },
    "circuit": {
        "role": "distribution",
        "feeds": "socket-outlets",
        "rated_current_a": 20,
        "arrangement": "ring",
        "users": "skilled",
        "designated_equipment": True,
        "line_conductor": copper(1.5),
        "neutral_conductor": copper(2.5),
        "protective_conductor": copper(2.5),
        "length_m": 5,
        "current_carrying_capacity_a": 20,
    },
    "board": {
        "line_neutral_loop_impedance_ohm": 0.1,
        "earth_fault_loop_impedance_ohm": 0.04,
        "prospective_current_ka": 3,
        "assembly_conditional_rating_ka": 16,
    },
    "readings": {
        "earth_fault_loop_impedance_ohm": 0.9,
        "external_earth_fault_loop_impedance_ohm": 0.3,
        "line_neutral_loop_impedance_ohm": 0.5,
        "line_line_loop_impedance_ohm": 0.5,
        "line_plus_protective_resistance_ohm": 0.45,
        "protective_conductor_resistance_ohm": 0.2,
        "earth_electrode_resistance_ohm": 50,
        "insulation_resistance_megohm": 0.3,
        "residual_operating_time_ms": {"1": 31},
        "residual_operating_current_ma": 45,
        "standing_leakage_ma": 5,
        "voltage_v": 110,
        "voltage_neutral_to_earth_v": 60,
        "polarity": "reversed",
        "voltage_l1_to_earth_v": 115,
        "voltage_l2_to_earth_v": 115,
        "contact_current_l1_ma": 0.4,
        "contact_current_l2_ma": 0.4,
        "winding_insulation_resistance_megohm": 20,
        "bonding_resistance_ohm": 0.1,
        "first_fault_current_ma": 13,
        "monitored_insulation_kohm": 90,
    },
}
MODELS: dict[str, type[BaseModel]] = {
    "supply": rq.Supply, "circuit": rq.Circuit, "board": rq.Board, "readings": rq.Readings,
}  # fmt: skip
# Fields that make a difference only beside another.
BESIDE: dict[tuple[str, str], Body] = {
    ("supply", "phases"): {"board": {"line_neutral_loop_impedance_ohm": 0.1}},
    ("circuit", "users"): {"circuit": {"feeds": "socket-outlets"}, "rules": "iec-60364"},
    ("circuit", "designated_equipment"): {"circuit": {"feeds": "socket-outlets"}},
    ("circuit", "rated_current_a"): {
        "circuit": {"feeds": "socket-outlets"},
        "overcurrent_device": {"rated_current_a": 63.0},
    },
    ("circuit", "line_conductor"): {"overcurrent_device": {"rated_current_a": 20.0}},
    ("circuit", "arrangement"): {"circuit": {"length_m": 20}},
    ("board", "assembly_conditional_rating_ka"): {"board": {"prospective_current_ka": 9}},
    ("readings", "earth_electrode_resistance_ohm"): {"supply": {"earthing": "TT"}},
}
# Words about the premises, kept with the request: nothing could be decided on them.
WORDS = {("supply", "source")}


def base(beside: Body) -> Body:
    device = {"kind": "miniature-circuit-breaker", "characteristic": "B", "rated_current_a": 32.0}
    body = request(
        readings(zs=live(0.6), ze=0.2, times={"1": 24}),
        device={**device, "breaking_capacity_ka": 6},
        residual=None if beside.get("circuit", {}).get("feeds") else RESIDUAL_30,
        **SIZES,
    )
    for part, more in beside.items():
        body[part] = {**body.get(part, {}), **more} if isinstance(more, dict) else more
    return body


@pytest.mark.parametrize("part", sorted(MODELS))
def test_every_field_is_tried(part: str) -> None:
    assert set(FIELDS[part]) == set(MODELS[part].model_fields)


@pytest.mark.parametrize(("part", "name"), [(part, name) for part, names in FIELDS.items() for name in names])
def test_a_field_changes_the_answer_or_is_named_as_not_used(part: str, name: str) -> None:
    before = base(BESIDE.get((part, name), {}))
    after = copy.deepcopy(before)
    after[part] = {**after.get(part, {}), name: FIELDS[part][name]}
    told = [assess(body) for body in (before, after)]
    for answer in told:
        del answer["provenance"]["input_digest"]
    named = {entry["subject"] for entry in told[1]["not_examined"] if entry["reason"] == "not-used"}
    if (part, name) in WORDS:
        assert told[0] == told[1]
    else:
        assert told[0] != told[1]
        decided = {key: value for key, value in told[1].items() if key != "not_examined"}
        unchanged = decided == {key: value for key, value in told[0].items() if key != "not_examined"}
        assert unchanged == (f"{part}.{name}" in named)
