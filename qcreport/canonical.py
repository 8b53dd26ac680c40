"""One form of JSON and one form of digest for everything that is hashed or compared byte for byte."""

from __future__ import annotations

import hashlib
import json
import math
from typing import Any


def to_json_bytes(value: Any) -> bytes:
    """Return the canonical JSON of `value`: sorted keys, no spaces, UTF-8, shortest round-trip numbers.

    Raises ValueError for NaN and infinities: results carry `null` instead.
    """
    text = json.dumps(value, sort_keys=True, separators=(",", ":"), ensure_ascii=False, allow_nan=False)
    return text.encode("utf-8")


def to_readable_json_bytes(value: Any) -> bytes:
    """Return JSON for people and machines alike: insertion order, indented by one, UTF-8, a final newline."""
    return (json.dumps(value, indent=1, ensure_ascii=False, allow_nan=False) + "\n").encode("utf-8")


def finite_or_none(value: float | None) -> float | None:
    """Return `value` as a float, or None where it is missing, NaN or infinite."""
    if value is None or not math.isfinite(value):
        return None
    return float(value)


def sha256_hex(data: bytes) -> str:
    """Return the SHA-256 of `data` in lower-case hexadecimal."""
    return hashlib.sha256(data).hexdigest()


def in_groups_of_eight(digest_hex: str) -> str:
    """Return a hexadecimal digest as people compare it: groups of eight, single spaces."""
    return " ".join(digest_hex[i : i + 8] for i in range(0, len(digest_hex), 8))
