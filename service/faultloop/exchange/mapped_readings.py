"""Readings in words -> the readings of a row, with the assumptions that had to be made."""

from collections.abc import Sequence

import numpy as np

from faultloop.assessment.codes import Bound, Choice, Method, Number, Polarity, Reading
from faultloop.assessment.points import Row
from faultloop.exchange import overcurrent as oc
from faultloop.exchange import requests as rq
from faultloop.exchange.fields import Instrument
from faultloop.exchange.fields import Reading as ReadingBody
from faultloop.exchange.mapped import Mapped

_BOUND = {"exact": Bound.EXACT, "above": Bound.ABOVE, "below": Bound.BELOW}
_METHOD = Method.codes()
_POLARITY: dict[str | None, int] = {None: 0, "not-tested": 0}
_POLARITY.update(Polarity.codes())
# Readings of the body that go into the row as they stand.
PLAIN_READINGS = {
    "external_earth_fault_loop_impedance_ohm": Reading.EXTERNAL,
    "line_neutral_loop_impedance_ohm": Reading.LINE_NEUTRAL,
    "line_plus_protective_resistance_ohm": Reading.LINE_PLUS_PROTECTIVE,
    "protective_conductor_resistance_ohm": Reading.PROTECTIVE,
    "earth_electrode_resistance_ohm": Reading.ELECTRODE,
    "insulation_resistance_megohm": Reading.INSULATION,
    "residual_operating_current_ma": Reading.OPERATING_CURRENT,
    "voltage_v": Reading.VOLTAGE,
    "voltage_neutral_to_earth_v": Reading.NEUTRAL_EARTH_VOLTAGE,
    "voltage_l1_to_earth_v": Reading.L1_EARTH_VOLTAGE,
    "voltage_l2_to_earth_v": Reading.L2_EARTH_VOLTAGE,
    "contact_current_l1_ma": Reading.L1_CONTACT,
    "contact_current_l2_ma": Reading.L2_CONTACT,
    "winding_insulation_resistance_megohm": Reading.WINDING_INSULATION,
    "bonding_resistance_ohm": Reading.BONDING,
    "line_line_loop_impedance_ohm": Reading.LINE_LINE,
    "first_fault_current_ma": Reading.FIRST_FAULT,
    "monitored_insulation_kohm": Reading.MONITORED,
}
# Readings to which the leads add their own resistance.
_THROUGH_LEADS = {
    Reading.LOOP,
    Reading.EXTERNAL,
    Reading.LINE_NEUTRAL,
    Reading.LINE_PLUS_PROTECTIVE,
    Reading.PROTECTIVE,
    Reading.ORIGIN_LINE_NEUTRAL,
    Reading.BOARD_LOOP,
    Reading.BONDING,
    Reading.LINE_LINE,
}
_UNUSED_READINGS = {"standing_leakage_ma"}
_UNUSED_UPSTREAM = ("breaking_capacity_ka", "energy_limiting_class", "let_through_energy_a2s", "poles")


def put_readings(point: Mapped, request: rq.AssessmentRequest) -> None:
    """Put what was read, how and with what; and say what had to be assumed of it."""
    readings, board, row = request.readings, request.board, point.row
    _put_loop(point, readings.earth_fault_loop_impedance_ohm)
    for name in readings.model_fields_set:
        if (which := PLAIN_READINGS.get(name)) is not None:
            _put(row, which, getattr(readings, name))
    row.choices[Choice.POLARITY] = _POLARITY[readings.polarity]
    if (times := readings.residual_operating_time_ms) is not None:
        row.choices[Choice.LOADS_CONNECTED] = int(times.loads_connected is True)
        _put(row, Reading.TIME_HALF, times.half)
        _put(row, Reading.TIME_1, times.one)
        _put(row, Reading.TIME_2, times.two)
        _put(row, Reading.TIME_5, times.five)
    if board is not None:
        _put(row, Reading.ORIGIN_LINE_NEUTRAL, board.line_neutral_loop_impedance_ohm)
        _put(row, Reading.BOARD_LOOP, board.earth_fault_loop_impedance_ohm)
        _put(row, Reading.BOARD_CURRENT, board.prospective_current_ka)
        if board.assembly_conditional_rating_ka is not None:
            row.numbers[Number.ASSEMBLY_RATING_KA] = board.assembly_conditional_rating_ka
    _put_method(point)
    heated = (
        readings.earth_fault_loop_impedance_ohm,
        readings.line_plus_protective_resistance_ohm,
        readings.line_neutral_loop_impedance_ohm,
    )
    _put_test_temperature(point, heated)
    used = (
        *heated,
        readings.external_earth_fault_loop_impedance_ohm,
        readings.earth_electrode_resistance_ohm,
    )
    if any(stated is not None and not _states_instrument(stated) for stated in used):
        point.assumptions.append("instrument")


