"""`qcreport records import FILE…`."""

from __future__ import annotations

import argparse
import json
import os
import sys
from collections import Counter
from pathlib import Path
from typing import Any

from qcreport.cli.account import account
from qcreport.cli.now import now
from qcreport.cli.run import DONE, REFUSED, printable
from qcreport.errors import UsageError
from qcreport.pipeline.importing import Imported, ImportState, import_files
from qcreport.records.facade import Records
from qcreport.settings import Site, load_plans, load_site
from qcreport.settings.keys import read_bytes
from qcreport.settings.plans import SettingsFile
from qcreport.settings.site import require_folders

MOST_READERS = 4


def run(arguments: argparse.Namespace) -> int:
    """Take past exports into the store without reports; tell progress, and at the end what was refused."""
    site = load_site(Path(arguments.site))
    plans = load_plans(site)
    fixed = None if arguments.layout is None else _layout(site, arguments.layout)
    require_folders(site)
    paths = _files(arguments.files)
    records = Records.open(site.folders.records, now, archive_folder=site.folders.archive)
    found: list[Imported] = []
    readers = max(1, min(MOST_READERS, os.cpu_count() or 1))
    for item in import_files(site, records, paths, plans, fixed=fixed, actor=account(), readers=readers):
        found.append(item)
        _progress(item, len(found), len(paths))
    if arguments.json:
        print(json.dumps({"files": [_json(item) for item in found]}, ensure_ascii=False, indent=1))
    else:
        print("\n".join(_lines(found)))
    return REFUSED if any(item.state is ImportState.REFUSED for item in found) else DONE


def _layout(site: Site, name: str) -> SettingsFile:
    """Return the layout of that file, or of that name in the site."""
    path = Path(name)
    if not path.is_file():
        path = site.root / "config" / "layouts" / f"{name}.toml"
    return SettingsFile(name=path.name, data=read_bytes(path, "the layout"))


def _files(names: list[str]) -> list[Path]:
    """Return the files named, those of a folder by name; all must be there before anything is read."""
    paths: list[Path] = []
    for name in names:
        path = Path(name)
        if path.is_dir():
            paths += sorted(p for p in path.iterdir() if p.is_file() and not p.name.startswith((".", "~")))
        elif path.is_file():
            paths.append(path)
        else:
            raise UsageError(f"{path} is not there. Name exports, or a folder of exports.", file=name)
    return paths


def _progress(item: Imported, done: int, total: int) -> None:
    text = f"{done} of {total}  {item.state}  {item.name}"
    if item.refusal is not None:
        text += f"  {item.refusal.code}"
    print(printable(text), file=sys.stderr, flush=True)


def _lines(found: list[Imported]) -> list[str]:
    states = Counter(item.state for item in found)
    surveys = [item.survey for item in found if item.survey is not None]
    lines = [
        f"{states[ImportState.IMPORTED]} imported, {states[ImportState.KNOWN]} known already, "
        f"{states[ImportState.REFUSED]} refused.",
        f"{sum(s.new for s in surveys)} values new, {sum(s.known for s in surveys)} known, "
        f"{sum(len(s.changed) for s in surveys)} changed; "
        f"{sum(len(s.retests) for s in surveys)} flagged: retest?",
    ]
    for item in found:
        if item.refusal is not None:
            lines.append(printable(item.refusal.five_lines().rstrip()))
    return lines


def _json(item: Imported) -> dict[str, Any]:
    survey, refusal = item.survey, item.refusal
    return {
        "name": item.name,
        "layout": item.layout,
        "state": str(item.state),
        "new": None if survey is None else survey.new,
        "known": None if survey is None else survey.known,
        "changed": None if survey is None else len(survey.changed),
        "retests": None if survey is None else len(survey.retests),
        "refusal": None if refusal is None else {"code": refusal.code, "text": refusal.text},
    }
