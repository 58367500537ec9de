"""Outcomes -> answers in words, and the one path from requests to answers."""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

import numpy as np

from faultloop import __version__
from faultloop.assessment.checks import CHECKS
from faultloop.assessment.codes import EARTHED, INSULATED, SEPARATED, Choice, Earthing, Reading
from faultloop.assessment.explain import Explainer, Names, Quoted, cautions_of
from faultloop.assessment.judged import Check
from faultloop.assessment.loops import Basis
from faultloop.assessment.points import Points, from_rows
from faultloop.assessment.standing import Verdict
from faultloop.assessment.texts import LANGUAGES, Texts, texts
from faultloop.assessment.urgency import Urgency
from faultloop.assessment.verdicts import ROWS, SENSES, Outcome, conditions_of, decide
from faultloop.digests import canonical_bytes, digest, rounded_rows, sha256
from faultloop.electrical.measurement import conformance_probability
from faultloop.exchange.mapped import Mapped
from faultloop.exchange.mapping import mapped, tables_of
from faultloop.exchange.quantities import interval, quantity_columns
from faultloop.exchange.requests import AssessmentRequest
from faultloop.protection.catalogue import catalogue

Body = dict[str, Any]
_VERDICTS = {code: word for word, code in Verdict.codes().items()}
_OWN_CLAUSE = {Earthing.TT: "tt", Earthing.IT: "it"}
_CLEARING_EARTH_FAULTS = (
    "overcurrent-disconnection",
    "residual-disconnection",
    "barrier-failed-path",
    "touch-voltage",
    "protective-conductor-condition",
    "protective-conductor-heating",
    "means-of-earthing",
    "earth-electrode",
)
_NOT_CONCERNED = {Earthing.IT: "not-concerned-it", Earthing.SEPARATED: "not-concerned-separated"}
LOOP_ROWS = np.array([check.quantity == "earth_fault_loop_impedance_ohm" for check in CHECKS])[:, None]
_URGENCIES = {code: word for word, code in Urgency.codes().items()}


def request_bytes(request: AssessmentRequest) -> bytes:
    """Canonical bytes of a validated request, unset fields left out, numbers as floats."""
    return canonical_bytes(request.model_dump(mode="json", by_alias=True, exclude_unset=True))


def assess_requests(
    requests: Sequence[AssessmentRequest],
    digests: Sequence[str] | None = None,
    languages: Sequence[str] | None = None,
) -> list[Body]:
    """Judge requests and put the outcomes in words, each in its language; one and many take the same path."""
    if not requests:
        return []
    known = digests or [sha256(request_bytes(request)) for request in requests]
    by = tables_of(requests)
    given = [mapped(request, by) for request in requests]
    points = from_rows([point.row for point in given])
    outcome = decide(points, by)
    spoken = languages or [LANGUAGES[0]] * len(requests)
    renderers = {language: Renderer(points, outcome, language) for language in set(spoken)}
    return [
        renderers[language].answer(at, point, told)
        for at, (point, told, language) in enumerate(zip(given, known, spoken, strict=True))
    ]


@dataclass(frozen=True, slots=True)
class _Fixed:
    """Parts of an answer that are the same for every point, made once a language; nobody changes them."""

    digest: str
    titles: list[str]
    not_applicable: dict[int, list[Body | None]]
    not_examined: list[list[Body | None]]
    subjects: list[Body]


@lru_cache(maxsize=8)
def _fixed(language: str) -> _Fixed:
    told = texts(language)
    return _Fixed(
        digest=digest(told.model_dump(mode="json")),
        titles=[told.checks[check.id].title for check in CHECKS],
        not_applicable={
            earthing: [_not_applicable(told, check, earthing) for check in CHECKS]
            for earthing in EARTHED | INSULATED | SEPARATED
        },
        not_examined=[[_said_alike(told, check.id, reason) for reason in check.reasons] for check in CHECKS],
        subjects=[_not_examined(name, "out-of-scope", text, None) for name, text in told.subjects.items()],
    )


def _not_applicable(told: Texts, check: Check, earthing: int) -> Body | None:
    """Entry of a check that does not apply; of checks for other supplies only those of an earthed one are missed."""
    if earthing in check.supplies:
        return {"check": check.id, "text": told.checks[check.id].applies_not}
    if earthing in EARTHED or check.supplies.isdisjoint(EARTHED):
        return None
    cleared = check.id in _CLEARING_EARTH_FAULTS
    return {"check": check.id, "text": told.phrases[_NOT_CONCERNED[earthing] if cleared else "not-looked-at"]}


