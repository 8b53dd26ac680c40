"""Draw docs/: page 1 of five reports as people would meet them, and the example that the README shows.

Run by `make golden`. Needs pdftoppm and Pillow, both of which the tests use too.
"""

from __future__ import annotations

import random
import subprocess
import sys
import tempfile
from collections.abc import Mapping, Sequence
from dataclasses import replace
from pathlib import Path

from PIL import Image

sys.path.insert(0, str(Path(__file__).parent / "unit"))

from report.samples import ATTACHMENTS, characteristic, context, measurements, plan_of

from qcreport.analysis import analyse
from qcreport.plan.model import ComparisonPlan
from qcreport.report.job import RenderJob, render_job
from qcreport.report.templates import load_templates
from qcreport.rules import parse_rules

ROOT = Path(__file__).parent.parent
DPI = 80
COLOURS = 160
FIRST = "equal-sizes"
"""The case whose page 1 the README shows."""

Batches = Mapping[str, Sequence[float]]


def batches(seed: int, shape: Mapping[str, tuple[int, float, float]], decimals: int = 2) -> Batches:
    """Return values by batch; `shape` gives n, mean and scatter of each."""
    numbers = random.Random(seed)  # noqa: S311 - example data
    return {
        label: [round(numbers.gauss(mean, spread), decimals) for _ in range(n)]
        for label, (n, mean, spread) in shape.items()
    }


LONG = {
    f"mixing line {'ABCD'[i % 4]}, second vessel, batch 24-{i:02d}": (5, 24.0 + 0.5 * (i % 5), 0.5)
    for i in range(24)
}
CASES: dict[str, tuple[Sequence[Batches], str | None, bool]] = {
    "equal-sizes": (
        [
            batches(
                3, {f"L{c}-2403": (8, m, 0.7) for c, m in zip("ABCD", (24.2, 23.8, 24.4, 22.6), strict=True)}
            )
        ],
        None,
        True,
    ),
    "unequal-sizes": (
        [batches(5, {"LA-2404": (12, 24.1, 0.6), "LB-2404": (7, 23.0, 0.7), "LC-2404": (10, 24.3, 0.6)})],
        None,
        True,
    ),
    "different-spread": (
        [batches(9, {"LA-2405": (10, 24.0, 0.3), "LB-2405": (10, 24.6, 1.6), "LC-2405": (10, 25.3, 0.5)})],
        None,
        False,
    ),
    "nine-with-reference": (
        [
            batches(
                12, {f"LB-24{i:02d}": (6, 24.0 + (1.6 if i == 7 else 0.15 * i), 0.5) for i in range(1, 10)}
            )
        ],
        "LB-2401",
        False,
    ),
    "24-long-names": ([batches(21, LONG), batches(22, LONG)], None, False),
}
"""Name → values of each characteristic, the reference, whether spread is declared similar."""


def pdf_of(name: str) -> bytes:
    """Return the report of one case, from analysis to pages."""
    values, reference, similar = CASES[name]
    kinds = (("lap_shear", "Lap-shear strength"), ("peel", "T-peel force"))
    asked = [
        characteristic(v, name=n, title=t, column=3 + i, procedure="tamhane_t2", reference=reference)
        for i, (v, (n, t)) in enumerate(zip(values, kinds, strict=False))
    ]
    read = measurements(asked)
    plan: ComparisonPlan = replace(plan_of(*asked, spread=similar), reference=reference)
    rules = parse_rules((ROOT / "config/rules/default.toml").read_bytes(), "default")
    around = context(demonstration=True)
    job = RenderJob(
        result=analyse(read, plan, rules, around),
        measurements=read,
        plan=plan,
        context=around,
        attachments=ATTACHMENTS,
        templates=load_templates({}),
    )
    return render_job(job).pdf


def drawn(pdf: bytes, folder: Path, *, pages: int, dpi: int = DPI) -> Image.Image:
    """Return the first pages of a report beside each other."""
    (folder / "a.pdf").write_bytes(pdf)
    for old in folder.glob("*.png"):
        old.unlink()
    command = ["pdftoppm", "-r", str(dpi), "-l", str(pages), "-png", str(folder / "a.pdf"), str(folder / "p")]
    subprocess.run(command, check=True)
    found = [Image.open(p).convert("RGB") for p in sorted(folder.glob("*.png"))]
    sheet = Image.new("RGB", (sum(p.width for p in found), found[0].height), "white")
    left = 0
    for page in found:
        sheet.paste(page, (left, 0))
        left += page.width
    return sheet


def main() -> None:
    """Write one picture a case into docs/."""
    with tempfile.TemporaryDirectory() as folder:
        for name in CASES:
            pdf = pdf_of(name)
            if name == FIRST:
                page = drawn(pdf, Path(folder), pages=1, dpi=90)
                page.quantize(COLOURS).save(ROOT / "docs" / "page-1.png", optimize=True)
            sheet = drawn(pdf, Path(folder), pages=2)
            sheet.quantize(COLOURS).save(ROOT / "docs" / f"pages-{name}.png", optimize=True)


if __name__ == "__main__":
    main()
