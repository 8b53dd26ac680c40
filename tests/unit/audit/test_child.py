"""What the checking process answers, asked without starting one."""

from __future__ import annotations

import io
import json
import resource
import sys
from types import SimpleNamespace
from typing import Any

import pytest
from signing.conftest import LATER

from qcreport.audit import child, verify
from qcreport.signing import limits
from qcreport.signing.keys import SigningKey


@pytest.fixture
def limited(monkeypatch: pytest.MonkeyPatch) -> list[tuple[int, tuple[int, int]]]:
    """Note the limits that would be set instead of setting them on the tests."""
    noted: list[tuple[int, tuple[int, int]]] = []
    monkeypatch.setattr(resource, "setrlimit", lambda kind, pair: noted.append((kind, pair)))
    return noted


def answer(pdf: bytes, roots: list[str] | None, monkeypatch: pytest.MonkeyPatch) -> dict[str, Any]:
    order = {"memory_bytes": 1 << 30, "cpu_s": 7, "roots": roots, "now": LATER.isoformat(), "recompute": True}
    order |= {"people": [], "templates": None}
    given = io.BytesIO(json.dumps(order).encode() + b"\n" + pdf)
    out = io.StringIO()
    monkeypatch.setattr(sys, "stdin", SimpleNamespace(buffer=given))
    monkeypatch.setattr(sys, "stdout", out)
    assert child.main() == 0
    told: dict[str, Any] = json.loads(out.getvalue())
    return told


def test_a_verdict_comes_under_the_limits_asked_for(
    report: bytes,
    service_key: SigningKey,
    limited: list[tuple[int, tuple[int, int]]],
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    told = answer(report, [service_key.certificate_pem().decode()], monkeypatch)
    assert told["answer"]["sealed"]["trusted"] is True
    soft = {kind: pair[0] for kind, pair in limited}
    assert soft == {resource.RLIMIT_AS: 1 << 30, resource.RLIMIT_CPU: 7}


@pytest.mark.usefixtures("limited")
def test_refusal_and_want_of_memory_are_told_apart(report: bytes, monkeypatch: pytest.MonkeyPatch) -> None:
    assert answer(b"no pdf", None, monkeypatch)["error"]["kind"] == "not_our_report"

    def exhausted(*_: object, **__: object) -> None:
        raise MemoryError

    monkeypatch.setattr(verify, "verify_report", exhausted)
    assert answer(report, None, monkeypatch) == {"stopped": "memory"}


def test_a_lower_hard_limit_stands(
    limited: list[tuple[int, tuple[int, int]]], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(resource, "getrlimit", lambda _: (5, 5))
    limits.apply_limits(1 << 30, 7)
    assert [pair for _, pair in limited] == [(5, 5), (5, 5)]


def test_a_system_without_limits_is_left_as_it_is(monkeypatch: pytest.MonkeyPatch) -> None:
    before = resource.getrlimit(resource.RLIMIT_CPU)
    monkeypatch.setitem(sys.modules, "resource", None)
    limits.apply_limits(1, 1)
    assert resource.getrlimit(resource.RLIMIT_CPU) == before
