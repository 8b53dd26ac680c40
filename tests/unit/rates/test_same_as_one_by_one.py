"""The vectorised simulation answers each table as the report would: judge, choose, compare, one by one."""

from __future__ import annotations

import dataclasses
import datetime as dt
import functools
from collections.abc import Sequence

import numpy as np
import pytest

from qcreport.analysis.procedures import run_procedure
from qcreport.plan.model import WITH_REFERENCE, Direction, SpreadDeclaration
from qcreport.rates import Asked, Design, Standing, alarms, any_rejected
from qcreport.rates.critical import by_inverse_df, exact, read
from qcreport.rates.draw import Draws, summarised
from qcreport.rates.rejections import PROCEDURES
from qcreport.rules import Facts, RulesTable, choose, parse_rules
from qcreport.rules.history import LineHistory, SpreadHistory
from qcreport.rules.spread import judge_spread
from qcreport.rules.spread_checks import Pooled
from qcreport.settings.shipped import shipped_files
from qcreport.stats.summary import GroupSummary, summarize

REPLICATES = 25
DAY = dt.date(2026, 11, 2)
DECLARED = SpreadDeclaration(similar=True, by="A", on=DAY, reason="B.", accept_unequal_sizes=True)
DIFFERENT_SAID = dataclasses.replace(DECLARED, similar=False)
TOO_LATE = DAY - dt.timedelta(days=1)


@functools.cache
def table(name: str) -> RulesTable:
    return parse_rules(shipped_files("config/rules", f"{name}.toml")[f"{name}.toml"], name)


def facts_of(design: Design) -> Facts:
    return Facts(
        comparison="every pair" if design.reference is None else "each with the reference",
        groups=len(design.sizes),
        smallest_n=min(design.sizes),
        sizes="equal" if len(set(design.sizes)) == 1 else "unequal",
        variation="some",
        censored="none",
        spread="cannot be judged",
        scale="as measured",
    )


def drawn(design: Design, sds: Sequence[float], shift: float = 0.0) -> tuple[list[np.ndarray], Draws]:
    """Return results by group, the first group shifted so that some tables differ, and their summaries."""
    source = np.random.RandomState(20261201)
    groups = [source.standard_normal((REPLICATES, n)) * sd for n, sd in zip(design.sizes, sds, strict=True)]
    groups[0] = groups[0] + shift
    return groups, summarised(groups)


def one_by_one(groups: list[np.ndarray]) -> list[list[GroupSummary]]:
    return [[summarize(f"B{i}", g[row].tolist()) for i, g in enumerate(groups)] for row in range(REPLICATES)]


def finds(procedure: str, summaries: Sequence[GroupSummary], design: Design) -> bool:
    found = run_procedure(
        procedure,
        summaries,
        alpha=design.alpha,
        reference=design.reference,
        direction=Direction.HIGHER_MATTERS if design.one_sided else Direction.BOTH,
    )
    return any(c.p < design.alpha for c in found.comparisons)


DESIGNS = [
    Design(sizes=(5, 5, 5, 5), reference=None, alpha=0.05),
    Design(sizes=(4, 8, 16), reference=None, alpha=0.1),
    Design(sizes=(12, 10, 11, 12), reference=None, alpha=0.05),
    Design(sizes=(30, 3, 4, 9), reference=0, alpha=0.05),
    Design(sizes=(12, 12, 40), reference=2, alpha=0.05),
    Design(sizes=(6, 7, 8), reference=1, alpha=0.05, one_sided=True),
]


@pytest.mark.parametrize("design", DESIGNS[1::2], ids=lambda d: f"{d.sizes}-{d.reference}-{d.one_sided}")
@pytest.mark.parametrize("procedure", sorted(set(PROCEDURES) - {"none"}))
def test_every_procedure(procedure: str, design: Design) -> None:
    with_reference = procedure in WITH_REFERENCE
    if with_reference is (design.reference is None):
        design = dataclasses.replace(design, reference=0 if with_reference else None, one_sided=False)
    groups, draws = drawn(design, np.linspace(1.0, 2.5, len(design.sizes)).tolist(), shift=1.2)
    if procedure == "tukey_hsd" and len(set(design.sizes)) > 1:
        procedure = "tukey_kramer"
    expected = [finds(procedure, summaries, design) for summaries in one_by_one(groups)]
    assert any_rejected(procedure, design, draws).tolist() == expected
    assert True in expected
    assert False in expected


