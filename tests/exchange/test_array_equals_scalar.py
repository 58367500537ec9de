"""A row of a batch has the verdict, the values and the reasons of the same point asked alone."""

import csv
import io
from typing import Any

from hypothesis import given, settings
from hypothesis import strategies as st

from faultloop import assess
from faultloop.assessment.points import Bound, Number, Reading
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
            assert check in not_applicable
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
    assert {*NUMBER_OF.values()} == {Number.BOARD_CURRENT_KA, Number.LENGTH_M}
    assert Reading.TIME_HALF not in READING_OF.values()
