"""Breaking lines: nothing lost, nothing too long, nothing that XML cannot carry."""

from xml.etree.ElementTree import Element, fromstring, tostring

from hypothesis import example, given
from hypothesis import strategies as st

from faultloop.reports.lettering import clean, width, wrapped

texts = st.text(st.characters(exclude_categories=["Cs"]), max_size=300)


@given(texts, st.floats(6, 20), st.floats(30, 700))
@example("Bank 3 " + "W" * 400, 17.0, 688.0)
def test_lines_fit_and_hold_the_whole_text(text: str, size: float, room: float) -> None:
    lines = wrapped(text, size, room)
    assert "".join(lines).replace(" ", "") == clean(text).replace(" ", "")
    assert all(width(line, size) <= room for line in lines)
    assert all(line == line.strip(" ") and line for line in lines)


@given(texts)
def test_what_is_cleaned_can_be_written_and_read_again(text: str) -> None:
    element = Element("text")
    element.text = clean(text)
    assert (fromstring(tostring(element)).text or "") == clean(text)


def test_words_are_kept_together_and_so_are_numbers_with_their_units() -> None:
    assert wrapped("one two three", 10, width("one two", 10)) == ["one two", "three"]
    assert wrapped("after 60\u00a0s", 10, width("after 60", 10)) == ["after", "60\u00a0s"]


def test_a_wide_letter_counts_as_wide() -> None:
    assert width("W", 10) > width("n", 10) > width("i", 10)
    assert width("電", 10) > width("n", 10)
