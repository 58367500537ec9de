"""What every rule set must keep, whoever wrote it: times that are ordered, numbers that can be meant."""

from collections.abc import Iterator
from itertools import pairwise
from typing import NamedTuple

from faultloop.rules.sheets import RuleSet, TimeRow

Place = tuple[str | int, ...]
MOST_BANDS = 5
SYSTEMS = ("TN", "TT")
CURRENTS = ("ac", "dc")
METHODS = ("high_current", "no_trip", "continuity", "electrode")


class Fault(NamedTuple):
    """Where a rule set breaks the contract, and what is expected there."""

    place: Place
    words: str


class Bounds(NamedTuple):
    """Between which values a number can be meant; the lower bound itself may be kept out."""

    least: float
    greatest: float
    least_kept_out: bool = False

    def hold(self, value: float) -> bool:
        """Whether a value lies inside."""
        return self.least <= value <= self.greatest and not (self.least_kept_out and value == self.least)

    def __str__(self) -> str:
        begin = "more than " if self.least_kept_out else ""
        return f"a number from {begin}{self.least:g} to {self.greatest:g} is expected"


# What can be meant, wide enough for any wiring rules: a slip of the pen or of the unit lies outside.
BOUNDS: dict[str, Bounds] = {
    "voltage_factor.least": Bounds(0.5, 1.0, True),
    "voltage_factor.greatest": Bounds(1.0, 1.5),
    "disconnection.distribution_tn": Bounds(0, 5, True),
    "disconnection.distribution_tt": Bounds(0, 5, True),
    "disconnection.scope_socket_outlets": Bounds(0, 6300),
    "disconnection.scope_fixed_equipment": Bounds(0, 6300),
    "disconnection.touch_voltage_ac": Bounds(0, 50, True),
    "additional_protection.residual_current": Bounds(0, 30, True),
    "additional_protection.socket_outlets_to": Bounds(0, 6300),
    "additional_protection.mobile_outdoors_to": Bounds(0, 6300),
    "electrode.stability_threshold": Bounds(0, 100_000, True),
    "electrode.season_factor": Bounds(1, 100),
    "electrode.source_allowance": Bounds(0, 1000),
    "electrode.touch_limit_on_tn": Bounds(0, 1),
    "instruments.residual_time": Bounds(0, 100),
    "instruments.insulation": Bounds(0, 100),
    "instruments.voltage": Bounds(0, 100),
    "instruments.no_trip_uplift": Bounds(0, 10),
    "temperature.alpha_20": Bounds(0.003, 0.005),
    "temperature.test_default": Bounds(-40, 90),
    "temperature.two_thirds": Bounds(0, 1, True),
    "temperature.four_fifths": Bounds(0, 1, True),
    "expected.tn_loop": Bounds(0, 1000, True),
    "expected.length_uncertainty": Bounds(0, 100),
    "expected.length_constant": Bounds(0, 100),
    "expected.least_plausible": Bounds(0, 1),
    "expected.greatest_insulation": Bounds(1, 10_000_000),
    "expected.least_time": Bounds(0, 1),
    "expected.greatest_time": Bounds(0.3, 100),
    "expected.voltage_tolerance": Bounds(0, 100),
    "expected.voltage_to_earth_asked_above": Bounds(50, 1000),
    "expected.neutral_earth_voltage": Bounds(0, 100, True),
    "urgency.body_dry": Bounds(100, 10_000),
    "urgency.body_wet": Bounds(100, 10_000),
    "urgency.sustained_current": Bounds(0, 100, True),
    "insulation": Bounds(0, 10_000, True),
    "separation.voltage": Bounds(0, 1000, True),
    "separation.wiring_length": Bounds(0, 10_000, True),
    "separation.voltage_length": Bounds(0, 1_000_000, True),
    "separation.contact_unfelt": Bounds(0, 10),
    "separation.contact_most": Bounds(0, 10, True),
    "separation.contact_referenced": Bounds(0, 30, True),
    "separation.pole_at_earth": Bounds(0, 50),
    "separation.short_circuit_tolerance": Bounds(0, 100),
    "separation.capacitance_tolerance": Bounds(0, 100),
    "separation.interwinding": Bounds(0, 1000),
    "separation.interwinding_screened": Bounds(0, 1000),
    "separation.wiring_capacitance": Bounds(0, 100),
    "separation.winding_basic": Bounds(0, 1000, True),
    "separation.winding_reinforced": Bounds(0, 1000, True),
    "separation.discharged": Bounds(0, 120, True),
    "separation.discharge_time": Bounds(0, 60),
    **{f"instruments.{name}.percent": Bounds(0, 100) for name in METHODS},
    **{f"instruments.{name}.constant": Bounds(0, 100) for name in METHODS},
}
TIMES = Bounds(0, 5, True)


def faults(rules: RuleSet) -> list[Fault]:
    """Everything in which a rule set breaks the contract; empty for one that can be judged by."""
    return [*_numbers(rules), *_times(rules), *_order(rules), *_voltages(rules), *_currents(rules)]


