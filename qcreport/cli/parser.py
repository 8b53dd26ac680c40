"""The words of the command line, grouped in `--help` by the person who needs them."""

from __future__ import annotations

import argparse
import os
from typing import Final, NoReturn, TypeAlias

import qcreport
from qcreport.cli import parser_records, parser_signing
from qcreport.errors import UsageError

COMMANDS: Final[dict[str, str]] = {
    "compare": "compare",
    **parser_signing.COMMANDS,
    "site new": "site_new",
    "config check": "config_check",
    "plan propose": "plan_propose",
    "plan size": "plan_size",
    "layout try": "layout_try",
    "rules show": "rules_show",
    "rules explain": "rules_explain",
    "keys new": "keys_new",
    "verify": "verify",
    "extract": "extract",
    **parser_records.COMMANDS,
    "watch": "watch",
    "demo": "demo",
}
"""Each command and the module in `qcreport.cli.commands` that runs it."""

HELP: Final = """\
qcreport: from an instrument's Excel export to a sealed report of which batches or lines differ

Every day
  compare EXPORT            one export through the whole pipeline to a sealed report
  sign [REPORT]             sign a report as reviewed or authorised, or return it; else what waits

Setting up
  site new DIR              make a site: folders, settings, rules
  keys new                  make the key that seals, or a person's key
  config check              read all settings and say every fault at once
  config approve PLAN       approve a plan with its layout and rules, by a person's key
  plan propose | size       draft a layout and a plan from an export; how many results a difference needs
  layout try EXPORT         show what would be read from an export, cell by cell
  rules show [TABLE]        print a decision table
  rules explain EXPORT      which row applies, and which fact would lead to another

Auditors
  verify REPORT.pdf         seal, attachments and numbers, from the file alone
  extract REPORT.pdf DIR    write the attached export, settings and result
  records list | check      what was reported; whether anything was changed
  records export DIR        a period as one folder: reports, originals, ledger, how to check them
  records import FILE…      past exports into the store, without reports
  records withdraw NUMBER   withdraw a report, with the reason

Service
  watch [--once]            take every export dropped into the inbox
  demo [DIR]                a site with examples, run from inbox to verified reports

`qcreport COMMAND --help` explains one command. --site DIR or QCREPORT_SITE names the site; else the current
folder is it. Exit codes: 0 done; 1 the answer is no; 2 usage or settings wrong; 3 the export was refused;
4 the environment failed (disk, key, share).

A report supports and never replaces the release decision of the responsible person.
"""


class _Parser(argparse.ArgumentParser):
    """A parser whose top-level help is grouped by person and whose faults are our own errors."""

    def format_help(self) -> str:
        return HELP if self.prog == "qcreport" else super().format_help()

    def error(self, message: str) -> NoReturn:
        raise UsageError(f"{message}. See: {self.prog} --help")


def build_parser() -> argparse.ArgumentParser:
    """Return the parser of the whole command line."""
    parser = _Parser(prog="qcreport", allow_abbrev=False)
    parser.add_argument("--version", action="version", version=f"qcreport {qcreport.__version__}")
    commands = parser.add_subparsers(dest="word", required=True, metavar="COMMAND")
    _compare(commands)
    parser_signing.add_sign(commands, _add)
    _setting_up(commands)
    _auditors(commands)
    _service(commands)
    return parser


Commands: TypeAlias = "argparse._SubParsersAction[_Parser]"


def _add(commands: Commands, words: str, about: str, *, site: bool, json: bool) -> _Parser:
    """Add one command with the options many share."""
    last = words.split()[-1]
    parser = commands.add_parser(last, help=about, description=about, allow_abbrev=False)
    parser.set_defaults(command=words)
    if site:
        parser.add_argument(
            "--site",
            default=os.environ.get("QCREPORT_SITE", "."),
            metavar="DIR",
            help="the site's folder (else QCREPORT_SITE, else the current folder)",
        )
    if json:
        parser.add_argument("--json", action="store_true", help="one JSON document on standard output")
    return parser


def _group(commands: Commands, word: str, about: str) -> Commands:
    parser = commands.add_parser(word, help=about, description=about, allow_abbrev=False)
    return parser.add_subparsers(dest="second", required=True, metavar="WHAT")


def _compare(commands: Commands) -> None:
    p = _add(commands, "compare", "Compare one export and issue a sealed report.", site=True, json=True)
    p.add_argument("export", metavar="EXPORT", help="the export; it stays where it is")
    p.add_argument("--plan", metavar="NAME|FILE", help="use this plan, whatever the file's name")
    p.add_argument("--out", metavar="DIR", help="also write NUMBER.pdf and result.json there")
    p.add_argument("--workbook", action="store_true", help="with --out: also results.xlsx, real numbers")
    p.add_argument("--no-report", action="store_true", help="compute and record, seal no report")
    p.add_argument(
        "--leave-out",
        metavar="CELL",
        action="append",
        help='leave out the value in this cell, e.g. "Results!E12"; both answers are printed (repeatable)',
    )
    p.add_argument("--replaces", metavar="NUMBER", help="the report that this one replaces")
    p.add_argument(
        "--reason", metavar="TEXT", help="why it is compared again, a value left out, a report replaced"
    )


