"""The messy files: every row becomes what was written down for it by hand, in both habits."""

import json
import runpy
from pathlib import Path
from typing import Any

import pytest

from tests.exchange.files import judge

MESSY = Path(__file__).parents[2] / "fixtures" / "messy"
EXPECTED: dict[str, Any] = json.loads((MESSY / "expected.json").read_text(encoding="utf-8"))


@pytest.mark.parametrize("name", EXPECTED)
def test_every_row_becomes_what_was_expected(name: str) -> None:
    told = EXPECTED[name]
    batch = judge((MESSY / f"{name}.csv").read_bytes(), ignore=told["ignore"])
    wrong = []
    for at, number in enumerate(batch.rows.numbers):
        row = told["rows"][str(number)]
        verdict = "pass" if batch.verdict(at) in ("pass", "pass-with-conditions") else "no-pass"
        found = {"status": batch.rows.of(at).status, "verdict": verdict}
        if row.get("urgency", batch.urgency(at)) != batch.urgency(at):
            found["urgency"] = batch.urgency(at)
        if any(found[key] != row.get(key) for key in found):
            wrong.append((number, row, found))
    assert wrong == []
    assert batch.counts == told["counts"]
    assert list(map(str, batch.rows.numbers)) == list(told["rows"])


@pytest.mark.parametrize("name", EXPECTED)
def test_nothing_of_a_row_is_lost(name: str) -> None:
    told = EXPECTED[name]
    batch = judge((MESSY / f"{name}.csv").read_bytes(), ignore=told["ignore"])
    for at, number in enumerate(batch.rows.numbers):
        cells = list(batch.rows.raw(at).values())
        assert told["rows"][str(number)]["cell"] in cells
        for question in batch.rows.of(at).questions:
            assert question.raw in [cell.strip() for cell in cells]
    assert len(batch.repeated()) == 6


def test_the_files_are_messy() -> None:
    for name, separator in (("comma", b","), ("semicolon", b";")):
        raw = (MESSY / f"{name}.csv").read_bytes()
        assert raw.startswith(b"\xef\xbb\xbf")
        assert raw.endswith(b"\r\n" + separator * 17 + b"\r\n\r\n")
        assert b'"Bench\nby the window"' in raw


def test_the_script_still_writes_these_files() -> None:
    script = runpy.run_path(str(MESSY / "make.py"))
    for habit, (name, separator, mark) in enumerate((("comma", ",", "."), ("semicolon", ";", ","))):
        text, rows = script["made"](separator, mark, habit)
        assert b"\xef\xbb\xbf" + text.encode() == (MESSY / f"{name}.csv").read_bytes()
        assert rows == EXPECTED[name]["rows"]
