"""Files of points: nothing is lost, nothing is converted, counts reconcile."""

import csv
import io
import time
from pathlib import Path

import pytest

from faultloop.digests import json_bytes
from faultloop.exchange.batch_answers import answer_csv
from faultloop.exchange.batches import BatchQuery
from faultloop.exchange.columns import COLUMNS, PATHS, FileRefused
from faultloop.exchange.judging import requests_of
from faultloop.exchange.listing import most_urgent, reconciled, table
from faultloop.exchange.render import assess_requests
from faultloop.exchange.unearthed_columns import ITEMS
from faultloop.exchange.uploads import Upload, read_upload
from tests.exchange.files import GOOD, HEAD, judge, statuses, written

WORKSHOP = Path(__file__).parents[2] / "fixtures" / "workshop" / "workshop.csv"
LOOP = "earth_fault_loop_impedance_ohm"


def test_workshop_reconciles_and_shows_every_row() -> None:
    batch = judge(WORKSHOP.read_bytes())
    told = table(batch)
    assert len(batch.rows.names) == 40
    assert all(name.id in told for name in batch.rows.names)
    assert batch.counts == {"rows": 40, "results": 39, "held": 1, "refused": 0}
    assert "40 rows in = 39 judged" in reconciled(batch)
    assert "stop-use" in most_urgent(batch).splitlines()[0]


@pytest.mark.parametrize(
    ("cell", "status"),
    [("OL", "held"), ("0,62", "held"), ("0.62k", "held"), (">2000", "judged"), ("", "judged"), ("n/a", "judged")],
)
def test_cells_that_are_no_plain_number_never_pass(cell: str, status: str) -> None:
    batch = judge(HEAD + GOOD.replace("0.62", f'"{cell}"'))
    assert statuses(batch) == [status]
    assert batch.verdict(0) in ("fail", "undetermined")


@pytest.mark.parametrize("device", ["K20", "Z10", "gG 32", "BS 88-2 gG 32", "BS 88-3 32", "BS 3036 30", "BS 1361 30"])
def test_every_family_is_read_from_its_shorthand(device: str) -> None:
    batch = judge(HEAD + GOOD.replace("B32", device))
    assert statuses(batch) == ["judged"], batch.rows.of(0).faults
    (answer,) = assess_requests(requests_of(batch, [0], {}))
    limit = next(f for f in answer["findings"] if f["check"] == "overcurrent-disconnection")
    assert limit["explanation"].startswith(f"{device} is sure to operate within 0.4 s")


def test_a_motor_fuse_refuses_its_row_with_a_way_out() -> None:
    batch = judge(HEAD + GOOD.replace("B32", "aM 32"))
    assert "aM fuse-links are not held" in batch.rows.of(0).faults[0].detail


def test_an_impossible_device_refuses_its_row_only() -> None:
    batch = judge(HEAD + GOOD.replace("B32", "B1000") + GOOD)
    assert statuses(batch) == ["refused", "judged"]
    assert batch.rows.of(0).faults[0].where == "overcurrent_device"


def test_a_misspelt_column_is_refused_with_the_nearest_name() -> None:
    with pytest.raises(FileRefused, match=r"column 10 .*did you mean earth_fault_loop_impedance_ohm"):
        judge(HEAD.replace(LOOP, "earth_fault_loop_impedence_ohm", 1) + GOOD)


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("", "empty"),
        ("\n\n  ,\n", "empty"),
        ("label,label\nx,y\n", "column 2 stands twice"),
        ("label,Label\nx,y\n", "column 2 stands twice"),
        ("label,,rules\nx,y,z\n", "column 2 has no name"),
        ('label,rules\n"unclosed,bs-7671\n', "never closed"),
        ('label,"rules\nx,bs-7671\n', "never closed"),
    ],
)
def test_what_is_no_table_is_refused(text: str, said: str) -> None:
    with pytest.raises(FileRefused, match=said):
        judge(text)


def test_a_heading_without_end_is_refused_at_once() -> None:
    for heading in (" " * 1_000_000 + "x", "a " * 60_000, "a" * 60_000 + " [", "x" * 500_000):
        began = time.process_time()
        with pytest.raises(FileRefused):
            judge(f"label,{heading}\nx,y\n")
        assert time.process_time() - began < 2


