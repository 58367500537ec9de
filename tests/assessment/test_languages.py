"""Every language says the same as English: same keys, same numbers, same cautions, and none of what is never said."""

import json
import re
from pathlib import Path
from typing import Any, get_args

import pytest

from faultloop.assessment.checks import CHECKS
from faultloop.assessment.texts import LANGUAGES, texts
from faultloop.exchange.answers import UrgencyWord
from faultloop.exchange.render import assess_requests
from faultloop.exchange.requests import AssessmentRequest
from faultloop.exchange.workshop_words import workshop_words
from faultloop.reports.texts import words
from tests.assessment.bodies import Body

OTHERS = [language for language in LANGUAGES if language != "en"]
FOLDER = Path(__file__).parents[2] / "fixtures" / "outlets"
OUTLETS = [o for name in ("ordinary", "dangerous") for o in json.loads((FOLDER / f"{name}.json").read_text("utf-8"))]

# No verdict calls anything safe, certified or compliant, and nothing is permitted: in each language's own words.
NEVER = {
    "en": r"\b(safe|safely|certified|compliant|permitted|allowed to)\b",
    "de": r"\b(un)?sicher(e|er|es|en|em|heit)?\b|\bgefahrlos|\bunbedenklich|\bungefährlich|\bzertifi|konform\w*\b"
    r"|\b(erlaubt|gestattet|genehmigt|freigegeben|zulässig\w*|vorschriftsmäßig\w*|normgerecht\w*)\b",
}
# Fields of an answer that hold words; whatever else an answer holds does not depend on the language.
SPOKEN = {"title", "explanation", "settled_by", "caution", "text", "owner", "language", "texts_digest"}


def leaves(told: Any, place: str = "") -> dict[str, Any]:
    """Every text of a file of texts, by its place; lists and flags stay whole."""
    if not isinstance(told, dict):
        return {place: told}
    return {at: leaf for key, inner in told.items() for at, leaf in leaves(inner, f"{place}/{key}").items()}


def everything(language: str) -> dict[str, Any]:
    """All that is said in a language, in answers, in drawings and in the workshop view."""
    workshop = workshop_words(language).model_dump()
    return leaves({"answers": texts(language).model_dump(), "drawings": words(language).model_dump(), "view": workshop})


def quoted(text: str) -> list[str]:
    """What a text quotes: placeholders with their number formats, and inserted sentences."""
    return sorted(re.findall(r"\{[^}]*\}|(?<!\S)@\S+", text))


@pytest.mark.parametrize("language", OTHERS)
def test_nothing_is_missing_and_nothing_is_left_over(language: str) -> None:
    english, other = everything("en"), everything(language)
    assert sorted(english.keys() - other.keys()) == [], f"missing in {language}"
    assert sorted(other.keys() - english.keys()) == [], f"not in English, but in {language}"


@pytest.mark.parametrize("language", OTHERS)
def test_the_same_numbers_are_quoted_in_the_same_form(language: str) -> None:
    english, other = everything("en"), everything(language)
    texts_of_both = {at: text for at, text in english.items() if isinstance(text, str) and at in other}
    differ = {at: (quoted(t), quoted(other[at])) for at, t in texts_of_both.items() if quoted(t) != quoted(other[at])}
    assert differ == {}


@pytest.mark.parametrize("language", OTHERS)
def test_the_same_cautions_follow_and_the_same_ones_always_stand(language: str) -> None:
    english, other = everything("en"), everything(language)
    plain = {at: value for at, value in english.items() if not isinstance(value, str)}
    assert {at: other.get(at) for at in plain} == plain


@pytest.mark.parametrize("language", OTHERS)
def test_a_text_is_translated_and_not_copied(language: str) -> None:
    english, other = everything("en"), everything(language)
    bare = {at: re.sub(r"\{[^}]*\}|(?<!\S)@\S+", "", text) for at, text in english.items() if isinstance(text, str)}
    spoken = {at for at, text in bare.items() if len(re.findall(r"[a-z]{3,}", text)) > 1}
    assert [at for at in sorted(spoken & other.keys()) if other[at] == english[at]] == []


@pytest.mark.parametrize("language", OTHERS)
def test_who_acts_is_the_same_in_every_language(language: str) -> None:
    english, other = workshop_words("en"), workshop_words(language)
    assert (other.fixes, other.default) == (english.fixes, english.default)


