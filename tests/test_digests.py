"""Canonical bytes, digests and the one rounding rule."""

import hashlib
import json
import math
from decimal import ROUND_HALF_EVEN, Decimal

import numpy as np
import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from faultloop.digests import canonical_bytes, digest, json_bytes, rounded, rounded_all, rounded_column, sha256

FINITE = st.floats(allow_nan=False, allow_infinity=False, min_value=-1e300, max_value=1e300)
# Measurements are floats; a whole number beyond 53 bits has no place in them.
WHOLE = st.integers(-(2**53), 2**53)
SCALARS = st.none() | st.booleans() | WHOLE | FINITE | st.text(st.characters(exclude_categories=["Cs"]))
JSON = st.recursive(
    SCALARS,
    lambda inner: st.lists(inner, max_size=4) | st.dictionaries(st.text("abcé", max_size=3), inner, max_size=4),
    max_leaves=12,
)


def exactly_rounded(value: float) -> float:
    """Six significant digits by decimal arithmetic, ties to even."""
    exact = Decimal(value)
    if exact == 0:
        return 0.0
    place = Decimal(1).scaleb(exact.adjusted() - 5)
    return float(exact.quantize(place, rounding=ROUND_HALF_EVEN))


@given(st.floats(min_value=1e-9, max_value=1e12))
def test_rounding_keeps_six_significant_digits(value: float) -> None:
    assert rounded(value) == exactly_rounded(value)
    assert rounded(-value) == -exactly_rounded(value)


@pytest.mark.parametrize(
    ("value", "printed"),
    [(1.36562512, 1.36563), (0.1 + 0.2, 0.3), (1234565.0, 1234560.0), (1234575.0, 1234580.0), (0.0, 0.0)],
)
def test_rounding_of_known_values(value: float, printed: float) -> None:
    assert rounded(value) == printed


@given(FINITE)
def test_rounding_twice_changes_nothing(value: float) -> None:
    once = rounded(value)
    assert once is not None
    assert rounded(once) == once


@pytest.mark.parametrize("value", [math.inf, -math.inf, math.nan])
def test_what_is_not_finite_has_no_number(value: float) -> None:
    assert rounded(value) is None


@given(st.lists(st.floats(), max_size=8))
def test_a_column_is_rounded_by_the_same_rule(values: list[float]) -> None:
    assert rounded_all(values) == [rounded(value) for value in values]


@given(JSON)
def test_canonical_bytes_read_back_as_the_same_value(value: object) -> None:
    assert json.loads(canonical_bytes(value).decode("utf-8")) == value


@given(st.dictionaries(st.text("abcdé", max_size=4), FINITE, max_size=6), st.randoms())
def test_order_of_keys_does_not_change_the_digest(value: dict[str, float], random: object) -> None:
    keys = list(value)
    random.shuffle(keys)  # type: ignore[attr-defined]
    shuffled = {key: value[key] for key in keys}
    assert canonical_bytes(shuffled) == canonical_bytes(value)
    assert digest(shuffled) == digest(value)


def test_canonical_text_is_the_shortest_one_and_utf8() -> None:
    assert canonical_bytes({"b": [1.5, None], "a": "Ω"}) == '{"a":"Ω","b":[1.5,null]}'.encode()


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf])
def test_canonical_bytes_refuse_what_json_cannot_say(value: float) -> None:
    with pytest.raises(ValueError, match="not JSON compliant"):
        canonical_bytes({"x": value})


def test_digest_is_the_sha256_of_the_canonical_bytes() -> None:
    # FIPS 180-4 example: the digest of "abc".
    assert sha256(b"abc") == "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"
    assert digest({"a": 1}) == hashlib.sha256(b'{"a":1}').hexdigest()


@given(JSON, JSON)
def test_different_values_have_different_digests(one: object, other: object) -> None:
    same = json.dumps(one, sort_keys=True) == json.dumps(other, sort_keys=True)
    assert (digest(one) == digest(other)) == same


def test_answers_keep_their_order() -> None:
    assert json_bytes({"b": 1.0, "a": 2.0}) == b'{"b":1.0,"a":2.0}'


@given(
    st.lists(
        st.one_of(
            st.floats(),
            st.floats(1e-6, 1e6).map(lambda value: float(f"{value:.7g}")),
            st.integers(100_000, 999_999).flatmap(
                lambda whole: st.integers(-30, 30).map(lambda power: float(f"{whole}.5e{power}"))
            ),
            st.integers(-25, 25).map(lambda power: 10.0**power),
        ),
        max_size=20,
    )
)
@example([math.nan, math.inf, -math.inf, 0.0, -0.0, 999999.5, 99999.95, 1000.0, 1e22, 1e-22, 5e-324, 1.7e308])
def test_an_array_is_rounded_as_its_values_are(values: list[float]) -> None:
    told = rounded_column(np.array(values, dtype=np.float64))
    assert [repr(value) for value in told] == [repr(rounded(value)) for value in values]
