"""`qcreport config check`."""

from __future__ import annotations

import argparse
import json
from collections.abc import Callable
from pathlib import Path
from typing import TypeVar

from qcreport.cli.now import now
from qcreport.errors import ConfigError, Fault, QcReportError
from qcreport.pipeline.key import load_service_key
from qcreport.pipeline.templates import load_site_templates
from qcreport.rules import parse_rules
from qcreport.settings import load_site
from qcreport.settings.people import load_people
from qcreport.settings.plans import load_plans_below
from qcreport.settings.site import Site, require_folders
from qcreport.workbook.layout import parse_layout

_T = TypeVar("_T")


def run(arguments: argparse.Namespace) -> int:
    """Read everything; print what holds, or raise with all faults at once."""
    root = Path(arguments.site).resolve()
    faults: list[Fault] = []
    lines: list[str] = []

    def check(what: str, say: Callable[[], str]) -> None:
        try:
            lines.append(f"{what + ':':<11}{say()}")
        except ConfigError as error:
            faults.extend(error.faults)
        except QcReportError as error:
            faults.append(Fault(text=error.text, file=error.file or what))

    site = _site(root, faults)
    if site is not None:
        check("folders", lambda: _folders(site))
    check("rules", lambda: _rules(root))
    check("layouts", lambda: _layouts(root))
    check("plans", lambda: _plans(root))
    check("people", lambda: _people(root))
    if site is not None:
        check("templates", lambda: _templates(site))
        check("key", lambda: _key(site))
    if site is None or faults:
        raise ConfigError(tuple(dict.fromkeys(faults)))
    if arguments.json:
        print(json.dumps({"ok": True, "faults": []}, indent=1))
    else:
        print(f"Site {site.root}: nothing wrong was found.")
        print("\n".join(lines))
        print(_next(site, arguments.site))
    return 0


def _site(root: Path, faults: list[Fault]) -> Site | None:
    """Return the site, or None with the faults of site.toml added; the other files are read all the same."""
    try:
        return load_site(root)
    except ConfigError as error:
        faults.extend(error.faults)
        return None


def _next(site: Site, named: str) -> str:
    if not any((site.root / "config" / "plans").glob("*.toml")):
        return (
            f"Next: write a plan into {site.root / 'config' / 'plans'} and its layout into "
            f"{site.root / 'config' / 'layouts'}; qcreport layout try EXPORT --layout FILE shows it"
        )
    return f"Next: drop an export into {site.folders.inbox} and run qcreport watch --site {named}"


def _folders(site: Site) -> str:
    require_folders(site)
    return "all there"


def _rules(root: Path) -> str:
    tables = _all_of(root / "config" / "rules", parse_rules)
    return ", ".join(f"{t.name} ({len(t.rows)} rows)" for t in tables)


def _layouts(root: Path) -> str:
    return (
        ", ".join(layout.name for layout in _all_of(root / "config" / "layouts", parse_layout)) or "none yet"
    )


def _all_of(folder: Path, parse: Callable[[bytes, str], _T]) -> list[_T]:
    """Return every file of a folder as parsed; a ConfigError with the faults of all."""
    parsed: list[_T] = []
    faults: list[Fault] = []
    for path in sorted(folder.glob("*.toml")):
        try:
            parsed.append(parse(path.read_bytes(), path.name))
        except ConfigError as error:
            faults.extend(error.faults)
    if faults:
        raise ConfigError(tuple(faults))
    return parsed


def _plans(root: Path) -> str:
    plans = load_plans_below(root)
    if not plans:
        return "none yet"
    return ", ".join(p.plan.name + ("" if p.plan.approved is not None else " (not approved)") for p in plans)


def _people(root: Path) -> str:
    persons = load_people(root).persons
    return ", ".join(f"{p.name} ({', '.join(p.may)})" for p in persons) or "nobody may sign yet"


def _templates(site: Site) -> str:
    changed = load_site_templates(site).changed
    return f"changed by the lab: {', '.join(changed)}" if changed else "as shipped"


def _key(site: Site) -> str:
    moment = now()
    key = load_service_key(site, moment)
    return f"{key.subject}, {(key.not_after - moment).days} days left"
