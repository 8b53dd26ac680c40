"""A result as reported beside the same result recomputed: where they differ, and by what rule.

Words, labels, counts and whole numbers must be equal. Other numbers may differ in the last bits, because
machines sum and exponentiate differently: 1e-9 of the larger one, and 1e-15 for a p below 1e-12.
"""

from __future__ import annotations

import json
import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from itertools import islice
from typing import Any

RELATIVE = 1e-9
SMALL_P = 1e-12
ABSOLUTE_SMALL_P = 1e-15
MOST_LISTED = 100
_LONGEST_VALUE = 80
_MOST_ADDED = 20
_PLACE = re.compile(r"\[\d+\]")
_ABSENT = object()


@dataclass(frozen=True, slots=True, kw_only=True)
class Comparison:
    """What a recomputation showed."""

    matches: bool
    """No difference that counts."""
    differences: tuple[str, ...]
    """One line each, by path."""
    notes: tuple[str, ...]
    """Differences of version, and what a later version adds; these do not count."""


def compare_results(reported: Mapping[str, Any], recomputed: Mapping[str, Any]) -> Comparison:
    """Compare two documents of `result.json`.

    A key that only the recomputed one has counts, unless another version of qcreport wrote the report: later
    versions may add keys, and what they added is told in the notes.
    """
    notes = tuple(_version_notes(reported.get("versions"), recomputed.get("versions")))
    added: dict[str, None] | None = {} if _own_version(reported) != _own_version(recomputed) else None
    found = _walk("", _without_versions(reported), _without_versions(recomputed), added)
    listed = tuple(islice(found, MOST_LISTED))
    more = sum(1 for _ in found)
    if more:
        listed = (*listed, f"and {more} more differences")
    return Comparison(matches=not listed, differences=listed, notes=(*notes, *_added_notes(added)))


def _added_notes(added: Mapping[str, None] | None) -> Iterator[str]:
    """Yield what only the recomputed result has, each name once."""
    names = list(added or ())
    for name in names[:_MOST_ADDED]:
        yield f"{name}: not in the report; this version of qcreport adds it"
    if len(names) > _MOST_ADDED:
        yield f"and {len(names) - _MOST_ADDED} more that this version adds"


def _without_versions(document: Mapping[str, Any]) -> dict[str, Any]:
    return {key: value for key, value in document.items() if key != "versions"}


def _own_version(document: Mapping[str, Any]) -> Any:
    versions = document.get("versions")
    return versions.get("qcreport") if isinstance(versions, Mapping) else None


def _version_notes(reported: Any, recomputed: Any) -> Iterator[str]:
    if not isinstance(reported, Mapping) or not isinstance(recomputed, Mapping):
        return
    for name in sorted({*map(str, reported), *map(str, recomputed)}):
        then, now = reported.get(name, "none"), recomputed.get(name, "none")
        if then != now:
            yield f"made with {name} {_shown(then)}, recomputed with {_shown(now)}"


def _walk(path: str, reported: Any, recomputed: Any, added: dict[str, None] | None) -> Iterator[str]:
    if isinstance(reported, Mapping) and isinstance(recomputed, Mapping):
        yield from _walk_tables(path, reported, recomputed, added)
    elif isinstance(reported, list) and isinstance(recomputed, list):
        if len(reported) != len(recomputed):
            yield f"{path}: {len(reported)} entries in the report, {len(recomputed)} recomputed"
        for index, (one, other) in enumerate(zip(reported, recomputed, strict=False)):
            yield from _walk(f"{path}[{index}]", one, other, added)
    elif not _same(path, reported, recomputed):
        yield f"{path}: {_shown(reported)} in the report, {_shown(recomputed)} recomputed"


def _walk_tables(
    path: str, reported: Mapping[str, Any], recomputed: Mapping[str, Any], added: dict[str, None] | None
) -> Iterator[str]:
    for key in sorted({*reported, *recomputed}):
        below = f"{path}.{key}" if path else key
        one, other = reported.get(key, _ABSENT), recomputed.get(key, _ABSENT)
        if one is _ABSENT and added is not None:
            added[_PLACE.sub("[]", below)] = None
            continue
        yield from _walk(below, one, other, added)


def _same(path: str, reported: Any, recomputed: Any) -> bool:
    if not _is_number(reported) or not _is_number(recomputed):
        return type(reported) is type(recomputed) and bool(reported == recomputed)
    if isinstance(reported, int) and isinstance(recomputed, int):
        return reported == recomputed
    distance = abs(reported - recomputed)
    if path.rpartition(".")[2] == "p" and min(abs(reported), abs(recomputed)) < SMALL_P:
        return bool(distance <= ABSOLUTE_SMALL_P)
    return bool(distance <= RELATIVE * max(abs(reported), abs(recomputed)))


def _is_number(value: Any) -> bool:
    return isinstance(value, (int, float)) and not isinstance(value, bool)


def _shown(value: Any) -> str:
    if value is _ABSENT:
        return "nothing"
    if isinstance(value, str) and value.isprintable():
        text = value
    else:
        text = json.dumps(value, ensure_ascii=True, allow_nan=True, default=str)
    return text if len(text) <= _LONGEST_VALUE else text[:_LONGEST_VALUE] + "…"
