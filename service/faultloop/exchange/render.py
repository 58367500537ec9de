"""Outcomes -> answers in words, and the one path from requests to answers."""

import math
from collections.abc import Sequence
from functools import lru_cache
from typing import Any

import numpy as np

from faultloop import __version__
from faultloop.assessment.checks import CHECKS
from faultloop.assessment.explain import Explainer, Names, cautions_of
from faultloop.assessment.loops import Basis
from faultloop.assessment.points import Choice, Earthing, Number, Points, Reading, from_rows
from faultloop.assessment.standing import Verdict
from faultloop.assessment.texts import Texts, texts
from faultloop.assessment.urgency import Urgency
from faultloop.assessment.verdicts import ROWS, Outcome, conditions_of, decide
from faultloop.digests import canonical_bytes, digest, rounded, sha256
from faultloop.electrical.fault_current import prospective_current
from faultloop.electrical.measurement import conformance_probability
from faultloop.exchange.mapping import Mapped, mapped
from faultloop.exchange.requests import AssessmentRequest
from faultloop.protection.band import faster
from faultloop.protection.catalogue import catalogue

Body = dict[str, Any]
_VERDICTS = {code: word for word, code in Verdict.codes().items()}
_URGENCIES = {code: word for word, code in Urgency.codes().items()}


def request_bytes(request: AssessmentRequest) -> bytes:
    """Canonical bytes of a validated request, unset fields left out, numbers as floats."""
    return canonical_bytes(request.model_dump(mode="json", by_alias=True, exclude_unset=True))


def assess_requests(requests: Sequence[AssessmentRequest], digests: Sequence[str] | None = None) -> list[Body]:
    """Judge requests and put the outcomes in words; one request and many take the same path."""
    if not requests:
        return []
    known = digests or [sha256(request_bytes(request)) for request in requests]
    given = [mapped(request) for request in requests]
    points = from_rows([point.row for point in given])
    outcome = decide(points)
    renderer = Renderer(points, outcome)
    return [renderer.answer(at, point, told) for at, (point, told) in enumerate(zip(given, known, strict=True))]


@lru_cache(maxsize=8)
def _texts_digest(language: str) -> str:
    return digest(texts(language).model_dump(mode="json"))


def interval(least: float, greatest: float) -> Body | None:
    """An interval in words: unknown is absent, an open end null."""
    if math.isnan(least) and math.isnan(greatest):
        return None
    body: Body = {"least": rounded(least), "greatest": rounded(greatest)}
    if body["least"] is None or body["greatest"] is None:
        both = body["least"] is None and body["greatest"] is None
        body["open"] = "both" if both else "least" if body["least"] is None else "greatest"
    return body


