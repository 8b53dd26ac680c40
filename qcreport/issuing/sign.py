"""A report signed by a person: the box on the page filled, the signature made, the signed report filed."""

from __future__ import annotations

from datetime import datetime
from typing import Final
from zoneinfo import ZoneInfo

from qcreport.issuing.signing import Filed, SigningDesk
from qcreport.signing.countersign import countersign, free_field
from qcreport.signing.keys import SigningKey

MEANINGS: Final = {"reviewed": "Reviewed", "authorised": "Authorised"}
"""What is printed beside name and time; the signature itself states the plain word."""


def sign_report(
    desk: SigningDesk,
    number: str,
    key: SigningKey,
    *,
    role: str,
    at: datetime,
    time_zone: str,
    location: str,
) -> Filed:
    """Sign a report and file it.

    Parameters
    ----------
    desk : SigningDesk
        The site's.
    number : str
        The report.
    key : SigningKey
        The person's own, just opened.
    role : {"reviewed", "authorised"}
        What the signature means.
    at : datetime
        Aware; the time stated in the signature and on the page.
    time_zone : str
        Zone of the time on the page.
    location : str
        Stated in the signature.

    Raises
    ------
    SigningDeniedError
        Where this person must not sign it so, or the certificate is not valid now.
    UsageError
        Where there is no such report.
    """
    from qcreport.report.stamp import render_stamp

    person = desk.person_of(key.fingerprint_sha256)
    desk.require_may_sign(number, role, person)
    _, original = desk.current(number)
    place = free_field(original, role)
    moment = at.replace(microsecond=0)
    stamp = render_stamp(
        person.name, MEANINGS[role], printed_time(moment, time_zone), place.width_pt, place.height_pt
    )
    signed = countersign(
        original, key, role=role, name=person.name, at=moment, location=location, stamp=stamp
    )
    return desk.file(number, signed, via="sign")


def printed_time(moment: datetime, time_zone: str) -> str:
    """Return a time as it stands in the box on the page: local, with its distance from UTC."""
    local = moment.astimezone(ZoneInfo(time_zone))
    offset = local.strftime("%z")
    return f"{local:%Y-%m-%d %H:%M} {offset[:3]}:{offset[3:5]}"
