"""Measure the reading of exports: time against openpyxl's read-only mode in one run, and memory.

    python tests/benchmarks/reading_bench.py [rounds] [rows of the memory run]

Both sides read the same workbook of 100,000 rows of 6 cells in a process of its own; ours with all checks,
the second look and the way back to the parent, the general library with nothing but a loop over the cells.
Times are processor seconds, both sides in turn, the median over the rounds. The memory is the peak of the
reader child's resident pages over a workbook of 1,000,000 rows unless told otherwise, read with all checks
under the address space that a reading is allowed by default; the whole run takes some five minutes. Prints
one line a figure and exits with 1 where a goal is missed by more than half.
"""

from __future__ import annotations

import io
import random
import resource
import statistics
import subprocess
import sys
import tempfile
import time
import zipfile
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

from qcreport.workbook.limits import MEGABYTE, Limits
from qcreport.workbook.read_in_child import read_in_child

ROWS = 100_000
MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
OFFICE = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
PACKAGE = "http://schemas.openxmlformats.org/package/2006"
TYPE = "application/vnd.openxmlformats-officedocument.spreadsheetml"
LAYOUT = b"""
name = "bench"
[[table]]
header_rows = [1]
first_row = 2
end = "sheet"
group = { col = "A", header = "Batch" }
line = { col = "B", header = "Line" }
sample = { col = "C", header = "Sample" }
replicate = { col = "D", header = "Reading" }
status = { col = "E", header = "Status", use = ["valid"] }
[[table.value]]
characteristic = "lap_shear"
col = "F"
header = "Lap shear (MPa)"
unit = "MPa"
unit_from = "header"
"""
LIBRARY = """
import sys, openpyxl
book = openpyxl.load_workbook(sys.argv[1], read_only=True)
print(sum(cell.value is not None for row in book["Data"].iter_rows() for cell in row))
"""
LIMITS = Limits(
    max_rows=2_000_000, max_cells=20_000_000, max_part_bytes=2048 * MEGABYTE,
    max_unpacked_bytes=4096 * MEGABYTE, max_file_bytes=512 * MEGABYTE, memory_bytes=16384 * MEGABYTE,
    cpu_s=1200, wall_s=2400.0, max_answer_bytes=4096 * MEGABYTE,
)  # fmt: skip


def sheet(rows: int) -> Iterator[str]:
    """Yield the XML of a sheet as spreadsheet programs write it: shared texts, stored numbers."""
    draw = random.Random(20261102)  # noqa: S311 - the same workbook every time
    yield f'<worksheet xmlns="{MAIN}"><sheetData><row r="1">'
    yield "".join(f'<c r="{c}1" t="s"><v>{i}</v></c>' for i, c in enumerate("ABCDEF")) + "</row>"
    for i in range(rows):
        r = i + 2
        yield (
            f'<row r="{r}"><c r="A{r}" t="s"><v>{7 + i % 200}</v></c>'
            f'<c r="B{r}" t="s"><v>{207 + i % 3}</v></c><c r="C{r}" t="s"><v>{210 + i // 4}</v></c>'
            f'<c r="D{r}"><v>{1 + i % 4}</v></c><c r="E{r}" t="s"><v>6</v></c>'
            f'<c r="F{r}"><v>{draw.gauss(24, 1):.2f}</v></c></row>'
        )
    yield "</sheetData></worksheet>"


