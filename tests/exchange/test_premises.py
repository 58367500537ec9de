"""The invented premises judged alone and by the command, and hostile variants of their cells."""

import csv
import io
import re

import pytest

from faultloop import assess
from faultloop.cli import main
from faultloop.digests import json_bytes
from faultloop.exchange.batches import BatchQuery
from faultloop.exchange.judging import judged
from faultloop.exchange.uploads import Upload, read_upload
from tests.exchange.files import judge, written
from tests.exchange.premises import NAMES, Body, body, by_hand, differences, premises

PREMISES = {name: premises(name) for name in NAMES}
ROWS = {point: row for place in PREMISES.values() for point, row in place.rows.items()}
EXPECTED: dict[str, Body] = {point: row for place in PREMISES.values() for point, row in place.judged.items()}
MET = ("pass", "pass-with-conditions")


@pytest.mark.parametrize("name", NAMES)
def test_the_arithmetic_that_stands_beside_each_value_gives_it(name: str) -> None:
    told = PREMISES[name].expected
    rows = [row for part in ("rows", "supplies", "networks") for row in told.get(part, {}).values()]
    values = [value for row in rows for value in row.get("values", ())]
    assert len(values) > 30
    for value in values:
        assert by_hand(value["by_hand"]) == pytest.approx(value["value"], rel=5e-4), value
    assert all(row["why"] for row in rows)
    assert list(told["rows"]) == list(PREMISES[name].rows)


@pytest.mark.parametrize("point", EXPECTED)
def test_each_point_alone_is_judged_as_by_hand(point: str) -> None:
    assert differences(assess(body(ROWS[point])), EXPECTED[point]) == []


@pytest.mark.parametrize("name", NAMES)
def test_the_command_says_the_same_of_the_file(name: str, capsys: pytest.CaptureFixture[str]) -> None:
    place = PREMISES[name]
    assert main(["assess", str(place.file), "--output", "csv"]) == 0
    rows = {row["point_id"]: row for row in csv.DictReader(io.StringIO(capsys.readouterr().out))}
    for point, expected in place.judged.items():
        assert (rows[point]["verdict"], rows[point]["urgency"]) == (expected["verdict"], expected["urgency"]), point
        for check, word in expected["checks"].items():
            assert rows[point][f"{check.replace('-', '_')}_verdict"] == (word or ""), (point, check)
    assert main(["assess", str(place.file)]) == 0
    counts = place.expected["counts"]
    out = capsys.readouterr().out
    assert f"{counts['rows']} rows in = {counts['results']} judged" in out
    assert f"+ {counts['held']} held + {counts['refused']} refused" in out


@pytest.mark.parametrize("name", NAMES)
def test_the_file_with_semicolons_and_decimal_commas_is_the_same(name: str) -> None:
    place = PREMISES[name]
    number = re.compile(r"([<>]?\d+)\.(\d+)")
    rows = [[number.sub(r"\1,\2", cell) for cell in row.values()] for row in place.rows.values()]
    header = list(next(iter(place.rows.values())))
    first = judge(place.file.read_bytes())
    other = judge("\ufeff" + written(header, rows, ";"))
    assert other.found == first.found
    assert other.counts == first.counts == place.expected["counts"]


def changed(point: str, **cells: str) -> dict[str, str]:
    """A row of the premises with other cells."""
    assert cells.keys() <= ROWS[point].keys() | {"pole_earthed"}
    return ROWS[point] | cells


def verdict(point: str, **cells: str) -> tuple[str, str, list[str]]:
    """What becomes of a row with other cells, through a file: status, verdict, and the columns asked about."""
    row = changed(point, **cells)
    batch = judge(written(list(row), [list(row.values())]))
    told = batch.rows.of(0)
    where = [question.where for question in told.questions] + [fault.where for fault in told.faults]
    return told.status, batch.verdict(0), where


# S1 is a sound separated bench, S2L one whose items are bonded, I1 a sound place of the island.
@pytest.mark.parametrize("text", ["two", "1.5", "-1", "10000", "201", "1e1", "OL", ">1", "2 pcs"])
@pytest.mark.parametrize("column", ["items_on_supply", "class_i_items_on_supply"])
def test_a_number_of_items_that_is_none_is_asked_about(column: str, text: str) -> None:
    status, word, where = verdict("S2L", **{column: text})
    assert (status, word) == ("held", "undetermined")
    assert where[0] in ("items_on_supply", "class_i_items_on_supply")


