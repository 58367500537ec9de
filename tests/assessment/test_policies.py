"""Policies of temperature and decision, conformance, nominal voltage and required times."""

import pytest

from tests.assessment.bodies import RESIDUAL_30, Body, finding, judged, live, readings

INSTRUMENT = {"instrument": {"percent": 3, "digits": 3, "resolution": 0.01}}
A, B = live(0.954, **INSTRUMENT), live(1.08, **INSTRUMENT)


def loop_finding(read: Body, **more: object) -> Body:
    """The overcurrent finding of a C16 under bs-7671."""
    return finding(judged(read, device="C16", **more), "overcurrent-disconnection")


def test_split_heats_the_reading_and_guards_its_upper_end() -> None:
    found = loop_finding(readings(zs=A))
    assert found["verdict"] == "pass"
    assert found["limit"] == pytest.approx(218.5 / 160, rel=1e-5)
    assert found["interval"]["greatest"] == pytest.approx(1.2 * (0.954 + 0.03 * 0.954 + 0.03), rel=1e-5)


def test_two_thirds_takes_no_voltage_factor_and_no_temperature_besides() -> None:
    found = loop_finding(readings(zs=A), policy={"temperature": "two-thirds"})
    assert found["verdict"] == "pass"
    assert (found["value"], found["limit"]) == pytest.approx((0.954, 2 / 3 * 230 / 160), rel=1e-5)


def test_four_fifths_takes_a_fifth_off_the_tabulated_limit() -> None:
    found = loop_finding(readings(zs=A), policy={"temperature": "four-fifths"})
    assert found["verdict"] == "pass"
    assert (found["value"], found["limit"]) == pytest.approx((0.954, 0.8 * 218.5 / 160), rel=1e-5)


def test_no_correction_compares_the_cold_reading_with_the_full_limit() -> None:
    found = loop_finding(readings(zs=A), policy={"temperature": "none"})
    assert (found["value"], found["limit"]) == pytest.approx((0.954, 218.5 / 160), rel=1e-5)


@pytest.mark.parametrize(
    ("temperature", "verdict"),
    [("split", "marginal"), ("two-thirds", "fail"), ("four-fifths", "pass"), ("none", "pass")],
)
def test_one_reading_gets_the_verdict_of_its_policy(temperature: str, verdict: str) -> None:
    answer = judged(readings(zs=B), device="C16", policy={"temperature": temperature})
    assert answer["verdict"] == verdict
    assert answer["policy"]["temperature"] == temperature


@pytest.mark.parametrize(
    ("temperature", "decision"),
    [("split", "guarded"), ("none", "guarded"), ("two-thirds", "simple"), ("four-fifths", "simple")],
)
def test_flat_policies_hold_a_margin_and_default_to_simple(temperature: str, decision: str) -> None:
    answer = judged(readings(zs=A), policy={"temperature": temperature})
    assert answer["policy"]["decision"] == decision


def test_the_policy_stands_in_every_answer() -> None:
    assert judged(readings(zs=A))["policy"] == {
        "temperature": "split",
        "decision": "guarded",
        "coverage": 0.95,
    }


def test_ze_settles_a_marginal_reading_and_is_what_is_asked_for() -> None:
    marginal = loop_finding(readings(zs=B))
    assert (marginal["interval"]["least"], marginal["interval"]["greatest"]) == pytest.approx((1.221, 1.371), abs=5e-4)
    assert "below" in marginal["explanation"]
    assert "Ze" in marginal["settled_by"]
    settled = loop_finding(readings(zs=B, ze={"value": 0.25, **INSTRUMENT}))
    assert settled["verdict"] == "pass"
    assert settled["interval"]["greatest"] == pytest.approx(1.321, rel=2e-3)


@pytest.mark.parametrize(("zs", "side"), [(1.10, "below"), (1.17, "above")])
def test_marginal_says_on_which_side_the_nominal_value_lies(zs: float, side: str) -> None:
    found = loop_finding(readings(zs=live(zs)))
    assert found["verdict"] == "marginal"
    assert side in found["explanation"]


@pytest.mark.parametrize(("zs", "verdict"), [(1.10, "pass"), (1.17, "fail")])
def test_simple_decides_on_the_nominal_value(zs: float, verdict: str) -> None:
    assert loop_finding(readings(zs=live(zs)), policy={"decision": "simple"})["verdict"] == verdict


