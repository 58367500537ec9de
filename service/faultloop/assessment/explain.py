"""Explanations, questions, conditions and cautions of one point, by reason; no sentence stands in code."""

import math
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from faultloop.assessment.checks import CHECKS
from faultloop.assessment.loops import Basis
from faultloop.assessment.points import Choice, Earthing, Method, Number, Points, Reading, TemperaturePolicy
from faultloop.assessment.quantities import Quantities, electrode_interval
from faultloop.assessment.texts import Said, texts
from faultloop.assessment.verdicts import ROWS, Outcome
from faultloop.electrical.fault_current import prospective_current
from faultloop.electrical.measurement import Array
from faultloop.protection.catalogue import catalogue

Values = dict[str, float | str]


class _Open(float):
    """An end without a bound: it prints as words, whatever number format the sentence asks for."""

    words = ""

    def __format__(self, spec: str) -> str:
        return self.words


_POLICIES = {code: word for word, code in TemperaturePolicy.codes().items()}
_BASES = {code: word for word, code in Basis.codes().items()}


@dataclass(frozen=True, slots=True)
class Names:
    """The words of one point that numbers do not hold."""

    device: str | None
    residual: str | None
    rules: str


@lru_cache(maxsize=4096)
def _template(language: str, check: str, reason: str, policy: str, basis: str) -> tuple[str, Said]:
    told = texts(language)
    said = told.said(check, reason)
    return told.expanded(said.explanation, {"limit": policy, "heating": policy, "loop": basis}), said


class Explainer:
    """Explains the points of one outcome; the columns are turned to plain lists once."""

    def __init__(self, points: Points, outcome: Outcome, language: str = "en") -> None:
        self._points, self._outcome, self._language = points, outcome, language
        with np.errstate(divide="ignore", invalid="ignore"):
            self._columns = _columns(points, outcome)
        self._phrases = texts(language).phrases
        self._open = _Open("inf")
        self._open.words = self._phrases["open-end"]

    def values(self, at: int, names: Names) -> Values:
        """Everything that a sentence about one point may quote."""
        values: Values = {name: column[at] for name, column in self._columns.items()}
        phrase = self._phrases
        for name in ("hot_greatest", "i_greatest"):
            if math.isinf(float(values[name])):
                values[name] = self._open
        values["device"] = names.device or phrase["no-device"]
        values["residual"] = names.residual or phrase["no-residual"]
        values["rules"] = names.rules
        _tell(values, self._outcome.quantities, at, phrase)
        return values

    def said(self, check: int, reason: int, at: int, values: Values) -> tuple[str, str | None, list[str]]:
        """Explanation, question and cautions of one finding."""
        points, found = self._points, self._outcome.findings
        policy = _POLICIES[int(points.choices[Choice.TEMPERATURE_POLICY, at])]
        basis = _BASES[int(self._outcome.quantities.loops.basis[at])]
        template, said = _template(self._language, CHECKS[check].id, CHECKS[check].reasons[reason], policy, basis)
        values["nominal"], values["limit"] = float(found.nominal[check, at]), float(found.limit[check, at])
        values["value_least"], values["value_greatest"] = (
            float(found.least[check, at]),
            float(found.greatest[check, at]),
        )
        if math.isinf(found.greatest[check, at]):
            values["value_greatest"] = self._open
        values["z_or_value"] = values["nominal"]
        values["side"] = self._phrases["below" if found.nominal[check, at] <= found.limit[check, at] else "above"]
        if CHECKS[check].id == "residual-disconnection":
            self._tell_residual_limit(values)
        question = None if said.settled_by is None else said.settled_by.format_map(values)
        return template.format_map(values), question, said.cautions

    def _tell_residual_limit(self, values: Values) -> None:
        """Say which of the two limits of a residual device is the lower one."""
        touch = float(values["touch_limit"]) / float(values["idn_a"])
        name = "residual-limit-touch" if values["limit"] == touch else "residual-limit-time"
        values["residual_limit"] = self._phrases[name].format_map(values)


