"""What an answer says: arithmetic that recomputes, cautions where they belong, nothing it must not say."""

import re
from typing import Any

import pytest

from tests.assessment.bodies import (
    RESIDUAL_30,
    SELECTIVE_100,
    Body,
    cautions,
    copper,
    finding,
    fuse,
    judged,
    live,
    no_trip,
    readings,
    said,
)

ALWAYS = {"competent-person", "no-certificate", "live-testing", "reconnect-earthing"}
NUMBER = r"([\d.]+)"
TT_SELECTIVE: Body = {"earthing": "TT", "residual": SELECTIVE_100}


def numbers(pattern: str, text: str) -> list[float]:
    """Numbers of the first place where a printed line matches."""
    match = re.search(pattern.replace("#", NUMBER), text)
    assert match is not None, text
    return [float(group.rstrip(".")) for group in match.groups()]


def explanation(answer: Body, check: str = "overcurrent-disconnection") -> str:
    """Explanation of a finding."""
    return str(finding(answer, check)["explanation"])


@pytest.mark.parametrize("device", ["B6", "B32", "C16", "D10"])
def test_the_printed_limit_recomputes_from_its_line(device: str) -> None:
    text = explanation(judged(readings(zs=live(0.6)), device=device))
    factor, voltage, current, limit = numbers("limit = # × # V / # A = # Ω", text)
    assert limit == pytest.approx(factor * voltage / current, rel=5e-4)


def test_the_printed_two_thirds_limit_recomputes() -> None:
    text = explanation(judged(readings(zs=live(0.6)), policy={"temperature": "two-thirds"}))
    voltage, current, limit = numbers("limit = 2/3 × # V / # A = # Ω", text)
    assert limit == pytest.approx(2 / 3 * voltage / current, rel=5e-4)


def test_the_printed_four_fifths_limit_recomputes() -> None:
    text = explanation(judged(readings(zs=live(0.6)), policy={"temperature": "four-fifths"}))
    share, factor, voltage, current, limit = numbers("limit = # × # × # V / # A = # Ω", text)
    assert limit == pytest.approx(share * factor * voltage / current, rel=5e-4)


@pytest.mark.parametrize("ze", [None, 0.25])
def test_the_printed_hot_loop_recomputes(ze: float | None) -> None:
    text = explanation(judged(readings(zs=live(1.08), ze=ze)))
    (z,) = numbers("Loop read # Ω", text)
    heated, factor, hot, least, greatest = numbers("Of it # Ω .* F = # .*: # Ω hot, # to # Ω", text)
    assert heated == pytest.approx(z - (ze or 0.0), rel=5e-4)
    assert hot == pytest.approx(z + (factor - 1) * heated, rel=5e-4)
    assert (least + greatest) / 2 == pytest.approx(hot, rel=5e-3)


def test_the_printed_dead_sum_recomputes() -> None:
    text = explanation(judged(readings(ze=0.35, dead=0.46)))
    ze, dead, total = numbers(r"Ze # \+ \(R1 \+ R2\) # = # Ω", text)
    assert total == pytest.approx(ze + dead, rel=5e-4)


def test_the_printed_residual_limit_and_multiple_recompute() -> None:
    answer = judged(readings(zs=live(86), times={"1": 410}), **TT_SELECTIVE)
    text = explanation(answer, "residual-disconnection")
    current, multiple = numbers("at # A, # × IΔn", text)
    assert multiple == pytest.approx(current / 0.1, rel=5e-4)
    factor, voltage, needed, rated, limit = numbers(r"limit = # × # V / \(# × # A\) = # Ω", text)
    assert limit == pytest.approx(factor * voltage / (needed * rated), rel=5e-4)


def test_the_printed_electrode_limit_recomputes() -> None:
    answer = judged(readings(electrode=71, times={"1": 410}), **TT_SELECTIVE)
    voltage, current, limit = numbers("limit = # V / # A = # Ω", explanation(answer, "earth-electrode"))
    assert limit == pytest.approx(voltage / current, rel=5e-4)


def test_the_printed_withstand_time_recomputes() -> None:
    answer = judged(
        readings(zs=live(0.3), z_ln=live(0.9)),
        device=fuse(32),
        rules="iec-60364",
        line_conductor=copper(10),
    )
    text = explanation(answer, "line-neutral-disconnection")
    k, area, current, time = numbers(r"\(# × # / #\)² = # s", text)
    assert time == pytest.approx((k * area / current) ** 2, rel=5e-3)


def test_the_printed_excess_recomputes() -> None:
    answer = judged(readings(zs=live(4.9), ze=0.21, dead=0.76, times={"1": 25}), residual=RESIDUAL_30)
    text = explanation(answer, "residual-disconnection")
    read, expected, excess = numbers("reads # Ω where # Ω is expected .*: # Ω more", text)
    assert excess == pytest.approx(read - expected, rel=5e-3)


