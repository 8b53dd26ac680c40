"""Every error ends as a sentence and a code; with --json as one document."""

from __future__ import annotations

import argparse
import json

import pytest

from qcreport import errors
from qcreport.cli import main
from qcreport.cli.commands import rules_show
from qcreport.cli.run import exit_code, printable

REFUSED = errors.ExportRefusedError(
    "no_plan", file="a\x1b.xlsx", where="the name", found="None fits.", expected="One.", next_step="Rename."
)
CODES = [
    (errors.ConfigError((errors.Fault(text="wrong", file="a.toml", line=2, key="k"),)), 2),
    (errors.UsageError("not so"), 2),
    (REFUSED, 3),
    (errors.NotOurReportError("no report"), 1),
    (errors.LedgerError("broken"), 1),
    (errors.SigningDeniedError("expired"), 4),
    (errors.EnvironmentFailedError("disk full", file="/x"), 4),
    (errors.TooFewObservationsError("too few"), 4),
    (errors.DegenerateDataError("no variation"), 4),
    (errors.QcReportError("whatever"), 4),
]


def raising(monkeypatch: pytest.MonkeyPatch, error: BaseException) -> None:
    def command(arguments: argparse.Namespace) -> int:
        raise error

    monkeypatch.setattr(rules_show, "run", command)


def subclasses(kind: type[errors.QcReportError]) -> set[type[errors.QcReportError]]:
    return {kind}.union(*(subclasses(k) for k in kind.__subclasses__()))


def test_every_error_has_a_code_here() -> None:
    ours = {k for k in subclasses(errors.QcReportError) if k.__module__ == "qcreport.errors"}
    assert {type(error) for error, _ in CODES} | {errors.StatisticsError} == ours


@pytest.mark.parametrize(("error", "code"), CODES, ids=lambda value: type(value).__name__)
def test_an_error_and_its_code(
    error: errors.QcReportError,
    code: int,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    raising(monkeypatch, error)
    assert main(["rules", "show"]) == code == exit_code(error)
    out, err = capsys.readouterr()
    assert out == ""
    assert "Traceback" not in err
    assert err.endswith("\n")
    assert "\x1b" not in err
    expected = REFUSED.five_lines().replace("\x1b", "\\x1b") if error is REFUSED else error.text + "\n"
    assert err == expected


def test_the_json_form(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    from qcreport.cli.commands import records_list

    def command(arguments: argparse.Namespace) -> int:
        raise errors.EnvironmentFailedError("disk full", file="/x")

    monkeypatch.setattr(records_list, "run", command)
    assert main(["records", "list", "--json"]) == 4
    out, err = capsys.readouterr()
    assert err == ""
    expected = {"error": {"kind": "environment", "text": "disk full", "file": "/x", "key": None}}
    assert json.loads(out) == expected


@pytest.mark.parametrize(
    ("error", "says"),
    [
        (PermissionError(13, "Permission denied", "/srv/x"), "Permission denied (/srv/x). Check the folder"),
        (OSError(28, "No space left on device"), "No space left on device. Check the folder"),
        (OSError("odd"), "odd. Check the folder"),
        (RuntimeError("boom"), "This should not have happened (RuntimeError: boom). Nothing was issued."),
    ],
)
def test_what_nobody_expected(
    error: Exception, says: str, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    raising(monkeypatch, error)
    monkeypatch.delenv("QCREPORT_TRACEBACK", raising=False)
    assert main(["rules", "show"]) == 4
    out, err = capsys.readouterr()
    assert out == ""
    assert err.startswith(says)
    assert "Traceback" not in err


def test_a_traceback_for_those_who_ask(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    raising(monkeypatch, RuntimeError("boom"))
    monkeypatch.setenv("QCREPORT_TRACEBACK", "1")
    assert main(["rules", "show"]) == 4
    assert "Traceback" in capsys.readouterr().err


def test_an_interrupt(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    raising(monkeypatch, KeyboardInterrupt())
    assert main(["rules", "show"]) == 130
    assert capsys.readouterr().err == "Stopped.\n"


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("plain\nlines\n", "plain\nlines\n"),
        ("\x1b[31mred", "\\x1b[31mred"),
        ("a\rb\tc\x00", "a\\x0db\\x09c\\x00"),
        ("right\u202eleft", "right\\x202eleft"),
        ("Prüfung – 23 °C", "Prüfung – 23 °C"),
    ],
)
def test_nothing_printed_steers_a_terminal(text: str, expected: str) -> None:
    assert printable(text) == expected


@pytest.mark.parametrize("words", [["--version"], ["--help"], ["compare", "--help"]])
def test_help_and_version_end_well(words: list[str]) -> None:
    with pytest.raises(SystemExit) as ended:
        main(words)
    assert ended.value.code == 0
