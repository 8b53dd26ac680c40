"""Days as people write them, in the site's zone, as moments of the records."""

from __future__ import annotations

import datetime as dt
import zoneinfo

from qcreport.errors import UsageError
from qcreport.records.moments import utc_text


def day_begins(text: str, zone: str) -> str:
    """Return the UTC time at which a day (YYYY-MM-DD) begins; a full time with its offset is taken as it is.

    Raises
    ------
    UsageError
        Where the text is neither.
    """
    return utc_text(_moment(text, zone, days=0))


def day_ends(text: str, zone: str) -> str:
    """Return the UTC time at which a day has ended, so that the whole day counts."""
    return utc_text(_moment(text, zone, days=1))


def _moment(text: str, zone: str, *, days: int) -> dt.datetime:
    try:
        if len(text) <= len("YYYY-MM-DD"):
            day = dt.date.fromisoformat(text) + dt.timedelta(days=days)
            return dt.datetime.combine(day, dt.time(), tzinfo=zoneinfo.ZoneInfo(zone))
        moment = dt.datetime.fromisoformat(text)
    except (ValueError, OverflowError):
        raise _no_time(text) from None
    if moment.tzinfo is None:
        raise _no_time(text)
    return moment


def _no_time(text: str) -> UsageError:
    return UsageError(f"{text!r} is no day such as 2026-11-02 (or a time with its offset).")
