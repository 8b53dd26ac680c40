"""The words of the command line."""

from __future__ import annotations

import importlib

import pytest

from qcreport.cli.parser import COMMANDS, HELP, build_parser
from qcreport.errors import UsageError

SMALLEST = {
    "compare": ["x.xlsx"],
    "plan propose": ["x.xlsx"],
    "site new": ["d"],
    "layout try": ["x.xlsx"],
    "keys new": ["N", "--for", "person"],
    "verify": ["r.pdf"],
    "extract": ["r.pdf", "d"],
    "config check": [],
    "records list": [],
    "records check": [],
    "watch": [],
    "demo": [],
}


@pytest.mark.parametrize("command", COMMANDS)
def test_a_command_has_a_module(command: str) -> None:
    module = importlib.import_module(f"qcreport.cli.commands.{COMMANDS[command]}")
    assert callable(module.run)
    assert f"`qcreport {command}" in module.__doc__


@pytest.mark.parametrize("command", SMALLEST)
def test_words_lead_to_their_command(command: str) -> None:
    assert build_parser().parse_args([*command.split(), *SMALLEST[command]]).command == command


@pytest.mark.parametrize("command", COMMANDS)
def test_the_help_groups_every_command(command: str) -> None:
    first, *rest = command.split()
    lines = [text for text in HELP.splitlines() if text.startswith(f"  {first} ")]
    assert any(all(word in line for word in rest) for line in lines)


def test_the_site_comes_from_option_environment_or_folder(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.delenv("QCREPORT_SITE", raising=False)
    assert build_parser().parse_args(["watch"]).site == "."
    monkeypatch.setenv("QCREPORT_SITE", "/srv/qc")
    assert build_parser().parse_args(["watch"]).site == "/srv/qc"
    assert build_parser().parse_args(["watch", "--site", "/other"]).site == "/other"
    assert build_parser().parse_args(["verify", "r.pdf"]).site is None, "verify trusts no site by accident"


@pytest.mark.parametrize(
    "words", [[], ["nothing"], ["compare"], ["site"], ["compare", "x", "--rea", "y"], ["keys", "new", "N"]]
)
def test_words_that_are_no_command(words: list[str]) -> None:
    with pytest.raises(UsageError, match="--help"):
        build_parser().parse_args(words)
