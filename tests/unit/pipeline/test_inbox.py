"""One claimed export by every plan that fits: reports, refusals with their plan, and nothing unsaid."""

from __future__ import annotations

import datetime as dt
from pathlib import Path
from types import SimpleNamespace
from typing import Any

import pytest

from qcreport.canonical import sha256_hex
from qcreport.errors import EnvironmentFailedError, ExportRefusedError
from qcreport.intake.exports import ClaimedExport
from qcreport.intake.journal import Claim, ClaimMode
from qcreport.intake.listing import Seen
from qcreport.pipeline.inbox import InboxHandler
from qcreport.pipeline.outcome import Reported

DATA = b"PK the export"


def refusal(code: str) -> ExportRefusedError:
    return ExportRefusedError(
        code, file="a.xlsx", where="Results!A1", found="This.", expected="That.", next_step="Mend it."
    )


def planned(name: str, pattern: str = "*.xlsx") -> Any:
    return SimpleNamespace(plan=SimpleNamespace(name=name, exports=(pattern,)))


class World:
    """A pipeline that answers as told, and records that remember what they are told."""

    def __init__(self, root: Path, **answers: ExportRefusedError | EnvironmentFailedError | None) -> None:
        self.root = root
        self.answers = answers
        self.told: list[tuple[Any, ...]] = []

    def receive(self, received: Any) -> None:
        self.told.append(("received", received.claim, received.sha256, received.data))

    def answer(self, received: Any, settings: Any, **_: Any) -> Reported:
        error = self.answers[settings.plan.name]
        if error is not None:
            raise error
        number = f"2026-000{1 + list(self.answers).index(settings.plan.name)}"
        return Reported(
            plan_name=settings.plan.name,
            number=number,
            path=self.root / f"{number}.pdf",
            result=b"{}",
            answers=(),
            new=True,
            pages=6,
        )

    def refuse(self, claim: str, error: ExportRefusedError, **facts: Any) -> None:
        self.told.append(("refused", claim, error.code, facts["plan_name"], facts["folder"]))

    def handler(self, *plans: Any) -> InboxHandler:
        site: Any = SimpleNamespace(
            time_zone="Europe/Berlin", folders=SimpleNamespace(refused=self.root / "refused")
        )
        me: Any = self
        return InboxHandler(site=site, records=me, pipeline=me, load_plans=lambda _: plans, clock=clock)


def clock() -> dt.datetime:
    return dt.datetime(2026, 11, 2, 6, 12, tzinfo=dt.UTC)


@pytest.fixture
def claimed(tmp_path: Path) -> ClaimedExport:
    folder = tmp_path / "work"
    folder.mkdir()
    (tmp_path / "refused").mkdir()
    (folder / "export.bin").write_bytes(DATA)
    claim = Claim(
        id="20261102T231500Z-1",
        name="a.xlsx",
        claimed_at="2026-11-02T23:15:00Z",
        mode=ClaimMode.COPIED,
        seen=Seen(name="a.xlsx", size=len(DATA), mtime_ns=1, inode=1),
        folder=folder,
    )
    sha256 = sha256_hex(DATA)
    return ClaimedExport(
        claim=claim, data=DATA, sha256=sha256, size=len(DATA), label=sha256[:8], refusal=None
    )


def test_every_plan_that_fits_answers(claimed: ClaimedExport, tmp_path: Path) -> None:
    world = World(tmp_path, one=None, two=None)
    handled = world.handler(planned("one"), planned("two"), planned("other", "*.csv")).handle(claimed)
    assert [outcome.plan_name for outcome in handled.outcomes] == ["one", "two"]
    assert handled.refusals == ()
    assert world.told == [("received", claimed.claim.id, sha256_hex(DATA), DATA)]


def test_a_refusal_by_one_plan_does_not_hide_the_other(claimed: ClaimedExport, tmp_path: Path) -> None:
    world = World(tmp_path, one=refusal("layout_mismatch"), two=None)
    handled = world.handler(planned("one"), planned("two")).handle(claimed)
    assert [outcome.plan_name for outcome in handled.outcomes] == ["two"]
    (refused,) = handled.refusals
    assert refused.error.code == "layout_mismatch"
    # Claimed at 23:15 UTC: in the site's time zone that is the next day.
    assert refused.folder.name == f"20261103-{sha256_hex(DATA)[:8]}"
    assert "(layout_mismatch)" in (refused.folder / "why.txt").read_text("utf-8")
    assert (refused.folder / "a.xlsx").read_bytes() == DATA
    recorded = ("refused", claimed.claim.id, "layout_mismatch", "one", refused.folder.name)
    assert world.told[1:] == [recorded]


def test_no_plan_fits(claimed: ClaimedExport, tmp_path: Path) -> None:
    world = World(tmp_path)
    with pytest.raises(ExportRefusedError) as refused:
        world.handler(planned("other", "*.csv")).handle(claimed)
    assert refused.value.code == "no_plan"
    assert [step[0] for step in world.told] == ["received"], "the original is archived all the same"


def test_a_failing_machine_is_no_refusal(claimed: ClaimedExport, tmp_path: Path) -> None:
    world = World(tmp_path, one=EnvironmentFailedError("disk full"))
    with pytest.raises(EnvironmentFailedError, match="disk full"):
        world.handler(planned("one")).handle(claimed)
    assert list((tmp_path / "refused").iterdir()) == []


def test_what_was_refused_unread(claimed: ClaimedExport, tmp_path: Path) -> None:
    unread = ClaimedExport(
        claim=claimed.claim, data=None, sha256=None, size=9, label="x", refusal=refusal("too_large")
    )
    world = World(tmp_path, one=None)
    with pytest.raises(ExportRefusedError) as refused:
        world.handler(planned("one")).handle(unread)
    assert refused.value.code == "too_large"
    assert world.told == []