def _said_alike(told: Texts, check: str, reason: str) -> Body | None:
    """Entry of a check that was not examined, where it says the same of every point; else None."""
    said = told.said(check, reason)
    quotes = any(mark in said.explanation + (said.settled_by or "") for mark in "{@") or said.cautions
    return None if quotes else _not_examined(check, reason, said.explanation, said.settled_by)


@lru_cache(maxsize=1024)
def _cautions(language: str, named: frozenset[str], earthing: int) -> list[Body]:
    told = texts(language).cautions
    # On a separated supply nothing is to be joined to earth.
    left_out = {"reconnect-earthing"} if earthing == Earthing.SEPARATED else set()
    held = [name for name, caution in told.items() if (caution.always or name in named) and name not in left_out]
    return [{"caution": name, "text": told[name].text} for name in held]


class _Values:
    """Values of the findings, (K, n), as lists: plain and rounded."""

    def __init__(self, points: Points, outcome: Outcome) -> None:
        found = outcome.findings
        with np.errstate(invalid="ignore", divide="ignore", over="ignore"):
            u = np.where(SENSES > 0, found.greatest - found.nominal, found.nominal - found.least)
            # Probability belongs to the reading (k = 2), whatever coverage the decision asked for.
            u = np.where(np.isinf(u), np.nan, u / points.coverage)
            probability = conformance_probability(found.nominal, u, found.limit, SENSES)
            worst = np.where(SENSES > 0, found.greatest, found.least)
            # A no-trip reading errs high by an amount that nobody knows the chance of.
            unknowable = LOOP_ROWS & (outcome.quantities.loops.basis == Basis.NO_TRIP)
            probability = np.where(unknowable & (found.verdict == Verdict.MARGINAL), np.nan, probability)
            margin = SENSES * (found.limit - worst) / found.limit * 100.0
        # Where something else decided, how the number stands to its limit would only mislead.
        probability, margin = (np.where(found.compared, of, np.nan) for of in (probability, margin))
        self.least, self.greatest = found.least.tolist(), found.greatest.tolist()
        printed = (found.nominal, found.least, found.greatest, found.limit, margin, probability)
        # Of each check (6, n) rounded numbers; a check that was nowhere examined prints none.
        examined = np.flatnonzero(np.any(found.verdict < Verdict.NOT_EXAMINED, axis=1)).tolist()
        rounded = rounded_rows([of[row] for row in examined for of in printed])
        self.rounded = {row: rounded[6 * at : 6 * at + 6] for at, row in enumerate(examined)}


