"""The moment of a record: UTC, whole seconds."""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable

Clock = Callable[[], dt.datetime]
"""Returns the aware current time."""


def utc_text(moment: dt.datetime) -> str:
    """Return an aware time as UTC, ISO 8601 with Z, whole seconds."""
    return moment.astimezone(dt.UTC).strftime("%Y-%m-%dT%H:%M:%SZ")
