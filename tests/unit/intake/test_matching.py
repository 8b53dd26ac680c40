"""Which plans an export belongs to."""

from __future__ import annotations

import pytest

from qcreport.errors import ExportRefusedError
from qcreport.intake.matching import matches, matching_plans

PLANS = {"shear": ["lap-shear*.xlsx", "*.xlsm"], "peel": ["peel*.xlsx"], "all": ["*2403*"]}


def test_every_plan_with_a_fitting_pattern_is_named_in_order() -> None:
    assert matching_plans("lap-shear-2403.xlsx", PLANS) == ("shear", "all")
    assert matching_plans("x.xlsm", PLANS) == ("shear",)


@pytest.mark.parametrize(
    ("name", "pattern"),
    [
        ("LAP-SHEAR.XLSX", "lap-shear*.xlsx"),
        ("lap-shear.xlsx", "Lap-Shear*.XLSX"),
        ("scha\u0308lfestigkeit.xlsx", "sch\u00e4l*.xlsx"),
        ("STRASSE.csv", "straße.csv"),
        ("run7.csv", "run[0-9].csv"),
    ],
)
def test_capitals_and_composed_accents_do_not_count(name: str, pattern: str) -> None:
    assert matches(name, pattern)


def test_a_pattern_fits_the_whole_name() -> None:
    assert not matches("old lap-shear.xlsx", "lap-shear*.xlsx")
    assert not matches("lap-shear.xlsx.csv", "lap-shear*.xlsx")


def test_no_plan_is_a_refusal_that_lists_the_patterns() -> None:
    with pytest.raises(ExportRefusedError) as refused:
        matching_plans("tack\n.xlsx", PLANS)
    assert refused.value.code == "no_plan"
    assert refused.value.file == r"tack\n.xlsx"
    assert "lap-shear*.xlsx, *.xlsm (plan shear); peel*.xlsx (plan peel)" in refused.value.expected
    with pytest.raises(ExportRefusedError, match="has none yet"):
        matching_plans("x", {})