class Renderer:
    """Puts the points of one outcome in words; whatever is an array is turned to lists once."""

    def __init__(self, points: Points, outcome: Outcome, language: str = "en") -> None:
        self._points, self._outcome, self._language = points, outcome, language
        self._texts: Texts = texts(language)
        self._fixed = _fixed(language)
        self._explainer = Explainer(points, outcome, language)
        found = outcome.findings
        # Points first: an answer walks through the checks of one point.
        self._verdict, self._reason = found.verdict.T.tolist(), found.reason.T.tolist()
        self._counts, self._earthing = found.counts.T.tolist(), points.choice(Choice.EARTHING).tolist()
        self._values = _Values(points, outcome)
        self._quantities = quantity_columns(points, outcome)

    def answer(self, at: int, point: Mapped, input_digest: str) -> Body:
        """The answer for one point."""
        names = Names(point.device, point.residual, point.rules.rules.title, point.upstream)
        quoted = self._explainer.quoted(at, names)
        cautions: set[str] = set(point.cautions)
        findings, not_examined, not_applicable = [], [], []
        said, counts, earthing = self._explainer.said, self._counts[at], self._earthing[at]
        settled = zip(CHECKS, self._verdict[at], self._reason[at], strict=True)
        for row, (check, verdict, reason) in enumerate(settled):
            if verdict == Verdict.NOT_APPLICABLE:
                if (told_why := self._fixed.not_applicable[earthing][row]) is not None:
                    not_applicable.append(told_why)
                continue
            if verdict == Verdict.NOT_EXAMINED and (alike := self._fixed.not_examined[row][reason]) is not None:
                not_examined.append(alike)
                continue
            explanation, question, named = said(row, reason, at, quoted)
            if verdict == Verdict.NOT_EXAMINED:
                not_examined.append(_not_examined(check.id, check.reasons[reason], explanation, question))
                continue
            # A finding that is met and decides nothing warns of nothing.
            told = named if counts[row] or verdict < Verdict.PASS_WITH_CONDITIONS else []
            cautions.update(told)
            findings.append(self._finding(row, at, point, explanation, question, told))
        not_examined += self._fixed.subjects
        not_examined += [_not_examined(name, "not-used", self._texts.unused, None) for name in point.unused]
        cautions |= cautions_of(self._points, self._outcome, at)
        cautions.update(point.rules.rules.cautions)
        return {
            "verdict": _VERDICTS[int(self._outcome.verdict[at])],
            "urgency": _URGENCIES[int(self._outcome.urgency[at])],
            "findings": findings,
            "quantities": self._quantities.body(at),
            "conditions": self._conditions(at),
            "not_examined": not_examined,
            "not_applicable": not_applicable,
            "assumptions": self._assumptions(at, point, quoted),
            "cautions": _cautions(self._language, frozenset(cautions), earthing),
            "policy": point.policy,
            "provenance": self._provenance(point, input_digest),
        }

    def _finding(
        self, row: int, at: int, point: Mapped, explanation: str, question: str | None, named: list[str]
    ) -> Body:
        check, verdict, clauses = CHECKS[row], self._verdict[at][row], point.rules.rules.clauses
        if verdict == Verdict.FAIL and question is not None:
            # Nothing read can settle a failure: what would be asked is what is to be done.
            explanation = f"{explanation} {question}"
        value, least, greatest, limit, margin, probability = [column[at] for column in self._values.rounded[row]]
        body: Body = {"check": check.id, "title": self._fixed.titles[row], "verdict": _VERDICTS[verdict]}
        body["quantity"] = check.quantity
        # What is unknown is absent.
        if value is not None:
            body["value"] = value
        told = interval(self._values.least[row][at], self._values.greatest[row][at], (least, greatest))
        if told is not None:
            body["interval"] = told
        if limit is not None:
            body["limit"] = limit
        body["unit"] = check.unit
        if margin is not None:
            body["margin_percent"] = margin
        if probability is not None:
            body["conformance_probability"] = probability
        if check.group is not None:
            body["group"] = check.group
        body["counts"] = self._counts[at][row]
        own = _OWN_CLAUSE.get(self._earthing[at])
        body["clause"] = (clauses.get(f"{check.id}-{own}") if own else None) or clauses[check.id]
        body["reason"] = check.reasons[self._reason[at][row]]
        body["explanation"] = explanation
        if question is not None and Verdict.FAIL < verdict < Verdict.PASS_WITH_CONDITIONS:
            body["settled_by"] = question
        if named:
            body["caution"] = self._texts.cautions[named[0]].text
        return body

    def _conditions(self, at: int) -> list[Body]:
        told = self._texts.conditions
        held = conditions_of(int(self._outcome.conditions[at]))
        return [{"condition": name, "text": told[name].text, "owner": told[name].owner} for name in held]

    def _assumptions(self, at: int, point: Mapped, quoted: Quoted) -> list[Body]:
        names = [*point.assumptions, *_assumed(self._outcome, at)]
        told = self._texts.assumptions
        return [{"assumption": name, "text": told[name].format_map(quoted)} for name in names]

    def _provenance(self, point: Mapped, input_digest: str) -> Body:
        return {
            "engine": __version__,
            "rules": point.rules.rules.key,
            "rules_digest": point.rules.digest,
            "devices_digest": catalogue().digest,
            "language": self._language,
            "texts_digest": self._fixed.digest,
            "input_digest": input_digest,
        }


def _not_examined(subject: str, reason: str, text: str, question: str | None) -> Body:
    body: Body = {"subject": subject, "reason": reason, "text": text}
    return body if question is None else {**body, "settled_by": question}


def _assumed(outcome: Outcome, at: int) -> list[str]:
    """Assumptions that the choice of the loop and of the electrode made."""
    q, basis = outcome.quantities, int(outcome.quantities.loops.basis[at])
    live = bool(q.given.known[Reading.LOOP, at])
    names = []
    if basis == Basis.DEAD and live:
        names.append("reading-outranked" if q.loops.excess[at] > 0 else "higher-dead-sum")
    if basis == Basis.ELECTRODE:
        names.append("source-earth")
    electrode = outcome.findings.verdict[ROWS["earth-electrode"], at] < Verdict.NOT_EXAMINED
    if electrode and live and not q.given.known[Reading.ELECTRODE, at]:
        names.append("electrode-from-loop")
    return names
