"""Times as printed: local to the site with its offset, and in UTC."""

from __future__ import annotations

import datetime as dt
from zoneinfo import ZoneInfo, ZoneInfoNotFoundError

from qcreport.errors import ConfigError, Fault


def utc_moment(text: str) -> dt.datetime:
    """Return an ISO 8601 time with Z as an aware UTC datetime."""
    return dt.datetime.fromisoformat(text).astimezone(dt.UTC)


def local_time(text: str, zone: str, date: str = "%Y-%m-%d") -> str:
    """Return `2026-12-02 07:12 +01:00 (Europe/Berlin), 06:12 UTC`; plain UTC where that is the zone.

    `date` is the language's form of a date, for strftime.

    Raises
    ------
    ConfigError
        Where the zone is unknown.
    """
    moment = utc_moment(text)
    if zone in ("UTC", "Etc/UTC"):
        return f"{moment.strftime(date)} {moment:%H:%M} UTC"
    try:
        local = moment.astimezone(ZoneInfo(zone))
    except (ZoneInfoNotFoundError, ValueError, OSError) as error:
        fault = Fault(text=f"the time zone {zone!r} is unknown", file="site.toml", key="lab.time_zone")
        raise ConfigError((fault,)) from error
    offset = f"{local:%z}"
    utc_day = "" if local.date() == moment.date() else f"{moment.strftime(date)} "
    here = f"{local.strftime(date)} {local:%H:%M} {offset[:3]}:{offset[3:5]} ({zone})"
    return f"{here}, {utc_day}{moment:%H:%M} UTC"
