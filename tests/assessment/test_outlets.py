"""Invented outlets with the words that were reasoned by hand beforehand; the reasoning stands beside each."""

import json
from pathlib import Path

import pytest

from faultloop import assess, assess_many
from tests.assessment.bodies import Body, rank

FOLDER = Path(__file__).parents[2] / "fixtures" / "outlets"


def outlets(name: str) -> list[Body]:
    """Outlets of one file."""
    listed: list[Body] = json.loads((FOLDER / f"{name}.json").read_text(encoding="utf-8"))
    return listed


def each(name: str) -> pytest.MarkDecorator:
    """One test an outlet, named by its title."""
    return pytest.mark.parametrize("outlet", [pytest.param(o, id=o["title"]) for o in outlets(name)])


@pytest.mark.parametrize("name", ["ordinary", "dangerous"])
def test_fifteen_outlets_each_with_its_reasoning(name: str) -> None:
    listed = outlets(name)
    assert len({outlet["title"] for outlet in listed}) == 15
    assert all(len(outlet["why"]) > 60 for outlet in listed)


@each("ordinary")
def test_ordinary_outlet_gets_the_words_reasoned_by_hand(outlet: Body) -> None:
    answer = assess(outlet["request"])
    assert {name: answer[name] for name in outlet["expected"]} == outlet["expected"]


@each("dangerous")
def test_dangerous_outlet_gets_the_words_reasoned_by_hand(outlet: Body) -> None:
    answer = assess(outlet["request"])
    assert {name: answer[name] for name in outlet["expected"]} == outlet["expected"]


def test_most_ordinary_outlets_pass_plainly_and_none_fails() -> None:
    verdicts = [answer["verdict"] for answer in assess_many([o["request"] for o in outlets("ordinary")])]
    assert verdicts.count("pass") >= 12
    assert "fail" not in verdicts


@each("dangerous")
def test_no_dangerous_outlet_passes_even_with_conditions(outlet: Body) -> None:
    assert rank(assess(outlet["request"])["verdict"]) < rank("pass-with-conditions")


@each("ordinary")
def test_nothing_urgent_is_raised_where_nothing_is_wrong(outlet: Body) -> None:
    assert assess(outlet["request"])["urgency"] in ("none", "note")
