"""Make the example exports in inbox_example/: invented values of a made-up maker of structural adhesives.

    python tests/make_inbox_example.py [FOLDER]

Every number comes from a fixed seed. A batch gets exactly the mean and the scatter asked for (before rounding
to what its rig shows), so that each export ends in the answers that inbox_example/README.md names for it. Two
runs on one machine give the same bytes.
"""

from __future__ import annotations

import io
import random
import re
import statistics
import sys
import zipfile
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta
from pathlib import Path

from openpyxl import Workbook
from openpyxl.styles import Alignment, Border, Font, PatternFill, Side
from openpyxl.worksheet.worksheet import Worksheet

SEED = 2403
MADE_AT = datetime(2026, 11, 3, 7, 30)  # noqa: DTZ001  # workbooks hold local times without a zone
FOLDER = Path(__file__).resolve().parent.parent / "inbox_example"


@dataclass(frozen=True, slots=True, kw_only=True)
class Batch:
    """One batch as it will be measured."""

    label: str
    n: int
    mean: float
    sd: float
    outlying: float | None = None
    """Distance of the last value from the mean, in standard deviations of the whole batch."""


def values(batch: Batch, resolution: float, seed: str) -> list[float]:
    """Return the batch's values with its mean and standard deviation, rounded to what the rig shows."""
    chance = random.Random(f"{SEED} {seed} {batch.label}")  # noqa: S311  # example data
    normal = statistics.NormalDist()
    free = batch.n if batch.outlying is None else batch.n - 1
    z = _standardised([normal.inv_cdf(0.03 + 0.94 * chance.random()) for _ in range(free)])
    if batch.outlying is not None:
        # n values of mean 0 and variance 1 of which the last is fixed: the others share what is left of both.
        last = batch.outlying
        left = ((batch.n - 1) - last**2 - last**2 / free) / (free - 1)
        z = [-last / free + left**0.5 * value for value in z] + [last]
    decimals = max(0, -int(f"{resolution:e}".split("e")[1]))
    return [round(round((batch.mean + batch.sd * value) / resolution) * resolution, decimals) for value in z]


def _standardised(z: Sequence[float]) -> list[float]:
    mean, sd = statistics.fmean(z), statistics.stdev(z)
    return [(value - mean) / sd for value in z]


def working_times(start: datetime, seed: str, minutes: tuple[float, float]) -> Iterator[datetime]:
    """Yield the times of one test after the other between 07:30 and 16:30, with a break at noon."""
    chance = random.Random(f"{SEED} times {seed}")  # noqa: S311  # example data
    now = start
    while True:
        now += timedelta(seconds=round(60 * chance.uniform(*minutes)))
        if now.hour == 12 and now.minute < 40:
            now += timedelta(minutes=45)
        if (now.hour, now.minute) >= (16, 30):
            now = (now + timedelta(days=1)).replace(hour=7, minute=30, second=chance.randrange(60))
        yield now


HEAD = Font(name="Arial", size=10, bold=True)
PLAIN = Font(name="Arial", size=10)
TITLE = Font(name="Arial", size=13, bold=True)
GREY = PatternFill("solid", start_color="FFE4E4E4")
UNDER = Border(bottom=Side(style="thin"))


def new_workbook(sheet: str) -> tuple[Workbook, Worksheet]:
    """Return a workbook with one named sheet."""
    book = Workbook()
    page = book.worksheets[0]
    page.title = sheet
    return book, page


def title_block(page: Worksheet, lines: Sequence[tuple[str, object]]) -> None:
    """Write a rig's title block from the first row: a title, then name and value."""
    for row, (name, value) in enumerate(lines, start=1):
        page.cell(row, 1, name).font = TITLE if row == 1 else HEAD
        if value is not None:
            cell = page.cell(row, 2, value)
            cell.font = PLAIN
            cell.alignment = Alignment(horizontal="left")
            if isinstance(value, datetime):
                cell.number_format = "yyyy-mm-dd hh:mm"


