"""The reported quantities of an answer: currents, times, voltages, with everything in them."""

import math
from dataclasses import dataclass
from typing import Any

import numpy as np

from faultloop.assessment.codes import EARTHED, Choice, Number
from faultloop.assessment.loops import Fault
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.standing import Verdict
from faultloop.assessment.verdicts import ROWS, Outcome
from faultloop.digests import rounded_all
from faultloop.electrical.fault_current import prospective_current
from faultloop.electrical.measurement import Array, Interval
from faultloop.exchange.quantities_unearthed import unearthed_quantities
from faultloop.protection.band import faster

Body = dict[str, Any]
Rounded = list[float | None]


def interval(least: float, greatest: float, ends: tuple[float | None, float | None]) -> Body | None:
    """An interval in words, from its values and the same rounded: unknown is absent, an open end null."""
    if ends[0] is not None and ends[1] is not None:
        return {"least": ends[0], "greatest": ends[1]}
    if math.isnan(least) and math.isnan(greatest):
        return None
    both = ends[0] is None and ends[1] is None
    return {
        "least": ends[0],
        "greatest": ends[1],
        "open": "both" if both else "least" if ends[0] is None else "greatest",
    }


@dataclass(frozen=True, slots=True)
class _Ends:
    """One interval of every point as lists, plain and rounded."""

    least: list[float]
    greatest: list[float]
    rounded: list[tuple[float | None, float | None]]

    def body(self, at: int) -> Body | None:
        """The interval of one point in words."""
        return interval(self.least[at], self.greatest[at], self.rounded[at])


def _ends(least: Array, greatest: Array) -> _Ends:
    low, high = least.tolist(), greatest.tolist()
    return _Ends(low, high, list(zip(rounded_all(low), rounded_all(high), strict=True)))


@dataclass(frozen=True, slots=True)
class QuantityColumns:
    """Columns of the reported quantities as lists."""

    ends: dict[str, _Ends]
    time: _Ends
    by: list[str]
    plain: dict[str, Rounded]

    def body(self, at: int) -> Body:
        """The quantities of one point; what is unknown is absent."""
        body: Body = {name: told for name, ends in self.ends.items() if (told := ends.body(at)) is not None}
        if (time := self.time.body(at)) is not None:
            body["disconnection_time_s"] = {**time, "by": self.by[at]}
        for name, column in self.plain.items():
            if (value := column[at]) is not None:
                body[name] = value
        return body


def quantity_columns(points: Points, outcome: Outcome) -> QuantityColumns:
    """Turn the quantities of one outcome to columns."""
    q, voltage = outcome.quantities, points.number(Number.VOLTAGE)
    given = outcome.findings.verdict[ROWS["line-neutral-disconnection"]] < Verdict.NOT_EXAMINED
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        short = [
            np.where(given, prospective_current(q.rule(factor), voltage, z), np.nan)
            for factor, z in (("c_min", q.line_neutral.hot.greatest), ("c_max", q.line_neutral.cold.least))
        ]
    # Nothing is reported of a current that a disbelieved loop or a lost earth leaves unknown, or that no fault drives.
    flows = (q.loops.fault == Fault.NONE) & ~q.given.earth_lost
    if q.separated is not None or q.insulated is not None:
        flows &= np.isin(points.choice(Choice.EARTHING), tuple(EARTHED))
    touch_least, touch_greatest = _touch_ends(outcome, voltage)
    ends = {
        "prospective_earth_fault_current_a": (_where(flows, q.current.least), _where(flows, q.current.greatest)),
        "prospective_short_circuit_current_a": (short[0], short[1]),
        "touch_voltage_v": (_where(flows, touch_least), _where(flows, touch_greatest)),
        "earth_fault_loop_impedance_ohm": (q.loops.loop.least, q.loops.loop.greatest),
        "heated_earth_fault_loop_impedance_ohm": (q.hot.least, q.hot.greatest),
    }
    time, by = _disconnection(outcome, flows)
    plain = {
        "required_disconnection_time_s": np.where(q.wanting == 0, q.required_s, np.nan),
        "temperature_factor": q.factor,
        "residual_current_multiple": q.residual.multiple,
    }
    for here, own_ends, own_plain in unearthed_quantities(points, outcome):
        ends |= {name: _either(here, own, ends.get(name)) for name, own in own_ends.items()}
        plain |= {name: np.where(here, own, plain.get(name, np.nan)) for name, own in own_plain.items()}
    told = {name: _ends(*pair) for name, pair in ends.items()}
    return QuantityColumns(told, time, by, {name: rounded_all(column.tolist()) for name, column in plain.items()})


def _either(here: Flags, own: Interval, other: tuple[Array, Array] | None) -> tuple[Array, Array]:
    """The ends of one quantity: where the supply is of the kind at hand its own, else what stands there already."""
    least, greatest = other or (np.full(here.shape, np.nan),) * 2
    return np.where(here, own.least, least), np.where(here, own.greatest, greatest)


def _where(known: Flags, of: Array) -> Array:
    return np.where(known, of, np.nan)


@np.errstate(divide="ignore", invalid="ignore", over="ignore")
def _touch_ends(outcome: Outcome, voltage: Array) -> tuple[Array, Array]:
    """Touch voltage with everything in it: voltage factors, and the loop's uncertainty taken in the protective path."""
    q, hot = outcome.quantities, outcome.quantities.hot
    path = q.touch_v / voltage * hot.nominal
    most = np.where(np.isinf(hot.greatest), 1.0, (path + hot.greatest - hot.nominal) / hot.greatest)
    least = np.maximum(path - (hot.nominal - hot.least), 0.0) / hot.nominal
    greatest = q.rule("c_max") * voltage * np.minimum(most, 1.0)
    open_end = np.where(np.isnan(q.touch_v), np.nan, -np.inf)
    return np.where(q.touch_known, q.rule("c_min") * voltage * least, open_end), _where(~np.isnan(q.touch_v), greatest)


def _disconnection(outcome: Outcome, flows: Flags) -> tuple[_Ends, list[str]]:
    """Disconnection time by the quicker device; a residual one counts when it was tested and did not fail."""
    q = outcome.quantities
    credited = q.residual.tested & ~q.residual.over_limit
    residual = np.where(credited, q.residual.time_s.greatest, np.inf)
    greatest = faster(q.overcurrent_s.greatest, residual)
    least = np.fmin(q.overcurrent_s.least, np.where(credited, q.residual.time_s.least, np.inf))
    known = ~np.isnan(q.current.least) & flows
    quicker = residual < np.where(np.isnan(q.overcurrent_s.greatest), np.inf, q.overcurrent_s.greatest)
    by = np.where(np.isinf(greatest), "none", np.where(quicker, "residual-current-device", "overcurrent-device"))
    return _ends(np.where(known, least, np.nan), np.where(known, greatest, np.nan)), by.tolist()
