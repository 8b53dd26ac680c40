"""Replace, in a whole model, what the pinned fonts cannot draw."""

from __future__ import annotations

from dataclasses import fields, is_dataclass, replace
from typing import Any

from qcreport.report.glyphs import printable
from qcreport.report.model import ReportModel


def with_printable_texts(model: ReportModel, missing: set[str]) -> ReportModel:
    """Return the model with every text printable; characters that were replaced are added to `missing`."""
    cleaned = _cleaned(model, missing)
    assert isinstance(cleaned, ReportModel)  # noqa: S101 - `_cleaned` keeps each type
    return cleaned


def _cleaned(value: Any, missing: set[str]) -> Any:
    if isinstance(value, str):
        return printable(value, missing)
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