def header(page: Worksheet, row: int, names: Sequence[str], widths: Sequence[float]) -> None:
    """Write one header row."""
    for column, (name, width) in enumerate(zip(names, widths, strict=True), start=1):
        cell = page.cell(row, column, name)
        cell.font, cell.fill, cell.border = HEAD, GREY, UNDER
        cell.alignment = Alignment(wrap_text=True, vertical="top")
        page.column_dimensions[cell.column_letter].width = width


def line(page: Worksheet, row: int, entries: Sequence[tuple[object, str]]) -> None:
    """Write one row of (value, number format)."""
    for column, (value, number_format) in enumerate(entries, start=1):
        cell = page.cell(row, column, value)
        cell.font = PLAIN
        if number_format:
            cell.number_format = number_format


def workbook_bytes(book: Workbook) -> bytes:
    """Return the workbook with every date in it fixed, so that the same content gives the same bytes."""
    book.properties.creator = "Rig software (example)"
    book.properties.created = MADE_AT
    raw = io.BytesIO()
    book.save(raw)
    fixed = io.BytesIO()
    with zipfile.ZipFile(raw) as old, zipfile.ZipFile(fixed, "w", zipfile.ZIP_DEFLATED) as new:
        for name in old.namelist():
            content = old.read(name)
            if name == "docProps/core.xml":
                content = re.sub(
                    rb"(<dcterms:modified[^>]*>)[^<]*",
                    rb"\g<1>" + MADE_AT.isoformat().encode() + b"Z",
                    content,
                )
            member = zipfile.ZipInfo(name, (2026, 11, 3, 7, 30, 0))
            member.compress_type = zipfile.ZIP_DEFLATED
            member.external_attr = 0o644 << 16
            new.writestr(member, content)
    return fixed.getvalue()


def shear_rig(batches: Sequence[Batch], seed: str, start: datetime, replaced: dict[int, str]) -> bytes:
    """Return an export of the lap-shear rig; `replaced` puts a text over the value of the nth specimen."""
    book, page = new_workbook("Results")
    last = start
    rows: list[Sequence[tuple[object, str]]] = []
    times = working_times(start, seed, (4.5, 9.0))
    chance = random.Random(f"{SEED} failure {seed}")  # noqa: S311  # example data
    for batch in batches:
        for number, strength in enumerate(values(batch, 0.01, seed), start=1):
            last = next(times)
            shown: object = replaced.get(len(rows) + 1, strength)
            overlap = round(12.5 + chance.uniform(-0.12, 0.12), 2)
            failure = chance.choices(("cohesive", "mixed"), (0.85, 0.15))[0]
            rows.append(
                (
                    (batch.label, "@"),
                    (batch.label[1], "@"),
                    (f"{batch.label}-{number:02d}", "@"),
                    (last, "yyyy-mm-dd hh:mm"),
                    (overlap, "0.00"),
                    (round(strength * overlap * 25.0 / 1000, 2), "0.00"),
                    (shown, "0.00" if shown is strength else "General"),
                    (failure, "@"),
                )
            )
    title_block(
        page,
        (
            ("Lap-shear rig 2", None),
            ("Method", "single lap on grit-blasted steel, 23 °C, 10 mm/min"),
            ("Load cell", "50 kN, class 0.5"),
            ("Exported", (last + timedelta(minutes=12)).replace(second=0)),
        ),
    )
    header(
        page,
        6,
        (
            "Batch",
            "Line",
            "Specimen",
            "Tested",
            "Overlap (mm)",
            "Maximum load (kN)",
            "Lap shear (MPa)",
            "Failure",
        ),
        (11, 6, 14, 17, 10, 12, 11, 11),
    )
    for row, entries in enumerate(rows, start=7):
        line(page, row, entries)
    page.freeze_panes = "A7"
    return workbook_bytes(book)


