"""`qcreport config check`."""

from __future__ import annotations

import argparse
import json
from pathlib import Path

from qcreport.cli.now import now
from qcreport.errors import ConfigError, Fault, QcReportError
from qcreport.pipeline.key import load_service_key
from qcreport.pipeline.templates import load_site_templates
from qcreport.rules import parse_rules
from qcreport.settings import load_plans, load_site
from qcreport.settings.site import Site, require_folders


def run(arguments: argparse.Namespace) -> int:
    """Read everything; print what holds, or raise with all faults at once."""
    site = load_site(Path(arguments.site))
    faults: list[Fault] = []
    lines: list[str] = []
    for what, check in (
        ("folders", _folders),
        ("rules", _rules),
        ("plans", _plans),
        ("templates", _templates),
        ("key", _key),
    ):
        try:
            lines.append(f"{what + ':':<11}{check(site)}")
        except ConfigError as error:
            faults.extend(error.faults)
        except QcReportError as error:
            faults.append(Fault(text=error.text, file=error.file or what))
    if faults:
        raise ConfigError(tuple(dict.fromkeys(faults)))
    if arguments.json:
        print(json.dumps({"ok": True, "faults": []}, indent=1))
    else:
        print(f"Site {site.root}: nothing wrong was found.")
        print("\n".join(lines))
        print(
            f"Next: drop an export into {site.folders.inbox} and run qcreport watch --site {arguments.site}"
        )
    return 0


def _folders(site: Site) -> str:
    require_folders(site)
    return "all there"


def _rules(site: Site) -> str:
    paths = sorted((site.root / "config" / "rules").glob("*.toml"))
    tables = [parse_rules(p.read_bytes(), p.name) for p in paths]
    return ", ".join(f"{t.name} ({len(t.rows)} rows)" for t in tables)


def _plans(site: Site) -> str:
    plans = load_plans(site)
    if not plans:
        return "none yet; write one into config/plans"
    return ", ".join(p.plan.name + ("" if p.plan.approved is not None else " (not approved)") for p in plans)


def _templates(site: Site) -> str:
    changed = load_site_templates(site).changed
    return f"changed by the lab: {', '.join(changed)}" if changed else "as shipped"


def _key(site: Site) -> str:
    moment = now()
    key = load_service_key(site, moment)
    return f"{key.subject}, {(key.not_after - moment).days} days left"