@pytest.mark.parametrize(
    ("column", "text", "status"),
    [
        ("pole_earthed", "yess", "held"),
        ("pole_earthed", "ja", "held"),
        ("pole_earthed", "1", "held"),
        ("pole_earthed", "true", "held"),
        ("earth_contacts", "bondet", "refused"),
        ("earth_contacts", "grounded", "refused"),
        ("winding_insulation", "double", "refused"),
        ("outlets", "0", "refused"),
        ("outlets", "1.5", "held"),
        ("outlets", "some", "held"),
        ("transformer_rated_power_va", "0.5 kVA", "held"),
        ("transformer_rated_power_va", "0", "refused"),
        ("transformer_short_circuit_voltage_percent", "0", "refused"),
        ("transformer_short_circuit_voltage_percent", "8 V", "held"),
        ("contact_current_l1_ma", "OL", "held"),
        ("contact_current_l2_ma", "0.12 A", "held"),
        ("contact_current_l2_ma", "-0.1", "held"),
        ("winding_insulation_resistance_megohm", "OL", "held"),
        ("nominal_voltage_between_lines_v", "230/115", "held"),
        ("lead_mm2", "3G1.5", "held"),
        ("wiring_length_m", "about 6", "held"),
    ],
)
def test_a_cell_of_a_separated_outlet_that_says_nothing_clear_is_asked_about(
    column: str, text: str, status: str
) -> None:
    assert verdict("S1", **{column: text}) == (status, "undetermined", [column])


@pytest.mark.parametrize(
    ("column", "text", "status"),
    [
        ("neutral_distributed", "nein", "held"),
        ("neutral_distributed", "0", "held"),
        ("insulation_monitor", "yes", "held"),
        ("insulation_monitor", "test", "held"),
        ("exposed_parts", "separate", "refused"),
        ("monitored_insulation_kohm", "OL", "held"),
        ("monitored_insulation_kohm", "0.18 MΩ", "held"),
        ("line_capacitance_to_earth_nf", "40 µF", "held"),
        ("earth_electrode_resistance_ohm", "OL", "held"),
        ("earth_fault_loop_impedance_ohm", "OL", "held"),
        ("phases", "4", "refused"),
    ],
)
def test_a_cell_of_an_it_outlet_that_says_nothing_clear_is_asked_about(column: str, text: str, status: str) -> None:
    assert verdict("I1", **{column: text}) == (status, "undetermined", [column])


@pytest.mark.parametrize("text", ["OL", ">1999", "---", "", "n/a", "> 2000 Ω"])
def test_no_reading_to_earth_is_the_good_result_of_a_separated_outlet(text: str) -> None:
    assert verdict("S1", earth_fault_loop_impedance_ohm=text) == ("judged", "pass-with-conditions", [])
    # It shows nothing where nothing else was read.
    unread = {"contact_current_l1_ma": "", "contact_current_l2_ma": "", "insulation_resistance_megohm": ""}
    assert verdict("S1", earth_fault_loop_impedance_ohm=text, **unread)[1] == "undetermined"


def test_no_reading_to_earth_is_the_good_result_in_a_list_of_requests_too() -> None:
    request = body(ROWS["S1"])
    request["readings"]["earth_fault_loop_impedance_ohm"] = "OL"
    batch = judged(read_upload(Upload("json", json_bytes({"rows": [request]}), BatchQuery())).rows)
    assert batch.verdict(0) == "pass-with-conditions"


def test_an_over_range_contact_never_becomes_less_than_was_shown() -> None:
    assert verdict("S1", contact_current_l1_ma=">2")[1] == "undetermined"
    assert verdict("S1", contact_current_l1_ma=">5")[1] == "fail"


