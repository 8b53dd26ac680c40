"""The wheel works where there is no checkout: its commands, its defaults and its data come with it."""

from __future__ import annotations

import os
import subprocess
import sys
import sysconfig
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]

pytestmark = pytest.mark.slow


def run(*command: str | Path, cwd: Path) -> str:
    hidden = ("PYTHONPATH", "PYTHONHOME", "QCREPORT_SITE", "VIRTUAL_ENV")
    environment = {name: value for name, value in os.environ.items() if name not in hidden}
    result = subprocess.run(
        command,
        cwd=cwd,
        env=environment,
        stdin=subprocess.DEVNULL,
        capture_output=True,
        text=True,
        check=False,
        timeout=200,
    )
    assert result.returncode == 0, result.stdout + result.stderr
    return result.stdout


@pytest.fixture(scope="module")
def wheel(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Build the wheel offline, with the backend that is installed here."""
    folder = tmp_path_factory.mktemp("wheel")
    run(sys.executable, "-m", "hatchling", "build", "-t", "wheel", "-d", folder, cwd=ROOT)
    (built,) = folder.glob("qcreport-*.whl")
    return built


@pytest.fixture(scope="module")
def installed(wheel: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return the commands of a new environment that holds the wheel and sees the dependencies from here."""
    environment = tmp_path_factory.mktemp("elsewhere") / "venv"
    run(sys.executable, "-m", "venv", "--without-pip", environment, cwd=environment.parent)
    pip = (sys.executable, "-m", "pip", "--python", environment, "--disable-pip-version-check")
    run(*pip, "install", "--quiet", "--no-deps", "--no-index", wheel, cwd=environment.parent)
    paths = {"base": str(environment), "platbase": str(environment)}
    packages = Path(sysconfig.get_path("purelib", "venv", paths))
    # The folder is named, so its own .pth files, and with them the editable checkout, are not followed.
    (packages / "dependencies.pth").write_text(sysconfig.get_path("purelib") + "\n", encoding="utf-8")
    return Path(sysconfig.get_path("scripts", "venv", paths))


def test_the_wheel_carries_defaults_types_and_licence(wheel: Path) -> None:
    with zipfile.ZipFile(wheel) as members:
        names = set(members.namelist())
    assert "qcreport/py.typed" in names
    assert any(name.endswith(".dist-info/licenses/LICENSE") for name in names)
    for folder in ("templates", "config", "inbox_example"):
        here = {
            f"qcreport/_site/{path.relative_to(ROOT).as_posix()}"
            for path in (ROOT / folder).rglob("*")
            if path.is_file() and "__pycache__" not in path.parts
        }
        assert here, f"{folder}/ is empty"
        assert here <= names
    assert not [name for name in names if name.startswith("tests/") or "__pycache__" in name]


def test_the_installed_command_is_the_wheels(installed: Path, tmp_path: Path) -> None:
    assert "0.1.0" in run(installed / "qcreport", "--version", cwd=tmp_path)
    where = run(installed / "python", "-c", "import qcreport; print(qcreport.__file__)", cwd=tmp_path)
    assert Path(where.strip()).is_relative_to(installed.parent)


def test_it_makes_a_site_from_the_shipped_defaults(installed: Path, tmp_path: Path) -> None:
    site = tmp_path / "site"
    run(
        installed / "qcreport",
        "site",
        "new",
        site,
        "--name",
        "Halden Adhesives (example)",
        "--address",
        "1 Example Quay",
        "--time-zone",
        "Europe/Berlin",
        "--language",
        "en",
        cwd=tmp_path,
    )
    assert "Halden Adhesives (example)" in (site / "config/site.toml").read_text("utf-8")
    assert (site / "config/people.toml").is_file()
    assert (site / "config/rules/default.toml").is_file()
    assert (site / "config/rules/textbook.toml").is_file()
    assert [path for path in (site / "templates").rglob("*") if path.is_file()]
    assert not (site / "config/plans/lap-shear-batches.toml").exists(), (
        "example plans stay out of a real site"
    )
