"""The command line as people use it, a site as the README makes one, and exports for it."""

from __future__ import annotations

import fcntl
import importlib.resources
import io
import json
import os
import re
import shutil
import subprocess
import sys
from collections.abc import Callable, Iterable, Mapping, Sequence
from contextlib import ExitStack, chdir, redirect_stderr, redirect_stdout
from dataclasses import asdict, dataclass
from datetime import datetime, timedelta
from functools import cache
from pathlib import Path
from typing import Any
from unittest import mock

import jsonschema
import pytest
from openpyxl import Workbook

from qcreport.canonical import sha256_hex
from qcreport.cli import main

ROOT = Path(__file__).resolve().parents[2]
NAME = "lap-shear-2411.xlsx"
"""Fits the README's plan."""
BATCHES: Mapping[str, Sequence[float]] = {
    "LA-2411": (24.1, 24.9, 23.6, 24.4, 25.0),
    "LB-2411": (24.3, 23.9, 24.8, 24.6, 23.7),
    "LC-2411": (21.0, 21.9, 20.6, 21.3, 21.8),
}


@dataclass(frozen=True)
class Ran:
    """How one command ended."""

    code: int
    out: str
    err: str

    @property
    def text(self) -> str:
        """Return all that it printed."""
        return self.out + self.err

    @property
    def json(self) -> Any:
        """Return standard output as the one JSON document that it must be."""
        return json.loads(self.out)


def command_line(*words: str | Path) -> list[str]:
    return [sys.executable, "-m", "qcreport", *map(str, words)]


def environment(**more: str) -> dict[str, str]:
    """Return the environment of a command: no site and no passphrase but those given."""
    kept = {name: value for name, value in os.environ.items() if not name.startswith("QCREPORT_")}
    return kept | more


def qcreport(*words: str | Path, cwd: Path | None = None, **env: str) -> Ran:
    """Run one command without a terminal; whatever happens, a person never sees a traceback."""
    out, err = io.StringIO(), io.StringIO()
    with ExitStack() as put:
        put.enter_context(mock.patch.dict(os.environ, environment(**env), clear=True))
        put.enter_context(redirect_stdout(out))
        put.enter_context(redirect_stderr(err))
        if cwd is not None:
            put.enter_context(chdir(cwd))
        try:
            code = main([str(word) for word in words])
        except SystemExit as ended:  # --help and --version
            code = int(ended.code or 0)
    return _seen(Ran(code, out.getvalue(), err.getvalue()))


def in_a_process(*words: str | Path, cwd: Path | None = None, **env: str) -> Ran:
    """Run one command in a process of its own, as a shell does."""
    ended = subprocess.run(
        command_line(*words),
        cwd=cwd,
        env=environment(**env),
        stdin=subprocess.DEVNULL,
        capture_output=True,
        text=True,
        check=False,
        timeout=280,
    )
    return _seen(Ran(ended.returncode, ended.stdout, ended.stderr))


def _seen(ran: Ran) -> Ran:
    assert "Traceback" not in ran.text, ran.text
    assert "should not have happened" not in ran.text, ran.text
    return ran


def done(*words: str | Path, cwd: Path | None = None, **env: str) -> Ran:
    """Run one command that must end well."""
    ran = qcreport(*words, cwd=cwd, **env)
    assert ran.code == 0, ran.text
    return ran


def conforms(document: object, schema: str) -> None:
    """Hold a document against one of the published schemas."""
    text = (importlib.resources.files("qcreport") / "schemas" / f"{schema}.schema.json").read_text("utf-8")
    jsonschema.Draft202012Validator(json.loads(text)).validate(document)


@cache
def readme() -> str:
    return (ROOT / "README.md").read_text("utf-8")


def readme_toml(begins: str) -> str:
    """Return the README's example file that begins with a line."""
    blocks = re.findall(r"^ *```toml\n(.*?)^ *```$", readme(), re.DOTALL | re.MULTILINE)
    plain = [re.sub(r"^   ", "", block, flags=re.MULTILINE) for block in blocks]
    (found,) = [block for block in plain if block.startswith(begins)]
    return found


