"""Texts by reason: nothing missing, nothing orphaned, every placeholder known."""

import re
from importlib import resources
from importlib.resources.abc import Traversable
from typing import Any

import pytest

from faultloop.assessment.checks import CHECKS
from faultloop.assessment.codes import EARTHED, SEPARATED, Decision, TemperaturePolicy
from faultloop.assessment.explain import Explainer, Names
from faultloop.assessment.judged import Condition
from faultloop.assessment.limits import loop_limit
from faultloop.assessment.loops import Basis
from faultloop.assessment.points import from_rows
from faultloop.assessment.texts import LANGUAGES, Said, texts
from faultloop.assessment.verdicts import decide
from faultloop.exchange.mapping import mapped
from faultloop.exchange.requests import AssessmentRequest
from faultloop.protection.designations import parse_device
from faultloop.rules.loader import resolve, shipped

TEXTS = texts("en")
POLICIES = sorted(TemperaturePolicy.codes())
BASES: dict[str, tuple[str, dict[str, object]]] = {
    "none": ("TN-S", {}),
    "live": ("TN-S", {"earth_fault_loop_impedance_ohm": {"value": 0.9, "method": "high-current"}}),
    "no-trip": ("TN-S", {"earth_fault_loop_impedance_ohm": {"value": 0.9, "method": "no-trip"}}),
    "dead": (
        "TN-S",
        {"external_earth_fault_loop_impedance_ohm": 0.3, "line_plus_protective_resistance_ohm": 0.6},
    ),
    "electrode": ("TT", {"earth_electrode_resistance_ohm": 100.0}),
}


UNEARTHED = ("separated", "IT")


def request(earthing: str, readings: dict[str, object], policy: str) -> dict[str, Any]:
    """A B32 socket circuit with a residual device."""
    return {
        "point": {"label": "bench"},
        "supply": {"earthing": earthing, "nominal_voltage_to_earth_v": 230},
        "circuit": {"role": "final", "feeds": "socket-outlets"},
        "overcurrent_device": {"kind": "miniature-circuit-breaker", "characteristic": "B", "rated_current_a": 32},
        "residual_current_device": {"rated_residual_operating_current_ma": 30},
        "readings": readings,
        "policy": {"temperature": policy},
    }


def explainer(basis: str, policy: str, language: str = "en") -> tuple[Explainer, Names]:
    """The explainer of a point whose loop rests on that basis and of one on each unearthed supply; and their words."""
    asked = [request(*BASES[basis], policy), *(request(earthing, {}, policy) for earthing in UNEARTHED)]
    point, *others = [mapped(AssessmentRequest.model_validate(body)) for body in asked]
    points = from_rows([point.row, *(other.row for other in others)])
    outcome = decide(points)
    assert Basis.word(int(outcome.quantities.loops.basis[0])) == basis
    found = Explainer(points, outcome, language)
    return found, Names(point.device, point.residual, point.rules.rules.title)


def finished(sentence: str) -> bool:
    """Whether nothing is left to be filled in."""
    return not re.search(r"[{}]|(^|\s)@\w", sentence)


def all_said() -> list[Said]:
    """Everything that is said of a reason."""
    own = [said for check in TEXTS.checks.values() for said in check.reasons.values()]
    return [*own, *TEXTS.shared.values()]


def source() -> str:
    """The package's code, in which texts are called by name."""

    def walk(folder: Traversable) -> list[str]:
        inside = sorted(folder.iterdir(), key=lambda entry: entry.name)
        below = [text for entry in inside if entry.is_dir() for text in walk(entry)]
        return below + [entry.read_text(encoding="utf-8") for entry in inside if entry.name.endswith(".py")]

    return "\n".join(walk(resources.files("faultloop")))


SOURCE = source()


def is_called(name: str) -> bool:
    """Whether the code calls a text by name."""
    return f'"{name}"' in SOURCE


@pytest.mark.parametrize("check", CHECKS, ids=lambda check: check.id)
def test_every_reason_of_every_check_has_a_text(check: Any) -> None:
    assert len(set(check.reasons)) == len(check.reasons)
    for reason in check.reasons:
        assert TEXTS.said(check.id, reason).explanation


def test_checks_and_texts_name_each_other() -> None:
    assert set(TEXTS.checks) == {check.id for check in CHECKS}


@pytest.mark.parametrize("check", CHECKS, ids=lambda check: check.id)
def test_no_text_of_a_check_is_orphaned(check: Any) -> None:
    assert set(TEXTS.checks[check.id].reasons) <= set(check.reasons)


def test_no_shared_text_is_orphaned() -> None:
    used = {r for check in CHECKS for r in check.reasons if r not in TEXTS.checks[check.id].reasons}
    assert set(TEXTS.shared) == used