def _setting_up(commands: Commands) -> None:
    site = _group(commands, "site", "Make a site.")
    p = _add(site, "site new", "Make a site: folders, settings, rules.", site=False, json=False)
    p.add_argument("dir", metavar="DIR", help="a new or empty folder")
    p.add_argument("--name", help="name of the laboratory")
    p.add_argument("--address", help="its address")
    p.add_argument("--time-zone", metavar="ZONE", help="IANA name, e.g. Europe/Berlin")
    p.add_argument("--language", choices=("de", "en"), help="language of reports")
    keys = _group(commands, "keys", "Make keys.")
    p = _add(keys, "keys new", "Make a key and its certificate.", site=True, json=False)
    p.add_argument("name", metavar="NAME", help="as printed on reports")
    p.add_argument("--for", dest="purpose", choices=("service", "person"), required=True)
    p.add_argument("--passphrase-file", metavar="FILE", help="file of mode 600 with the passphrase")
    p.add_argument("--days", type=int, default=730, help="days until the certificate ends (730)")
    config = _group(commands, "config", "Check settings.")
    _add(config, "config check", "Read all settings; say every fault at once.", site=True, json=True)
    parser_records.add_approve(config, _add)
    plan = _group(commands, "plan", "Draft plans.")
    p = _add(plan, "plan propose", "Draft a layout and a plan from an export.", site=True, json=False)
    p.add_argument("export", metavar="EXPORT", help="an export with values; nothing is recorded")
    p.add_argument("--out", metavar="DIR", help="a new folder for the drafts (proposed-NAME)")
    layout = _group(commands, "layout", "Try layouts.")
    p = _add(layout, "layout try", "Show what would be read from an export.", site=True, json=True)
    p.add_argument("export", metavar="EXPORT")
    p.add_argument("--layout", metavar="NAME|FILE", help="else the layout of the plan that fits the name")
    rules = _group(commands, "rules", "Show decision tables.")
    p = _add(rules, "rules explain", "Say which row applies and why.", site=True, json=True)
    p.add_argument("export", metavar="EXPORT")
    p.add_argument("--plan", metavar="NAME|FILE", help="use this plan, whatever the file's name")
    p = _add(rules, "rules show", "Print a decision table.", site=True, json=False)
    p.add_argument("table", nargs="?", default="default", metavar="TABLE", help="default, textbook, your own")
    _plan_size(plan)


def _plan_size(plan: Commands) -> None:
    p = _add(plan, "plan size", "Say how many results a group are needed.", site=True, json=True)
    p.add_argument("--plan", metavar="NAME|FILE", help="takes margin, alpha, reference and procedure from it")
    p.add_argument("--characteristic", metavar="NAME", help="one of the plan's, where it has several")
    p.add_argument(
        "--difference", type=float, metavar="D", help="true difference to be seen (a ratio on the log scale)"
    )
    p.add_argument("--sd", type=float, metavar="S", help="standard deviation of a result (else the plan's)")
    p.add_argument("--margin", type=float, metavar="M", help="smallest difference that matters")
    p.add_argument(
        "--groups", type=int, default=2, metavar="K", help="groups compared, with the reference (2)"
    )
    p.add_argument("--procedure", metavar="NAME", help="a procedure based on means; else as the rules choose")
    p.add_argument("--alpha", type=float, metavar="A", help="family-wise error rate (0.05)")
    p.add_argument("--power", type=float, default=0.80, metavar="P", help="probability to see it (0.80)")


def _auditors(commands: Commands) -> None:
    p = _add(commands, "verify", "Check a report from the file alone.", site=False, json=True)
    p.add_argument("report", metavar="REPORT.pdf")
    p.add_argument(
        "--trust", metavar="FILE", help="certificate(s) of the laboratory, got from the laboratory"
    )
    p.add_argument(
        "--site", metavar="DIR", help="trust this site's key and compare with its ledger and archive"
    )
    p = _add(commands, "extract", "Write what is attached to a report.", site=False, json=False)
    p.add_argument("report", metavar="REPORT.pdf")
    p.add_argument("dir", metavar="DIR", help="where to; nothing there is overwritten")
    records = _group(commands, "records", "Look into the records.")
    parser_records.add_records(records, _add)


def _service(commands: Commands) -> None:
    p = _add(commands, "watch", "Take every export dropped into the inbox.", site=True, json=False)
    p.add_argument("--once", action="store_true", help="stop when the inbox is empty")
    p = _add(commands, "demo", "Run the examples from inbox to verified reports.", site=False, json=False)
    p.add_argument("dir", nargs="?", default="demo-site", metavar="DIR", help="a new or empty folder")