def peel_rig(batches: Sequence[Batch], start: datetime) -> bytes:
    """Return an export of the peel rig: a row of units, and a status that voids a slipped specimen."""
    book, page = new_workbook("Peel")
    title_block(page, (("T-peel, 100 mm/min, width 25 mm", None),))
    header(
        page,
        3,
        ("Batch", "Specimen", "Tested", "Mean peel force", "Status", "Remark"),
        (11, 14, 17, 12, 9, 26),
    )
    line(page, 4, (("", ""), ("", ""), ("", ""), ("N/mm", "@"), ("", ""), ("", "")))
    times = working_times(start, "peel", (6.0, 11.0))
    row = 5
    for batch in batches:
        for number, force in enumerate(values(batch, 0.01, "peel"), start=1):
            specimen = f"{batch.label}/{number:02d}"
            if (batch.label, number) == ("LC-2404", 4):
                slipped = (1.12, "0.00")
                line(
                    page,
                    row,
                    (
                        (batch.label, "@"),
                        (f"{specimen}x", "@"),
                        (next(times), "yyyy-mm-dd hh:mm"),
                        slipped,
                        ("void", "@"),
                        ("slipped out of the grip", "@"),
                    ),
                )
                row += 1
            line(
                page,
                row,
                (
                    (batch.label, "@"),
                    (specimen, "@"),
                    (next(times), "yyyy-mm-dd hh:mm"),
                    (force, "0.00"),
                    ("valid", "@"),
                ),
            )
            row += 1
    return workbook_bytes(book)


def viscometer(batches: Sequence[Batch], start: datetime) -> bytes:
    """Return an export of the viscometer, which shows tens of mPa.s."""
    book, page = new_workbook("Viscosity")
    header(
        page,
        1,
        ("Run", "Date and time", "Batch", "Sample", "Spindle", "rpm", "Temp. (°C)", "Viscosity (mPa.s)"),
        (6, 17, 11, 14, 9, 6, 10, 12),
    )
    times = working_times(start, "viscosity", (3.0, 6.5))
    chance = random.Random(f"{SEED} temperature")  # noqa: S311  # example data
    row = 2
    for batch in batches:
        for number, viscosity in enumerate(values(batch, 10.0, "viscosity"), start=1):
            line(
                page,
                row,
                (
                    (row - 1, "0"),
                    (next(times), "yyyy-mm-dd hh:mm"),
                    (batch.label, "@"),
                    (f"{batch.label}-V{number:02d}", "@"),
                    ("S6", "@"),
                    (20, "0"),
                    (round(23.0 + chance.uniform(-0.2, 0.2), 1), "0.0"),
                    (int(viscosity), "0"),
                ),
            )
            row += 1
    return workbook_bytes(book)


def open_time_bench(batches: Sequence[Batch], start: datetime) -> bytes:
    """Return an export of the open-time bench, the reference batch first."""
    book, page = new_workbook("Open time")
    title_block(
        page,
        (
            ("Open time, bead on card, 23 °C, 50 % r.h.", None),
            ("Bench", "OT-1"),
            ("Exported", datetime(2026, 11, 5, 16, 41)),  # noqa: DTZ001  # local time, as the bench writes it
        ),
    )
    header(page, 5, ("Batch", "Card", "Started", "Open time (min)"), (11, 9, 17, 16))
    times = working_times(start, "open time", (7.0, 12.0))
    row = 6
    for batch in batches:
        for minutes in values(batch, 0.1, "open time"):
            line(
                page,
                row,
                (
                    (batch.label, "@"),
                    (f"C{row - 5:03d}", "@"),
                    (next(times), "yyyy-mm-dd hh:mm"),
                    (minutes, "0.0"),
                ),
            )
            row += 1
    return workbook_bytes(book)


def release_panel(shear: Sequence[Batch], monomer: Sequence[Batch], start: datetime) -> bytes:
    """Return an export with two characteristics side by side, one of them once not measured."""
    book, page = new_workbook("Release panel")
    header(
        page,
        1,
        ("Batch", "Line", "Sample", "Taken", "Lap shear (MPa)", "Residual monomer (mg/kg)"),
        (11, 6, 14, 17, 11, 13),
    )
    times = working_times(start, "panel", (20.0, 34.0))
    row = 2
    for first, second in zip(shear, monomer, strict=True):
        pairs = zip(values(first, 0.01, "panel shear"), values(second, 1.0, "panel monomer"), strict=True)
        for number, (strength, content) in enumerate(pairs, start=1):
            absent = (first.label, number) == ("LB-2405", 5)
            line(
                page,
                row,
                (
                    (first.label, "@"),
                    (first.label[1], "@"),
                    (f"{first.label}-P{number}", "@"),
                    (next(times), "yyyy-mm-dd hh:mm"),
                    (strength, "0.00"),
                    ("n/a", "@") if absent else (int(content), "0"),
                ),
            )
            row += 1
    return workbook_bytes(book)


