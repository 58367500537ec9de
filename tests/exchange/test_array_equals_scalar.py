"""A row of a batch has the verdict, the values and the reasons of the same point asked alone."""

import csv
import io
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from faultloop import assess
from faultloop.assessment.checks import CHECKS
from faultloop.assessment.codes import EARTHED, Bound, Number, Reading
from faultloop.digests import json_bytes
from faultloop.exchange.batches import BatchQuery
from faultloop.exchange.compact import CHECK_IDS
from faultloop.exchange.judging import CHUNK, Judged, judged
from faultloop.exchange.mapping import mapped
from faultloop.exchange.patterns import NUMBER_OF, READING_OF
from faultloop.exchange.rows import Format, read_cells
from faultloop.exchange.uploads import Upload, read_upload
from tests.assessment import workshop
from tests.assessment.strategies import requests
from tests.exchange.files import judge

ROWS = workshop.rows()
HEADER = list(ROWS[0])
PREMISES = [row for row in ROWS if row["overcurrent_device"]]
UNEARTHED = {check.id for check in CHECKS if not check.supplies & EARTHED}
READ = (*workshop.LOOPS, "residual_operating_time_ms")


def same(batch: Judged, at: int, answer: dict[str, Any]) -> None:
    """The compact row says what the full answer says."""
    found = batch.found[at]
    assert found is not None
    assert (found.verdict, found.urgency) == (answer["verdict"], answer["urgency"])
    findings = {finding["check"]: finding for finding in answer["findings"]}
    reasons = {told["subject"]: told["reason"] for told in answer["not_examined"]}
    not_applicable = {told["check"] for told in answer["not_applicable"]}
    for check, told in zip(CHECK_IDS, found.findings, strict=True):
        if told is None:
            # Of the checks for other supplies only those of an earthed one are listed as not applying.
            assert check in not_applicable or check in UNEARTHED
            assert check not in findings
            assert check not in reasons
        elif told[0] is None:
            assert told == (None, None, None, reasons[check])
        else:
            finding = findings[check]
            assert told == (finding["verdict"], finding.get("value"), finding.get("limit"), finding["reason"])
    counted = [f["check"] for f in answer["findings"] if f["counts"] and f["verdict"] == answer["verdict"]]
    assert found.decided_by == (counted[0] if counted else None)


def cells() -> st.SearchStrategy[str]:
    """Plain cells of a reading."""
    number = st.one_of(
        st.floats(0.01, 3).map("{:.2f}".format), st.floats(0.05, 3000).map("{:.1f}".format), st.just("0.0004")
    )
    return st.one_of(number, number, number.map(">{}".format), st.sampled_from(["", "n/a", "---"]))


@st.composite
def file_row(draw: st.DrawFn) -> dict[str, str]:
    """A row of the invented workshop with readings of its own."""
    row = dict(draw(st.sampled_from(PREMISES)))
    row |= {name: draw(cells()) for name in READ}
    row["residual_operating_time_ms"] = row["residual_operating_time_ms"].removeprefix(">")
    row["length_m"] = str(draw(st.integers(1, 90)))
    row["reading_method"] = draw(st.sampled_from(["no-trip", "high-current", "declared"]))
    return row


@given(st.lists(file_row(), min_size=1, max_size=12))
@settings(max_examples=60, deadline=None)
def test_rows_of_a_file_equal_points_asked_alone(rows: list[dict[str, str]]) -> None:
    out = io.StringIO()
    writer = csv.DictWriter(out, HEADER)
    writer.writeheader()
    writer.writerows(rows)
    batch = judge(out.getvalue())
    for at, row in enumerate(rows):
        same(batch, at, assess(workshop.body(row)))


@given(st.lists(requests, min_size=1, max_size=6))
@settings(max_examples=60, deadline=None)
def test_rows_of_a_list_equal_points_asked_alone(rows: list[dict[str, Any]]) -> None:
    batch = judged(read_upload(Upload("json", json_bytes({"rows": rows}), BatchQuery())).rows)
    for at, row in enumerate(rows):
        same(batch, at, assess(row))


