"""Which representation a caller likes best."""

import pytest

from faultloop.api.negotiation import CSV, HTML, JSON, preferred


@pytest.mark.parametrize(
    ("accept", "told"),
    [
        (None, JSON),
        ("*/*", JSON),
        ("text/csv", CSV),
        ("application/json, text/csv", JSON),
        ("application/json;q=0.5, text/csv", CSV),
        ("text/*", CSV),
        ("*/*, text/csv", CSV),
        ("TEXT/CSV; header=present", CSV),
        ("text/csv;q=0", JSON),
        ("text/csv;q=x, */*;q=0.1", JSON),
        ("image/png", JSON),
        ("", JSON),
        (",;q=,", JSON),
    ],
)
def test_csv_or_json(accept: str | None, told: str) -> None:
    assert preferred(accept, (JSON, CSV)) == told


def test_a_browser_gets_the_page() -> None:
    assert preferred("text/html,application/xhtml+xml,application/xml;q=0.9,*/*;q=0.8", (JSON, HTML)) == HTML
