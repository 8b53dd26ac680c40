"""A cumulative export dropped evening after evening, with one value corrected on the way."""

from __future__ import annotations

import json
import sqlite3
from collections import Counter
from datetime import datetime
from pathlib import Path
from typing import Any

import pytest
from openpyxl import Workbook
from rig import BATCHES, Site, copied, done

pytestmark = pytest.mark.slow

FIRST_LIST = sum(map(len, BATCHES.values()))
EVENINGS = 5
CORRECTED_ON = 2


def drop(site: Site, evening: int) -> None:
    """Drop the list as it stands on an evening: each day brings one more specimen of each batch.

    On the third day somebody also corrects the third specimen of the first batch.
    """
    book = Workbook()
    (page,) = book.worksheets
    page.title = "Results"
    page.append(["Batch", "Line", "Specimen", "Tested at", "Lap shear (MPa)"])
    for batch, values in BATCHES.items():
        later = [23.0 + 0.1 * day for day in range(evening)]
        for number, value in enumerate((*values, *later), start=1):
            corrected = evening >= CORRECTED_ON and (batch, number) == ("LA-2411", 3)
            tested = datetime(2026, 11, 3 + max(0, number - len(values)), 8, number)  # noqa: DTZ001
            page.append([batch, batch[:2], f"{batch}-{number}", tested, 24.6 if corrected else value])
    book.save(site.inbox / "lap-shear-list.xlsx")
    book.close()


@pytest.fixture(scope="module")
def evenings(site_as_made: Path, tmp_path_factory: pytest.TempPathFactory) -> Site:
    """Return a site after five evenings of one growing list."""
    site = copied(site_as_made, tmp_path_factory.mktemp("evenings") / "site")
    for evening in range(EVENINGS):
        drop(site, evening)
        site.done("watch", "--once")
    return site


def records_of(site: Site, tmp_path: Path) -> list[Any]:
    """Return what the context of each report says of the records, in order."""
    found = []
    for report in site.reports:
        folder = tmp_path / report.stem
        done("extract", report, folder)
        found.append(json.loads((folder / "context.json").read_text("utf-8"))["records"])
    return found


def test_each_evening_is_one_report_and_one_run(evenings: Site) -> None:
    listed = evenings.done("records", "list", "--json").json["reports"]
    assert len({row["number"] for row in listed}) == EVENINGS
    assert [(row["run"]["k"], row["run"]["n"]) for row in listed] == [(1, 1)] * EVENINGS


def test_every_value_counts_once_and_the_correction_is_one_more_version(evenings: Site) -> None:
    raw = sqlite3.connect(evenings.root / "records/records.sqlite3")
    versions = Counter(version for (version,) in raw.execute("SELECT version FROM measurement"))
    corrected = "SELECT text, version FROM measurement WHERE sample = 'LA-2411-3' ORDER BY version"
    assert raw.execute(corrected).fetchall() == [("23.6", 1), ("24.6", 2)]
    raw.close()
    assert versions == {1: FIRST_LIST + 3 * (EVENINGS - 1), 2: 1}


def test_what_each_report_says_of_values_met_before(evenings: Site, tmp_path: Path) -> None:
    told = records_of(evenings, tmp_path)
    assert [(r["new"], r["known"]) for r in told] == [(15, 0), (3, 15), (3, 17), (3, 21), (3, 24)]
    assert [[c["when"] for c in r["changed"]] for r in told] == [[], [], ["now"], ["earlier"], ["earlier"]]
    flags = [[flag["why"] for flag in r["retests"]] for r in told]
    assert flags == [[], [], ["another value at the same time"], [], []]
    change = told[2]["changed"][0]
    assert (change["cell"], change["before"], change["after"]) == ("Results!E4", "23.6 MPa", "24.6 MPa")
    assert change["source"] == evenings.reports[0].name.split()[0]


def test_the_reports_recompute_and_the_store_holds_what_the_exports_hold(evenings: Site) -> None:
    assert evenings.run("verify", evenings.reports[2], "--json").json["valid"]
    assert evenings.done("records", "check", "--reread", "all", "--json").json["reread"] == EVENINGS
