"""Facts of a ledger entry: plain JSON without floats, safe to hash, store and print.

A float has no single text that every language agrees on, so the hash of an entry would depend on who computes
it. Numbers with decimals are therefore kept as text by whoever records them.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from qcreport.canonical import to_json_bytes
from qcreport.errors import LedgerError

Facts = Mapping[str, Any]


def clean_text(text: str) -> str:
    """Return `text` as UTF-8 can carry it: bytes of a name that were no UTF-8 are shown escaped."""
    return text.encode("utf-8", "backslashreplace").decode("utf-8")


def canonical_facts(facts: Facts) -> str:
    """Return facts as canonical JSON text.

    Raises
    ------
    LedgerError
        For a float, a key that is no text, or any other type that JSON does not have.
    """
    return to_json_bytes(_plain(facts, "facts")).decode("utf-8")


def _plain(value: Any, place: str) -> Any:
    if value is None or isinstance(value, bool | int):
        return value
    if isinstance(value, str):
        return clean_text(value)
    if isinstance(value, Mapping):
        return {_key(key, place): _plain(item, f"{place}.{key}") for key, item in value.items()}
    if isinstance(value, Sequence) and not isinstance(value, bytes | bytearray):
        return [_plain(item, f"{place}[{i}]") for i, item in enumerate(value)]
    raise LedgerError(
        f"{place} is a {type(value).__name__}; a ledger entry holds text, integers, true, false, null."
    )


def _key(key: Any, place: str) -> str:
    if not isinstance(key, str):
        raise LedgerError(f"{place} has the key {key!r}; keys of a ledger entry are text.")
    return clean_text(key)
