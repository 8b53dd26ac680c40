"""Replace, in everything that is to be printed, what the pinned fonts cannot draw."""

from __future__ import annotations

from dataclasses import fields, is_dataclass, replace
from typing import Any, TypeVar

from qcreport.report.glyphs import printable

T = TypeVar("T")


def with_printable_texts(value: T, missing: set[str]) -> T:
    """Return `value` (a frozen dataclass, tuple or text) with every text inside it printable.

    Characters that were replaced are added to `missing`. Done before anything is measured or broken into
    lines, so that names in figures and sentences agree.
    """
    cleaned: T = _cleaned(value, missing)
    return cleaned


def _cleaned(value: Any, missing: set[str]) -> Any:
    if isinstance(value, str):
        if value.isascii() and value.isprintable():
            return value
        text = printable(value, missing)
        return value if text == value else text
    if isinstance(value, tuple):
        items = [_cleaned(item, missing) for item in value]
        return tuple(items) if any(a is not b for a, b in zip(items, value, strict=True)) else value
    if is_dataclass(value) and not isinstance(value, type):
        changed = {}
        for field in fields(value):
            before = getattr(value, field.name)
            after = _cleaned(before, missing)
            if after is not before:
                changed[field.name] = after
        return replace(value, **changed) if changed else value
    return value
