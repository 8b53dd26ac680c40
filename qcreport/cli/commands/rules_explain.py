"""`qcreport rules explain EXPORT`."""

from __future__ import annotations

import argparse
import json
from collections.abc import Iterator
from pathlib import Path

from qcreport.analysis.explain import Explained, explain
from qcreport.canonical import sha256_hex
from qcreport.cli.now import now
from qcreport.cli.run import DONE, REFUSED, print_error, printable
from qcreport.errors import ExportRefusedError, UsageError
from qcreport.measurements import MeasurementSet
from qcreport.pipeline.choose_plans import fitting_plans
from qcreport.pipeline.history import spread_history
from qcreport.records.facade import Records
from qcreport.settings import PlanSettings, Site, find_plan, load_plans, load_site
from qcreport.settings.keys import read_bytes
from qcreport.workbook.layout_try import layout_try_json
from qcreport.workbook.read_in_child import read_in_child


def run(arguments: argparse.Namespace) -> int:
    """Say which row applies to each characteristic and what would lead to another; nothing is recorded."""
    site = load_site(Path(arguments.site))
    path = Path(arguments.export)
    if not path.is_file():
        raise UsageError(f"{path} is not there. Name an export.", file=str(path))
    data = read_bytes(path, "the export")
    documents, texts = [], []
    try:
        for settings in _plans(arguments, site, path.name):
            measurements = _read(site, settings, path.name, data)
            records = Records.open(site.folders.records, now, archive_folder=site.folders.archive)
            history = spread_history(records, measurements, settings.plan)
            explained = explain(measurements, settings.plan, settings.rules, history)
            documents.append(_json(settings, path.name, data, explained))
            texts.append("\n".join(_lines(settings, path.name, explained)))
    except ExportRefusedError as error:
        if arguments.json:
            print(json.dumps(layout_try_json(error), ensure_ascii=False, indent=1))
        print_error(error, arguments)
        return REFUSED
    if arguments.json:
        print(json.dumps(documents[0], ensure_ascii=False, indent=1))
    else:
        print(printable("\n\n".join(texts)))
    return DONE


def _plans(arguments: argparse.Namespace, site: Site, name: str) -> tuple[PlanSettings, ...]:
    if arguments.plan is not None:
        return (find_plan(site, arguments.plan),)
    plans = fitting_plans(name, load_plans(site))
    if len(plans) > 1 and arguments.json:
        names = ", ".join(p.plan.name for p in plans)
        raise UsageError(f"{len(plans)} plans fit {name}: {names}. With --json name one: --plan NAME")
    return plans


def _read(site: Site, settings: PlanSettings, name: str, data: bytes) -> MeasurementSet:
    return read_in_child(
        data,
        name=name,
        layout_bytes=settings.layout_file.data,
        layout_file=settings.layout_file.name,
        limits=site.limits,
        second_look=site.intake.second_look,
    )


def _json(
    settings: PlanSettings, name: str, data: bytes, explained: tuple[Explained, ...]
) -> dict[str, object]:
    return {
        "export": {"name": name, "sha256": sha256_hex(data)},
        "plan": settings.plan.name,
        "table": settings.rules.name,
        "characteristics": [e.to_json() for e in explained],
    }


def _lines(settings: PlanSettings, name: str, explained: tuple[Explained, ...]) -> Iterator[str]:
    approved = settings.rules.approved
    by = "whose file names no approval" if approved is None else f"approved by {approved.by}, {approved.on}"
    yield f"{name} by the plan {settings.plan.name} and the table {settings.rules.name}, {by}"
    for e in explained:
        yield ""
        yield f"{e.name}: {e.choice.procedure}, row {e.choice.rule.id}"
        yield f"  {e.choice.rule.reason}"
        yield "  Facts"
        for fact in e.gathered.evidence:
            yield f"    {fact.fact:<11} {fact.value}. {fact.observed}".rstrip()
        yield "  Rows tried"
        for step in e.choice.trace:
            yield f"    {step.id}: {'applies; ' if step.applied else ''}{step.why}"
        yield from _alternative_lines(e)
    yield ""
    yield f"Next: qcreport rules show {settings.rules.name}"


def _alternative_lines(explained: Explained) -> Iterator[str]:
    if not explained.alternatives:
        yield "  No single fact would lead to another row."
        return
    yield "  Another row, if one fact alone were otherwise"
    for a in explained.alternatives:
        yield f"    {a.fact} = {a.other} (here {a.here}): {a.procedure}, row {a.row}"