@pytest.mark.parametrize("language", LANGUAGES)
@pytest.mark.parametrize("policy", POLICIES)
@pytest.mark.parametrize("basis", sorted(BASES))
def test_every_placeholder_of_every_reason_is_known(basis: str, policy: str, language: str) -> None:
    found, names = explainer(basis, policy, language)
    for row, check in enumerate(CHECKS):
        place = 0 if check.supplies & EARTHED else 1 if check.supplies & SEPARATED else 2
        for at in range(len(check.reasons)):
            explanation, question, _ = found.said(row, at, place, found.quoted(place, names))
            assert explanation
            assert finished(explanation), explanation
            assert question is None or finished(question), question


def test_every_basis_and_policy_is_tried() -> None:
    assert set(BASES) == set(Basis.codes())
    assert set(POLICIES) == {"split", "two-thirds", "four-fifths", "none"}


@pytest.mark.parametrize("language", LANGUAGES)
def test_every_assumption_can_be_said(language: str) -> None:
    found, names = explainer("no-trip", "split", language)
    for name, text in texts(language).assumptions.items():
        assert finished(text.format_map(found.quoted(0, names))), name


@pytest.mark.parametrize("language", LANGUAGES)
@pytest.mark.parametrize("policy", POLICIES)
@pytest.mark.parametrize("device", ["B32", "gG 63", "30 mA", "300 mA S"])
def test_every_limit_can_be_explained(device: str, policy: str, language: str) -> None:
    rules = resolve("bs-7671")
    assert rules is not None
    told = loop_limit(parse_device(device), rules.rules, 0.4, policy, 230.0, language).explanation
    assert told
    assert finished(told), told


def test_sentences_are_used_and_have_a_variant_for_each_case() -> None:
    named = {word[1:] for said in all_said() for word in said.explanation.split() if word.startswith("@")}
    variants = {
        "limit": POLICIES,
        "upstream": POLICIES,
        "heating": [*POLICIES, "electrode"],
        "line-neutral": POLICIES,
        "loop": sorted(Basis.codes()),
        "within": sorted(Decision.codes()),
        "beyond": sorted(Decision.codes()),
    }
    needed = {f"{name}.{v}" for name in named if name in variants for v in variants[name]}
    needed |= {name for name in named if name not in variants}
    assert needed <= set(TEXTS.sentences)
    assert [name for name in set(TEXTS.sentences) - needed if not is_called(name)] == []


@pytest.mark.parametrize("name", sorted(TEXTS.phrases))
def test_no_phrase_is_orphaned(name: str) -> None:
    assert is_called(name)


@pytest.mark.parametrize("name", sorted(TEXTS.assumptions))
def test_no_assumption_is_orphaned(name: str) -> None:
    assert is_called(name)


def test_conditions_are_those_that_checks_can_set() -> None:
    assert set(TEXTS.conditions) == set(Condition.codes())


def test_cautions_exist_and_none_is_orphaned() -> None:
    named = {name for said in all_said() for name in said.cautions}
    assert named <= set(TEXTS.cautions)
    by_sets = {name for loaded in shipped().values() for name in loaded.rules.cautions}
    assert by_sets <= set(TEXTS.cautions)
    rest = {name for name, caution in TEXTS.cautions.items() if not caution.always} - named - by_sets
    assert [name for name in sorted(rest) if not is_called(name)] == []


def test_some_cautions_stand_under_every_answer() -> None:
    assert {"competent-person", "no-certificate"} <= {n for n, c in TEXTS.cautions.items() if c.always}


@pytest.mark.parametrize("check", CHECKS, ids=lambda check: check.id)
def test_what_does_not_pass_says_what_would_settle_it(check: Any) -> None:
    # The first reason of every check is that of a limit kept; the next two are those of one that is not.
    for reason in check.reasons[1:3]:
        assert TEXTS.said(check.id, reason).settled_by


def test_nothing_is_called_safe_certified_or_compliant() -> None:
    words: list[str] = [*TEXTS.sentences.values(), *TEXTS.phrases.values(), *TEXTS.subjects.values()]
    words += [part for said in all_said() for part in (said.explanation, said.settled_by or "")]
    words += [part for check in TEXTS.checks.values() for part in (check.title, check.applies_not)]
    words += [c.text for c in TEXTS.cautions.values()] + [c.text for c in TEXTS.conditions.values()]
    words += list(TEXTS.assumptions.values())
    for sentence in words:
        assert not re.search(r"\b(safe|safely|certified|compliant)\b", sentence, flags=re.IGNORECASE), sentence
