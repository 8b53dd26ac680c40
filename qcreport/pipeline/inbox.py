"""One claimed export from the inbox: answered by every plan that fits, or refused with the reason."""

from __future__ import annotations

import datetime as dt
import zoneinfo
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

from qcreport.errors import ExportRefusedError
from qcreport.intake.exports import ClaimedExport
from qcreport.intake.refusals import put_refused
from qcreport.pipeline.choose_plans import fitting_plans
from qcreport.pipeline.outcome import Outcome, Received
from qcreport.pipeline.pipeline import Pipeline
from qcreport.pipeline.signed_copies import SignedCopies, TakenCopy
from qcreport.records.facade import Records
from qcreport.settings.plans import PlanSettings
from qcreport.settings.site import Site

ACTOR = "service"


@dataclass(frozen=True, slots=True, kw_only=True)
class Refused:
    """An export that was refused by a plan, or before any plan was asked."""

    error: ExportRefusedError
    """Why."""
    folder: Path
    """Where original and reason are."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Handled:
    """What became of one claimed export."""

    name: str
    """File name as dropped."""
    outcomes: tuple[Outcome, ...]
    """Reports."""
    refusals: tuple[Refused, ...]
    """Refusals; both may be there where several plans fit."""
    copy: TakenCopy | None = None
    """A signed copy of a report, which is no export."""


class InboxHandler:
    """Answers claimed exports; plans are read anew for each, so that a mended one counts at once."""

    def __init__(
        self,
        *,
        site: Site,
        records: Records,
        pipeline: Pipeline,
        load_plans: Callable[[Site], tuple[PlanSettings, ...]],
        clock: Callable[[], dt.datetime],
    ) -> None:
        self._site = site
        self._records = records
        self._pipeline = pipeline
        self._load_plans = load_plans
        self._copies = SignedCopies(site=site, records=records, clock=clock)

    def handle(self, export: ClaimedExport) -> Handled:
        """Answer or refuse one export; safe to repeat after a kill at any instant.

        Raises
        ------
        ExportRefusedError
            Where no plan fits its name, the file was refused unread, or it is a PDF but no copy of a report
            that can be filed.
        """
        if export.data is None or export.sha256 is None:
            raise export.refusal or _unreadable(export.name)
        copy = self._copies.take(export.name, export.data)
        if copy is not None:
            return Handled(name=export.name, outcomes=(), refusals=(), copy=copy)
        received = Received(
            name=export.name, data=export.data, sha256=export.sha256, claim=export.claim.id, actor=ACTOR
        )
        self._pipeline.receive(received)
        outcomes: list[Outcome] = []
        refusals: list[Refused] = []
        for settings in fitting_plans(export.name, self._load_plans(self._site)):
            try:
                outcomes.append(self._pipeline.answer(received, settings))
            except ExportRefusedError as error:
                refusals.append(self._refuse(export, error, settings.plan.name))
        return Handled(name=export.name, outcomes=tuple(outcomes), refusals=tuple(refusals))

    def _refuse(self, export: ClaimedExport, error: ExportRefusedError, plan_name: str) -> Refused:
        claimed_at = dt.datetime.fromisoformat(export.claim.claimed_at)
        day = claimed_at.astimezone(zoneinfo.ZoneInfo(self._site.time_zone)).date()
        folder = put_refused(self._site.folders.refused, export, error, day)
        self._records.refuse(
            export.claim.id,
            error,
            export_sha256=export.sha256,
            folder=folder.name,
            actor=ACTOR,
            plan_name=plan_name,
        )
        return Refused(error=error, folder=folder)


def _unreadable(name: str) -> ExportRefusedError:
    return ExportRefusedError(
        "damaged_or_incomplete",
        file=name,
        where="the whole file",
        found="The file could not be read.",
        expected="A complete export.",
        next_step="Copy it again.",
    )
