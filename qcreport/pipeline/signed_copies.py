"""Signed copies of our own reports, dropped into the inbox by whoever signs in a PDF reader."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass
from datetime import datetime
from typing import Final

from qcreport.canonical import sha256_hex
from qcreport.errors import ExportRefusedError, LedgerError, NotOurReportError, SigningDeniedError
from qcreport.intake.names import one_line
from qcreport.issuing.signing import Filed, SigningDesk
from qcreport.records.facade import Records
from qcreport.settings.people import load_people
from qcreport.settings.site import Site
from qcreport.signing.copy_in_child import added_signature_in_child
from qcreport.signing.signed_copy import AddedSignature

_BEGINS: Final = b"%PDF-"
_RANGE: Final = re.compile(rb"/ByteRange\s*\[\s*0\s+\d{1,12}\s+(\d{1,12})\s+(\d{1,12})\s*\]")
_MOST_RANGES: Final = 4
"""Signatures whose end is looked at; the seal is the first in the file."""
REFUSED_COPY: Final = "signed_copy"
NOT_OURS: Final = "not_our_report"


@dataclass(frozen=True, slots=True, kw_only=True)
class TakenCopy:
    """What became of a signed copy."""

    number: str
    """The report."""
    filed: Filed | None
    """None where this very copy was filed before."""


class SignedCopies:
    """Takes signed copies of one site's reports."""

    def __init__(self, *, site: Site, records: Records, clock: Callable[[], datetime]) -> None:
        self._site = site
        self._records = records
        self._clock = clock

    def take(self, name: str, data: bytes) -> TakenCopy | None:
        """File a signed copy; None where a file is no PDF and so may be an export.

        Safe to repeat after a kill at any instant: a copy that is recorded is put in its place and no more.

        Raises
        ------
        ExportRefusedError
            A PDF that is no report of this site, or more or less than its newest version with one signature
            added by a person who may sign it so.
        """
        if not data.startswith(_BEGINS):
            return None
        number = self._number_of(data)
        if number is None:
            if not name.casefold().endswith(".pdf"):
                return None
            raise _not_ours(name)
        people = load_people(self._site.root)
        desk = SigningDesk(
            records=self._records, reports=self._site.folders.reports, people=people, clock=self._clock
        )
        digest = sha256_hex(data)
        if any(version.sha256 == digest for version in self._records.versions_of(number)):
            desk.current(number)
            return TakenCopy(number=number, filed=None)
        try:
            filed = desk.file(number, data, via="inbox", look=_look)
        except (SigningDeniedError, NotOurReportError, LedgerError) as error:
            raise _refused(name, number, error.text) from None
        return TakenCopy(number=number, filed=filed)

    def _number_of(self, data: bytes) -> str | None:
        """Return the report whose sealed bytes a file begins with.

        Only bytes are compared here: a hostile PDF is parsed in a process of its own.
        """
        for count, found in enumerate(_RANGE.finditer(data)):
            if count == _MOST_RANGES:
                break
            end = int(found.group(1)) + int(found.group(2))
            if end <= len(data):
                number = self._records.number_of_version(sha256_hex(data[:end]))
                if number is not None:
                    return number
        return None


def _look(original: bytes, copy: bytes, at: datetime) -> AddedSignature:
    return added_signature_in_child(original, copy, at=at)


def _not_ours(name: str) -> ExportRefusedError:
    return ExportRefusedError(
        NOT_OURS,
        file=one_line(name),
        where="the whole file",
        found="This PDF does not begin with a report that was sealed here.",
        expected="An export, or a signed copy of a report from the folder of reports.",
        next_step="Sign the report itself without printing or saving it anew, and drop that copy here.",
    )


def _refused(name: str, number: str, text: str) -> ExportRefusedError:
    return ExportRefusedError(
        REFUSED_COPY,
        file=one_line(name),
        where=f"the signed copy of report {number}",
        found=text,
        expected="The newest version with one signature added, by a person whom people.toml names.",
        next_step=f"Open {number} in the folder of reports, sign it in its field, and drop that copy here.",
    )