@pytest.mark.parametrize(("coverage", "verdict"), [(0.95, "pass"), (0.99, "marginal"), (0.8, "pass")])
def test_coverage_widens_the_guard(coverage: float, verdict: str) -> None:
    # 1.05: 1.26 + 1.2 x 0.0825 = 1.359 at 0.95; times 1.314 at 0.99: 1.390.
    assert loop_finding(readings(zs=live(1.05)), policy={"coverage": coverage})["verdict"] == verdict


def test_conformance_is_a_property_of_the_reading_not_of_the_coverage_asked_for() -> None:
    told = [
        loop_finding(readings(zs=live(1.05)), policy={"coverage": c})["conformance_probability"]
        for c in (0.8, 0.95, 0.99)
    ]
    # u = U/2 = 0.0495 on 1.26 against 1.365625: z = 2.1338, from a table of the normal distribution 0.98357.
    assert told == pytest.approx([0.98357] * 3, abs=1e-5)


def test_a_guarded_pass_at_the_limit_leaves_a_false_accept_of_about_two_percent() -> None:
    # The upper end on the limit is z = 2: 0.97725.
    found = loop_finding(readings(zs=live((1.365625 / 1.2 - 0.03) / 1.05 - 1e-9)))
    assert found["verdict"] == "pass"
    assert found["conformance_probability"] == pytest.approx(0.97725, abs=1e-5)


def test_over_range_and_failing_is_not_half_likely_to_conform() -> None:
    found = loop_finding(readings(zs=live(2000, bound="above")))
    assert found["verdict"] == "fail"
    assert found.get("conformance_probability", 0.0) < 0.01


@pytest.mark.parametrize("voltage", [231, 238.4, 240, 250, 253])
@pytest.mark.parametrize("rules", ["bs-7671", "iec-60364"])
def test_a_measured_or_odd_nominal_voltage_is_asked_about_and_picks_no_row(voltage: float, rules: str) -> None:
    answer = judged(readings(zs=live(0.3)), voltage=voltage, rules=rules)
    assert answer["verdict"] == "undetermined"
    assert "nominal voltage" in finding(answer, "overcurrent-disconnection")["settled_by"]
    assert "required_disconnection_time_s" not in answer["quantities"]


@pytest.mark.parametrize(
    ("more", "seconds"),
    [
        ({}, 0.4),
        ({"voltage": 120}, 0.8),
        ({"voltage": 277}, 0.2),
        ({"earthing": "TT"}, 0.2),
        ({"earthing": "TT", "voltage": 120}, 0.3),
        ({"role": "distribution"}, 5),
        ({"role": "distribution", "earthing": "TT"}, 1),
        ({"rated_current_a": 40, "device": "B40"}, 5),
        ({"rated_current_a": 40, "device": "B40", "feeds": "socket-outlets"}, 0.4),
        ({"rated_current_a": 80, "device": "B80", "feeds": "socket-outlets"}, 5),
    ],
)
def test_required_time_by_voltage_earthing_role_and_rating(more: Body, seconds: float) -> None:
    answer = judged(readings(zs=live(0.1)), **more)
    assert answer["quantities"]["required_disconnection_time_s"] == seconds


def test_rule_sets_differ_in_their_voltage_factor() -> None:
    limits = [
        finding(judged(readings(zs=A), rules=rules), "overcurrent-disconnection")["limit"]
        for rules in ("bs-7671", "bs-7671:2008", "iec-60364")
    ]
    assert limits == pytest.approx([218.5 / 160, 230 / 160, 230 / 160], rel=1e-5)


def test_currents_carry_voltage_factor_and_temperature_at_both_ends() -> None:
    # Least: 0.95, hot upper end; greatest: 1.1, cold lower end.
    current = judged(readings(zs=live(1.0)))["quantities"]["prospective_earth_fault_current_a"]
    assert current == {
        "least": pytest.approx(218.5 / (1.2 * 1.08), rel=1e-5),
        "greatest": pytest.approx(1.1 * 230 / 0.92, rel=1e-5),
    }


def test_a_residual_limit_counts_the_heated_loop() -> None:
    answer = judged(readings(zs=live(86), times={"1": 25}), earthing="TT", residual=RESIDUAL_30)
    assert finding(answer, "residual-disconnection")["value"] == pytest.approx(103.2)