def _numbers(rules: RuleSet) -> Iterator[Fault]:
    for name, bounds in BOUNDS.items():
        place = tuple(name.split("."))
        found: object = rules
        for part in place:
            found = getattr(found, part)
        if not bounds.hold(found.value):  # type: ignore[attr-defined]
            yield Fault((*place, "value"), str(bounds))
    for at, row in enumerate(rules.disconnection.table):
        if not TIMES.hold(row.value):
            yield Fault(("disconnection", "table", at, "value"), str(TIMES))


def bands(rules: RuleSet, earthing: str, current: str) -> list[TimeRow]:
    """Rows of the table of disconnection times for one system, by rising voltage."""
    rows = [row for row in rules.disconnection.table if (row.earthing, row.current) == (earthing, current)]
    return sorted(rows, key=lambda row: row.above_v)


def _times(rules: RuleSet) -> Iterator[Fault]:
    """Each system has its rows; they meet, and a higher voltage is never given longer."""
    place = ("disconnection", "table")
    for current in CURRENTS:
        for earthing in SYSTEMS:
            rows, told = bands(rules, earthing, current), f"{earthing} {current}"
            if not 0 < len(rows) <= MOST_BANDS:
                yield Fault(place, f"{told}: from 1 to {MOST_BANDS} rows are expected")
                continue
            if rows[-1].to_v is not None:
                yield Fault(place, f"{told}: the row of the highest voltages must be open above (no to_v)")
            for low, high in pairwise(rows):
                at = (*place, rules.disconnection.table.index(high))
                if low.to_v != high.above_v or low.above_v == high.above_v:
                    yield Fault((*at, "above_v"), f"{told}: this row must begin where the one before it ends")
                if low.value <= high.value:
                    yield Fault((*at, "value"), f"{told}: a higher voltage must be given less time than the one below")
        tn, tt = (bands(rules, earthing, current) for earthing in SYSTEMS)
        if [row.above_v for row in tn] != [row.above_v for row in tt]:
            yield Fault(place, f"{current}: TN and TT must have rows of the same voltages")
        elif any(b.value > a.value for a, b in zip(tn, tt, strict=True)):
            yield Fault(place, f"{current}: TT is given longer than TN")


def _order(rules: RuleSet) -> Iterator[Fault]:
    """Distribution circuits are given no shorter time than final ones, and bounds lie the right way round."""
    d, t, u = rules.disconnection, rules.temperature, rules.urgency
    for earthing, longer in (("TN", d.distribution_tn), ("TT", d.distribution_tt)):
        if any(row.value > longer.value for row in bands(rules, earthing, "ac")):
            place = ("disconnection", f"distribution_{earthing.lower()}", "value")
            yield Fault(place, f"{earthing}: distribution circuits are given less time than final circuits")
    if d.distribution_tt.value > d.distribution_tn.value:
        yield Fault(("disconnection", "distribution_tt", "value"), "TT is given longer than TN")
    if t.two_thirds.value >= t.four_fifths.value:
        yield Fault(("temperature", "two_thirds", "value"), "two_thirds must be less than four_fifths")
    if u.body_wet.value > u.body_dry.value:
        yield Fault(("urgency", "body_wet", "value"), "a wet body must not resist more than a dry one")
    p = rules.separation
    lines = (p.contact_unfelt.value, p.contact_most.value, p.contact_referenced.value)
    if sorted(lines) != list(lines):
        words = "contact_unfelt, contact_most and contact_referenced must rise in this order"
        yield Fault(("separation", "contact_most", "value"), words)


def _voltages(rules: RuleSet) -> Iterator[Fault]:
    values, place = rules.nominal_voltage_to_earth.values, ("nominal_voltage_to_earth", "values")
    lowest = bands(rules, "TN", "ac")
    if values != sorted(set(values)) or len(values) > 50 or values[-1] > 1000:
        yield Fault(place, "at most 50 different voltages to 1000 V are expected, rising")
    if lowest and values[0] <= lowest[0].above_v:
        yield Fault(place, "every voltage must lie in the table of disconnection times")


def _currents(rules: RuleSet) -> Iterator[Fault]:
    """One current a device and time, and a shorter time never takes a smaller current."""
    told = [(device, row.time_s) for row in rules.operating_current for device in row.devices]
    if len(set(told)) < len(told):
        yield Fault(("operating_current",), "one device has two currents for one time")
    printed = {(d, row.time_s): (at, row) for at, row in enumerate(rules.operating_current) for d in row.devices}
    for (device, time_s), (at, row) in printed.items():
        slower = [other for (d, t), (_, other) in printed.items() if d == device and t > time_s]
        if any(other.unit != row.unit or other.value > row.value for other in slower):
            words = "a longer time must not take a greater current, nor another unit"
            yield Fault(("operating_current", at, "value"), words)
