"""What `layout try --json` prints: what would be read from an export, cell by cell."""

from __future__ import annotations

from typing import Any

from qcreport.errors import ExportRefusedError
from qcreport.measurements import MeasurementSet

Outcome = MeasurementSet | ExportRefusedError | None
"""What came of an export: read, refused, or (None) left alone because of its name."""


def layout_try_json(outcome: Outcome) -> dict[str, Any]:
    """Return the outcome of reading one export in its documented JSON form.

    Parameters
    ----------
    outcome : MeasurementSet, ExportRefusedError or None
        None where the file is left alone: `is_ignored_name` is true of its name.

    Returns
    -------
    dict
        `outcome`, `code`, `text`, `cells`, `characteristics`, `notices`; see `layout_try.schema.json`.
    """
    if outcome is None:
        return _form("ignored", text="Not an export: a lock file or a hidden file. It is left alone.")
    if isinstance(outcome, ExportRefusedError):
        text = f"{outcome.file}: {outcome.text}"
        return _form("refused", code=outcome.code, text=text, cells=list(outcome.cells))
    n_values = sum(not m.missing for m in outcome.measurements)
    n_batches = len({m.batch for m in outcome.measurements})
    notices = [{"code": n.code, "cells": list(n.cells), "text": n.text} for n in outcome.notices]
    text = f"{outcome.export_name}: {n_values} values of {n_batches} batches were read."
    if notices:
        text += " " + " ".join(n.text for n in outcome.notices)
    return _form(
        "read_with_notices" if notices else "read",
        text=text,
        cells=[],
        characteristics=_characteristics(outcome),
        notices=notices,
    )


def _form(
    outcome: str,
    *,
    text: str,
    code: str | None = None,
    cells: list[str] | None = None,
    characteristics: list[dict[str, Any]] | None = None,
    notices: list[dict[str, Any]] | None = None,
) -> dict[str, Any]:
    return {
        "schema": "qcreport/layout_try/1",
        "outcome": outcome,
        "code": code,
        "text": text,
        "cells": cells or [],
        "characteristics": characteristics or [],
        "notices": notices or [],
    }


def _characteristics(result: MeasurementSet) -> list[dict[str, Any]]:
    """Return the values by characteristic and batch; missing ones stand in the notices only."""
    found: dict[str, dict[str, Any]] = {}
    for m in result.measurements:
        if m.missing:
            continue
        entry = found.setdefault(m.characteristic, {"name": m.characteristic, "unit": m.unit, "groups": {}})
        entry["groups"].setdefault(m.batch, []).append(
            {
                "cell": str(m.cell),
                "value": m.value,
                "raw": m.text,
                "censored": m.censored.value if m.censored is not None else None,
            }
        )
    return list(found.values())
