"""Read the outside values; a missing file is an error, never a reason to skip."""

import importlib.resources
import json
import tomllib
from pathlib import Path
from typing import Any

from qcreport.stats.comparison import PosthocResult
from qcreport.stats.summary import GroupSummary, summarize

DATA = Path(__file__).parent / "data"
DATA_SETS = (
    "PlantGrowth",
    "morley",
    "chickwts",
    "InsectSprays",
    "warpbreaks_tension",
    "waste_temp",
    "inv_ties",
    "inv_unequal_n",
)
"""Data sets analysed in exact arithmetic and with R; source and citation stand in each file."""


def data_set(name: str) -> dict[str, Any]:
    return json.loads((DATA / f"{name}.json").read_text())


def rows(name: str) -> list[dict[str, Any]]:
    found = json.loads((DATA / f"{name}.json").read_text())["rows"]
    assert found
    return found


def published(name: str) -> dict[str, Any]:
    return tomllib.loads((DATA / "published.toml").read_text())[name]


def groups_of(data: dict[str, Any]) -> list[GroupSummary]:
    return [summarize(group["label"], group["values"]) for group in data["groups"]]


def lettered(values: list[list[float]]) -> list[GroupSummary]:
    return [summarize(chr(ord("A") + i), group) for i, group in enumerate(values)]


def nist_anova(name: str) -> tuple[list[GroupSummary], dict[str, float]]:
    """Read a certified one-way set (NIST StRD, https://www.itl.nist.gov/div898/strd/) from scipy's wheel."""
    text = (
        importlib.resources.files("scipy.stats.tests") / "data" / "nist_anova" / f"{name}.dat"
    ).read_text()
    lines = text.splitlines()
    between = next(line for line in lines if line.startswith("Between") and "E+" in line).split()
    within = next(line for line in lines if line.startswith("Within") and "E-" in line).split()
    certified = {"ss_between": float(between[-3]), "f": float(between[-1]), "ss_within": float(within[-2])}
    start = max(i for i, line in enumerate(lines) if line.startswith("Data:"))
    groups: dict[str, list[float]] = {}
    for line in lines[start + 1 :]:
        if line.strip():
            group, value = line.split()
            groups.setdefault(group, []).append(float(value))
    return [summarize(label, values) for label, values in groups.items()], certified


def relative(found: float, expected: float) -> float:
    return abs(found / expected - 1.0)


def by_pair(result: PosthocResult) -> dict[frozenset[str], Any]:
    return {frozenset((c.first, c.second)): c for c in result.comparisons}
