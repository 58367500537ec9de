"""Explanations, questions, conditions and cautions of one point, by reason; no sentence stands in code."""

import math
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from faultloop.assessment.checks import CHECKS
from faultloop.assessment.codes import (
    Choice,
    Decision,
    Earthing,
    LetThrough,
    Method,
    Number,
    Reading,
    TemperaturePolicy,
)
from faultloop.assessment.explain_unearthed import unearthed_columns
from faultloop.assessment.loops import Basis
from faultloop.assessment.points import Points
from faultloop.assessment.texts import Said, texts
from faultloop.assessment.verdicts import ROWS, Outcome
from faultloop.electrical.fault_current import prospective_current
from faultloop.electrical.measurement import Array
from faultloop.protection.catalogue import catalogue

_POLICIES = {code: word for word, code in TemperaturePolicy.codes().items()}
_DECISIONS = {code: word for word, code in Decision.codes().items()}
UNEARTHED_CAUTIONS = {
    Earthing.SEPARATED: ("upstream-residual-blind", "separated-state"),
    Earthing.IT: ("insulated-first-fault", "medical-locations"),
}
_BASES = {code: word for word, code in Basis.codes().items()}


@dataclass(frozen=True, slots=True)
class Names:
    """The words of one point that numbers do not hold."""

    device: str | None
    residual: str | None
    rules: str
    upstream: Sequence[str] = ()


class Quoted(dict[str, float | str]):
    """What sentences about one point may quote: its numbers, and phrases made only when one is quoted."""

    def __init__(self, numbers: Iterable[tuple[str, float | str]], phrases: dict[str, str]) -> None:
        super().__init__(numbers)
        self.phrases = phrases

    def __missing__(self, name: str) -> float | str:
        """Make the phrase of that name."""
        self[name] = found = _PHRASES[name](self)
        return found

    def number(self, name: str) -> float:
        """A number for arithmetic: an open end counts as infinite."""
        found = self[name]
        return math.inf if isinstance(found, str) else found


class _Open(str):
    """An end without a bound: it prints as words, whatever number format the sentence asks for."""

    __slots__ = ()

    def __format__(self, spec: str) -> str:
        return str(self)


def _opened(column: list[float], words: str) -> list[float | str]:
    """A column with its open ends in words."""
    if math.inf not in column:
        return column  # type: ignore[return-value]
    return [_Open(words) if value == math.inf else value for value in column]


def _withstand(q: Quoted) -> float:
    current = q.number("i_ln")
    return (q.number("k") * q.number("area") / current) ** 2 if current else math.nan


def _withstand_told(q: Quoted) -> str:
    return "" if math.isnan(q.number("withstand")) else q.phrases["withstand"].format_map(q)


def _overcurrent_time(q: Quoted) -> str:
    nominal = q.number("overcurrent_nominal")
    return f"{nominal:g} s" if math.isfinite(nominal) else q.phrases["no-time"]


def _own_current(q: Quoted) -> str:
    return q.phrases["own-never" if math.isinf(q.number("ia")) else "own-from"].format_map(q)


def _times_told(q: Quoted) -> str:
    times = [(m, q.number(f"time_{m}")) for m in (1, 2, 5)]
    return ", ".join(q.phrases["time"].format(time=t, multiple=m) for m, t in times if not math.isnan(t))


_LET_THROUGH = {
    LetThrough.UNKNOWN: "let-through-unknown",
    LetThrough.MAKER: "let-through-maker",
    LetThrough.CLASS_MARKED: "let-through-class-marked",
    LetThrough.CLASS_USUAL: "let-through-class-usual",
    LetThrough.FUSE: "let-through-fuse",
}


def _let_through_told(q: Quoted) -> str:
    by_class = q.number("let_through_basis") in (LetThrough.CLASS_MARKED, LetThrough.CLASS_USUAL)
    known = not (by_class and math.isnan(q.number("let_through")))
    return q.phrases[_LET_THROUGH[int(q.number("let_through_basis"))] if known else "let-through-unknown"].format_map(q)


