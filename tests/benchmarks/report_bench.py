"""Measure reports: export to sealed report against an afternoon script, and the annex of 2,000 values.

    python tests/benchmarks/report_bench.py [reports]

Both sides read the same exports in this one run; warm is the median of all but the first report of a process.
Prints one line a goal and exits with 1 where a goal is missed.
"""

from __future__ import annotations

import json
import os
import random
import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Sequence
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent.parent / "e2e"))
sys.path.insert(0, str(Path(__file__).parent.parent / "unit"))

from report.samples import characteristic, context, measurements, plan_of, result_of
from rig import export, make_site

from qcreport.canonical import sha256_hex
from qcreport.cli.now import now
from qcreport.pipeline.opened import opened
from qcreport.pipeline.outcome import Received
from qcreport.pipeline.wish import Wish
from qcreport.report.build import build_model
from qcreport.report.page_checks import page_of
from qcreport.report.render import lay_out
from qcreport.report.templates import load_templates
from qcreport.settings import load_plans, load_site

HERE = Path(__file__).parent
WARM, COLD = 4.0, 2.0
ANNEX_PAGES, ANNEX_SECONDS = 6, 2.0


def exports(folder: Path, count: int) -> list[Path]:
    """Write exports with four batches of ten."""
    numbers = random.Random(7)  # noqa: S311 - example data
    return [
        export(
            folder / f"lap-shear-{i:03d}.xlsx",
            {f"L{c}-24{i:02d}": [round(numbers.gauss(24, 0.6), 2) for _ in range(10)] for c in "ABCD"},
        )
        for i in range(count)
    ]


def ours_warm(root: Path, given: Sequence[Path]) -> float:
    """Return the median seconds of a report in a process that has made one."""
    site = load_site(root)
    (plan,) = load_plans(site)
    seconds = []
    with opened(site, now, workers=1, seals=True, progress=lambda _: None) as work:
        for path in given:
            start = time.perf_counter()
            data = path.read_bytes()
            received = Received(
                name=path.name, data=data, sha256=sha256_hex(data), claim=path.stem, actor="bench"
            )
            work.pipeline.receive(received)
            work.pipeline.answer(received, plan, Wish())
            seconds.append(time.perf_counter() - start)
    return statistics.median(seconds[1:])


def timed(command: Sequence[str | Path]) -> tuple[float, int, str]:
    """Return seconds, peak memory in MB and output of a command and the processes it waits for."""
    start = time.perf_counter()
    with subprocess.Popen(command, stdout=subprocess.PIPE, text=True) as process:
        assert process.stdout is not None
        said = process.stdout.read()
        _, status, used = os.wait4(process.pid, 0)
        process.returncode = os.waitstatus_to_exitcode(status)
    if process.returncode:
        raise SystemExit(f"{command} ended with {process.returncode}")
    return time.perf_counter() - start, used.ru_maxrss // 1024, said


def annex() -> tuple[int, float]:
    """Return pages and seconds that 2,000 values take, over a report of the same batches with 50."""
    numbers = random.Random(1)  # noqa: S311 - example data
    batches = {f"LA-24{i:02d}": [round(numbers.gauss(24, 0.6), 2) for _ in range(200)] for i in range(10)}
    taken = {}
    for n in (5, 200, 5, 200):
        result = characteristic({k: v[:n] for k, v in batches.items()}, procedure="tamhane_t2")
        model = build_model(result_of(result), measurements((result,)), plan_of(result), context())
        start = time.perf_counter()
        document = lay_out(model, load_templates({}))
        taken[n] = time.perf_counter() - start, document
    first, last = (page_of(taken[200][1], anchor) or 0 for anchor in ("data", "flagged"))
    return last - first + 1, taken[200][0] - taken[5][0]


def main() -> int:
    """Measure, print and judge."""
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 6
    with tempfile.TemporaryDirectory() as folder:
        root = Path(folder) / "site"
        make_site(root)
        given = exports(Path(folder), count + 1)
        warm = ours_warm(root, given[:-1])
        command = [Path(sys.executable).parent / "qcreport", "compare", given[-1], "--site", root]
        cold, memory, _ = timed(command)
        afternoon = [sys.executable, HERE / "afternoon.py", Path(folder) / "out"]
        _, _, said = timed([*afternoon, *given[:-1]])
        their_cold, their_memory, _ = timed([*afternoon, given[-1]])
    their_warm = statistics.median(json.loads(said)[1:])
    pages, seconds = annex()
    goals = (
        ("warm", their_warm / warm, WARM, f"{warm:.2f} s against {their_warm:.2f} s a report"),
        ("cold", their_cold / cold, COLD, f"{cold:.2f} s against {their_cold:.2f} s"),
        (
            "memory",
            their_memory / memory,
            1.0,
            f"{memory} MB against {their_memory} MB in the largest process",
        ),
        ("annex, pages", ANNEX_PAGES / pages, 1.0, f"2,000 values on {pages} pages"),
        ("annex, time", ANNEX_SECONDS / seconds, 1.0, f"2,000 values in {seconds:.2f} s"),
    )
    for name, found, goal, text in goals:
        verdict = "met" if found >= goal else "MISSED"
        print(f"{name}: {text}; {found:.2f} times, at least {goal:.2f}: {verdict}")
    return 0 if all(found >= goal for _, found, goal, _ in goals) else 1


if __name__ == "__main__":
    sys.exit(main())
