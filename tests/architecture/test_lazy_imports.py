"""What a start must not load: a service and its children are quick because they load only what they use."""

from __future__ import annotations

import subprocess
import sys

import pytest

EVERY_STATS_MODULE = """
import importlib, pkgutil, qcreport.stats
for found in pkgutil.walk_packages(qcreport.stats.__path__, "qcreport.stats."):
    importlib.import_module(found.name)
"""
EDGE = {"pandas", "openpyxl", "jinja2", "weasyprint", "sqlalchemy", "pyhanko", "cryptography", "watchdog"}
HEAVY = {"pandas", "openpyxl", "scipy.stats", "weasyprint"}


@pytest.mark.parametrize(
    ("statement", "forbidden"),
    [
        ("import qcreport.stats", EDGE | {"scipy.stats"}),
        (EVERY_STATS_MODULE, EDGE | {"scipy.stats"}),
        ("import qcreport.cli", HEAVY),
        ("import qcreport.service", HEAVY),
        ("import qcreport.workbook.reader_child", HEAVY),
    ],
    ids=["stats", "every module of stats", "cli", "service", "reader child"],
)
def test_importing_it_loads_none_of_these(statement: str, forbidden: set[str]) -> None:
    script = f"{statement}\nimport sys\nprint(*sorted(set(sys.modules) & {forbidden!r}))"
    result = subprocess.run(
        [sys.executable, "-I", "-c", script], capture_output=True, text=True, check=False, timeout=60
    )
    assert result.returncode == 0, result.stderr
    assert result.stdout.split() == []