def _residual_limit(q: Quoted) -> str:
    touch = q.number("touch_limit") / q.number("idn_a")
    return q.phrases["residual-limit-touch" if q["limit"] == touch else "residual-limit-time"].format_map(q)


def _begun(sentence: str) -> str:
    """A phrase with which a sentence begins."""
    return sentence[0].upper() + sentence[1:]


def _contact_told(q: Quoted) -> str:
    """What the current of a contact rests on: a solved network, a reading, capacitance, or two of them."""
    if q.number("contact_solved"):
        return q.phrases["contact-solved"].format(nominal=q.number("contact_ma"))
    if q.number("joined") and q.number("contact_ma") == 1000.0 * q.number("u_sep") / q.number("body"):
        return _begun(q.phrases["contact-joined"].format_map(q))
    read = [(pole, q.number(f"contact_{pole.lower()}"), q.number(f"above_{pole.lower()}")) for pole in ("L1", "L2")]
    told = [
        q.phrases["contact-pole-above" if above else "contact-pole"].format(pole=pole, ma=ma)
        for pole, ma, above in read
        if not math.isnan(ma)
    ]
    parts = [q.phrases["contact-read"].format(contact_reads=", ".join(told))] if told else []
    if q.number("every_pole_read"):
        told_too = q.number("stated_nf") > 0.0 and not math.isnan(q.number("stated_ma"))
        parts += [q.phrases["contact-stated"].format_map(q)] if told_too else []
    elif not math.isnan(q.number("driven")):
        leaks = not math.isnan(q.number("insulation_least"))
        parts.append(q.phrases["contact-driven-leaking" if leaks else "contact-driven"].format_map(q))
    if len(parts) < 2:
        return _begun(parts[0] if parts else q.phrases["contact-nothing"])
    return q.phrases["contact-and"].format(contact_one=parts[0], contact_two=parts[1])


def _by_supply(q: Quoted, separated: str, insulated: str) -> str:
    """A phrase that differs between a separated and an IT supply."""
    return q.phrases[separated if q.number("is_separated") else insulated].format_map(q)


# Phrases that depend on what is known of the point.
_PHRASES: dict[str, Callable[[Quoted], float | str]] = {
    "withstand": _withstand,
    "withstand_told": _withstand_told,
    "upstream": lambda q: q.phrases["no-device"],
    "series": lambda q: q.phrases["series"].format_map(q) if "all_upstream" in q else q["device"],
    "own_current": _own_current,
    "multiple_in": lambda q: q.number("i_ln") / q.number("in_device"),
    "overcurrent_time": _overcurrent_time,
    "time_told": _times_told,
    "residual_limit": _residual_limit,
    "let_through_told": _let_through_told,
    "electrode_told": lambda q: q.phrases["electrode-bounded" if math.isnan(q.number("ra")) else "electrode-read"],
    "marginal_question": lambda q: q.phrases[
        "marginal-question-external" if math.isnan(q.number("ze")) else "marginal-question"
    ],
    "contact_told": _contact_told,
    "u_told": lambda q: q.phrases["voltage-whole" if math.isnan(q.number("u_sep")) else "voltage-known"].format_map(q),
    "pole_told": lambda q: q.phrases["pole-made" if math.isnan(q.number("line_line")) else "pole-read"].format_map(q),
    "second_told": lambda q: _by_supply(q, "second-separated", "second-insulated"),
    "second_limit": lambda q: _by_supply(q, "second-limit-separated", "second-limit-insulated"),
    "side": lambda q: q.phrases["below" if q.number("nominal") <= q.number("limit") else "above"],
    "z_or_value": lambda q: q["nominal"],
    "excess_told": lambda q: max(round(q.number("nominal"), 9), 0.0),
}


# Phrases that speak of one finding's own numbers.
_OWN_PHRASES = ("side", "residual_limit", "z_or_value", "excess_told", "contact_told", "second_told", "second_limit")