def test_the_finding_repeats_the_numbers_of_its_line() -> None:
    found = finding(judged(readings(zs=live(1.08))), "overcurrent-disconnection")
    assert f"{found['limit']:.4g} Ω" in found["explanation"]
    assert f"{found['value']:.4g} Ω hot" in found["explanation"]
    worst = found["interval"]["greatest"]
    assert found["margin_percent"] == pytest.approx(100 * (found["limit"] - worst) / found["limit"], rel=1e-3)


def test_the_standing_cautions_are_all_that_a_plain_pass_says() -> None:
    answer = judged(readings(zs=live(0.6)), earthing="TN-S")
    assert cautions(answer) == ALWAYS | {"parallel-paths"}


@pytest.mark.parametrize(
    ("read", "more", "caution"),
    [
        (readings(zs=live(0.6)), {}, "open-pen"),
        (readings(zs=live(86), times={"1": 410}), TT_SELECTIVE, "tt-metalwork"),
        (readings(zs=live(86), times={"1": 410}), TT_SELECTIVE, "residual-device-only"),
        (readings(zs=no_trip(0.6)), {}, "no-trip-reading"),
        (readings(zs=live(1.1)), {}, "marginal"),
        (readings(zs=live(1.6), ze=0.4), {"residual": RESIDUAL_30}, "line-neutral-unseen"),
        (readings(zs=live(1.6), times={"1": 25}), {"residual": RESIDUAL_30}, "fault-path-unexplained"),
        (readings(zs=live(86), times={"1": 900}), TT_SELECTIVE, "residual-device-failed"),
        (readings(zs=live(0.5, bound="above")), {}, "over-range"),
        (readings(zs=live(2000, bound="above")), {}, "over-range"),
        (
            readings(zs=no_trip(2000, bound="above"), times={"1": 25}),
            {"residual": RESIDUAL_30},
            "over-range",
        ),
    ],
)
def test_a_caution_stands_where_its_cause_is(read: Body, more: Body, caution: str) -> None:
    assert ALWAYS | {caution} <= cautions(judged(read, **more))


def test_an_unknown_quantity_is_absent_and_an_open_end_says_so() -> None:
    def nulls(value: Any) -> list[Body]:
        if isinstance(value, list):
            return [found for part in value for found in nulls(part)]
        if not isinstance(value, dict):
            return []
        own = [value] if None in value.values() else []
        return own + [found for part in value.values() for found in nulls(part)]

    for read in (readings(), readings(zs=no_trip(0.3)), readings(zs=live(2000, bound="above"))):
        found = nulls(judged(read))
        assert all(set(entry) <= {"least", "greatest", "open", "by"} and "open" in entry for entry in found)
    current = judged(readings(zs=no_trip(0.3)))["quantities"]["prospective_earth_fault_current_a"]
    assert (current["greatest"], current["open"]) == (None, "greatest")


def test_without_a_device_there_is_no_limit_to_print() -> None:
    found = finding(judged(readings(zs=live(0.6)), device=None), "overcurrent-disconnection")
    assert not {"limit", "margin_percent", "conformance_probability"} & set(found)


def test_where_no_current_is_guaranteed_no_number_is_invented() -> None:
    # At 277 V a TT final circuit asks for 0.07 s; a breaker's standard promises no less than 0.1 s.
    answer = judged(readings(zs=live(0.5), z_ln=live(0.4)), device="B16", earthing="TT", voltage=277)
    assert not [text for text in said(answer) if re.search(r"\b(nan|inf|no bound A)\b", text)]


def test_clauses_are_those_of_the_earthing() -> None:
    tn = judged(readings(zs=live(0.6), times={"1": 25}), residual=RESIDUAL_30)
    tt = judged(readings(zs=live(86), times={"1": 25}), earthing="TT", residual=RESIDUAL_30)
    assert finding(tn, "residual-disconnection")["clause"] == "411.4.5"
    assert finding(tt, "residual-disconnection")["clause"] == "411.5.3"


def test_provenance_names_the_edition_and_everything_that_decided() -> None:
    provenance = judged(readings(zs=live(0.6)))["provenance"]
    assert provenance["rules"] == "bs-7671:2018"
    for name in ("rules_digest", "devices_digest", "texts_digest", "input_digest"):
        assert re.fullmatch("[0-9a-f]{64}", provenance[name])


def test_what_was_not_examined_is_listed_with_its_reason() -> None:
    entries = judged(readings(zs=live(0.6)))["not_examined"]
    listed = {entry["subject"]: entry["reason"] for entry in entries}
    assert listed["line-neutral-disconnection"] == "not-measured"
    assert {"overload", "breaking-capacity", "protective-conductor-heating", "means-of-earthing"} <= set(listed)
