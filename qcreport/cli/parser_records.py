"""The words of the `records` commands and of approval."""

from __future__ import annotations

import argparse
from collections.abc import Callable
from typing import Any, Final, TypeAlias

Commands: TypeAlias = "argparse._SubParsersAction[Any]"
Add: TypeAlias = Callable[..., argparse.ArgumentParser]

COMMANDS: Final = {
    "config approve": "config_approve",
    "records list": "records_list",
    "records check": "records_check",
    "records export": "records_export",
    "records import": "records_import",
    "records withdraw": "records_withdraw",
}
"""Each command and its module."""


def add_approve(config: Commands, add: Add) -> None:
    """Add `config approve`."""
    p = add(config, "config approve", "Approve a plan with its layout and rules.", site=True, json=False)
    p.add_argument("plan", metavar="PLAN", help="name or file of the plan")
    p.add_argument("--key", metavar="FILE", required=True, help="the person's key (keys new --for person)")
    p.add_argument("--passphrase-file", metavar="FILE", help="file of mode 600 with its passphrase")
    p.add_argument("--reason", metavar="TEXT", help="what the approval rests on")


def add_records(records: Commands, add: Add) -> None:
    """Add the commands of `records`."""
    p = add(records, "records list", "List reports.", site=True, json=True)
    p.add_argument("--from", dest="since", metavar="DAY", help="received on this day or later")
    p.add_argument("--to", dest="until", metavar="DAY", help="received on this day or earlier")
    for name, about in (
        ("line", "comparing this line"),
        ("batch", "comparing this batch"),
        ("characteristic", "comparing this characteristic"),
        ("answer", "with this answer, e.g. matters"),
        ("state", "reserved, sealed, signed, issued, returned, withdrawn or replaced"),
    ):
        p.add_argument(f"--{name}", metavar=name.upper(), help=about)
    p = add(records, "records check", "Find anything changed, dropped or missing.", site=True, json=True)
    p.add_argument(
        "--reread", metavar="N|all", help="also read N exports, or all, again and compare the store"
    )
    p.add_argument(
        "--checkpoint",
        metavar="FILE",
        action="append",
        help="checkpoints kept elsewhere (a copy of checkpoints.jsonl); repeatable",
    )
    p = add(records, "records export", "Write a period as one folder for an auditor.", site=True, json=False)
    p.add_argument("dir", metavar="DIR", help="a new or empty folder")
    p.add_argument("--from", dest="since", metavar="DAY", required=True, help="first day, YYYY-MM-DD")
    p.add_argument("--to", dest="until", metavar="DAY", required=True, help="last day, YYYY-MM-DD")
    p = add(records, "records import", "Take past exports into the store, no reports.", site=True, json=True)
    p.add_argument("files", metavar="FILE", nargs="+", help="exports, or folders of exports; oldest first")
    p.add_argument("--layout", metavar="NAME|FILE", help="else the layouts of the plans that fit the names")
    p = add(records, "records withdraw", "Withdraw a report.", site=True, json=False)
    p.add_argument("number", metavar="NUMBER", help="of the report")
    p.add_argument("--reason", metavar="TEXT", required=True, help="why")
