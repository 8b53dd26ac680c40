"""The one clock of a command, handed down to whatever needs the time."""

from __future__ import annotations

import datetime as dt


def now() -> dt.datetime:
    """Return the current time in UTC."""
    return dt.datetime.now(dt.UTC)