CASES = [
    ("default", Standing(), None, DAY),
    ("default", Standing(declared="similar"), DECLARED, DAY),
    ("default", Standing(declared="set aside"), DECLARED, TOO_LATE),
    ("default", Standing(declared="different"), DIFFERENT_SAID, DAY),
    ("textbook", Standing(), None, DAY),
]


@pytest.mark.parametrize(("name", "standing", "declaration", "earliest"), CASES)
@pytest.mark.parametrize("design", DESIGNS, ids=lambda d: f"{d.sizes}-{d.reference}-{d.one_sided}")
def test_every_policy(
    design: Design,
    name: str,
    standing: Standing,
    declaration: SpreadDeclaration | None,
    earliest: dt.date,
) -> None:
    sds = [1.0] * (len(design.sizes) - 1) + [2.6]
    groups, draws = drawn(design, sds, shift=1.5)
    asked = Asked(table=table(name), facts=facts_of(design), design=design, standing=standing)
    expected = []
    for row, summaries in enumerate(one_by_one(groups)):
        values = [g[row].tolist() for g in groups]
        judged = judge_spread(summaries, values, asked.table.spread, declaration, earliest)
        procedure = choose(asked.table, dataclasses.replace(asked.facts, spread=judged.value)).procedure
        expected.append(finds(procedure, summaries, design))
    assert alarms(asked, draws, sds, np.random.RandomState(1)).tolist() == expected
    assert True in expected
    assert False in expected


class Fixed(np.random.RandomState):
    """A source whose chi-squares are their degrees of freedom: history with exactly the true variance."""

    def chisquare(self, df: object, size: object = None) -> np.ndarray:  # type: ignore[override]
        return np.broadcast_to(np.asarray(df, dtype=float), size).copy()  # type: ignore[call-overload]


@pytest.mark.parametrize("df", [5.0, 40.0, 60.0, 300.0])
def test_the_lines_history(df: float) -> None:
    design, sds = DESIGNS[2], [1.0, 1.0, 1.0, 1.1]
    groups, draws = drawn(design, sds, shift=1.0)
    standing = Standing(lines=(df,) * 4)
    asked = Asked(table=table("default"), facts=facts_of(design), design=design, standing=standing)
    history = SpreadHistory(
        characteristic="c",
        lines=tuple(
            LineHistory(label=f"B{i}", batches=9, n=99, df=df, variance=sd * sd) for i, sd in enumerate(sds)
        ),
    )
    expected = []
    for row, summaries in enumerate(one_by_one(groups)):
        within = [Pooled(df=s.n - 1.0, variance=s.variance) for s in summaries]
        values = [g[row].tolist() for g in groups]
        judged = judge_spread(summaries, values, asked.table.spread, None, None, history, within)
        procedure = choose(asked.table, dataclasses.replace(asked.facts, spread=judged.value)).procedure
        expected.append(finds(procedure, summaries, design))
    assert alarms(asked, draws, sds, Fixed(1)).tolist() == expected


@pytest.mark.parametrize("law", ["range", "modulus", "sidak", "sidak one-sided"])
@pytest.mark.parametrize("count", [2, 6, 66])
@pytest.mark.parametrize("smallest_df", [1.0, 2.0, 9.0])
def test_critical_values_between_the_points_of_the_table(law: str, count: int, smallest_df: float) -> None:
    if law == "range":
        count = min(count, 12)
    df = smallest_df * np.concatenate([np.geomspace(1.0, 1.01, 40), np.geomspace(1.01, 100.0, 60)])
    found = read(by_inverse_df(law, count, 0.05, smallest_df), 1.0 / df)
    assert np.max(np.abs(found / exact(law, count, 0.05, df) - 1.0)) < 1e-5