def at(day: int, hour: int, minute: int = 0) -> datetime:
    """Return a local time in November 2026."""
    return datetime(2026, 11, day, hour, minute)  # noqa: DTZ001  # local time, as the rigs write it


def exports() -> dict[str, bytes]:
    """Return every example export by its name."""
    return {
        "lap-shear-2403.xlsx": shear_rig(
            (
                Batch(label="LA-2403", n=10, mean=24.18, sd=0.88),
                Batch(label="LB-2403", n=10, mean=23.77, sd=0.81),
                Batch(label="LC-2404", n=10, mean=24.45, sd=0.79),
                Batch(label="LD-2404", n=10, mean=22.55, sd=0.86),
            ),
            "2403",
            at(3, 7, 40),
            {},
        ),
        "lap-shear-textbook-2404.xlsx": shear_rig(
            (
                Batch(label="LA-2404", n=8, mean=24.62, sd=0.74),
                Batch(label="LB-2405", n=8, mean=24.31, sd=0.86),
                Batch(label="LC-2405", n=8, mean=23.50, sd=0.80),
                Batch(label="LD-2405", n=8, mean=24.02, sd=0.71),
            ),
            "textbook",
            at(5, 7, 35),
            {},
        ),
        "lap-shear-2405-rework.xlsx": shear_rig(
            (
                Batch(label="LC-2405R", n=6, mean=23.60, sd=0.80),
                Batch(label="LD-2405R", n=6, mean=22.90, sd=0.85),
            ),
            "rework",
            at(6, 13, 5),
            {4: "12.4*", 9: "see note"},
        ),
        "peel-2404.xlsx": peel_rig(
            (
                Batch(label="LA-2404", n=8, mean=5.62, sd=0.18),
                Batch(label="LB-2404", n=10, mean=5.58, sd=0.17, outlying=-2.62),
                Batch(label="LC-2404", n=9, mean=4.70, sd=0.19),
                Batch(label="LD-2404", n=10, mean=5.40, sd=0.16),
            ),
            at(4, 7, 50),
        ),
        "viscosity-2404.xlsx": viscometer(
            (
                Batch(label="LA-2404", n=10, mean=12150, sd=80),
                Batch(label="LB-2404", n=12, mean=12340, sd=90),
                Batch(label="LC-2404", n=11, mean=12240, sd=310),
                Batch(label="LD-2404", n=10, mean=12980, sd=120),
            ),
            at(4, 8, 15),
        ),
        "open-time-ref-2404.xlsx": open_time_bench(
            (
                Batch(label="REF-2311", n=12, mean=18.0, sd=0.55),
                Batch(label="LA-2403", n=6, mean=18.2, sd=0.60),
                Batch(label="LB-2403", n=7, mean=17.6, sd=0.52),
                Batch(label="LC-2404", n=8, mean=16.1, sd=0.58),
                Batch(label="LD-2404", n=6, mean=19.0, sd=0.56),
                Batch(label="LA-2404", n=7, mean=18.1, sd=0.50),
            ),
            at(5, 7, 45),
        ),
        "two-characteristics-2405.xlsx": release_panel(
            (
                Batch(label="LA-2405", n=6, mean=24.10, sd=0.50),
                Batch(label="LB-2405", n=6, mean=23.95, sd=0.55),
                Batch(label="LC-2405", n=6, mean=24.25, sd=0.48),
            ),
            (
                Batch(label="LA-2405", n=6, mean=118, sd=9.0),
                Batch(label="LB-2405", n=6, mean=126, sd=10.0),
                Batch(label="LC-2405", n=6, mean=121, sd=8.5),
            ),
            at(6, 7, 35),
        ),
    }


def main() -> None:
    """Write the exports into inbox_example/ or the folder named."""
    folder = Path(sys.argv[1]) if len(sys.argv) > 1 else FOLDER
    folder.mkdir(parents=True, exist_ok=True)
    for name, content in exports().items():
        (folder / name).write_bytes(content)


if __name__ == "__main__":
    main()
