"""The workshop view and the rows of a batch in every language: other words, the same work."""

import re
from pathlib import Path
from typing import Any

import httpx
import pytest
from fastapi import FastAPI

from faultloop import assess
from faultloop.assessment.texts import LANGUAGES
from faultloop.cli import main
from faultloop.exchange.render import assess_requests
from faultloop.exchange.requests import AssessmentRequest
from tests.api.client import served
from tests.api.test_batches import migrated
from tests.assessment import workshop
from tests.assessment.test_languages import NEVER, OTHERS, SPOKEN
from tests.exchange.files import GOOD, HEAD
from tests.reports.test_workshop import outline, page, view

FILE = workshop.FILE.read_bytes()
# Two rows of one point, so that the view says so, a refused row, a held one, and a point that fails.
MIXED = HEAD + GOOD * 2 + GOOD.replace("B32", "B1000") + GOOD.replace("0.62", '"0,62"') + GOOD.replace(",24,", ",386,")
VIEWED = SPOKEN | {"who", "question", "also", "not_judged"}


def without_words(told: Any) -> Any:
    """A view without what is said in it."""
    if isinstance(told, list):
        return [without_words(part) for part in told]
    if isinstance(told, dict):
        return {name: without_words(value) for name, value in told.items() if name not in VIEWED}
    return told


@pytest.mark.parametrize("language", OTHERS)
@pytest.mark.parametrize("content", [FILE, MIXED, HEAD])
def test_the_language_changes_the_words_of_the_view_only(content: str | bytes, language: str) -> None:
    english, other = view(content, 60), view(content, 60, language=language)
    assert without_words(other) == without_words(english)
    for one, two in zip(english["stop_use"] + english["fix"], other["stop_use"] + other["fix"], strict=True):
        assert set(one) == set(two)
        assert one["who"] != two["who"]
        assert one["explanation"] != two["explanation"]


def test_the_german_view_says_who_acts_and_why() -> None:
    told = view(FILE, 60, language="de")
    assert told["stop_use"][0]["who"] == "die für die Betriebsstätte verantwortliche Person"
    assert {item["who"] for item in told["fix"]} == {"eine Elektrofachkraft"}
    answer = assess_requests([AssessmentRequest.model_validate(workshop.body(workshop.rows()[6]))], languages=["de"])[0]
    assert told["fix"][0]["point_id"] == "W07"
    assert told["fix"][0]["explanation"] in [finding["explanation"] for finding in answer["findings"]]
    assert "bis zu 13 der 60" in told["sample"]["text"][1]


def test_questions_about_cells_stay_english_and_the_page_marks_them() -> None:
    english, german = view(MIXED), view(MIXED, language="de")
    asked = [{g["question"] for g in told["questions"] if "where" in g} for told in (english, german)]
    assert len(asked[0]) == 2
    assert asked[0] == asked[1]
    text = page(german, "de")
    assert "auf Englisch" in text
    assert [attrs for tag, attrs in outline(text).seen if tag == "span" and "lang" in attrs] == [{"lang": "en"}] * 2


@pytest.mark.parametrize("language", LANGUAGES)
@pytest.mark.parametrize("content", [FILE, MIXED])
def test_the_page_says_its_language_and_nothing_that_is_never_said(content: str | bytes, language: str) -> None:
    text = page(view(content, 60, language=language), language)
    assert dict(outline(text).seen)["html"] == {"lang": language}
    said = re.sub(r"<style>.*?</style>|<[^>]+>", " ", text, flags=re.S)
    assert not re.search(NEVER[language], said, re.IGNORECASE)
    assert not re.search(r"[{}]", said)


def test_the_german_page_keeps_the_verdict_words_beside_its_own() -> None:
    text = page(view(FILE, language="de"), "de")
    assert '<strong class="stop-use">außer Betrieb nehmen (stop-use)</strong>' in text
    assert "30 erfüllt (pass), 5 nicht erfüllt (fail)" in text
    for english in ("Row", "What was found", "Verdict", "device data", " rows"):
        assert english not in re.sub(r"<style>.*?</style>", "", text, flags=re.S), english


def test_a_changed_engine_is_told_in_the_language_of_the_page() -> None:
    told = view(FILE, language="de") | {"changed": ["engine", "devices"]}
    assert "hat sich geändert: Programm, Gerätedaten" in page(told, "de")


def test_view_and_row_are_negotiated(tmp_path: Path) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        made = await client.post("/v1/batches", content=FILE, headers={"Content-Type": "text/csv"})
        where = made.headers["Location"]
        for asked, given in ((None, "en"), ("de", "de"), ("de-AT,en;q=0.5", "de"), ("fr", "en"), ("en,de;q=0.9", "en")):
            headers = {} if asked is None else {"Accept-Language": asked}
            body = await client.get(f"{where}/workshop", headers=headers)
            assert (body.headers["Content-Language"], body.headers["Vary"]) == (given, "Accept, Accept-Language")
            assert ("Elektrofachkraft" in body.json()["fix"][0]["who"]) == (given == "de")
            shown = await client.get(f"{where}/workshop", headers={**headers, "Accept": "text/html"})
            assert (shown.headers["Content-Language"], shown.headers["Vary"]) == (given, "Accept, Accept-Language")
            assert f'<html lang="{given}">' in shown.text
            row = await client.get(f"{where}/rows/8", headers=headers)
            assert (row.headers["Content-Language"], row.headers["Vary"]) == (given, "Accept-Language")
            assert row.json()["assessment"]["provenance"]["language"] == given
            assert row.json()["identical"] is True

    served(migrated(tmp_path), work)


def test_a_row_in_german_is_the_answer_of_its_point_and_a_held_one_is_english(tmp_path: Path) -> None:
    german = {"Accept-Language": "de"}

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        made = await client.post("/v1/batches", content=FILE, headers={"Content-Type": "text/csv", **german})
        where = made.headers["Location"]
        told = (await client.get(f"{where}/rows/8", headers=german)).json()["assessment"]
        alone = await client.post("/v1/assessments/preview", json=workshop.body(workshop.rows()[6]), headers=german)
        assert told["findings"] == alone.json()["findings"]
        assert told["verdict"] == assess(workshop.body(workshop.rows()[6]))["verdict"]
        held = await client.get(f"{where}/rows/27", headers=german)
        assert held.headers["Content-Language"] == "en"
        assert "above which value" in held.json()["stored"]["questions"][0]["question"]

    served(migrated(tmp_path), work)


def test_the_command_prints_the_page_in_a_language(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["assess", str(workshop.FILE), "--output", "html", "--population", "60", "--language", "de"]) == 0
    printed, shown = capsys.readouterr().out, page(view(FILE, 60, language="de"), "de")
    # The digest of the input covers the parameters, which the command always states.
    assert re.sub("[0-9a-f]{64}", "", printed) == re.sub("[0-9a-f]{64}", "", shown)
    with pytest.raises(SystemExit):
        main(["assess", str(workshop.FILE), "--output", "html", "--language", "xx"])
    assert "--language" in capsys.readouterr().err
