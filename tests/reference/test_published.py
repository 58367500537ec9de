"""Published figures: each rounds to print, or is excused by name within one printed step."""

import math
from functools import lru_cache
from statistics import NormalDist

import pytest

from faultloop.assessment.codes import Current, Earthing
from faultloop.digests import rounded
from tests.reference import examples, limits, quantities, separation, separation_figures
from tests.reference.exceptions import CONTRADICTED, CUT, UNUSED
from tests.reference.published import EDITIONS, Comparison, document, files, oracles, rules_for

MODULES = (limits, quantities, examples, separation, separation_figures)
COMPARISONS: list[Comparison] = [comparison for module in MODULES for comparison in module.comparisons()]
CONCLUDED = examples.concluded()
GUARD = oracles("conformance", "CF-guard-")


@lru_cache(maxsize=1)
def values() -> dict[str, float]:
    """Every figure of the service, computed once."""
    return {comparison.title: comparison.value for comparison in COMPARISONS}


def excuse(comparison: Comparison) -> str | None:
    """Reason for which a figure may miss the rounding, if one is named."""
    return CUT.get(comparison.row) or CUT.get(f"{comparison.row}:{comparison.part}")


def agrees(comparison: Comparison) -> bool:
    """Whether the service's figure is the printed one."""
    value = values()[comparison.title]
    return comparison.within_one_step(value) if excuse(comparison) else comparison.rounds(value)


def is_contradicted(comparison: Comparison) -> bool:
    """Whether the service knowingly says something else."""
    return f"{comparison.row}:{comparison.part}" in CONTRADICTED


@pytest.mark.parametrize("comparison", [c for c in COMPARISONS if not is_contradicted(c)], ids=lambda c: c.title)
def test_figure_is_the_published_one(comparison: Comparison) -> None:
    value = values()[comparison.title]
    assert agrees(comparison), f"printed {comparison.printed:g}, computed {value:.6g}"


@pytest.mark.parametrize("comparison", [c for c in COMPARISONS if is_contradicted(c)], ids=lambda c: c.title)
def test_a_contradiction_is_still_one(comparison: Comparison) -> None:
    assert not comparison.within_one_step(values()[comparison.title]), "the contradiction is gone: take it off the list"


@pytest.mark.parametrize("name", sorted([*CUT, *CONTRADICTED]))
def test_every_exception_is_needed(name: str) -> None:
    concerned = [c for c in COMPARISONS if name in (c.row, f"{c.row}:{c.part}")]
    assert concerned, "no such figure is compared"
    assert any(not c.rounds(values()[c.title]) for c in concerned), "the figure rounds: take it off the list"


@pytest.mark.parametrize("name", sorted(CONCLUDED))
def test_example_ends_as_it_must(name: str) -> None:
    row, verdict = CONCLUDED[name]
    assert verdict() == row["expected_verdict"], row["source"]


@pytest.mark.parametrize("row", GUARD, ids=lambda row: f"{row['id']} [{row['source']}]")
def test_false_acceptance_stays_under_its_published_bound(row: dict[str, float]) -> None:
    found = quantities.false_accept(row["r"])
    assert 0.0 < found <= row["printed"] + 1e-12
    # The bound is tight: U at k = 2 makes r times U two r standard uncertainties.
    assert found == pytest.approx(NormalDist().cdf(-2.0 * row["r"]), abs=1e-12)


@pytest.mark.parametrize("system", [Earthing.TN_S, Earthing.TT])
@pytest.mark.parametrize("rules", ["bs-7671:2008", "bs-7671:2011", "bs-7671:2018", "iec-60364:2017"])
def test_no_time_is_set_for_low_direct_voltages(system: int, rules: str) -> None:
    blank = {row["id"] for row in oracles("disconnection_times") if row.get("required_time_s", 0) is None}
    assert blank == {"DT-TN-dc-0", "DT-TT-dc-0"}
    assert math.isnan(limits.time_required(rules, system, Current.DC, 120.0))


@pytest.mark.parametrize("name", ["loop_limits_breakers", "loop_limits_fuses"])
def test_rule_sets_take_the_voltage_factor_of_their_edition(name: str) -> None:
    for row in oracles(name):
        assert rules_for(EDITIONS[row["edition"]]).voltage_factor.least.value == row["voltage_factor"]


@pytest.mark.parametrize("policy", ["none", "two-thirds", "four-fifths"])
@pytest.mark.parametrize("rules", sorted(set(EDITIONS.values())))
@pytest.mark.parametrize("device", ["B6", "B32", "C16", "D20"])
def test_an_assessment_is_held_to_the_same_limit(device: str, rules: str, policy: str) -> None:
    body = examples.circuit(
        device,
        readings={"earth_fault_loop_impedance_ohm": 0.3},
        rules=rules,
        policy={"temperature": policy, "decision": "simple"},
    )
    found = examples.finding(body, "overcurrent-disconnection")
    assert found["limit"] == rounded(limits.limit(device, rules, 0.4, policy))


@pytest.mark.parametrize("name", files())
def test_only_what_was_seen_in_print_is_an_oracle(name: str) -> None:
    assert oracles(name)
    for row in oracles(name):
        assert row["sourcing"] == "seen", row["id"]
        assert not row.get("source_is_wrong"), row["id"]


@pytest.mark.parametrize("name", files())
def test_every_oracle_is_compared_or_told_why_not(name: str) -> None:
    used = {c.row for c in COMPARISONS} | set(CONCLUDED) | {row["id"] for row in GUARD}
    left = {row["id"] for row in oracles(name)} - used
    reasons = UNUSED.get(name, {})
    assert [row for row in sorted(left) if not row.startswith(tuple(reasons))] == []
    assert [start for start in reasons if not any(row.startswith(start) for row in left)] == []


def test_enough_was_really_compared() -> None:
    done = [c for c in COMPARISONS if math.isfinite(values()[c.title]) and agrees(c)]
    figures = {(c.row, c.printed) for c in done}
    worked = {c.row for c in done if c.row.startswith("WE-")}
    unearthed = {c.row for c in done if c.row.startswith("SS-")}
    documents = {document(c.source) for c in done if not c.row.startswith("WE-")}
    assert len(documents) >= 6
    assert len(figures) >= 150
    assert len(worked) >= 12
    assert len(unearthed) >= 40
