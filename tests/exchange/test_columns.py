"""Files of points: nothing is lost, nothing is converted, counts reconcile."""

import csv
import io
from pathlib import Path

import pytest

from faultloop import assess
from faultloop.exchange.columns import COLUMNS, FileRefused, judge_rows, read_rows, write_csv
from faultloop.exchange.listing import most_urgent, reconciled, table

WORKSHOP = Path(__file__).parents[2] / "fixtures" / "workshop" / "workshop.csv"
HEAD = (
    "point_id,label,earthing,nominal_voltage_to_earth_v,role,feeds,rated_current_a,overcurrent_device,"
    "residual_current_device,earth_fault_loop_impedance_ohm,external_earth_fault_loop_impedance_ohm,"
    "residual_operating_time_ms,rules\n"
)
GOOD = "S1,Bench,TN-C-S,230,final,socket-outlets,32,B32,30 mA A,0.62,0.2,24,bs-7671\n"


def test_workshop_reconciles_and_shows_every_row() -> None:
    rows = read_rows(WORKSHOP.read_text(encoding="utf-8"))
    judge_rows(rows)
    assert len(rows) == 40
    told = table(rows)
    assert all(row.raw["point_id"] in told for row in rows)
    states = [row.status for row in rows]
    assert states.count("judged") + states.count("held") + states.count("refused") == 40
    assert f"40 rows in = {states.count('judged')} judged" in reconciled(rows)
    assert "stop-use" in most_urgent(rows).splitlines()[0]


def test_a_row_is_answered_as_its_request_is() -> None:
    rows = read_rows(HEAD + GOOD)
    judge_rows(rows)
    assert rows[0].request is not None
    body = rows[0].request.model_dump(mode="json", by_alias=True, exclude_unset=True)
    assert rows[0].answer == assess(body)


@pytest.mark.parametrize(
    ("cell", "status"),
    [("OL", "held"), ("0,62", "held"), ("0.62k", "held"), (">2000", "judged"), ("", "judged"), ("n/a", "judged")],
)
def test_cells_that_are_no_plain_number_never_pass(cell: str, status: str) -> None:
    quoted = f'"{cell}"'
    rows = read_rows(HEAD + GOOD.replace("0.62", quoted))
    judge_rows(rows)
    assert rows[0].status == status
    if rows[0].answer is not None:
        assert rows[0].answer["verdict"] in ("fail", "undetermined")


@pytest.mark.parametrize("device", ["K20", "Z10", "gG 32", "BS 88-2 gG 32", "BS 88-3 32", "BS 3036 30", "BS 1361 30"])
def test_every_family_is_read_from_its_shorthand(device: str) -> None:
    rows = read_rows(HEAD + GOOD.replace("B32", device))
    judge_rows(rows)
    assert rows[0].answer is not None, rows[0].faults
    limit = next(f for f in rows[0].answer["findings"] if f["check"] == "overcurrent-disconnection")
    assert limit["explanation"].startswith(f"{device} is sure to operate within 0.4 s")


def test_a_motor_fuse_refuses_its_row_with_a_way_out() -> None:
    rows = read_rows(HEAD + GOOD.replace("B32", "aM 32"))
    assert "aM fuse-links are not held" in rows[0].faults[0]


def test_an_impossible_device_refuses_its_row_only() -> None:
    rows = read_rows(HEAD + GOOD.replace("B32", "B1000") + GOOD)
    judge_rows(rows)
    assert [row.status for row in rows] == ["refused", "judged"]
    assert "overcurrent_device" in rows[0].faults[0]


def test_a_misspelt_column_is_refused_with_the_nearest_name() -> None:
    with pytest.raises(FileRefused, match="did you mean earth_fault_loop_impedance_ohm"):
        read_rows(HEAD.replace("earth_fault_loop_impedance_ohm", "earth_fault_loop_impedence_ohm", 1) + GOOD)


@pytest.mark.parametrize("text", ["", "label,label\nx,y\n", 'label,rules\n"unclosed,bs-7671\n'])
def test_what_is_no_table_is_refused(text: str) -> None:
    with pytest.raises(FileRefused):
        read_rows(text)


def test_byte_order_mark_defaults_and_short_rows() -> None:
    rows = read_rows("\ufefflabel\nBench\n", {"earthing": "TN-S"})
    assert rows[0].request is not None
    assert rows[0].request.supply.earthing == "TN-S"
    assert read_rows("label,earthing\nBench\n")[0].status == "judged"
    assert read_rows("label\nBench,extra\n")[0].status == "refused"


def test_answers_stand_beside_the_rows_and_no_cell_is_a_formula() -> None:
    rows = read_rows(HEAD + GOOD.replace("Bench", '"=HYPERLINK(1)"') + GOOD.replace("0.62", "OL"))
    judge_rows(rows)
    out = list(csv.DictReader(io.StringIO(write_csv(rows))))
    assert out[0]["label"] == "'=HYPERLINK(1)"
    assert out[0]["verdict"] == "pass"
    assert float(out[0]["overcurrent_disconnection_limit"]) == pytest.approx(0.95 * 230 / 160, rel=1e-5)
    assert out[1]["status"] == "held"
    assert out[1]["verdict"] == "undetermined"
    assert out[1]["earth_fault_loop_impedance_ohm"] == "OL"
    assert out[1]["questions"]


def test_every_column_is_read() -> None:
    assert len(set(COLUMNS)) == len(COLUMNS)