def unused(request: rq.AssessmentRequest) -> list[str]:
    """Values that were given and on which nothing is decided: what is ignored is said."""
    given = sorted(request.readings.model_fields_set & _UNUSED_READINGS)
    found = [f"readings.{name}" for name in given if getattr(request.readings, name) is not None]
    device, own = request.residual_current_device, request.overcurrent_device
    found += ["residual_current_device.delay_ms"] if device and device.delay_ms is not None else []
    if isinstance(own, oc.MouldedCase) and own.settings.overload_time_s is not None:
        found.append("overcurrent_device.settings.overload_time_s")
    if not request.upstream_overcurrent_devices:
        return found
    # Of a device upstream only its time counts: nothing is backed up by presence.
    stated = [name for body in request.upstream_overcurrent_devices for name in _UNUSED_UPSTREAM if _states(body, name)]
    return found + [f"upstream_overcurrent_devices.{name}" for name in dict.fromkeys(stated)]


def _states(body: oc.OvercurrentDevice, name: str) -> bool:
    return getattr(body, name, None) is not None


def _put_loop(point: Mapped, stated: float | ReadingBody | None) -> None:
    """The loop at the point; one that nobody read live there is named and not decided on."""
    if isinstance(stated, ReadingBody) and stated.method in ("declared", "calculated", "dead"):
        point.assumptions.append("loop-not-read-unused")
    else:
        _put(point.row, Reading.LOOP, stated)


def _put(row: Row, which: int, stated: float | ReadingBody | None) -> None:
    if stated is None:
        return
    if isinstance(stated, float | int):
        row.value[which], row.bound[which] = stated, Bound.EXACT
        return
    row.value[which], row.bound[which] = stated.value, _BOUND[stated.bound]
    row.method[which] = _METHOD[stated.method or "unstated"]
    if (instrument := stated.instrument) is not None:
        row.percent[which], row.constant[which] = (
            instrument.percent,
            instrument.digits * instrument.resolution,
        )
        _put_instrument(row, which, stated, instrument)


def _put_instrument(row: Row, which: int, stated: ReadingBody, instrument: Instrument) -> None:
    """Whether the calibration held on the day of the reading, and how far the joined leads were off zero."""
    if instrument.calibration_due is not None:
        # A reading without a date shows no valid calibration.
        lapsed = stated.taken_at is None or stated.taken_at[:10] > instrument.calibration_due
        row.choices[Choice.CALIBRATION_LAPSED] |= int(lapsed)
    if instrument.zero_check is not None and which in _THROUGH_LEADS:
        excess = abs(instrument.zero_check) - instrument.digits * instrument.resolution
        row.numbers[Number.ZERO_EXCESS] = max(np.nan_to_num(row.numbers[Number.ZERO_EXCESS], nan=excess), excess)


def _put_method(point: Mapped) -> None:
    """A loop reading whose method is not stated: no-trip if a residual device is fitted; said."""
    row = point.row
    if row.bound[Reading.LOOP] and row.method[Reading.LOOP] == Method.UNSTATED:
        no_trip = point.residual is not None
        row.method[Reading.LOOP] = Method.NO_TRIP if no_trip else Method.HIGH_CURRENT
        point.assumptions.append("method-no-trip" if no_trip else "method-high-current")


def _states_instrument(stated: float | ReadingBody) -> bool:
    return isinstance(stated, ReadingBody) and stated.instrument is not None


def _put_test_temperature(point: Mapped, heated: Sequence[float | ReadingBody | None]) -> None:
    """The coldest stated temperature of the readings that are heated: it gives the greatest correction."""
    told = [r.conductor_temperature_c for r in heated if isinstance(r, ReadingBody)]
    known = [temperature for temperature in told if temperature is not None]
    if not known:
        point.assumptions.append("test-temperature")
    default = point.rules.rules.temperature.test_default.value
    point.row.numbers[Number.TEST_C] = min(known, default=default)
