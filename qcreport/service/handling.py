"""One claimed export through the injected work, whatever that runs into."""

from __future__ import annotations

import datetime as dt
import errno
import traceback
from collections.abc import Callable

from qcreport.errors import ConfigError, EnvironmentFailedError, ExportRefusedError, SigningDeniedError
from qcreport.intake.claim import Claims
from qcreport.intake.exports import ClaimedExport, StillChangingError
from qcreport.intake.journal import Claim
from qcreport.intake.names import one_line
from qcreport.intake.refusals import put_refused
from qcreport.service.model import Event, EventKind, Outcome, OutcomeKind, ServiceSettings

Process = Callable[[ClaimedExport], Outcome]
Tell = Callable[[Event], None]

NOT_THE_FILES_FAULT = (EnvironmentFailedError, SigningDeniedError, ConfigError)
"""What would meet every file: the work pauses and is tried again, and no file is set aside for it."""

_MACHINE = frozenset(
    {
        errno.ENOSPC,
        errno.EDQUOT,
        errno.EROFS,
        errno.EIO,
        errno.EMFILE,
        errno.ENFILE,
        errno.ENOMEM,
        errno.EAGAIN,
    }
)


class Handling:
    """Handles claims one by one.

    Parameters
    ----------
    settings : ServiceSettings
        The site's folders.
    claims : Claims
        The site's claims.
    process : callable
        Reads, compares, seals; may raise `ExportRefusedError`.
    tell : callable
        Told what happened, before the claim is removed; writes the ledger.
    """

    def __init__(self, settings: ServiceSettings, claims: Claims, process: Process, tell: Tell) -> None:
        self._settings = settings
        self._claims = claims
        self._process = process
        self._tell = tell

    def handle(self, claim: Claim) -> EventKind:
        """Handle one claim up to the point where it may be removed, and return how it ended.

        Raises
        ------
        StillChangingError
            Where somebody still writes to the file.
        EnvironmentFailedError, SigningDeniedError, ConfigError
            What is not the file's fault; the claim stays.
        """
        export: ClaimedExport | None = None
        try:
            export = self._claims.load(claim)
            return self._worked(export)
        except (StillChangingError, *NOT_THE_FILES_FAULT):
            raise
        except OSError as error:
            if error.errno in _MACHINE:
                text = f"{one_line(claim.name)}: {error.strerror}."
                raise EnvironmentFailedError(text) from error
            return self._failed(claim, export, error)
        except Exception as error:  # noqa: BLE001  one file's fault must not stop the service
            return self._failed(claim, export, error)

    def _worked(self, export: ClaimedExport) -> EventKind:
        try:
            if export.refusal is not None:
                raise export.refusal
            outcome = self._process(export)
        except ExportRefusedError as error:
            return self._refused(export, error)
        self._tell(
            Event(kind=EventKind.HANDLED, text=outcome.text, claim=export.claim, export=export),
        )
        return EventKind.REFUSED if outcome.kind is OutcomeKind.REFUSED else EventKind.HANDLED

    def _refused(self, export: ClaimedExport, error: ExportRefusedError) -> EventKind:
        claimed_at = dt.datetime.fromisoformat(export.claim.claimed_at)
        day = claimed_at.astimezone(self._settings.time_zone).date()
        folder = put_refused(self._settings.refused, export, error, day)
        self._tell(
            Event(
                kind=EventKind.REFUSED,
                text=f"{export.shown_name} was not read ({error.code}): see {folder.name}.",
                claim=export.claim,
                export=export,
                refusal=error,
                folder=folder,
            )
        )
        return EventKind.REFUSED

    def _failed(self, claim: Claim, export: ClaimedExport | None, error: Exception) -> EventKind:
        """Set a claim aside; told first, so that a kill in between repeats both and loses neither."""
        folder = self._settings.work / "failed" / claim.id
        self._tell(
            Event(
                kind=EventKind.FAILED,
                text=f"{one_line(claim.name)} met a fault of the program: {one_line(str(error))[:300]}",
                claim=claim,
                export=export,
                folder=folder,
            )
        )
        self._claims.set_aside(claim, "".join(traceback.format_exception(error)))
        return EventKind.FAILED