def strings(rows: int) -> Iterator[str]:
    """Yield the shared texts."""
    texts = ["Batch", "Line", "Sample", "Reading", "Status", "Lap shear (MPa)", "valid"]
    texts += [f"LA-{2400 + i}" for i in range(200)] + ["A", "B", "C"]
    yield f'<sst xmlns="{MAIN}">' + "".join(f"<si><t>{text}</t></si>" for text in texts)
    for i in range(rows // 4 + 1):
        yield f"<si><t>S{i:06d}</t></si>"
    yield "</sst>"


def workbook(rows: int) -> bytes:
    """Return a workbook with one sheet of so many rows."""
    relation = '<Relationship Id="r{}" Type="' + OFFICE + '/{}" Target="{}"/>'
    small = {
        "[Content_Types].xml": f'<Types xmlns="{PACKAGE}/content-types">'
        '<Default Extension="rels" ContentType="application/vnd.openxmlformats-package.relationships+xml"/>'
        f'<Override PartName="/xl/workbook.xml" ContentType="{TYPE}.sheet.main+xml"/>'
        f'<Override PartName="/xl/sheet.xml" ContentType="{TYPE}.worksheet+xml"/>'
        f'<Override PartName="/xl/sharedStrings.xml" ContentType="{TYPE}.sharedStrings+xml"/></Types>',
        "_rels/.rels": f'<Relationships xmlns="{PACKAGE}/relationships">'
        + relation.format(1, "officeDocument", "xl/workbook.xml")
        + "</Relationships>",
        "xl/workbook.xml": f'<workbook xmlns="{MAIN}" xmlns:r="{OFFICE}"><sheets>'
        '<sheet name="Data" sheetId="1" r:id="r1"/></sheets></workbook>',
        "xl/_rels/workbook.xml.rels": f'<Relationships xmlns="{PACKAGE}/relationships">'
        + relation.format(1, "worksheet", "sheet.xml")
        + relation.format(2, "sharedStrings", "sharedStrings.xml")
        + "</Relationships>",
    }
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED, compresslevel=1) as archive:
        for name, text in small.items():
            archive.writestr(name, text)
        for name, pieces in (("xl/sheet.xml", sheet(rows)), ("xl/sharedStrings.xml", strings(rows))):
            with archive.open(name, "w", force_zip64=True) as part:
                for piece in pieces:
                    part.write(piece.encode())
    return out.getvalue()


def seconds() -> float:
    """Return the processor time of this process and its children so far."""
    children = resource.getrusage(resource.RUSAGE_CHILDREN)
    return time.process_time() + children.ru_utime + children.ru_stime


def ours(data: bytes, *, second_look: bool, rows: int = ROWS, limits: Limits = LIMITS) -> float:
    """Return the seconds of one reading with all checks."""
    start = seconds()
    result = read_in_child(
        data, name="bench.xlsx", layout_bytes=LAYOUT, layout_file="bench.toml", limits=limits,
        second_look=second_look,
    )  # fmt: skip
    codes = [notice.code for notice in result.notices]
    if len(result.measurements) != rows or "limited_checks" in codes:
        raise SystemExit(f"read {len(result.measurements)} of {rows} values, {codes}")
    return seconds() - start


def library(path: Path) -> float:
    """Return the seconds of a loop over all cells by the general library."""
    start = seconds()
    done = subprocess.run(
        [sys.executable, "-c", LIBRARY, str(path)], capture_output=True, text=True, check=True
    )
    if int(done.stdout) != 6 * (ROWS + 1):
        raise SystemExit(f"the general library read {done.stdout} cells")
    return seconds() - start


def times(rounds: int) -> bool:
    """Print the ratios of the times; return whether the goal is missed by more than half."""
    data = workbook(ROWS)
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "bench.xlsx"
        path.write_bytes(data)
        first: list[float] = []
        both: list[float] = []
        theirs: list[float] = []
        for _ in range(rounds):
            both.append(ours(data, second_look=True))
            theirs.append(library(path))
            first.append(ours(data, second_look=False))
    a, b, c = (statistics.median(found) for found in (first, both, theirs))
    print(f"R1 {ROWS:,} rows x 6, all checks {b:8.2f} s, openpyxl read-only {c:.2f} s")
    print(f"R1 ratio                       {b / c:8.2f}x at most 1x (3x)")
    print(
        f"R2 second look                 {b - a:8.2f} s, {100 * (b - a) / a:.0f} % of the first", flush=True
    )
    return b / c > 1.5


def memory(rows: int) -> bool:
    """Print the peak memory of a reading of so many rows; return whether it misses by more than half."""
    ours(
        workbook(rows),
        second_look=True,
        rows=rows,
        limits=replace(LIMITS, memory_bytes=Limits().memory_bytes),
    )
    peak = resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss / 1024
    allowed = 1024 * rows / 1_000_000
    print(f"R3 memory of {rows:,} rows    {peak:8.0f} MB at most {allowed:.0f} MB", flush=True)
    return peak > 1.5 * allowed


def main() -> int:
    rounds = int(sys.argv[1]) if len(sys.argv) > 1 else 3
    rows = int(sys.argv[2]) if len(sys.argv) > 2 else 1_000_000
    missed = [times(rounds), memory(rows)]
    return 1 if any(missed) else 0


if __name__ == "__main__":
    sys.exit(main())
