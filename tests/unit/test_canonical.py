"""One form of JSON and digests."""

from __future__ import annotations

import hashlib
import json
import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from qcreport.canonical import (
    finite_or_none,
    in_groups_of_eight,
    sha256_hex,
    to_json_bytes,
    to_readable_json_bytes,
)


def test_canonical_json_is_sorted_narrow_and_utf8() -> None:
    assert to_json_bytes({"b": [1, 0.1], "a": "Prüfung"}) == '{"a":"Prüfung","b":[1,0.1]}'.encode()


def test_readable_json_keeps_the_order_and_ends_with_a_line() -> None:
    text = to_readable_json_bytes({"b": {"y": 1}, "a": ["é"]}).decode()
    assert text == '{\n "b": {\n  "y": 1\n },\n "a": [\n  "é"\n ]\n}\n'


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf])
def test_what_is_not_finite_never_enters_json(value: float) -> None:
    for form in (to_json_bytes, to_readable_json_bytes):
        with pytest.raises(ValueError, match="not JSON compliant"):
            form({"x": value})
    assert finite_or_none(value) is None


@settings(deadline=None)
@given(st.floats(allow_nan=False, allow_infinity=False))
def test_numbers_keep_every_bit(value: float) -> None:
    for form in (to_json_bytes, to_readable_json_bytes):
        back = json.loads(form([value]))[0]
        assert math.copysign(1.0, back) == math.copysign(1.0, value)
        assert back == value


def test_finite_numbers_come_back_as_floats() -> None:
    assert finite_or_none(None) is None
    found = finite_or_none(3)
    assert (found, type(found)) == (3.0, float)


def test_digests() -> None:
    # FIPS 180-2, appendix B.1
    digest = "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"
    assert sha256_hex(b"abc") == digest == hashlib.sha256(b"abc").hexdigest()
    assert in_groups_of_eight(digest) == (
        "ba7816bf 8f01cfea 414140de 5dae2223 b00361a3 96177a9c b410ff61 f20015ad"
    )
    assert in_groups_of_eight("") == ""
