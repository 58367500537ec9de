"""The tables of conductors: orderly, and silent where they hold nothing."""

from itertools import pairwise

import pytest

from faultloop.rules.conductors import adiabatic_k, conductor_tables, ohm_per_km, service_temperature

METALS = ["copper", "aluminium"]


@pytest.mark.parametrize("metal", METALS)
def test_a_greater_area_has_less_resistance(metal: str) -> None:
    rows = [row for row in conductor_tables().resistance if row.material == metal]
    assert len(rows) >= 10
    for small, large in pairwise(sorted(rows, key=lambda row: row.area_mm2)):
        assert small.value > large.value


def test_copper_conducts_better_than_aluminium_and_bears_more() -> None:
    for row in conductor_tables().resistance:
        copper = ohm_per_km("copper", row.area_mm2)
        assert copper is not None
        assert copper <= row.value
    for insulation in ("pvc", "xlpe", "epr"):
        copper, aluminium = (adiabatic_k(metal, insulation, 2.5) for metal in METALS)
        assert copper is not None
        assert aluminium is not None
        assert copper > aluminium


@pytest.mark.parametrize("metal", METALS)
@pytest.mark.parametrize("insulation", ["pvc", "xlpe", "epr", "rubber", "mineral"])
def test_a_great_area_is_never_credited_with_a_greater_factor(metal: str, insulation: str) -> None:
    small, great = (adiabatic_k(metal, insulation, area) for area in (300.0, 400.0))
    if great is not None:
        assert small is not None
        assert great <= small


@pytest.mark.parametrize(
    ("metal", "area"), [("copper", 1.3), ("copper", 0.0), ("steel", 2.5), ("aluminium", 1.5), ("copper", 1000.0)]
)
def test_a_size_that_is_not_held_has_no_resistance(metal: str, area: float) -> None:
    assert ohm_per_km(metal, area) is None


def test_an_unknown_insulation_has_no_temperature_and_no_factor() -> None:
    assert service_temperature("bare") is None
    assert adiabatic_k("steel", "pvc", 2.5) is None
    assert adiabatic_k("copper", "bare", 2.5) is None