def _columns(points: Points, outcome: Outcome) -> dict[str, list[float]]:
    """Numbers that sentences quote, as lists."""
    q = outcome.quantities
    number, value, u = points.number, points.value, q.given.uncertainty
    electrode, _ = electrode_interval(q)
    needed = catalogue().residual.operating_current(points.choice(Choice.RESIDUAL), q.required_s)
    loop = outcome.findings.greatest[ROWS["line-neutral-disconnection"]]
    line_neutral = prospective_current(q.rule("c_min"), number(Number.VOLTAGE), loop)
    columns: dict[str, Array] = {
        "required": q.required_s,
        "ia": q.operating_current,
        "c_min": q.rule("c_min"),
        "u0": number(Number.VOLTAGE),
        "four_fifths": q.rule("four_fifths"),
        "uplift": q.rule("uplift"),
        "allowance": q.rule("source_allowance"),
        "tn_loop": q.rule("tn_loop"),
        "touch_limit": q.rule("touch_voltage"),
        "z": value[Reading.LOOP],
        "z_u": u[Reading.LOOP],
        "ze": value[Reading.EXTERNAL],
        "r12": value[Reading.LINE_PLUS_PROTECTIVE],
        "dead": q.loops.expected.value,
        "ra": value[Reading.ELECTRODE],
        "ra_or_loop": electrode.nominal,
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
        "in_device": number(Number.DEVICE_RATED_CURRENT),
        "iz": number(Number.CARRYING_CAPACITY_A),
        "icn": number(Number.BREAKING_CAPACITY_KA),
        "pscc": number(Number.BOARD_CURRENT_KA),
        "overcurrent_least": q.overcurrent_s.least,
        "overcurrent_nominal": q.overcurrent_s.nominal,
        "time_1": value[Reading.TIME_1],
        "time_2": value[Reading.TIME_2],
        "time_5": value[Reading.TIME_5],
        "i_ln": line_neutral,
    }
    return {name: column.tolist() for name, column in columns.items()}


def _tell(values: Values, q: Quantities, at: int, phrase: dict[str, str]) -> None:
    """Short phrases that depend on what is known."""
    k, area, i_ln = float(values["k"]), float(values["area"]), float(values["i_ln"])
    withstand = (k * area / i_ln) ** 2 if i_ln else math.nan
    values["withstand"] = withstand
    values["withstand_told"] = "" if math.isnan(withstand) else phrase["withstand"].format_map(values)
    values["multiple_in"] = i_ln / float(values["in_device"])
    nominal = float(values["overcurrent_nominal"])
    values["overcurrent_time"] = f"{nominal:g} s" if math.isfinite(nominal) else phrase["no-time"]
    electrode = bool(q.given.known[Reading.ELECTRODE, at])
    values["electrode_told"] = phrase["electrode-read" if electrode else "electrode-bounded"]
    times = [(m, float(values[f"time_{m}"])) for m in (1, 2, 5)]
    told = [phrase["time"].format(time=time, multiple=m) for m, time in times if not math.isnan(time)]
    values["time_told"] = ", ".join(told)
    external = bool(q.given.known[Reading.EXTERNAL, at])
    values["marginal_question"] = phrase["marginal-question" if external else "marginal-question-external"]


def cautions_of(points: Points, outcome: Outcome, at: int, named: set[str], language: str = "en") -> list[str]:
    """Cautions that an answer carries: the standing ones, those of its state, and those its findings name."""
    earthing = int(points.choices[Choice.EARTHING, at])
    if earthing == Earthing.TT:
        named.add("tt-metalwork")
    if earthing == Earthing.TN_C_S:
        named.add("open-pen")
    if points.method[Reading.LOOP, at] == Method.NO_TRIP:
        named.add("no-trip-reading")
    if not math.isnan(points.numbers[Number.RESIDUAL_MA, at]):
        named.add("line-neutral-unseen")
    if int(outcome.quantities.loops.basis[at]) == Basis.LIVE and earthing != Earthing.TT:
        named.add("parallel-paths")
    return [name for name, caution in texts(language).cautions.items() if caution.always or name in named]
