"""The rooms import only lower rooms, and a breach is seen."""

from __future__ import annotations

import shutil
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]


def lint_imports(folder: Path) -> subprocess.CompletedProcess[str]:
    command = Path(sys.executable).with_name("lint-imports")
    return subprocess.run(
        [command, "--no-cache"], cwd=folder, capture_output=True, text=True, check=False, timeout=120
    )


def test_the_contracts_hold() -> None:
    result = lint_imports(ROOT)
    assert result.returncode == 0, result.stdout + result.stderr
    assert " 0 broken" in result.stdout


@pytest.mark.parametrize(
    ("module", "line", "contract"),
    [
        ("stats/planted.py", "import qcreport.report", "rooms import only lower rooms"),
        ("report/planted.py", "import qcreport.signing", "rooms import only lower rooms"),
        ("analysis/planted.py", "import pathlib", "the core does no input or output"),
        ("rules/planted.py", "import pandas", "the core does no input or output"),
    ],
)
def test_a_planted_import_breaks_its_contract(tmp_path: Path, module: str, line: str, contract: str) -> None:
    shutil.copy(ROOT / "pyproject.toml", tmp_path)
    shutil.copytree(ROOT / "qcreport", tmp_path / "qcreport", ignore=shutil.ignore_patterns("__pycache__"))
    (tmp_path / "qcreport" / module).write_text(f'"""Planted."""\n\n{line}\n', encoding="utf-8")

    result = lint_imports(tmp_path)

    assert result.returncode != 0
    assert f"{contract} BROKEN" in result.stdout, result.stdout + result.stderr
