"""The example exports are what their maker makes, and the example plans and layouts fit them."""

from __future__ import annotations

import fnmatch
import hashlib
import subprocess
import sys
import tomllib
import zipfile
from pathlib import Path
from typing import Any

import openpyxl
import pytest

ROOT = Path(__file__).resolve().parents[2]
EXPORTS = sorted((ROOT / "inbox_example").glob("*.xlsx"))
PLANS = {path.stem: tomllib.loads(path.read_text("utf-8")) for path in (ROOT / "config/plans").glob("*.toml")}


def make(folder: Path) -> None:
    subprocess.run([sys.executable, ROOT / "tests/make_inbox_example.py", folder], check=True, timeout=60)


def content_sha256(path: Path) -> str:
    """Return a digest of all that a workbook holds; the bytes around it depend on the machine's zlib."""
    digest = hashlib.sha256()
    with zipfile.ZipFile(path) as members:
        for member in members.infolist():
            digest.update(repr((member.filename, member.date_time, member.file_size)).encode())
            digest.update(members.read(member))
    return digest.hexdigest()


def test_the_committed_files_are_what_the_script_makes(tmp_path: Path) -> None:
    make(tmp_path)
    made = {path.name: content_sha256(path) for path in tmp_path.iterdir()}
    assert made == {path.name: content_sha256(path) for path in EXPORTS}


def test_two_runs_give_the_same_bytes(tmp_path: Path) -> None:
    make(tmp_path / "once")
    make(tmp_path / "twice")
    for path in (tmp_path / "once").iterdir():
        assert path.read_bytes() == (tmp_path / "twice" / path.name).read_bytes(), path.name


def plans_of(export: Path) -> list[dict[str, Any]]:
    return [
        plan
        for plan in PLANS.values()
        if any(fnmatch.fnmatchcase(export.name, pattern) for pattern in plan["exports"])
    ]


@pytest.mark.parametrize("export", EXPORTS, ids=lambda path: path.name)
def test_exactly_one_plan_takes_each_export_and_its_layout_finds_the_columns(export: Path) -> None:
    (plan,) = plans_of(export)
    layout = tomllib.loads((ROOT / f"config/layouts/{plan['layout']}.toml").read_text("utf-8"))
    assert layout["name"] == plan["layout"]
    page = openpyxl.load_workbook(export, read_only=False)[layout["sheet"]["name"]]
    (table,) = layout["table"]
    read = {value["characteristic"]: value for value in table["value"]}
    for characteristic in plan["characteristic"]:
        value = read[characteristic["name"]]
        assert value["unit"] == characteristic["unit"]
        assert page[f"{value['col']}{table['header_rows'][-1]}"].value == value["header"]
        assert isinstance(page[f"{value['col']}{table['first_row']}"].value, int | float)


def test_every_example_plan_has_an_export() -> None:
    used = {plan["name"] for export in EXPORTS for plan in plans_of(export)}
    assert used == {plan["name"] for plan in PLANS.values()} == set(PLANS)
