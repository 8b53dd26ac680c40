"""`compare --workbook`: the numbers of a report as a workbook, on demand."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from openpyxl import load_workbook
from rig import NAME, Site, export


def test_a_workbook_lies_beside_the_result_where_it_was_asked_for(site: Site, tmp_path: Path) -> None:
    given, out = export(tmp_path / NAME), tmp_path / "out"
    site.done("compare", given, "--no-report", "--out", out, "--workbook")
    assert sorted(p.name for p in out.iterdir()) == ["result.json", "results.xlsx"]
    (found,) = json.loads((out / "result.json").read_bytes())["characteristics"]
    rows = list(load_workbook(out / "results.xlsx")["Pairs"].iter_rows(values_only=True))
    column = rows[0].index("difference")
    assert [r[column] for r in rows[1:]] == pytest.approx(
        [p["difference"] for p in found["pairs"]], rel=1e-15
    )


def test_without_a_folder_it_is_refused_before_anything_is_compared(site: Site, tmp_path: Path) -> None:
    ran = site.run("compare", export(tmp_path / NAME), "--workbook")
    assert ran.code == 2
    assert "--workbook needs a folder to write to: --out DIR" in ran.err
    assert site.reports == []