@pytest.mark.parametrize(
    ("point", "blank"),
    [
        ("S1", ("items_on_supply", "class_i_items_on_supply", "filter_capacitance_nf", "lead_length_m", "lead_mm2")),
        ("S1", ("nominal_voltage_between_lines_v", "transformer_secondary_voltage_v")),
        ("S1", ("contact_current_l1_ma", "contact_current_l2_ma", "insulation_resistance_megohm")),
        ("S1", ("overcurrent_device",)),
        ("S2L", ("earth_contacts",)),
        ("S3L", ("earth_contacts",)),
        ("S2L", ("transformer_short_circuit_voltage_percent",)),
        ("I1", ("line_capacitance_to_earth_nf",)),
        ("I1", ("phases",)),
        ("I1", ("exposed_parts",)),
        ("I1", ("insulation_monitor", "monitor_set_point_kohm")),
        ("I1", ("earth_electrode_resistance_ohm",)),
        ("I1", ("earth_fault_loop_impedance_ohm",)),
        ("I1", ("nominal_voltage_between_lines_v",)),
        ("I1", ("nominal_voltage_to_earth_v",)),
        ("I1", ("overcurrent_device",)),
    ],
)
def test_what_is_left_blank_is_unknown_and_never_a_pass(point: str, blank: tuple[str, ...]) -> None:
    status, word, _ = verdict(point, **dict.fromkeys(blank, ""))
    assert (status, word) == ("judged", "undetermined")


@pytest.mark.parametrize("blank", [("lead_length_m", "lead_mm2"), ("bonding_resistance_ohm",)])
def test_conductors_that_are_not_known_pass_no_second_fault_and_save_none(blank: tuple[str, ...]) -> None:
    # A C10 has at most 2.185 ohm, and the source alone has 0.8 x 3.174 = 2.539; a B6 has 7.283 and leaves it open.
    cells = dict.fromkeys(blank, "")
    assert verdict("S2L", **cells)[1] == "fail"
    assert verdict("S2L", overcurrent_device="B6", **cells)[1] == "undetermined"


def test_a_blank_number_of_items_beside_what_is_said_of_them_is_asked_for() -> None:
    assert verdict("S1", items_on_supply="") == ("held", "undetermined", ["items_on_supply"])


def test_a_voltage_between_lines_in_the_place_of_that_to_earth_is_not_met() -> None:
    # A neutral that nobody spoke of counts: 230 V allow 230 / 160 = 1.44 ohm, 400 V would allow 2.5; 1.92 is there hot.
    cells = {"neutral_distributed": "", "earth_fault_loop_impedance_ohm": "1.6"}
    assert verdict("I1", **cells)[1] == "fail"
    assert verdict("I1", nominal_voltage_to_earth_v="400", **cells)[1] not in MET


MISLEADING = {
    "a loop under the range of the tester is a pole at earth": ("S1", {"earth_fault_loop_impedance_ohm": "<0.1"}),
    "nobody said what the earth contacts are joined to": ("S1", {"earth_contacts": ""}),
    "a short-circuit voltage of 0.08 % is 8 % written as a share": (
        "S1", {"transformer_short_circuit_voltage_percent": "0.08"},
    ),
    "the plate says 115 V and the row 230 V": ("S1", {"transformer_secondary_voltage_v": "115"}),
}  # fmt: skip


@pytest.mark.parametrize("what", MISLEADING)
def test_what_contradicts_itself_or_was_not_said_is_not_met(what: str) -> None:
    point, cells = MISLEADING[what]
    assert verdict(point, **cells)[1] not in MET


def detail(point: str, **cells: str) -> str:
    """What is said of a row that cannot be judged, with the columns."""
    row = changed(point, **cells)
    told = judge(written(list(row), [list(row.values())])).rows.of(0)
    questions = [f"{question.where}: {question.question}" for question in told.questions]
    return "; ".join(questions + [f"{fault.where}: {fault.detail}" for fault in told.faults])


WORDS = {
    "yes or no": ("S1", {"pole_earthed": "yess"}, ("pole_earthed", "yes", "no")),
    "the monitor's words": ("I1", {"insulation_monitor": "ok"}, ("insulation_monitor", "none", "fitted", "tested")),
    "a set point without a monitor": ("I1", {"insulation_monitor": ""}, ("insulation_monitor", "fitted", "tested")),
    "more items of class I than items": ("S1", {"class_i_items_on_supply": "3"}, ("class_i_items_on_supply:",)),
    "a supply that is not known": ("S1", {"earthing": "isolated"}, ("earthing", "separated")),
}


@pytest.mark.parametrize("what", WORDS)
def test_the_words_say_what_the_cell_may_hold(what: str) -> None:
    point, cells, expected = WORDS[what]
    told = detail(point, **cells)
    assert all(word in told for word in expected), told
