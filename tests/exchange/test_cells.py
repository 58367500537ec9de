"""Cells as instruments print them: a bound, nothing, or a question; never a zero, never converted."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from faultloop.exchange.cells import read_cell

LOOP = "earth_fault_loop_impedance_ohm"


@pytest.mark.parametrize(
    ("text", "value", "bound"),
    [
        ("0.72", 0.72, "exact"),
        (" 0.72 ", 0.72, "exact"),
        (">2000", 2000.0, "above"),
        ("> 1999 ohm", 1999.0, "above"),
        ("<0.05", 0.05, "below"),
        ("0.72 Ω", 0.72, "exact"),
        ("0", 0.0, "exact"),
    ],
)
def test_plain_numbers_and_bounds(text: str, value: float, bound: str) -> None:
    cell = read_cell(text, LOOP)
    assert (cell.value, cell.bound, cell.question) == (value, bound, None)


@pytest.mark.parametrize("text", ["", "  ", "-", "---", "n/a", "N/A", "LIM", "not tested"])
def test_words_for_nothing_say_nothing(text: str) -> None:
    cell = read_cell(text, LOOP)
    assert cell.value is None
    assert cell.question is None


@pytest.mark.parametrize(
    "text",
    [
        "0,69",
        "1 420",
        "0.71k",
        "640 mohm",
        "655*",
        "OL",
        "OFL",
        "1e3",
        "-0.5",
        "0.7.2",
        "abc",
        "０.７",
        "0x1f",
        ">",
        "= 1+1",
    ],
)
def test_anything_else_is_asked_about(text: str) -> None:
    cell = read_cell(text, LOOP)
    assert cell.value is None
    assert cell.question


def test_over_range_without_a_number_is_marked() -> None:
    assert read_cell("OL", LOOP).over_range


@given(st.text(max_size=30))
def test_a_cell_is_one_of_three_things(text: str) -> None:
    cell = read_cell(text, LOOP)
    assert not (cell.value is not None and cell.question is not None)
    if cell.value is not None:
        assert str(cell.value).rstrip("0").rstrip(".") in text or float(text.strip(" <>Ωohms")) == cell.value
