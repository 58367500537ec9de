"""A museum of bad files: each is refused with its name, the key and what is wrong."""

from pathlib import Path

import pytest

from faultloop.rules.loader import load
from faultloop.rules.strict import DataFileError
from tests.rules.loading import SHIPPED_FILES

MUSEUM = Path(__file__).parent / "museum"

REFUSED = {
    "unknown-key": ["electrode.stability_treshold", "unknown key"],
    "unknown-top-level-key": ["colour", "unknown key"],
    "duplicate-key": ["not readable as TOML", "line 5"],
    "duplicate-row": ["disconnection.table", "duplicate row", "TN ac 50"],
    "duplicate-operating-current": ["operating_current", "duplicate row", "gG 10 5"],
    "missing-source": ["voltage_factor.least.source", "missing"],
    "missing-unit": ["voltage_factor.least.unit", "missing"],
    "missing-clause": ["voltage_factor.least.clause", "missing"],
    "missing-date": ["voltage_factor.least.checked", "missing"],
    "empty-source": ["voltage_factor.least.source", "at least 1 character"],
    "unknown-sourcing": ["voltage_factor.least.sourcing", "'seen'"],
    "wrong-unit": ["voltage_factor.least", "unit must be '1', not '%'"],
    "unknown-unit": ["voltage_factor.least.unit", "'ohm'"],
    "number-as-text": ["voltage_factor.least.value", "valid number"],
    "number-as-truth": ["voltage_factor.least.value", "valid number"],
    "not-a-number": ["voltage_factor.least.value", "finite number"],
    "infinite": ["voltage_factor.least.value", "finite number"],
    "date-as-text": ["voltage_factor.least.checked", "valid date"],
    "half-an-override": ["voltage_factor.least.clause", "missing"],
    "half-an-override-of-a-list": ["nominal_voltage_to_earth.clause", "missing"],
    "unknown-base": ["extends", "iec-60364:1899", "write id:edition"],
    "base-without-edition": ["extends", "'iec-60364'", "write id:edition"],
    "extends-itself": ["extends", "museum:2020", "leads back to itself"],
    "no-id": ["id", "missing"],
    "no-edition": ["edition", "missing"],
    "bad-id": ["id", "match pattern"],
    "bad-edition": ["edition", "match pattern"],
    "id-of-another": ["id and edition", "iec-60364:2017", "iec-60364-2017.toml"],
    "empty-table": ["disconnection.table", "at least 1 item"],
    "table-as-number": ["voltage_factor", "valid dictionary"],
    "coverage-out-of-range": ["policy.coverage", "less than or equal to 0.9999"],
    "no-time": ["operating_current.0.time_s", "greater than 0"],
    "unknown-exemption": ["additional_protection.exempt.0", "'skilled'"],
    "incomplete": ["voltage_factor", "missing"],
    "broken": ["not readable as TOML", "line 4"],
    "empty": ["id", "missing"],
    "not-utf8": ["not readable as TOML", "utf-8"],
}


def test_every_exhibit_has_its_words() -> None:
    assert {file.stem for file in MUSEUM.glob("*.toml")} == set(REFUSED)


@pytest.mark.parametrize("name", sorted(REFUSED))
def test_bad_file_is_refused_with_file_key_and_fault(name: str) -> None:
    with pytest.raises(DataFileError) as refusal:
        load([*SHIPPED_FILES, MUSEUM / f"{name}.toml"])
    told = str(refusal.value)
    assert told.startswith(f"{name}.toml: "), told
    for word in REFUSED[name]:
        assert word in told
