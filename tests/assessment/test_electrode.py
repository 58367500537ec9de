"""The earth electrode on TT: every residual device in series, the loop as a bound, and the season."""

import pytest

from tests.assessment.bodies import (
    RESIDUAL_30,
    Body,
    cautions,
    conditions,
    finding,
    judged,
    live,
    readings,
    verdict_of,
)

CHECK = "earth-electrode"
FRONT_300 = {"rated_residual_operating_current_ma": 300, "delay": "selective"}


def on_tt(upstream: list[Body] | None = None, **read: object) -> Body:
    """A fixed TT circuit with a tested 30 mA device."""
    told = readings(times={"1": 25}, **read)
    return judged(told, earthing="TT", residual=RESIDUAL_30, upstream=upstream)


def test_the_least_sensitive_device_in_series_sets_the_limit() -> None:
    found = finding(on_tt([FRONT_300], electrode=100), CHECK)
    assert found["limit"] == pytest.approx(50 / 0.3, rel=1e-5)
    assert finding(on_tt(electrode=100), CHECK)["limit"] == pytest.approx(50 / 0.03, rel=1e-5)


@pytest.mark.parametrize(
    ("electrode", "verdict"),
    [(100, "pass-with-conditions"), (160, "marginal"), (240, "fail")],
)
def test_an_electrode_against_fifty_volt_with_a_300_ma_front_device(electrode: float, verdict: str) -> None:
    # 10 %: 90 to 110 but 3 x 100 x 0.3 = 90 V in a dry season; 144 to 176 and 216 to 264 about 166.7.
    answer = on_tt([FRONT_300], electrode=electrode)
    assert verdict_of(answer, CHECK) == answer["verdict"] == verdict


@pytest.mark.parametrize(("zs", "verdict"), [(40, "pass"), (160, "marginal"), (205, "fail")])
def test_a_loop_reading_is_an_upper_bound_of_the_electrode(zs: float, verdict: str) -> None:
    # The upper end is the loop's; below, up to 21 ohm of it may be the source's earth: 205 - 10.3 - 21 = 173.7.
    answer = on_tt([FRONT_300], zs=live(zs))
    assert verdict_of(answer, CHECK) == verdict


@pytest.mark.parametrize(
    ("upstream", "electrode", "held"),
    [
        (None, 210, True),
        (None, 190, False),
        ([FRONT_300], 55, False),
        ([FRONT_300], 60, True),
    ],
)
def test_season_is_a_condition_only_over_the_threshold_or_when_dried_out(
    upstream: list[Body] | None, electrode: float, held: bool
) -> None:
    # 55 x 3 x 0.3 = 49.5 V; 60 x 3 x 0.3 = 54 V.
    answer = on_tt(upstream, electrode=electrode)
    assert ("season" in conditions(answer)) == held
    assert answer["verdict"] == ("pass-with-conditions" if held else "pass")


def test_it_is_asked_of_tt_only() -> None:
    answer = judged(readings(zs=live(0.6)), residual=RESIDUAL_30)
    assert verdict_of(answer, CHECK) == "not-applicable"


def test_all_metalwork_of_a_tt_installation_rises_together_and_that_is_said() -> None:
    assert "tt-metalwork" in cautions(on_tt(electrode=71))


def test_touch_voltage_on_tt_is_the_electrodes_share_of_the_loop() -> None:
    # R_A 240 of a loop of 251: only 11 ohm beyond the electrode is heated: 253.2.
    answer = on_tt(zs=live(251), electrode=240)
    assert finding(answer, "touch-voltage")["value"] == pytest.approx(230 * 240 / 253.2, rel=1e-5)
    assert 1.1 * 230 * 240 / 253.2 < answer["quantities"]["touch_voltage_v"]["greatest"] < 1.1 * 230
