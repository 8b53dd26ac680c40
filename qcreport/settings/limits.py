"""The [limits] of site.toml: every bound of a reading, each with its default."""

from __future__ import annotations

import dataclasses

from qcreport.toml_source import TableReader
from qcreport.workbook.limits import Limits


def parse_limits(table: TableReader) -> Limits:
    """Return the limits, defaults where the table is silent; whole numbers and seconds must be positive."""
    defaults = Limits()
    chosen: dict[str, float | int] = {}
    for field in dataclasses.fields(Limits):
        default = getattr(defaults, field.name)
        if isinstance(default, int):
            chosen[field.name] = table.integer(field.name, default, minimum=1)
        else:
            chosen[field.name] = table.number(field.name, default, above=0.0)
    return dataclasses.replace(defaults, **chosen)  # type: ignore[arg-type]
