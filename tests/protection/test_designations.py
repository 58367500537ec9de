"""Trade shorthand: what is written is read back, and what cannot be read is refused."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from faultloop.protection.catalogue import listed_devices
from faultloop.protection.designations import (
    Breaker,
    Fuse,
    OvercurrentDevice,
    ResidualDevice,
    UnknownDesignation,
    known_ratings,
    parse_device,
    parse_overcurrent,
    parse_residual,
)
from faultloop.protection.residual import residual_table

RESIDUAL = [
    ResidualDevice(rated, kind, delay)
    for rated in residual_table().rated_residual_operating_currents_ma
    for kind in (None, "AC", "A", "F", "B")
    for delay in ("general", "selective")
]


@pytest.mark.parametrize("device", listed_devices(), ids=lambda device: device.designation)
def test_overcurrent_devices_are_read_back(device: OvercurrentDevice) -> None:
    assert parse_overcurrent(device.designation) == device
    assert parse_device(device.designation) == device
    assert device.rated_current_a in known_ratings(device)


@pytest.mark.parametrize("device", RESIDUAL, ids=lambda device: device.designation)
def test_residual_devices_are_read_back(device: ResidualDevice) -> None:
    assert parse_residual(device.designation) == device
    assert parse_device(device.designation) == device


@pytest.mark.parametrize(
    ("text", "device"),
    [
        ("B32", Breaker("B", 32.0)),
        ("b32", Breaker("B", 32.0)),
        (" C 16 A ", Breaker("C", 16.0)),
        ("MCB D10", Breaker("D", 10.0)),
        ("RCBO  B32", Breaker("B", 32.0)),
        ("gG 63", Fuse("iec-60269", 63.0)),
        ("gG63 A", Fuse("iec-60269", 63.0)),
        ("BS 88-2 gG 63", Fuse("bs-88-2", 63.0)),
        ("K20", Breaker("K", 20.0)),
        ("mcb z10", Breaker("Z", 10.0)),
        ("BS 88-3 63", Fuse("bs-88-3", 63.0)),
        ("BS 88-3 gG 63 A", Fuse("bs-88-3", 63.0)),
        ("BS 3036 30", Fuse("bs-3036", 30.0)),
        ("bs3036 30 A", Fuse("bs-3036", 30.0)),
        ("BS 1361 60", Fuse("bs-1361", 60.0)),
        ("BS 1362 13 A", Fuse("bs-1362", 13.0)),
    ],
)
def test_common_ways_of_writing_overcurrent_devices(text: str, device: OvercurrentDevice) -> None:
    assert parse_overcurrent(text) == device


@pytest.mark.parametrize(
    ("text", "device"),
    [
        ("30 mA", ResidualDevice(30.0)),
        ("30mA", ResidualDevice(30.0)),
        ("30 mA A", ResidualDevice(30.0, "A")),
        ("300 mA S", ResidualDevice(300.0, None, "selective")),
        ("300 mA B S", ResidualDevice(300.0, "B", "selective")),
    ],
)
def test_common_ways_of_writing_residual_devices(text: str, device: ResidualDevice) -> None:
    assert parse_residual(text) == device


REFUSED = [
    "", " ", "B", "32", "B1000", "B33", "B0", "B-32", "B32.5", "E16", "B 32 kA", "B32kA", "B32 mA", "B32/C16",
    "B3 2", "B32\x00", "\x00B32", "B" + "9" * 5000, "9" * 5000, "gG", "gG 7", "gG 1000", "BS 88-2 gG 2",
    "BS 88-3 gG 40", "BS 88-316", "BS 303630", "BS 3036 gG 30", "BS 3036 25", "BS 1361", "BS 1363 13", "BS 1362 5",
    "aM 50", "BS 88-2 aM 50", "K33", "K80", "Z0", "B1e1", "Binf", "Bnan", "B32; C16", "B32 B32", "Ｂ32 kA",
]  # fmt: skip


@pytest.mark.parametrize("text", REFUSED, ids=lambda text: ascii(text[:12]))
def test_what_is_no_overcurrent_device_is_refused_with_what_was_expected(text: str) -> None:
    with pytest.raises(UnknownDesignation, match=r"expected a breaker such as|this family is held for"):
        parse_overcurrent(text)


@pytest.mark.parametrize(
    "text",
    ["", "30", "30 A", "mA", "0 mA", "31 mA", "-30 mA", "30 mA X", "30 mA S S", "30 mA S A", "30 mA\x00", "0.03 A",
     "30 mA time-delayed", "9" * 5000 + " mA", "30 kmA", "30 mΩ", "nan mA", "300 mA SS"],
    ids=lambda text: ascii(text[:12]),
)  # fmt: skip
def test_what_is_no_residual_device_is_refused_with_what_was_expected(text: str) -> None:
    with pytest.raises(UnknownDesignation, match="expected a residual device such as"):
        parse_residual(text)


@pytest.mark.parametrize("text", ["aM 50", "am50 A", "BS 88-2 aM 63"])
def test_a_motor_fuse_is_refused_with_the_reason_and_a_way_out(text: str) -> None:
    with pytest.raises(UnknownDesignation, match=r"aM fuse-links are not held.*maker's points as a curve"):
        parse_overcurrent(text)


def read(text: str) -> OvercurrentDevice | ResidualDevice | str:
    """A device, or the words of the refusal."""
    try:
        return parse_device(text)
    except UnknownDesignation as refusal:
        return str(refusal)


@given(st.text(max_size=30) | st.text("BCDgGmASF0123456789. -\x00ΩKZ", max_size=9))
def test_any_text_is_read_or_refused_with_what_was_expected(text: str) -> None:
    answer = read(text)
    if isinstance(answer, str):
        assert "expected" in answer or "this family is held for" in answer
        assert len(answer) < 400
    else:
        assert parse_device(answer.designation) == answer


def test_a_refusal_does_not_repeat_the_input() -> None:
    with pytest.raises(UnknownDesignation) as refusal:
        parse_device("<script>mallory</script>")
    assert "mallory" not in str(refusal.value)


@given(st.sampled_from("BCDKZ"), st.integers(1, 9999))
def test_only_ratings_of_the_table_are_devices(letter: str, rated: int) -> None:
    held = known_ratings(Breaker(letter, 1.0))  # type: ignore[arg-type]
    if rated in held:
        assert parse_overcurrent(f"{letter}{rated}").rated_current_a == rated
    else:
        with pytest.raises(UnknownDesignation, match="this family is held for"):
            parse_overcurrent(f"{letter}{rated}")


def test_an_unknown_fuse_system_holds_no_ratings() -> None:
    assert known_ratings(Fuse("bs-646", 1.0)) == []
