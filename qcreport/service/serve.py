"""The service of one opened site: the loop with the pipeline, the records and the signals put in."""

from __future__ import annotations

import zoneinfo
from collections.abc import Callable
from datetime import datetime

from qcreport.intake.exports import ClaimedExport
from qcreport.pipeline.inbox import Handled, InboxHandler, Refused
from qcreport.pipeline.opened import Opened
from qcreport.pipeline.outcome import Reported
from qcreport.pipeline.signed_copies import TakenCopy
from qcreport.service.bookkeeping import record_event
from qcreport.service.loop import Service
from qcreport.service.model import Counts, Event, EventKind, Outcome, OutcomeKind, ServiceSettings
from qcreport.service.stopping import Stop, stop_on_signals
from qcreport.service.wake import Wake
from qcreport.settings import Site, load_plans
from qcreport.workbook.complete import looks_complete


class Audience:
    """Who is told how the service gets on; the default hears nothing."""

    def handled(self, handled: Handled) -> None:
        """Hear what became of an export that was read."""

    def event(self, event: Event) -> None:
        """Hear of a start, a stop, a lost share, a pause, a refusal before reading, a failure."""

    def progress(self, counts: Counts) -> None:
        """Hear the counts after each change."""


def serve(work: Opened, clock: Callable[[], datetime], audience: Audience, *, once: bool) -> Counts:
    """Run the service of a site until it is asked to stop; with `once` until the inbox is empty.

    Raises
    ------
    EnvironmentFailedError
        Where another service of this site runs; with `once` also where the machine fails.
    """
    handler = InboxHandler(
        site=work.site, records=work.records, pipeline=work.pipeline, load_plans=load_plans, clock=clock
    )

    def process(export: ClaimedExport) -> Outcome:
        handled = handler.handle(export)
        audience.handled(handled)
        return summary(handled)

    def tell(event: Event) -> None:
        record_event(work.records, event)
        if event.kind is not EventKind.HANDLED:
            audience.event(event)

    stop, wake = Stop(), Wake()
    service = Service(
        service_settings(work.site),
        process=process,
        tell=tell,
        looks_complete=looks_complete,
        wait=wake.wait,
        pull=wake.pull,
        stop=stop,
        clock=clock,
        progress=audience.progress,
    )
    try:
        with stop_on_signals(stop, wake.pull):
            return service.run(once=once)
    finally:
        wake.close()


def service_settings(site: Site) -> ServiceSettings:
    """Return the service's part of a site's settings."""
    return ServiceSettings(
        inbox=site.folders.inbox,
        refused=site.folders.refused,
        work=site.folders.work,
        max_bytes=site.limits.max_file_bytes,
        quiet_s=site.intake.quiet_s,
        poll_s=site.intake.poll_s,
        time_zone=zoneinfo.ZoneInfo(site.time_zone),
    )


def summary(handled: Handled) -> Outcome:
    """Return what became of an export as the loop counts it."""
    if handled.copy is not None:
        return Outcome(kind=OutcomeKind.RECORDED, text=copy_words(handled.name, handled.copy))
    if handled.refusals and not handled.outcomes:
        return Outcome(kind=OutcomeKind.REFUSED, text=_refused_words(handled.refusals[0]))
    new = [o for o in handled.outcomes if isinstance(o, Reported) and o.new]
    numbers = ", ".join(o.number for o in handled.outcomes if isinstance(o, Reported))
    if new:
        return Outcome(kind=OutcomeKind.REPORTED, text=f"{handled.name} was reported as {numbers}.")
    return Outcome(kind=OutcomeKind.RECORDED, text=f"{handled.name} was answered before, in {numbers}.")


def copy_words(name: str, copy: TakenCopy) -> str:
    """Return what became of a signed copy, one sentence."""
    filed = copy.filed
    if filed is None:
        return f"{name} is a copy of {copy.number} that was filed before."
    issued = "; it is issued" if filed.issued else ""
    return f"{name}: {filed.number} is {filed.role} by {filed.person.name}{issued}."


def _refused_words(refused: Refused) -> str:
    return f"{refused.error.file} was not read ({refused.error.code}): see {refused.folder.name}."