def test_a_row_of_many_faults_is_refused_in_few_words() -> None:
    rows = [{"point": {"label": "x"}, **{f"field_{at}": 1 for at in range(5000)}}] * 20
    read = read_upload(Upload("json", json_bytes({"rows": rows}), BatchQuery())).rows
    assert [len(read.of(at).faults) for at in range(20)] == [10] * 20


def test_what_is_not_utf8_names_the_line() -> None:
    with pytest.raises(FileRefused, match="line 2 is not UTF-8"):
        judge(b"label\nK\xfcche\n")


def test_a_column_without_meaning_is_passed_over_only_when_told() -> None:
    text = HEAD.replace("point_id,", "point_id,Remarks,") + GOOD.replace("S1,", "S1,loose plate,")
    with pytest.raises(FileRefused, match="column 2 is not known"):
        judge(text)
    batch = judge(text, ignore=["Remarks"])
    assert batch.verdict(0) == "pass"
    assert batch.rows.raw(0)["Remarks"] == "loose plate"


def test_byte_order_mark_defaults_and_short_rows() -> None:
    batch = judge("\ufefflabel\nBench\n", default=["earthing=TN-S"])
    request = batch.rows.alone(0).request
    assert request is not None
    assert request.supply.earthing == "TN-S"
    # Which cell is missing nobody can tell: a rule set that goes missing would be another rule set.
    assert statuses(judge("label,earthing\nBench\n")) == ["refused"]
    assert statuses(judge("label,earthing\nBench,\n")) == ["judged"]
    assert statuses(judge("label\nBench,extra\n")) == ["refused"]
    assert statuses(judge("label\nBench,,\n")) == ["judged"]


def test_a_default_fills_an_absent_column_and_never_a_blank_cell() -> None:
    batch = judge(HEAD + GOOD.replace("0.62", ""), default=[f"{LOOP}=0.62"])
    assert batch.verdict(0) == "undetermined"
    without = HEAD.replace(f"{LOOP},", "", 1), GOOD.replace("0.62,", "")
    assert judge("".join(without), default=[f"{LOOP}=0.62"]).verdict(0) == "pass"


def test_a_default_of_an_unknown_column_or_form_is_refused() -> None:
    with pytest.raises(FileRefused, match="did you mean earthing"):
        judge("label\nx\n", default=["earthin=TN-S"])
    with pytest.raises(FileRefused, match="column=value"):
        judge("label\nx\n", default=["earthing"])


def test_rows_are_numbered_as_a_spreadsheet_does_and_blank_ones_are_no_rows() -> None:
    batch = judge(HEAD + GOOD + "\n" + "," * 12 + "\r\n" + GOOD.replace("Bench", '"two\nlines"') + GOOD + "\n\n")
    assert list(batch.rows.numbers) == [2, 5, 6]
    assert batch.counts["rows"] == 3


def test_one_row_with_bad_quotes_is_refused_alone() -> None:
    batch = judge(HEAD + GOOD + GOOD.replace("Bench", '"Ben"ch') + GOOD)
    assert statuses(batch) == ["judged", "refused", "judged"]
    assert "quotation marks" in batch.rows.of(1).faults[0].detail


@pytest.mark.parametrize("separator", [";", "\t"])
def test_other_separators_take_either_decimal_mark_where_it_is_plain(separator: str) -> None:
    good = GOOD.replace("0.2,", "0~2,")
    text = HEAD + "".join(good.replace("0.62", cell) for cell in ("0.62", "0~62", "1.420", "1~420", "0~620"))
    batch = judge(text.replace(",", separator).replace("~", ","))
    assert statuses(batch) == ["judged", "judged", "held", "held", "judged"]
    assert batch.found[0] == batch.found[1] == batch.found[4]
    told = judge(text.replace(",", separator).replace("~", ","), decimal="comma")
    assert statuses(told) == ["held", "judged", "held", "judged", "judged"]


def test_a_first_line_may_name_the_separator() -> None:
    batch = judge("sep=;\n" + (HEAD + GOOD).replace(",", ";"))
    assert batch.verdict(0) == "pass"
    assert list(batch.rows.numbers) == [3]


