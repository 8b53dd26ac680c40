"""A shipped example export, analysed, attached, sealed, and computed anew from the sealed report."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from signing.conftest import LATER
from signing.keys_fixture import key_of

from qcreport.analysis import analyse
from qcreport.audit.in_child import verify_in_child
from qcreport.canonical import sha256_hex, to_readable_json_bytes
from qcreport.plan import parse_plan
from qcreport.rules import parse_rules
from qcreport.signing.keys import SigningKey
from qcreport.workbook.read_in_child import read_in_child

from .example import context_of, sealed_with

ROOT = Path(__file__).parents[3]
EXPORT_NAME = "lap-shear-2403.xlsx"


@pytest.fixture(scope="module")
def key() -> SigningKey:
    return key_of("QC reports")


@pytest.fixture(scope="module")
def attached(key: SigningKey) -> dict[str, bytes]:
    """Return what the service attaches for the example."""
    config = ROOT / "config"
    files = {
        "export.xlsx": (ROOT / "inbox_example" / EXPORT_NAME).read_bytes(),
        "plan.toml": (config / "plans" / "lap-shear-batches.toml").read_bytes(),
        "layout.toml": (config / "layouts" / "shear-rig.toml").read_bytes(),
        "rules.toml": (config / "rules" / "default.toml").read_bytes(),
    }
    digests = {f"{name.split('.')[0]}_sha256": sha256_hex(data) for name, data in files.items()}
    context = context_of(key, export_name=EXPORT_NAME, **digests)
    measurements = read_in_child(
        files["export.xlsx"], name=EXPORT_NAME, layout_bytes=files["layout.toml"], layout_file="layout.toml"
    )
    plan, rules = parse_plan(files["plan.toml"], "p"), parse_rules(files["rules.toml"], "r")
    result = analyse(measurements, plan, rules, context)
    return {
        **files,
        "context.json": to_readable_json_bytes(context.to_json()),
        "result.json": to_readable_json_bytes(result.to_json()),
    }


def test_a_report_is_recomputed_from_itself(attached: dict[str, bytes], key: SigningKey) -> None:
    verdict = verify_in_child(sealed_with(attached, key), roots=(key.certificate,), now=LATER)
    assert verdict["recomputed"] == {"matches": True, "differences": [], "done": True, "notes": []}
    assert verdict["valid"] is True
    assert verdict["trusted"] is True


def test_one_number_of_the_result_changed_before_sealing_is_found(
    attached: dict[str, bytes], key: SigningKey
) -> None:
    result = json.loads(attached["result.json"])
    pair = result["characteristics"][0]["pairs"][0]
    pair["difference"] *= 1 + 1e-6
    forged = {**attached, "result.json": to_readable_json_bytes(result)}
    verdict = verify_in_child(sealed_with(forged, key), roots=(key.certificate,), now=LATER)
    assert verdict["valid"] is False
    (difference,) = verdict["recomputed"]["differences"]
    assert difference.startswith("characteristics[0].pairs[0].difference: ")
