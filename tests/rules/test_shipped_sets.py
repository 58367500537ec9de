"""What every shipped rule set must keep; a new file is held to it by being there."""

import datetime as dt
import tomllib
from collections.abc import Iterator
from itertools import pairwise
from typing import Any

import pytest

from faultloop.assessment.checks import CHECKS
from faultloop.protection.catalogue import listed_devices
from faultloop.rules.contract import bands
from faultloop.rules.loader import shipped
from faultloop.rules.sheets import RuleSet
from tests.rules.loading import SHIPPED_FILES

KEYS = sorted(shipped())
FILES = {file.name: tomllib.loads(file.read_text(encoding="utf-8")) for file in SHIPPED_FILES}
SOURCING = {"unit", "clause", "source", "sourcing", "checked"}
# Numbers that are no sourced values by themselves: bounds of a sourced row, and the set's own policy.
BARE_NUMBERS = {"above_v", "to_v", "time_s", "coverage"}


def tables(found: object) -> Iterator[dict[str, Any]]:
    """Every table in a file."""
    if isinstance(found, dict):
        yield found
        for value in found.values():
            yield from tables(value)
    elif isinstance(found, list):
        for value in found:
            yield from tables(value)


def rules_of(key: str) -> RuleSet:
    """A shipped rule set."""
    return shipped()[key].rules


def test_registry_equals_folder() -> None:
    assert {f"{table['id']}-{table['edition']}.toml" for table in FILES.values()} == set(FILES)
    assert {f"{table['id']}:{table['edition']}" for table in FILES.values()} == set(KEYS)


@pytest.mark.parametrize("name", sorted(FILES))
def test_every_value_says_its_unit_clause_source_and_when_it_was_checked(name: str) -> None:
    valued = [table for table in tables(FILES[name]) if "value" in table or "values" in table]
    assert valued
    for table in valued:
        assert set(table) >= SOURCING, table
        assert isinstance(table["checked"], dt.date)
        assert all(str(table[key]).strip() for key in SOURCING)


@pytest.mark.parametrize("name", sorted(FILES))
def test_no_number_stands_without_a_source(name: str) -> None:
    for table in tables(FILES[name]):
        bare = {key for key, value in table.items() if isinstance(value, int | float) and not isinstance(value, bool)}
        assert bare - {"value"} <= BARE_NUMBERS, table


@pytest.mark.parametrize("key", KEYS)
def test_least_factor_is_at_most_one_and_greatest_at_least_one(key: str) -> None:
    factor = rules_of(key).voltage_factor
    assert 0.5 < factor.least.value <= 1.0 <= factor.greatest.value < 1.5


@pytest.mark.parametrize("key", KEYS)
@pytest.mark.parametrize("earthing", ["TN", "TT"])
@pytest.mark.parametrize("current", ["ac", "dc"])
def test_times_fall_with_voltage_and_bands_meet(key: str, earthing: str, current: str) -> None:
    rows = bands(rules_of(key), earthing, current)
    assert rows
    for low, high in pairwise(rows):
        assert low.value > high.value
        assert low.to_v == high.above_v
    assert rows[-1].to_v is None
    assert all(0 < row.value <= 5 for row in rows)


@pytest.mark.parametrize("key", KEYS)
@pytest.mark.parametrize("current", ["ac", "dc"])
def test_tt_is_never_given_longer_than_tn(key: str, current: str) -> None:
    tn, tt = (bands(rules_of(key), earthing, current) for earthing in ("TN", "TT"))
    assert [row.above_v for row in tn] == [row.above_v for row in tt]
    assert all(b.value <= a.value for a, b in zip(tn, tt, strict=True))
    disconnection = rules_of(key).disconnection
    assert disconnection.distribution_tt.value <= disconnection.distribution_tn.value
    assert tn[0].value <= disconnection.distribution_tn.value
    assert tt[0].value <= disconnection.distribution_tt.value


@pytest.mark.parametrize("key", KEYS)
def test_nominal_voltages_rise_and_lie_in_the_table(key: str) -> None:
    values = rules_of(key).nominal_voltage_to_earth.values
    assert values == sorted(set(values))
    assert 230 in values
    assert values[0] > bands(rules_of(key), "TN", "ac")[0].above_v


@pytest.mark.parametrize("key", KEYS)
def test_every_check_has_a_clause_and_every_clause_a_check(key: str) -> None:
    checks = {check.id for check in CHECKS}
    clauses = set(rules_of(key).clauses)
    assert checks <= clauses
    assert {clause.removesuffix("-tt").removesuffix("-it") for clause in clauses} == checks


@pytest.mark.parametrize("key", KEYS)
def test_printed_currents_belong_to_devices_that_are_held(key: str) -> None:
    held = {device.designation for device in listed_devices()}
    for row in rules_of(key).operating_current:
        known = set("BCD") if row.unit == "x In" else held
        assert set(row.devices) <= known, "a misspelt device would be passed over in silence"


@pytest.mark.parametrize("key", KEYS)
def test_printed_currents_rise_with_the_rating_and_fall_with_the_time(key: str) -> None:
    printed = {(d, row.time_s): row.value for row in rules_of(key).operating_current for d in row.devices}
    for (device, time), value in printed.items():
        family, _, rating = device.rpartition(" ")
        greater = [v for (d, t), v in printed.items() if t == time and is_greater(d, family, rating)]
        assert all(value < v for v in greater), device
        slower = [v for (d, t), v in printed.items() if d == device and t > time]
        assert all(value > v for v in slower), device


def is_greater(device: str, family: str, rating: str) -> bool:
    """Whether a device is of the same family and of a greater rating."""
    own, _, own_rating = device.rpartition(" ")
    return bool(family) and own == family and float(own_rating) > float(rating)


@pytest.mark.parametrize("key", KEYS)
def test_factors_and_defaults_are_possible(key: str) -> None:
    rules = rules_of(key)
    assert 0 < rules.temperature.two_thirds.value < rules.temperature.four_fifths.value < 1
    assert 0.003 < rules.temperature.alpha_20.value < 0.005
    assert rules.electrode.season_factor.value >= 1
    assert rules.additional_protection.residual_current.value <= 30
    assert rules.policy.coverage >= 0.9
    assert rules.instruments.no_trip.percent.value >= rules.instruments.high_current.percent.value
    assert rules.urgency.body_wet.value <= rules.urgency.body_dry.value
