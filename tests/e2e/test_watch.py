"""`watch`: what is dropped is answered once, whatever else lies there, however the service is ended."""

from __future__ import annotations

import os
import re
import signal
import sqlite3
import subprocess
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path

import pytest
from rig import BATCHES, Site, command_line, environment, export, in_a_process, replaced

pytestmark = pytest.mark.slow

PATIENCE_S = 100.0


def wait_until(true: Callable[[], object]) -> None:
    """Poll for something another process does; the tests' machine may be busy."""
    end = time.monotonic() + PATIENCE_S
    while not true():
        assert time.monotonic() < end, "it did not happen in time"
        time.sleep(0.02)


@contextmanager
def watching(site: Site, *more: str) -> Iterator[subprocess.Popen[str]]:
    """Run the service in a process group of its own, gone at the end whatever happens."""
    process = subprocess.Popen(
        command_line("watch", "--site", site.root, *more),
        env=environment(),
        stdin=subprocess.DEVNULL,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        start_new_session=True,
    )
    try:
        yield process
    finally:
        if process.poll() is None:
            os.killpg(process.pid, signal.SIGKILL)
        process.communicate()


def kinds(site: Site) -> list[str]:
    """Return the kinds of the ledger's entries, in order."""
    path = site.root / "records/records.sqlite3"
    if not path.exists():
        return []
    connection = sqlite3.connect(f"file:{path}?mode=ro", uri=True)
    try:
        return [kind for (kind,) in connection.execute("SELECT kind FROM ledger ORDER BY sequence")]
    except sqlite3.OperationalError:  # not made yet, or just being written
        return []
    finally:
        connection.close()


def hurried(site: Site) -> Site:
    """Shorten the waiting of the service; nothing else changes."""
    replaced(site.settings, "quiet_s = 5.0", "quiet_s = 0.3")
    replaced(site.settings, "poll_s = 3.0", "poll_s = 0.3")
    return site


def left(folder: Path) -> set[str]:
    return {path.name for path in folder.iterdir()}


def test_several_files_at_once(site: Site) -> None:
    hurried(site)
    one, two = site.inbox / "lap-shear-1.xlsx", site.inbox / "lap-shear-2.xlsx"
    export(one)
    export(two, {**BATCHES, "LA-2411": [24.1, 24.9, 23.6]})
    export(site.inbox / "lap-shear-3.xlsx", {**BATCHES, "LA-2411": [24.1, "see note", 23.6]})
    export(site.inbox / "peel-1.xlsx")
    alone = {
        "~$lap-shear-1.xlsx": b"\x05somebody",
        ".lap-shear-4.xlsx": b"PK",
        "lap-shear-5.xlsx.part": b"PK",
    }
    for name, data in alone.items():
        (site.inbox / name).write_bytes(data)
    ran = site.done("watch", "--once")
    assert "2 done, 2 refused, 0 failed." in ran.out
    assert [path.name.split(" ", 1)[1] for path in site.reports] == ["lap-shear-1.pdf", "lap-shear-2.pdf"]
    assert left(site.inbox) == set(alone)
    for name, data in alone.items():
        assert (site.inbox / name).read_bytes() == data
    whys = "".join((folder / "why.txt").read_text("utf-8") for folder in site.refused)
    assert "lap-shear-3.xlsx" in whys
    assert "(no_plan)" in whys
    for why in whys.split("Not read:")[1:]:
        assert why.strip().splitlines()[0].strip() in ran.out
    assert {p.name for folder in site.refused for p in folder.iterdir()} == {
        "why.txt",
        "lap-shear-3.xlsx",
        "peel-1.xlsx",
    }
    assert site.holds()["reports"] == 2


def test_a_half_written_file_waits_for_its_rest(site: Site, tmp_path: Path) -> None:
    """The service is told nothing: the copy grows, and only the whole file is taken."""
    hurried(site)
    whole = export(tmp_path / "whole.xlsx").read_bytes()
    dropped = site.inbox / "lap-shear-1.xlsx"
    with watching(site) as service:
        wait_until(lambda: "service started" in kinds(site))
        with dropped.open("wb") as stream:
            for end in range(2000, len(whole), 2000):
                stream.write(whole[end - 2000 : end])
                stream.flush()
                time.sleep(0.1)
            stream.write(whole[end:])
        wait_until(lambda: site.reports)
        wait_until(lambda: not left(site.inbox))
        service.terminate()
        out, _ = service.communicate(timeout=PATIENCE_S)
    assert service.returncode == 0
    assert "1 done, 0 refused, 0 failed." in out
    assert site.refused == []
    assert site.holds()["reports"] == 1


def test_terminated_while_it_waits(site: Site) -> None:
    with watching(site) as service:
        wait_until(lambda: "service started" in kinds(site))
        asked = time.monotonic()
        service.terminate()
        out, err = service.communicate(timeout=PATIENCE_S)
        took = time.monotonic() - asked
    assert service.returncode == 0, err
    assert took < 10.0
    assert out == "0 done, 0 refused, 0 failed.\n"
    assert "Watching " in err
    assert "Traceback" not in err
    assert kinds(site)[-1] == "service stopped"


def test_a_second_service_is_told_of_the_first(site: Site) -> None:
    with watching(site) as service:
        wait_until(lambda: "service started" in kinds(site))
        for more in ((), ("--once",)):
            second = in_a_process("watch", "--site", site.root, *more)
            assert second.code == 4
            assert f"process {service.pid}, since " in second.err
            assert "runs already" in second.err
        service.terminate()
        service.communicate(timeout=PATIENCE_S)
    assert service.returncode == 0


@pytest.mark.parametrize("moment", ["received", "read", "compared", "published"])
def test_killed_in_the_middle(moment: str, site: Site) -> None:
    """After a kill at any instant the next start ends the work: one report, one number, a whole chain."""
    hurried(site)
    export(site.inbox / "lap-shear-1.xlsx")
    with watching(site, "--once") as service:
        if moment == "published":
            wait_until(lambda: site.reports or service.poll() is not None)
        else:
            wait_until(lambda: moment in kinds(site) or service.poll() is not None)
        os.killpg(service.pid, signal.SIGKILL)
        service.communicate()
    after = site.run("records", "check", "--json").json
    published_only = [text for text in after["problems"] if "is not in the ledger" in text]
    assert after["problems"] == published_only, "nothing but a report that was not recorded any more"
    ran = site.done("watch", "--once")
    assert re.search(r"^[01] done, 0 refused, 0 failed\.$", ran.out, re.MULTILINE)
    (report,) = site.reports
    assert re.fullmatch(r"\d{4}-0001 lap-shear-1\.pdf", report.name)
    assert left(site.inbox) == set()
    assert left(site.root / "refused") == set()
    assert site.holds()["reports"] == 1
    assert kinds(site).count("sealed") == 1
    assert kinds(site).count("received") == 1


def test_a_faulty_plan_is_told_at_the_start(site: Site) -> None:
    replaced(site.plan, "alpha = 0.05", "alpah = 0.05")
    dropped = export(site.inbox / "lap-shear-1.xlsx")
    ran = site.run("watch", "--once")
    assert ran.code == 2
    assert "lap-shear.toml, line 11, comparison.alpah" in ran.err
    assert dropped.exists()


def test_an_inbox_that_is_not_there(site: Site, tmp_path: Path) -> None:
    replaced(site.settings, 'inbox = "inbox"', f'inbox = "{tmp_path / "share"}"')
    ran = site.run("watch", "--once")
    assert ran.code == 4
    assert "Mount the share" in ran.err
    assert str(tmp_path / "share") in ran.err