@pytest.mark.parametrize("language", LANGUAGES)
def test_every_urgency_and_every_change_has_a_name(language: str) -> None:
    held = workshop_words(language)
    assert list(held.urgencies) == list(get_args(UrgencyWord))
    assert set(held.changes) == {"engine", "rules", "devices"}


@pytest.mark.parametrize("language", LANGUAGES)
@pytest.mark.parametrize("check", CHECKS, ids=lambda check: check.id)
def test_every_reason_of_every_check_is_told(check: Any, language: str) -> None:
    held = texts(language)
    assert check.id in held.checks
    own, shared = held.checks[check.id].reasons, held.shared
    assert [reason for reason in check.reasons if reason not in own and reason not in shared] == []


@pytest.mark.parametrize("language", LANGUAGES)
def test_no_text_says_what_is_never_said(language: str) -> None:
    never = re.compile(NEVER[language], re.IGNORECASE)
    found = {at: text for at, text in everything(language).items() if isinstance(text, str) and never.search(text)}
    assert found == {}


def test_the_german_words_are_known_when_they_are_said() -> None:
    never = re.compile(NEVER["de"], re.IGNORECASE)
    for said in ("ist sicher", "Sicheres Urteil", "zertifiziert", "normkonform", "VDE-konform", "ist zulässig"):
        assert never.search(said), said
    for said in ("Sicherung", "Sicherungssystem", "versichert"):
        assert not never.search(said), said


def answers(language: str) -> list[Body]:
    """Answers for the invented outlets in one language."""
    requests = [AssessmentRequest.model_validate(outlet["request"]) for outlet in OUTLETS]
    return assess_requests(requests, languages=[language] * len(requests))


def spoken(told: Any) -> list[str]:
    """Texts of an answer."""
    if isinstance(told, list):
        return [text for part in told for text in spoken(part)]
    if not isinstance(told, dict):
        return []
    own = [value for name, value in told.items() if name in SPOKEN and isinstance(value, str)]
    return own + [text for part in told.values() for text in spoken(part)]


def unspoken(told: Any) -> Any:
    """The answer without its words."""
    if isinstance(told, list):
        return [unspoken(part) for part in told]
    if isinstance(told, dict):
        return {name: unspoken(value) for name, value in told.items() if name not in SPOKEN}
    return told


def numerals(told: str) -> list[str]:
    return sorted(re.findall(r"\d+(?:\.\d+)?(?:e[+-]\d+)?", told))


@pytest.mark.parametrize("language", OTHERS)
def test_the_language_changes_words_only(language: str) -> None:
    for english, other in zip(answers("en"), answers(language), strict=True):
        assert unspoken(other) == unspoken(english)
        assert (english["provenance"]["language"], other["provenance"]["language"]) == ("en", language)
        assert english["provenance"]["texts_digest"] != other["provenance"]["texts_digest"]


@pytest.mark.parametrize("language", OTHERS)
def test_explanations_show_the_same_arithmetic(language: str) -> None:
    for english, other in zip(answers("en"), answers(language), strict=True):
        for one, two in zip(english["findings"], other["findings"], strict=True):
            assert numerals(two["explanation"]) == numerals(one["explanation"])
            assert ("settled_by" in one, "caution" in one) == ("settled_by" in two, "caution" in two)


@pytest.mark.parametrize("language", LANGUAGES)
def test_no_answer_says_what_is_never_said(language: str) -> None:
    never = re.compile(NEVER[language], re.IGNORECASE)
    said = [text for answer in answers(language) for text in spoken(answer)]
    assert len(said) > 1000
    assert [text for text in said if never.search(text) or re.search(r"[{}]|\bnan\b|\binf\b", text)] == []


def test_a_table_may_speak_several_languages() -> None:
    requests = [AssessmentRequest.model_validate(outlet["request"]) for outlet in OUTLETS]
    mixed = [LANGUAGES[at % len(LANGUAGES)] for at in range(len(requests))]
    together = assess_requests(requests, languages=mixed)
    alone = [assess_requests([r], languages=[language])[0] for r, language in zip(requests, mixed, strict=True)]
    assert together == alone