@given(requests, st.lists(st.floats(0, 12_000), min_size=2, max_size=6), st.data())
@settings(max_examples=60, deadline=None)
def test_rows_of_a_list_that_differ_in_numbers_equal_points_asked_alone(
    row: dict[str, Any], values: list[float], data: st.DataObject
) -> None:
    rows = []
    for value in values:
        readings = dict(row.get("readings", {}))
        for name in data.draw(st.lists(st.sampled_from(sorted(readings) or ["none"]), max_size=2)):
            told = readings.get(name)
            if name == "residual_operating_time_ms":
                readings[name] = {**told, "1": value}
            elif told is not None and name != "polarity":
                readings[name] = {**told, "value": value} if isinstance(told, dict) else value
        rows.append({**row, "readings": readings})
    batch = judged(read_upload(Upload("json", json_bytes({"rows": rows}), BatchQuery())).rows)
    for at, told in enumerate(rows):
        same(batch, at, assess(told))


def test_rows_of_a_list_share_patterns_and_keep_their_own_numbers() -> None:
    body = workshop.body(ROWS[0])
    loops = [0.40, 0.62, 4.9, 0.40]
    rows = [
        {**body, "point": {"label": f"P{at}"}, "readings": {**body["readings"], READ[1]: {"value": loop}}}
        for at, loop in enumerate(loops)
    ]
    read = read_upload(Upload("json", json_bytes({"rows": rows}), BatchQuery())).rows
    assert len(read.told) == 1
    batch = judged(read)
    for at, row in enumerate(rows):
        same(batch, at, assess(row))
    assert batch.found[0] == batch.found[3] != batch.found[1] != batch.found[2]


@pytest.mark.parametrize("odd", [True, None, "0.4", [0.4], {"value": True}, {"value": None}, {"value": "0.4"}, -0.4])
def test_what_stands_in_place_of_a_number_never_shares_the_pattern_of_one(odd: Any) -> None:
    body = workshop.body(ROWS[0])
    for good in (0.4, {"value": 0.4}):
        rows = [{**body, "readings": {**body["readings"], READ[1]: reading}} for reading in (good, odd, good)]
        rows += [{**body, "point": point} for point in (True, None, {"label": None}, {"label": ""}, {"id": "x"})]
        batch = judged(read_upload(Upload("json", json_bytes({"rows": rows}), BatchQuery())).rows)
        assert batch.found[0] == batch.found[2] is not None
        assert batch.found[3:] == [None] * 5
        if odd is None:
            same(batch, 1, assess(rows[1]))
        elif odd != "0.4":
            assert batch.found[1] is None


def test_the_invented_workshop_over_several_chunks_equals_its_rows_alone() -> None:
    text = workshop.FILE.read_text(encoding="utf-8").splitlines()
    repeats = 2 * CHUNK // 40 + 1
    batch = judge("\n".join([text[0], *text[1:] * repeats]))
    alone = [assess(workshop.body(row)) if row["point_id"] != "W26" else None for row in ROWS]
    for at in range(len(batch.found)):
        if (answer := alone[at % 40]) is not None:
            same(batch, at, answer)
        else:
            assert batch.found[at] is None


def test_numbers_land_where_the_mapping_puts_them() -> None:
    for column, reading in READING_OF.items():
        request = read_cells({"label": "x", column: "7.25"}, 2, Format()).request
        assert request is not None
        row = mapped(request).row
        assert row.value[reading] == 7.25, column
        assert [at for at, bound in enumerate(row.bound) if bound == Bound.EXACT] == [reading], column
    for column, number in NUMBER_OF.items():
        request = read_cells({"label": "x", column: "7.25"}, 2, Format()).request
        assert request is not None
        assert mapped(request).row.numbers[number] == 7.25, column
    assert len({*READING_OF.values()}) == len(READING_OF)
    assert {*NUMBER_OF.values()} == {Number.LENGTH_M}
    assert Reading.TIME_HALF not in READING_OF.values()
