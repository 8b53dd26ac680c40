"""Simulate the published error rates: docs/rates.csv and docs/rates.svg.

    python tests/rates/rates_run.py [--replicates 100000] [--others 20000] [--jobs 2]

`--replicates` is for normal results, `--others` for the other shapes. Progress goes to standard error. What
is done is kept in build/rates.part.csv and taken up by the next call with the same numbers and tables. At the
end it prints the largest rate of each kind, and every normal cell of the default table above the limit.
"""

from __future__ import annotations

import argparse
import csv
import sys
import time
from collections.abc import Iterable, Iterator
from concurrent.futures import ProcessPoolExecutor, as_completed
from pathlib import Path

from rates_figure import figure
from rates_grid import LIMIT, Block, Cell, blocks, simulate

from qcreport.canonical import sha256_hex
from qcreport.settings.shipped import shipped_files

ROOT = Path(__file__).parents[2]
PART = ROOT / "build" / "rates.part.csv"
COLUMNS = (
    "table",
    "known",
    "family",
    "sizes",
    "reference",
    "spread",
    "sds",
    "shape",
    "replicates",
    "alarms",
    "rate",
)


def main() -> None:
    """Run what is not done yet, then write everything and say what stands out."""
    options = _options()
    todo = list(blocks())
    done = _taken_up(options)
    todo = [b for b in todo if b.name not in {c.block.name for c in done}]
    for cells in _simulated(todo, options):
        done += cells
        _write(PART, cells, append=True)
    order = {b.name: i for i, b in enumerate(blocks())}
    done.sort(key=lambda c: (c.table, c.known, order[c.block.name]))
    docs = ROOT / "docs"
    _write(docs / "rates.csv", done, append=False)
    (docs / "rates.svg").write_text(figure(done), encoding="utf-8")
    PART.unlink(missing_ok=True)
    _say(done)


def _options() -> argparse.Namespace:
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--replicates", type=int, default=100_000)
    parser.add_argument("--others", type=int, default=20_000)
    parser.add_argument("--jobs", type=int, default=2)
    return parser.parse_args()


def _simulated(todo: list[Block], options: argparse.Namespace) -> Iterator[list[Cell]]:
    """Yield the cells of each block as they come, telling how far it is."""
    work = {b.name: sum(b.sizes) * _replicates(b, options) for b in todo}
    total, finished, begin = sum(work.values()), 0, time.monotonic()
    todo = sorted(todo, key=lambda b: -work[b.name])
    with ProcessPoolExecutor(max_workers=options.jobs) as pool:
        futures = {pool.submit(simulate, b, _replicates(b, options)): b for b in todo}
        for count, future in enumerate(as_completed(futures), start=1):
            finished += work[futures[future].name]
            spent = time.monotonic() - begin
            left = spent * (total - finished) / finished
            print(
                f"\r{count}/{len(todo)} designs, {spent / 60:.1f} min, about {left / 60:.1f} min left ",
                end="",
                file=sys.stderr,
                flush=True,
            )
            yield future.result()
    print(file=sys.stderr)


def _replicates(block: Block, options: argparse.Namespace) -> int:
    return int(options.replicates if block.shape == "normal" else options.others)


def _digest(options: argparse.Namespace) -> str:
    tables = b"".join(data for _, data in sorted(shipped_files("config/rules", "*.toml").items()))
    code = b"".join(p.read_bytes() for p in sorted((ROOT / "qcreport" / "rates").glob("*.py")))
    return sha256_hex(tables + code + f"{options.replicates} {options.others}".encode())


def _taken_up(options: argparse.Namespace) -> list[Cell]:
    """Return what an earlier call with the same tables, code and numbers has done; else begin anew."""
    PART.parent.mkdir(exist_ok=True)
    stamp = PART.with_suffix(".sha256")
    if not (PART.exists() and stamp.exists() and stamp.read_text("utf-8") == _digest(options)):
        PART.unlink(missing_ok=True)
        stamp.write_text(_digest(options), encoding="utf-8")
        return []
    found = list(read(PART))
    print(f"{len(found)} cells are done already.", file=sys.stderr)
    return found


def _write(path: Path, cells: Iterable[Cell], *, append: bool) -> None:
    head = not (append and path.exists())
    with path.open("a" if append else "w", newline="", encoding="utf-8") as stream:
        writer = csv.writer(stream, lineterminator="\n")
        if head:
            writer.writerow(COLUMNS)
        for c in cells:
            b = c.block
            reference = "" if b.reference is None else b.reference
            sizes, sds = " ".join(map(str, b.sizes)), " ".join(f"{s:g}" for s in b.sds)
            writer.writerow(
                (
                    *(c.table, c.known, b.family, sizes, reference, b.spread, sds, b.shape),
                    *(c.replicates, c.alarms, f"{c.rate:.5f}"),
                )
            )


def read(path: Path) -> Iterator[Cell]:
    """Yield the cells of a file of rates."""
    with path.open(newline="", encoding="utf-8") as stream:
        for row in csv.DictReader(stream):
            block = Block(
                family=row["family"],
                sizes=tuple(int(n) for n in row["sizes"].split()),
                reference=int(row["reference"]) if row["reference"] else None,
                spread=row["spread"],
                sds=tuple(float(s) for s in row["sds"].split()),
                shape=row["shape"],
            )
            yield Cell(row["table"], row["known"], block, int(row["replicates"]), int(row["alarms"]))


def _say(cells: list[Cell]) -> None:
    """Print the largest rate of each kind, and every cell above the limit."""
    normal = [c for c in cells if c.block.shape == "normal"]
    for table, known in dict.fromkeys((c.table, c.known) for c in normal):
        honest = [c for c in normal if (c.table, c.known) == (table, known) and not c.misdeclared]
        worst = max(honest, key=lambda c: c.rate)
        print(f"{table}, {known}: {len(honest)} normal cells, largest {_line(worst)}")
    missed = [c for c in normal if c.table == "default" and not c.misdeclared and c.too_high]
    for c in missed:
        print(f"ABOVE {LIMIT}: {c.known}, {_line(c)}")


def _line(cell: Cell) -> str:
    b = cell.block
    return f"{cell.rate:.4f} ± {cell.se:.4f} ({len(b.sizes)} groups, {b.family}, {b.spread})"


if __name__ == "__main__":
    main()
