"""Small parts of the pipeline: attachment names, plans by name, and the key's passphrase."""

from __future__ import annotations

import os
from pathlib import Path
from types import SimpleNamespace
from typing import Any

import pytest
from signing.keys_fixture import NOW, PASSPHRASE

from qcreport.errors import ConfigError, EnvironmentFailedError, ExportRefusedError, SigningDeniedError
from qcreport.measurements import MeasurementSet
from qcreport.pipeline.choose_plans import fitting_plans
from qcreport.pipeline.compute import attached_files
from qcreport.pipeline.job import Job
from qcreport.pipeline.key import load_service_key
from qcreport.pipeline.workers import PASSPHRASE_VARIABLE
from qcreport.report.attachment import export_attachment_name
from qcreport.settings.plans import SettingsFile
from qcreport.signing.new_key import new_key


@pytest.mark.parametrize(
    ("export", "expected"),
    [
        ("a.xlsx", "export.xlsx"),
        ("A.XLSX", "export.xlsx"),
        ("a.b.csv", "export.csv"),
        ("a.exe", "export.bin"),
        ("a", "export.bin"),
        ("a.xlsx/../../x", "export.bin"),
    ],
)
def test_the_export_is_attached_under_a_fixed_name(export: str, expected: str) -> None:
    assert export_attachment_name(export) == expected


def test_everything_that_decides_the_result_is_attached() -> None:
    measured = MeasurementSet(
        export_name="a.xlsx", export_sha256="0" * 64, layout_name="l", measurements=(), notices=()
    )
    files = {
        name: SettingsFile(name=f"my-{name}.toml", data=name.encode()) for name in ("plan", "layout", "rules")
    }
    job = Job(measurements=measured, export=b"bytes", context=b"c", templates=(), render=True, **files)
    attached = attached_files(job, b"result")
    assert [name for name, _ in attached] == [
        "context.json", "export.xlsx", "layout.toml", "plan.toml", "result.json", "rules.toml",
    ]  # fmt: skip
    assert dict(attached)["plan.toml"] == b"plan"


def planned(**exports: tuple[str, ...]) -> tuple[Any, ...]:
    return tuple(SimpleNamespace(plan=SimpleNamespace(name=n, exports=e)) for n, e in exports.items())


def test_every_plan_whose_pattern_fits() -> None:
    plans = planned(one=("lap-*.xlsx",), two=("peel-*.xlsx", "*.xlsx"), three=("x-*.xlsx",))
    assert [p.plan.name for p in fitting_plans("lap-1.xlsx", plans)] == ["one", "two"]
    with pytest.raises(ExportRefusedError) as refused:
        fitting_plans("lap-1.csv", plans)
    assert refused.value.code == "no_plan"


def site_with(key: Path | None, passphrase_file: Path | None = None) -> Any:
    return SimpleNamespace(root=Path("/site"), seal=SimpleNamespace(key=key, passphrase_file=passphrase_file))


@pytest.fixture
def key_file(tmp_path: Path) -> Path:
    made = new_key("QC", purpose="service", organisation="Lab", now=NOW, days=30, passphrase=PASSPHRASE)
    path = tmp_path / "service.p12"
    path.write_bytes(made.pkcs12)
    path.chmod(0o600)
    return path


def test_the_passphrase_leaves_the_environment(key_file: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv(PASSPHRASE_VARIABLE, PASSPHRASE.decode())
    assert load_service_key(site_with(key_file), NOW).subject == "QC"
    assert PASSPHRASE_VARIABLE not in os.environ


def test_a_wrong_passphrase_leaves_the_environment_too(
    key_file: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv(PASSPHRASE_VARIABLE, "wrong")
    with pytest.raises(SigningDeniedError, match="does not open this key"):
        load_service_key(site_with(key_file), NOW)
    assert PASSPHRASE_VARIABLE not in os.environ


def test_the_file_comes_before_the_environment(
    key_file: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = tmp_path / "passphrase"
    path.write_bytes(PASSPHRASE + b"\n")
    path.chmod(0o600)
    monkeypatch.setenv(PASSPHRASE_VARIABLE, "wrong")
    assert load_service_key(site_with(key_file, path), NOW).subject == "QC"


def test_without_a_passphrase_the_sources_are_named(key_file: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.delenv(PASSPHRASE_VARIABLE, raising=False)
    with pytest.raises(SigningDeniedError, match=r"passphrase_file in config/site.toml, from QCREPORT_KEY"):
        load_service_key(site_with(key_file), NOW)


def test_no_key_and_a_key_that_is_gone(tmp_path: Path) -> None:
    with pytest.raises(ConfigError, match="qcreport keys new --for service"):
        load_service_key(site_with(None), NOW)
    with pytest.raises(EnvironmentFailedError, match=r"service\.p12"):
        load_service_key(site_with(tmp_path / "service.p12"), NOW)