Template = tuple[str, bool, Said]


@lru_cache(maxsize=256)
def _templates(language: str, policy: str, basis: str, decision: str) -> list[list[Template]]:
    """For every reason of every check: its template, whether it quotes anything at all, and what else is said."""
    told = texts(language)
    # Of a loop taken from the electrode nothing is heated.
    heating = basis if basis == "electrode" else policy
    variants = dict.fromkeys(("limit", "upstream", "line-neutral"), policy)
    variants |= {"heating": heating, "loop": basis, "within": decision, "beyond": decision}

    def template(said: Said) -> Template:
        text = told.expanded(said.explanation, variants)
        return text, "{" in text + (said.settled_by or ""), said

    return [[template(told.said(check.id, reason)) for reason in check.reasons] for check in CHECKS]


class Explainer:
    """Explains the points of one outcome; the columns are turned to plain rows once."""

    def __init__(self, points: Points, outcome: Outcome, language: str = "en") -> None:
        self._phrases = texts(language).phrases
        words, found = self._phrases["open-end"], outcome.findings
        with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
            columns = _columns(points, outcome)
        self._names = tuple(columns)
        self._rows = list(zip(*(_opened(column, words) for column in columns.values()), strict=True))
        choices = [points.choices[which].tolist() for which in (Choice.TEMPERATURE_POLICY, Choice.DECISION)]
        chosen = zip(choices[0], outcome.quantities.loops.basis.tolist(), choices[1], strict=True)
        self._templates = [
            _templates(language, _POLICIES[policy], _BASES[basis], _DECISIONS[decision])
            for policy, basis, decision in chosen
        ]
        self._upstream = outcome.quantities.upstream.place.tolist()
        own = (found.nominal.tolist(), found.limit.tolist(), found.least.tolist(), found.greatest.tolist())
        self._own = [
            list(zip(nominal, limit, least, _opened(greatest, words), strict=True))
            for nominal, limit, least, greatest in zip(*own, strict=True)
        ]

    def quoted(self, at: int, names: Names) -> Quoted:
        """Everything that a sentence about one point may quote."""
        quoted = Quoted(zip(self._names, self._rows[at], strict=True), self._phrases)
        quoted["device"] = names.device or self._phrases["no-device"]
        quoted["residual"] = names.residual or self._phrases["no-residual"]
        quoted["rules"] = names.rules
        if names.upstream:
            quoted["upstream"] = names.upstream[self._upstream[at]]
            quoted["all_upstream"] = ", ".join(names.upstream)
        return quoted

    def said(self, check: int, reason: int, at: int, quoted: Quoted) -> tuple[str, str | None, list[str]]:
        """Explanation, question and cautions of one finding."""
        template, quotes, said = self._templates[at][check][reason]
        if not quotes:
            return template, said.settled_by, said.cautions
        own = self._own[check][at]
        quoted["nominal"], quoted["limit"], quoted["value_least"], quoted["value_greatest"] = own
        for phrase in _OWN_PHRASES:
            quoted.pop(phrase, None)
        question = None if said.settled_by is None else said.settled_by.format_map(quoted)
        return template.format_map(quoted), question, said.cautions