class Renderer:
    """Puts the points of one outcome in words; whatever is an array is turned to lists once."""

    def __init__(self, points: Points, outcome: Outcome, language: str = "en") -> None:
        self._points, self._outcome, self._language = points, outcome, language
        self._texts: Texts = texts(language)
        self._explainer = Explainer(points, outcome, language)
        found = outcome.findings
        self._verdict, self._reason = found.verdict.tolist(), found.reason.tolist()
        self._least, self._greatest = found.least.tolist(), found.greatest.tolist()
        self._nominal, self._limit = found.nominal.tolist(), found.limit.tolist()
        self._counts = found.counts.tolist()
        senses = np.array([check.sense for check in CHECKS])[:, None]
        with np.errstate(invalid="ignore", divide="ignore"):
            u = np.where(senses > 0, found.greatest - found.nominal, found.nominal - found.least)
            # Probability belongs to the reading (k = 2), whatever coverage the decision asked for.
            u = np.where(np.isinf(u), np.nan, u / points.coverage)
            probability = conformance_probability(found.nominal, u, found.limit, senses)
            worst = np.where(senses > 0, found.greatest, found.least)
            margin = senses * (found.limit - worst) / found.limit * 100.0
        self._probability, self._margin = probability.tolist(), margin.tolist()
        self._quantities = _quantity_columns(points, outcome)

    def answer(self, at: int, point: Mapped, input_digest: str) -> Body:
        """The answer for one point."""
        names = Names(point.device, point.residual, point.rules.rules.title)
        values = self._explainer.values(at, names)
        cautions: set[str] = set()
        findings, not_examined, not_applicable = [], [], []
        for row, check in enumerate(CHECKS):
            verdict = self._verdict[row][at]
            if verdict == Verdict.NOT_APPLICABLE:
                not_applicable.append({"check": check.id, "text": self._texts.checks[check.id].applies_not})
                continue
            explanation, question, named = self._explainer.said(row, self._reason[row][at], at, values)
            if verdict == Verdict.NOT_EXAMINED:
                not_examined.append(
                    _not_examined(check.id, check.reasons[self._reason[row][at]], explanation, question)
                )
                continue
            # A finding that is met and decides nothing warns of nothing.
            told = named if self._counts[row][at] or verdict < Verdict.PASS_WITH_CONDITIONS else []
            cautions.update(told)
            findings.append(self._finding(row, at, point, explanation, question, told))
        for subject, text in self._texts.subjects.items():
            not_examined.append({"subject": subject, "reason": "out-of-scope", "text": text})
        return {
            "verdict": _VERDICTS[int(self._outcome.verdict[at])],
            "urgency": _URGENCIES[int(self._outcome.urgency[at])],
            "findings": findings,
            "quantities": self._quantities_of(at),
            "conditions": self._conditions(at),
            "not_examined": not_examined,
            "not_applicable": not_applicable,
            "assumptions": self._assumptions(at, point, values),
            "cautions": self._cautions(at, cautions),
            "policy": point.policy,
            "provenance": self._provenance(point, input_digest),
        }

    def _finding(
        self, row: int, at: int, point: Mapped, explanation: str, question: str | None, named: list[str]
    ) -> Body:
        check, verdict = CHECKS[row], self._verdict[row][at]
        if verdict == Verdict.FAIL and question is not None:
            # Nothing read can settle a failure: what would be asked is what is to be done.
            explanation, question = f"{explanation} {question}", None
        tt = check.id + "-tt"
        clauses = point.rules.rules.clauses
        is_tt = int(self._points.choices[Choice.EARTHING, at]) == Earthing.TT
        body: Body = {
            "check": check.id,
            "title": self._texts.checks[check.id].title,
            "verdict": _VERDICTS[verdict],
            "quantity": check.quantity,
            "value": rounded(self._nominal[row][at]),
            "interval": interval(self._least[row][at], self._greatest[row][at]),
            "limit": rounded(self._limit[row][at]),
            "unit": check.unit,
            "margin_percent": rounded(self._margin[row][at]),
            "conformance_probability": rounded(self._probability[row][at]),
            "group": check.group,
            "counts": self._counts[row][at],
            "clause": clauses[tt] if is_tt and tt in clauses else clauses[check.id],
            "reason": check.reasons[self._reason[row][at]],
            "explanation": explanation,
            "settled_by": question if verdict < Verdict.PASS_WITH_CONDITIONS else None,
            "caution": self._texts.cautions[named[0]].text if named else None,
        }
        return {name: value for name, value in body.items() if value is not None}

    def _quantities_of(self, at: int) -> Body:
        columns = self._quantities
        body: Body = {name: interval(least[at], greatest[at]) for name, (least, greatest) in columns.ends.items()}
        time = interval(columns.time[0][at], columns.time[1][at])
        body["disconnection_time_s"] = None if time is None else {**time, "by": columns.by[at]}
        body.update({name: rounded(column[at]) for name, column in columns.plain.items()})
        return {name: value for name, value in body.items() if value is not None}

    def _conditions(self, at: int) -> list[Body]:
        told = self._texts.conditions
        held = conditions_of(int(self._outcome.conditions[at]))
        return [{"condition": name, "text": told[name].text, "owner": told[name].owner} for name in held]

    def _assumptions(self, at: int, point: Mapped, values: dict[str, float | str]) -> list[Body]:
        names = [*point.assumptions, *_assumed(self._outcome, at)]
        told = self._texts.assumptions
        return [{"assumption": name, "text": told[name].format_map(values)} for name in names]

    def _cautions(self, at: int, named: set[str]) -> list[Body]:
        told = self._texts.cautions
        names = cautions_of(self._points, self._outcome, at, named, self._language)
        return [{"caution": name, "text": told[name].text} for name in names]

    def _provenance(self, point: Mapped, input_digest: str) -> Body:
        return {
            "engine": __version__,
            "rules": point.rules.rules.key,
            "rules_digest": point.rules.digest,
            "devices_digest": catalogue().digest,
            "texts_digest": _texts_digest(self._language),
            "input_digest": input_digest,
        }