def test_units_in_the_heading_and_in_cells() -> None:
    assert judge(HEAD.replace(LOOP, f"{LOOP} [Ω]", 1) + GOOD).verdict(0) == "pass"
    assert judge(HEAD.replace(LOOP, f"{LOOP} (ohm)", 1) + GOOD.replace("0.62", "0.62 Ω")).verdict(0) == "pass"
    other = HEAD.replace(LOOP, f"{LOOP} [mΩ]", 1)
    batch = judge(
        other + GOOD.replace("0.62", "620") + GOOD.replace("0.62", "0.62 ohm") + GOOD.replace("0.62", "620 mΩ")
    )
    assert statuses(batch) == ["held", "judged", "held"]
    assert batch.rows.of(0).questions[0].raw == "620"


def test_answers_stand_beside_the_rows_and_no_cell_is_a_formula() -> None:
    batch = judge(HEAD + GOOD.replace("Bench", '"=HYPERLINK(1)"') + GOOD.replace("0.62", "OL"))
    out = list(csv.DictReader(io.StringIO(answer_csv(batch))))
    assert out[0]["label"] == "'=HYPERLINK(1)"
    assert out[0]["verdict"] == "pass"
    assert float(out[0]["overcurrent_disconnection_limit"]) == pytest.approx(0.95 * 230 / 160, rel=1e-5)
    assert (out[1]["status"], out[1]["verdict"], out[1]["urgency"]) == ("held", "undetermined", "stop-use")
    assert out[1][LOOP] == "OL"
    assert "OL" not in out[1]["questions"]
    assert "above which value" in out[1]["questions"]


def test_a_point_that_stands_twice_is_governed_by_its_worse_row() -> None:
    batch = judge(HEAD + GOOD + GOOD.replace("0.62", "4.9") + GOOD.replace("S1", "S2"))
    assert batch.repeated() == [[1, 0]]


def test_every_column_is_read_into_its_own_place() -> None:
    assert len(set(COLUMNS)) == len(COLUMNS)
    assert len(set(PATHS.values())) == len(PATHS) - len(ITEMS) + 1, "the columns of items make one list"


def test_the_columns_of_the_interface_are_there() -> None:
    named = (
        "point_id label location earthing nominal_voltage_to_earth_v phases role feeds rated_current_a "
        "overcurrent_device breaking_capacity_ka residual_current_device line_conductor_mm2 protective_conductor_mm2 "
        "length_m users reading_method board_line_neutral_loop_impedance_ohm board_prospective_current_ka rules "
        "earth_fault_loop_impedance_ohm external_earth_fault_loop_impedance_ohm line_neutral_loop_impedance_ohm "
        "line_line_loop_impedance_ohm line_plus_protective_resistance_ohm protective_conductor_resistance_ohm "
        "earth_electrode_resistance_ohm insulation_resistance_megohm residual_operating_time_ms "
        "residual_operating_current_ma standing_leakage_ma voltage_v voltage_neutral_to_earth_v polarity"
    )
    assert set(named.split()) <= set(COLUMNS)


def test_a_blank_rule_set_beside_others_is_asked_for() -> None:
    batch = judge(HEAD + GOOD + GOOD.replace("bs-7671", ""))
    assert statuses(batch) == ["judged", "held"]
    assert batch.rows.of(1).questions[0].where == "rules"


def test_words_may_be_written_in_capitals_and_a_dash_says_nothing() -> None:
    batch = judge(
        HEAD + GOOD + GOOD.replace("TN-C-S", "tn-c-s").replace("final", "Final").replace("bs-7671", "BS-7671")
    )
    assert [batch.verdict(at) for at in (0, 1)] == ["pass", "pass"]
    dashed = judge(HEAD + GOOD.replace("B32", "---"))
    assert (statuses(dashed), dashed.verdict(0)) == (["judged"], "undetermined")


@pytest.mark.parametrize(
    ("column", "urgency"),
    [(LOOP, "stop-use"), ("insulation_resistance_megohm", "planned"), ("voltage_v", "planned")],
)
def test_over_range_means_no_earth_only_where_the_path_to_earth_was_read(column: str, urgency: str) -> None:
    head, row = HEAD.strip().split(","), GOOD.strip().split(",")
    cells = dict(zip(head, row, strict=True)) | {column: "OL"}
    batch = judge(written(list(cells), [list(cells.values())]))
    assert (statuses(batch), batch.urgency(0)) == (["held"], urgency)