@dataclass(frozen=True)
class Site:
    """A site and where its things are."""

    root: Path

    @property
    def inbox(self) -> Path:
        return self.root / "inbox"

    @property
    def plan(self) -> Path:
        return self.root / "config/plans/lap-shear.toml"

    @property
    def layout(self) -> Path:
        return self.root / "config/layouts/shear-rig.toml"

    @property
    def settings(self) -> Path:
        return self.root / "config/site.toml"

    @property
    def reports(self) -> list[Path]:
        return sorted((self.root / "reports").glob("*.pdf"))

    @property
    def refused(self) -> list[Path]:
        return sorted((self.root / "refused").iterdir())

    def run(self, *words: str | Path, **env: str) -> Ran:
        """Run a command on this site."""
        return qcreport(*words, "--site", self.root, **env)

    def done(self, *words: str | Path, **env: str) -> Ran:
        """Run a command on this site that must end well."""
        return done(*words, "--site", self.root, **env)

    def holds(self) -> Any:
        """Require that the records hold together, and return what the check says."""
        return self.done("records", "check", "--json").json


def replaced(path: Path, old: str, new: str) -> None:
    """Edit a settings file as a person would; the old text must be there."""
    text = path.read_text("utf-8")
    assert old in text, f"{old!r} is not in {path.name}"
    path.write_text(text.replace(old, new), "utf-8")


def make_site(root: Path) -> None:
    """Follow the README's first site, word for word where it matters."""
    answers = ("--name", "Your laboratory", "--address", "Street 1, Town")
    done("site", "new", root, *answers, "--time-zone", "Europe/Berlin", "--language", "en")
    passphrase = root / "keys/passphrase"
    passphrase.write_text("made for one test session\n")
    passphrase.chmod(0o600)
    name = "Your laboratory, report seal"
    done("keys", "new", "--for", "service", name, "--passphrase-file", passphrase, "--site", root)
    (root / "config/layouts/shear-rig.toml").write_text(readme_toml("layout_version"), "utf-8")
    (root / "config/plans/lap-shear.toml").write_text(readme_toml('name = "lap-shear"'), "utf-8")


def copied(source: Path, target: Path) -> Site:
    shutil.copytree(source, target)
    return Site(target)


def export(
    path: Path, batches: Mapping[str, Iterable[object]] = BATCHES, heading: str = "Lap shear (MPa)"
) -> Path:
    """Write an export that the README's layout reads."""
    book = Workbook()
    (page,) = book.worksheets
    page.title = "Results"
    page.append(["Batch", "Line", "Specimen", "Tested at", heading])
    tested = datetime(2026, 11, 3, 7, 30)  # noqa: DTZ001  # workbooks hold local times without a zone
    for batch, values in batches.items():
        for number, value in enumerate(values, start=1):
            tested += timedelta(minutes=5)
            page.append([batch, batch[:2], f"{batch}-{number}", tested, value])
    book.save(path)
    book.close()
    return path


def made_once(factory: pytest.TempPathFactory, name: str, make: Callable[[Path], None]) -> Path:
    """Return a folder that all test processes of this run share; the first that needs it fills it."""
    shared = factory.getbasetemp()
    if "PYTEST_XDIST_WORKER" in os.environ:
        shared = shared.parent
    folder = shared / name
    with (shared / f"{name}.lock").open("w") as lock:
        fcntl.flock(lock, fcntl.LOCK_EX)
        if not folder.exists():
            making = shared / f"{name}.part"
            shutil.rmtree(making, ignore_errors=True)
            making.mkdir()
            make(making)
            making.rename(folder)
    return folder


@dataclass(frozen=True)
class Demo:
    """The demonstration, run twice on one folder, with what it printed and what it left."""

    folder: Path

    @property
    def site(self) -> Site:
        return Site(self.folder / "demo-site")

    def ran(self, time: str) -> Ran:
        """Return what the `first` or the `second` call printed."""
        return Ran(**json.loads((self.folder / f"{time}.json").read_text("utf-8")))

    def files(self, time: str) -> dict[str, str]:
        """Return the digest of every report and refused file after that call, by name."""
        found: dict[str, str] = json.loads((self.folder / f"{time}.files.json").read_text("utf-8"))
        return found


def make_demo(folder: Path) -> None:
    for time in ("first", "second"):
        ran = in_a_process("demo", cwd=folder)
        (folder / f"{time}.json").write_text(json.dumps(asdict(ran)), "utf-8")
        site = folder / "demo-site"
        kept = [p for part in ("reports", "refused") for p in sorted((site / part).rglob("*")) if p.is_file()]
        digests = {str(p.relative_to(site)): sha256_hex(p.read_bytes()) for p in kept}
        (folder / f"{time}.files.json").write_text(json.dumps(digests), "utf-8")
