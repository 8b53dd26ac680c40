"""`qcreport site new DIR`."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path

from qcreport.errors import UsageError
from qcreport.settings.new_site import NewSite, make_site

_QUESTIONS = (
    ("name", "Name of the laboratory"),
    ("address", "Its address"),
    ("time_zone", "Time zone, IANA name such as Europe/Berlin"),
    ("language", "Language of reports (en or de)"),
)


def run(arguments: argparse.Namespace) -> int:
    """Make a site; ask at the terminal for what the options leave open."""
    answers = {key: getattr(arguments, key) for key, _ in _QUESTIONS}
    missing = [key for key, _ in _QUESTIONS if not answers[key]]
    if missing and not sys.stdin.isatty():
        options = " ".join(f"--{key.replace('_', '-')} …" for key in missing)
        raise UsageError(f"Nobody is at the terminal to ask. Give: {options}")
    for key, question in _QUESTIONS:
        while not answers[key]:
            answers[key] = input(f"{question}: ").strip()
    site = make_site(Path(arguments.dir), NewSite(**answers))
    print(f"Site made: {site.root}")
    print(f'Next: qcreport keys new --for service "{answers["name"]}" --site {arguments.dir}')
    return 0
