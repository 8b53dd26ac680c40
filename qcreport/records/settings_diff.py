"""What changed between two versions of a settings file, key by key."""

from __future__ import annotations

import datetime as dt
import tomllib
from collections.abc import Iterator, Mapping
from typing import Any

from qcreport.analysis.provenance import Change
from qcreport.canonical import sha256_hex

WHOLE_FILE = "whole file"
"""Named as key where the file is no TOML that can be read."""
_LONGEST = 200


def settings_changes(what: str, before: bytes | None, after: bytes | None) -> tuple[Change, ...]:
    """Return what changed between two versions of a settings file; None where there is no file.

    A change that touches no value (comments, spaces, order) is told as one of the whole file, by its digests.
    """
    if before == after:
        return ()
    old, new = _flat(before), _flat(after)
    if old is None or new is None or old == new:
        return (Change(what=what, key=WHOLE_FILE, before=_digest(before), after=_digest(after)),)
    keys = [*old, *(key for key in new if key not in old)]
    return tuple(
        Change(what=what, key=key, before=old.get(key), after=new.get(key))
        for key in keys
        if old.get(key) != new.get(key)
    )


def _flat(data: bytes | None) -> dict[str, str] | None:
    """Return every value by its dotted key, as text; None where the file cannot be read."""
    if data is None:
        return {}
    try:
        document = tomllib.loads(data.decode("utf-8-sig"))
        return dict(_items("", document))
    except (ValueError, RecursionError):
        return None


def _items(path: str, value: Any) -> Iterator[tuple[str, str]]:
    if isinstance(value, Mapping):
        for key, item in value.items():
            yield from _items(f"{path}.{key}" if path else str(key), item)
    elif isinstance(value, list) and value and all(isinstance(item, Mapping) for item in value):
        for name, item in _named(value):
            yield from _items(f"{path}[{name}]", item)
    else:
        text = _text(value)
        yield (
            path,
            text if len(text) <= _LONGEST else f"{text[:_LONGEST]}… ({sha256_hex(text.encode())[:16]})",
        )


def _named(items: list[Mapping[str, Any]]) -> list[tuple[str, Mapping[str, Any]]]:
    """Return the tables of an array by the name each gives itself, else by their place."""
    for key in ("name", "id", "characteristic"):
        names = [item.get(key) for item in items]
        if all(isinstance(name, str) for name in names) and len(set(names)) == len(names):
            return [(str(name), item) for name, item in zip(names, items, strict=True)]
    return [(str(place), item) for place, item in enumerate(items, start=1)]


def _text(value: Any) -> str:
    """Return a value as settings write it, with the shortest form of a number."""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        return f'"{value}"'
    if isinstance(value, dt.date | dt.time):
        return value.isoformat()
    if isinstance(value, list):
        return f"[{', '.join(map(_text, value))}]"
    if isinstance(value, Mapping):
        return f"{{{', '.join(f'{key} = {_text(item)}' for key, item in value.items())}}}"
    return str(value)


def _digest(data: bytes | None) -> str | None:
    return None if data is None else f"SHA-256 {sha256_hex(data)[:16]}…"
