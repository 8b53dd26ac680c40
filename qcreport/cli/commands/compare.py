"""`qcreport compare EXPORT`."""

from __future__ import annotations

import argparse
import json
import secrets
import sys
from pathlib import Path

from qcreport.canonical import sha256_hex
from qcreport.cli.account import account
from qcreport.cli.now import now
from qcreport.cli.run import DONE, REFUSED, print_error
from qcreport.cli.words import outcome_lines
from qcreport.durable import make_folder, write_durably
from qcreport.errors import EnvironmentFailedError, ExportRefusedError, UsageError
from qcreport.pipeline.choose_plans import fitting_plans
from qcreport.pipeline.opened import Opened, opened
from qcreport.pipeline.outcome import Outcome, Received, Reported
from qcreport.pipeline.wish import Wish
from qcreport.settings import PlanSettings, Site, find_plan, load_plans, load_site
from qcreport.workbook.layout_try import layout_try_json


def run(arguments: argparse.Namespace) -> int:
    """Compare one export by every plan that fits; it stays where it is, refused or not."""
    site = load_site(Path(arguments.site))
    received = _received(Path(arguments.export), site)
    if arguments.workbook and arguments.out is None:
        raise UsageError("--workbook needs a folder to write to: --out DIR")
    _wish(arguments).require_reason()
    with opened(site, now, workers=1, seals=not arguments.no_report, progress=_progress) as work:
        if len(received.data) > site.limits.max_file_bytes:
            return _refused(work, received, _too_large(Path(arguments.export), site), arguments)
        work.pipeline.receive(received)
        try:
            plans = _plans(arguments, site, received.name)
        except ExportRefusedError as error:
            return _refused(work, received, error, arguments)
        code = DONE
        for settings in plans:
            try:
                outcome = _answer(work, received, settings, arguments)
            except ExportRefusedError as error:
                code = _refused(work, received, error, arguments, plan=settings.plan.name)
            else:
                _tell(outcome, arguments, several=len(plans) > 1)
    return code


def _tell(outcome: Outcome, arguments: argparse.Namespace, *, several: bool) -> None:
    if arguments.out is not None:
        _write_out(Path(arguments.out), outcome, several=several, workbook=arguments.workbook)
    if arguments.json:
        sys.stdout.write(outcome.result.decode("utf-8"))
    else:
        print("\n".join(outcome_lines(outcome)))


def _received(path: Path, site: Site) -> Received:
    """Read the export once; of one above the site's limit only the beginning."""
    try:
        with path.open("rb") as stream:
            data = stream.read(site.limits.max_file_bytes + 1)
    except (FileNotFoundError, IsADirectoryError) as error:
        raise UsageError(f"{path}: {error.strerror}. Name an export.", file=str(path)) from None
    except OSError as error:
        raise EnvironmentFailedError(f"{path} cannot be read: {error.strerror}.", file=str(path)) from None
    return Received(
        name=path.name,
        data=data,
        sha256=sha256_hex(data),
        claim=f"compare-{secrets.token_hex(8)}",
        actor=account(),
    )


def _too_large(path: Path, site: Site) -> ExportRefusedError:
    return ExportRefusedError(
        "too_large",
        file=path.name,
        where="the whole file",
        found=f"The file has {path.stat().st_size:,} bytes.",
        expected=f"At most {site.limits.max_file_bytes:,} bytes (the limit of this site).",
        next_step="Export fewer results at a time, or have the limit in site.toml raised.",
    )


def _plans(arguments: argparse.Namespace, site: Site, name: str) -> tuple[PlanSettings, ...]:
    if arguments.plan is not None:
        return (find_plan(site, arguments.plan),)
    plans = fitting_plans(name, load_plans(site))
    if len(plans) > 1 and arguments.json:
        names = ", ".join(p.plan.name for p in plans)
        raise UsageError(f"{len(plans)} plans fit {name}: {names}. With --json name one: --plan NAME")
    return plans


def _answer(
    work: Opened, received: Received, settings: PlanSettings, arguments: argparse.Namespace
) -> Outcome:
    try:
        return work.pipeline.answer(received, settings, _wish(arguments))
    except ExportRefusedError as error:
        if error.code == "already_read":
            raise UsageError(f'{error.found} Every further run must be explained: --reason "…".') from None
        raise


def _wish(arguments: argparse.Namespace) -> Wish:
    return Wish(
        reason=arguments.reason or "",
        leave_out=tuple(arguments.leave_out or ()),
        replaces=arguments.replaces or "",
        report=not arguments.no_report,
    )


def _refused(
    work: Opened,
    received: Received,
    error: ExportRefusedError,
    arguments: argparse.Namespace,
    *,
    plan: str = "",
) -> int:
    whole = error.code != "too_large"  # of a larger file only the beginning was read: no digest of it
    sha256 = received.sha256 if whole else None
    work.records.refuse(
        received.claim, error, export_sha256=sha256, folder="", actor=received.actor, plan_name=plan
    )
    if arguments.json:
        print(json.dumps(layout_try_json(error), ensure_ascii=False, indent=1))
    print_error(error, arguments)
    return REFUSED


def _write_out(folder: Path, outcome: Outcome, *, several: bool, workbook: bool) -> None:
    make_folder(folder)
    name = f"{outcome.plan_name}.result.json" if several else "result.json"
    write_durably(folder / name, outcome.result)
    if workbook:
        from qcreport.report.results_workbook import results_workbook

        write_durably(folder / name.replace("result.json", "results.xlsx"), results_workbook(outcome.result))
    if isinstance(outcome, Reported):
        try:
            report = outcome.path.read_bytes()
        except OSError as error:
            raise EnvironmentFailedError(
                f"{outcome.path} cannot be read: {error.strerror}.", file=str(outcome.path)
            ) from None
        write_durably(folder / f"{outcome.number}.pdf", report)


def _progress(text: str) -> None:
    if sys.stderr.isatty():
        print(f"… {text}", file=sys.stderr)
