"""Three processes append to one ledger, as the service, `sign` and `compare` do, and keep one chain."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

from qcreport.records.chain import Kind
from qcreport.records.chain_walk import walk_chain
from qcreport.records.checkpoints import FILE_NAME, checkpoints
from qcreport.records.facade import Records
from qcreport.records.ledger import entries

from .conftest import SetClock

_EACH = 15
_WRITER = """
import datetime, hashlib, pathlib, sys
from qcreport.records.chain import Kind
from qcreport.records.checkpoints import write_checkpoint
from qcreport.records.facade import Records
actor, folder = sys.argv[1], pathlib.Path(sys.argv[2])
clock = lambda: datetime.datetime.now(datetime.UTC)
records = Records.open(folder, clock)
sys.stdin.readline()
for place in range(int(sys.argv[3])):
    records.note(Kind.VERIFIED, {"place": place}, actor=actor)
    sign = lambda document: hashlib.sha256(document).digest()
    write_checkpoint(folder, records.head(), at="x", sign=sign, certificate_pem=b"P")
"""


def test_three_processes_keep_one_chain_and_whole_checkpoints(tmp_path: Path, clock: SetClock) -> None:
    folder = tmp_path / "records"
    records = Records.open(folder, clock)
    actors = ("service", "sign", "compare")
    writers = [
        subprocess.Popen(
            [sys.executable, "-c", _WRITER, actor, str(folder), str(_EACH)], stdin=subprocess.PIPE, text=True
        )
        for actor in actors
    ]
    for writer in writers:  # all begin together
        assert writer.stdin is not None
        writer.stdin.write("go\n")
        writer.stdin.flush()
    assert [writer.wait(120) for writer in writers] == [0, 0, 0]
    for writer in writers:
        assert writer.stdin is not None
        writer.stdin.close()
    with records.database.read() as connection:
        walked = walk_chain(lambda: entries(connection))
        found = list(entries(connection, kind=Kind.VERIFIED))
    assert (walked.n_entries, walked.problems) == (3 * _EACH, ())
    for actor in actors:
        assert [e.facts_object()["place"] for e in found if e.actor == actor] == list(range(_EACH))
    heads = [c.head for c in checkpoints(folder / FILE_NAME)]
    assert len(heads) == 3 * _EACH
    with records.database.read() as connection:
        assert walk_chain(lambda: entries(connection), heads).problems == ()