def _columns(points: Points, outcome: Outcome) -> dict[str, list[float]]:
    """Numbers that sentences quote, as lists."""
    q = outcome.quantities
    number, value, u = points.number, points.value, q.given.uncertainty
    needed = catalogue().residual.operating_current(points.choice(Choice.RESIDUAL), q.required_s)
    loop = outcome.findings.greatest[ROWS["line-neutral-disconnection"]]
    line_neutral = prospective_current(q.rule("c_min"), number(Number.VOLTAGE), loop)
    columns: dict[str, Array] = {
        "required": q.required_s,
        "ia": q.operating_current,
        "ia_upstream": q.upstream.operating_current,
        "c_min": q.rule("c_min"),
        "u0": number(Number.VOLTAGE),
        "four_fifths": q.rule("four_fifths"),
        "uplift": q.rule("uplift"),
        "allowance": q.rule("source_allowance"),
        "tn_loop": q.rule("tn_loop"),
        "touch_limit": q.rule("touch_voltage"),
        "fault_time": q.severity.time_s,
        "z": value[Reading.LOOP],
        "z_u": u[Reading.LOOP],
        "ze": value[Reading.EXTERNAL],
        "r12": value[Reading.LINE_PLUS_PROTECTIVE],
        "dead": q.loops.expected.value,
        "ra": value[Reading.ELECTRODE],
        "ra_or_loop": q.electrode.nominal,
        "heated": np.where(q.factor == 1.0, 0.0, (q.hot.nominal - q.loops.loop.nominal) / (q.factor - 1.0)),
        "z_least": q.loops.live.least,
        "cold_least": q.loops.loop.least,
        "factor": q.factor,
        "test": number(Number.TEST_C),
        "service": number(Number.SERVICE_C),
        "hot": q.hot.nominal,
        "hot_least": q.hot.least,
        "hot_greatest": q.hot.greatest,
        "i_least": q.current.least,
        "i_nominal": q.current.nominal,
        "i_greatest": q.current.greatest,
        "multiple": q.residual.multiple,
        "residual_s": q.residual.time_s.greatest,
        "needed": needed,
        "idn_a": number(Number.RESIDUAL_MA) / 1000.0,
        "idn_max_a": number(Number.RESIDUAL_GREATEST_MA) / 1000.0,
        "expected": q.loops.expected.value,
        "excess": q.loops.excess,
        "slack": q.loops.slack,
        "touch": q.touch_v,
        "k": number(Number.ADIABATIC_K),
        "area": number(Number.LINE_MM2),
        "operating_ma": value[Reading.OPERATING_CURRENT],
        "voltage": value[Reading.VOLTAGE],
        "dead_excess": q.loops.expected.dead_excess,
        "excess_below": -q.loops.excess,
        "excess_above": q.loops.excess,
        "pe_k": number(Number.PROTECTIVE_K),
        "pe_area": number(Number.PROTECTIVE_MM2),
        "pe_energy": (number(Number.PROTECTIVE_K) * number(Number.PROTECTIVE_MM2)) ** 2,
        "let_through_basis": points.choice(Choice.LET_THROUGH).astype(np.float64),
        "let_through": q.let_through.energy_a2s,
        "in_device": number(Number.DEVICE_RATED_CURRENT),
        "iz": number(Number.CARRYING_CAPACITY_A),
        "icn": number(Number.BREAKING_CAPACITY_KA),
        "pscc": value[Reading.BOARD_CURRENT],
        "overcurrent_least": q.overcurrent_s.least,
        "overcurrent_nominal": q.overcurrent_s.nominal,
        "time_1": value[Reading.TIME_1],
        "time_2": value[Reading.TIME_2],
        "time_5": value[Reading.TIME_5],
        "i_ln": line_neutral,
    }
    columns |= unearthed_columns(points, outcome)
    return {name: column.tolist() for name, column in columns.items()}


def cautions_of(points: Points, outcome: Outcome, at: int) -> set[str]:
    """Cautions that a point's own state asks for, beside the standing ones and those its findings name."""
    earthing, named = int(points.choices[Choice.EARTHING, at]), set()
    if earthing == Earthing.TT:
        named.add("tt-metalwork")
    if earthing == Earthing.TN_C_S:
        named.add("open-pen")
    if points.method[Reading.LOOP, at] == Method.NO_TRIP:
        named.add("no-trip-reading")
    if not math.isnan(points.numbers[Number.RESIDUAL_MA, at]):
        named.add("line-neutral-unseen")
    if earthing in UNEARTHED_CAUTIONS:
        return {*UNEARTHED_CAUTIONS[earthing], "pole-to-pole"}
    if int(outcome.quantities.loops.basis[at]) == Basis.LIVE and earthing != Earthing.TT:
        named.add("parallel-paths")
    return named