def _not_examined(subject: str, reason: str, text: str, question: str | None) -> Body:
    body: Body = {"subject": subject, "reason": reason, "text": text}
    return body if question is None else {**body, "settled_by": question}


class _QuantityColumns:
    """Columns of the reported quantities as lists."""

    def __init__(self) -> None:
        self.ends: dict[str, tuple[list[float], list[float]]] = {}
        self.plain: dict[str, list[float]] = {}
        self.time: tuple[list[float], list[float]] = ([], [])
        self.by: list[str] = []


def _quantity_columns(points: Points, outcome: Outcome) -> _QuantityColumns:
    q, found, columns = outcome.quantities, outcome.findings, _QuantityColumns()
    given = found.verdict[ROWS["line-neutral-disconnection"]] < Verdict.NOT_EXAMINED
    voltage, loop = points.number(Number.VOLTAGE), q.line_neutral
    with np.errstate(divide="ignore", invalid="ignore"):
        short = [
            np.where(given, prospective_current(q.rule(factor), voltage, z), np.nan)
            for factor, z in (("c_min", loop.hot.greatest), ("c_max", loop.cold_least))
        ]
    touch_least = np.where(q.touch_known, q.touch_v, np.where(np.isnan(q.touch_v), np.nan, -np.inf))
    ends = {
        "prospective_earth_fault_current_a": (q.current.least, q.current.greatest),
        "prospective_short_circuit_current_a": (short[0], short[1]),
        "touch_voltage_v": (touch_least, q.touch_v),
        "earth_fault_loop_impedance_ohm": (q.loops.loop.least, q.loops.loop.greatest),
        "heated_earth_fault_loop_impedance_ohm": (q.hot.least, q.hot.greatest),
    }
    columns.ends = {name: (least.tolist(), greatest.tolist()) for name, (least, greatest) in ends.items()}
    credited = q.residual.tested & ~q.residual.over_limit
    residual = np.where(credited, q.residual.time_s.greatest, np.inf)
    greatest = faster(q.overcurrent_s.greatest, residual)
    least = np.fmin(q.overcurrent_s.least, np.where(credited, q.residual.time_s.least, np.inf))
    known = ~np.isnan(q.current.least)
    columns.time = (np.where(known, least, np.nan).tolist(), np.where(known, greatest, np.nan).tolist())
    quicker = residual < np.where(np.isnan(q.overcurrent_s.greatest), np.inf, q.overcurrent_s.greatest)
    by = np.where(np.isinf(greatest), "none", np.where(quicker, "residual-current-device", "overcurrent-device"))
    columns.by = by.tolist()
    columns.plain = {
        "required_disconnection_time_s": np.where(q.wanting == 0, q.required_s, np.nan).tolist(),
        "temperature_factor": q.factor.tolist(),
        "residual_current_multiple": q.residual.multiple.tolist(),
    }
    return columns


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
