"""Checking in a process of its own: the same verdict, and bounds that hold."""

from __future__ import annotations

import os
import subprocess
import sys
import time

import jsonschema
import pytest
from signing.conftest import LATER

from qcreport.audit import in_child
from qcreport.audit.in_child import verify_in_child
from qcreport.audit.verify import verify_report
from qcreport.errors import EnvironmentFailedError, NotOurReportError
from qcreport.signing.keys import SigningKey
from qcreport.signing.limits import VerifyLimits

from .schema import schema


def test_the_child_says_what_the_parent_would(report: bytes, service_key: SigningKey) -> None:
    roots = (service_key.certificate,)
    here = verify_report(report, roots=roots, now=LATER, recompute=False).to_json()
    assert verify_in_child(report, roots=roots, now=LATER, recompute=False) == here


def test_attachments_that_cannot_be_analysed_are_not_valid(report: bytes, service_key: SigningKey) -> None:
    """The example's plan is no plan: the real analysis says so, in the child."""
    verdict = verify_in_child(report, roots=(service_key.certificate,), now=LATER)
    jsonschema.validate(verdict, schema())
    assert verdict["valid"] is False
    assert verdict["recomputed"]["differences"][0].startswith("could not be computed anew: plan.toml")


def test_what_is_no_report_is_refused_through_the_child() -> None:
    with pytest.raises(NotOurReportError, match="not a PDF"):
        verify_in_child(b"\n{}\n", roots=None, now=LATER)
    with pytest.raises(NotOurReportError, match="cannot be read"):
        verify_in_child(b"%PDF-1.7\n{}\n", roots=None, now=LATER, recompute=False)


def test_too_much_memory_is_a_verdict(report: bytes) -> None:
    verdict = verify_in_child(report, roots=None, now=LATER, limits=VerifyLimits(memory_bytes=90 << 20))
    jsonschema.validate(verdict, schema())
    assert verdict["valid"] is False
    assert "90 MB of memory" in verdict["problems"][0]


def busy_with(script: str) -> tuple[str, ...]:
    """Return the command of a child that does this instead of checking a report."""
    return (sys.executable, "-I", "-c", script)


def test_too_much_work_is_a_verdict(report: bytes, monkeypatch: pytest.MonkeyPatch) -> None:
    script = "from qcreport.signing.limits import apply_limits as limit\nlimit(1 << 32, 1)\nwhile True: pass"
    monkeypatch.setattr(in_child, "_COMMAND", busy_with(script))
    verdict = verify_in_child(report, roots=None, now=LATER, limits=VerifyLimits(cpu_s=1))
    jsonschema.validate(verdict, schema())
    assert verdict["problems"] == ["checking it needs more than 1 seconds of work and was stopped"]


def test_a_crash_is_a_verdict(report: bytes, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(in_child, "_COMMAND", busy_with("import os; os.abort()"))
    verdict = verify_in_child(report, roots=None, now=LATER)
    assert verdict["problems"] == ["the process that read it crashed, which no report of ours causes"]


@pytest.mark.parametrize(
    "script",
    [
        "raise SystemExit(3)",
        "print('no json')",
        "print('[]')",
        'print(\'{"error": {"kind": "environment", "text": "x"}}\')',
    ],
)
def test_a_child_that_fails_on_its_own_account_is_no_verdict(
    report: bytes, monkeypatch: pytest.MonkeyPatch, script: str
) -> None:
    monkeypatch.setattr(in_child, "_COMMAND", busy_with(script))
    with pytest.raises(EnvironmentFailedError):
        verify_in_child(report, roots=None, now=LATER)


def test_a_child_that_cannot_be_started_is_no_verdict(report: bytes, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(in_child, "_COMMAND", ("/nowhere/python",))
    with pytest.raises(EnvironmentFailedError, match="can be started"):
        verify_in_child(report, roots=None, now=LATER)


def test_the_environment_is_not_handed_down(report: bytes, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("QCREPORT_KEY_PASSPHRASE", "secret")
    script = """import json, os
print(json.dumps({"error": {"kind": "not_our_report", "text": " ".join(sorted(os.environ))}}))"""
    monkeypatch.setattr(in_child, "_COMMAND", busy_with(script))
    with pytest.raises(NotOurReportError) as caught:
        verify_in_child(report, roots=None, now=LATER)
    assert "QCREPORT_KEY_PASSPHRASE" not in caught.value.text
    assert "OPENBLAS_NUM_THREADS" in caught.value.text


def test_too_much_time_is_a_verdict_and_ends_the_process(
    report: bytes, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(in_child, "_COMMAND", busy_with("import time; time.sleep(60)"))
    started: list[subprocess.Popen[bytes]] = []
    popen = subprocess.Popen

    def remember(*args: object, **options: object) -> subprocess.Popen[bytes]:
        started.append(popen(*args, **options))  # type: ignore[call-overload]
        return started[-1]

    monkeypatch.setattr(subprocess, "Popen", remember)
    begun = time.monotonic()
    verdict = verify_in_child(report, roots=None, now=LATER, limits=VerifyLimits(wall_s=0.5))
    assert time.monotonic() - begun < 30
    assert verdict["problems"] == ["checking it took longer than 0.5 seconds and was stopped"]
    with pytest.raises(ProcessLookupError):
        os.kill(started[0].pid, 0)
