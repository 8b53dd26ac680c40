"""The service as a process of its own, with real time, real signals and a real watcher."""

from __future__ import annotations

import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

PROGRAM = """
import datetime as dt, sys, time
from pathlib import Path
from qcreport.service.loop import Service
from qcreport.service.model import Outcome, OutcomeKind, ServiceSettings
from qcreport.service.stopping import Stop, stop_on_signals
from qcreport.service.wake import Wake

site, busy_s = Path(sys.argv[1]), float(sys.argv[2])

def say(text):
    print(text, flush=True)

def process(export):
    say("taken " + export.name)
    time.sleep(busy_s)
    return Outcome(kind=OutcomeKind.REPORTED, text=export.name)

stop, wake = Stop(), Wake()
service = Service(
    ServiceSettings(
        inbox=site / "inbox", refused=site / "refused", work=site / "work", max_bytes=1000, quiet_s=0.2,
        poll_s=float(sys.argv[3]), min_free_bytes=1,
    ),
    process=process, tell=lambda event: say(event.kind.value), looks_complete=lambda data: True,
    wait=wake.wait, pull=wake.pull, stop=stop, clock=lambda: dt.datetime.now(dt.UTC),
)
with stop_on_signals(stop, wake.pull, grace_s=0.3):
    counts = service.run()
say(f"done {counts.done}, waiting {counts.waiting}")
"""


def started(site: Path, *, busy_s: float, poll_s: float) -> subprocess.Popen[str]:
    (site / "inbox").mkdir(exist_ok=True)
    arguments = [sys.executable, "-c", PROGRAM, str(site), str(busy_s), str(poll_s)]
    return subprocess.Popen(arguments, stdout=subprocess.PIPE, text=True)


def lines_until(process: subprocess.Popen[str], last: str) -> list[str]:
    """Return what the process says, up to a line; the test's time-out guards against waiting for ever."""
    assert process.stdout is not None
    lines: list[str] = []
    while last not in lines:
        line = process.stdout.readline()
        assert line, f"ended without saying {last!r}: {lines}"
        lines.append(line.strip())
    return lines


@pytest.mark.slow
@pytest.mark.parametrize("number", [signal.SIGTERM, signal.SIGINT])
def test_a_signal_ends_it_soon_in_the_middle_of_the_work(tmp_path: Path, number: int) -> None:
    with started(tmp_path, busy_s=200, poll_s=0.2) as process:
        lines_until(process, "started")
        (tmp_path / "inbox/a.xlsx").write_bytes(b"data")
        lines_until(process, "taken a.xlsx")
        begun = time.monotonic()
        process.send_signal(number)
        lines_until(process, "done 0, waiting 1")
        assert process.wait() == 0
        assert time.monotonic() - begun < 10
    assert len(list((tmp_path / "work/claims").iterdir())) == 1


@pytest.mark.slow
def test_an_event_wakes_it_long_before_the_next_listing(tmp_path: Path) -> None:
    with started(tmp_path, busy_s=0, poll_s=200) as process:
        lines_until(process, "started")
        (tmp_path / "inbox/a.xlsx").write_bytes(b"data")
        lines_until(process, "taken a.xlsx")
        process.send_signal(signal.SIGTERM)
        assert lines_until(process, "done 1, waiting 0")[-2] == "stopped"


@pytest.mark.slow
def test_a_killed_service_leaves_its_claim_to_the_next(tmp_path: Path) -> None:
    with started(tmp_path, busy_s=200, poll_s=0.2) as process:
        lines_until(process, "started")
        (tmp_path / "inbox/a.xlsx").write_bytes(b"data")
        lines_until(process, "taken a.xlsx")
        process.kill()
    with started(tmp_path, busy_s=0, poll_s=0.2) as process:
        lines_until(process, "handled")
        process.send_signal(signal.SIGTERM)
        lines_until(process, "done 1, waiting 0")
    assert list((tmp_path / "work/claims").iterdir()) == []
