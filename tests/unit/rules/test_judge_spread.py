"""Whether groups scatter alike: shown, declared, contradicted, or open."""

from __future__ import annotations

import dataclasses
import datetime as dt
import functools
import math

import pytest
from scipy import stats

from qcreport.plan.model import SpreadDeclaration
from qcreport.rules import parse_rules
from qcreport.rules.evidence import Check
from qcreport.rules.spread import SpreadJudgement, judge_spread
from qcreport.settings.shipped import shipped_files
from qcreport.stats.summary import summarize

DECLARED = SpreadDeclaration(
    similar=True, by="Head of QC", on=dt.date(2026, 11, 2), reason="Validation.", accept_unequal_sizes=False
)
LATER = dt.date(2026, 12, 1)


def group(n: int, sd: float = 1.0, mean: float = 10.0) -> list[float]:
    """Return n values with exactly (to rounding) this mean and standard deviation."""
    raw = [stats.norm.ppf((i + 0.5) / n) for i in range(n)]
    scale = sd / float(stats.tstd(raw))
    return [mean + scale * float(r) for r in raw]


@functools.cache
def policy(name: str) -> object:
    return parse_rules(shipped_files("config/rules", f"{name}.toml")[f"{name}.toml"], name).spread


def judged(
    *groups: list[float],
    declaration: SpreadDeclaration | None = None,
    earliest: dt.date | None = LATER,
    table: str = "default",
) -> SpreadJudgement:
    summaries = [summarize(f"B{i}", values) for i, values in enumerate(groups, start=1)]
    return judge_spread(summaries, groups, policy(table), declaration, earliest)  # type: ignore[arg-type]


def check(judgement: SpreadJudgement, name: str) -> Check:
    return next(c for c in judgement.checks if c.name == name)


def limit_by_hand(ns: list[int], sds: list[float], confidence: float = 0.95) -> float:
    """Return the simultaneous upper limit of the largest ratio of standard deviations."""
    k = len(ns)
    level = (1 - confidence) / (k * (k - 1))
    return max(
        sds[i] / sds[j] * math.sqrt(stats.f.isf(level, ns[j] - 1, ns[i] - 1))
        for i in range(k)
        for j in range(k)
        if i != j
    )


class TestDeclared:
    def test_a_declaration_before_the_data_that_they_do_not_contradict(self) -> None:
        found = judged(group(5), group(5, 1.5), group(5, 0.8), declaration=DECLARED)
        assert found.value == "similar"
        assert found.observed == "Declared similar by Head of QC, 2026-11-02: Validation."
        assert found.source == "Comparison plan"
        assert check(found, "spread_conflict").met is True

    @pytest.mark.parametrize(
        ("earliest", "counts"),
        [
            (dt.date(2026, 11, 3), True),
            (dt.date(2026, 11, 2), True),
            (dt.date(2026, 11, 1), False),
            (None, True),
        ],
    )
    def test_one_made_after_the_data_does_not_count(self, earliest: dt.date | None, counts: bool) -> None:
        found = judged(group(5), group(5, 1.2), declaration=DECLARED, earliest=earliest)
        assert found.value == ("similar" if counts else "cannot be judged")
        assert ("after the first measurement (2026-11-01)" in found.observed) is not counts

    @pytest.mark.parametrize(
        ("sizes", "accepted", "counts"),
        [
            ((6, 6), False, True),
            ((6, 9), False, True),  # 1.5 exactly
            ((6, 10), False, False),
            ((6, 10), True, True),
            ((3, 30), True, True),
        ],
    )
    def test_sizes_that_differ_much_must_be_accepted(
        self, sizes: tuple[int, int], accepted: bool, counts: bool
    ) -> None:
        declaration = dataclasses.replace(DECLARED, accept_unequal_sizes=accepted)
        found = judged(*(group(n) for n in sizes), declaration=declaration)
        assert found.value == ("similar" if counts else "cannot be judged")
        if not counts:
            assert "the largest group is more than 1.5 times the smallest" in found.observed
            assert "accept_unequal_sizes" in found.observed
            assert "check that fails to object proves nothing" in found.observed

    def test_data_that_contradict_it_set_it_aside(self) -> None:
        found = judged(group(10), group(10), group(10, 4.0), declaration=DECLARED)
        assert found.value == "conflict"
        assert found.observed == (
            "Data and declaration conflict: declared similar by Head of QC, 2026-11-02, but B3 scatters more "
            "than the other groups together. The declaration is set aside."
        )
        conflict = check(found, "spread_conflict")
        assert (conflict.note, conflict.met) == ("B3", False)
        assert conflict.statistic == pytest.approx(16.0, rel=1e-9)
        assert conflict.df == (9, 18)
        assert conflict.p == pytest.approx(stats.f.sf(16.0, 9, 18), rel=1e-9)
        assert conflict.threshold == pytest.approx(0.05 / 3, rel=1e-15)

    @pytest.mark.parametrize("factor", [0.999, 1.001])
    def test_the_conflict_begins_at_its_level_shared_over_the_groups(self, factor: float) -> None:
        critical = float(stats.f.isf(0.05 / 4, 7, 21))
        groups = [group(8), group(8), group(8, math.sqrt(critical * factor)), group(8)]
        found = judged(*groups, declaration=DECLARED)
        assert found.value == ("similar" if factor < 1 else "conflict")

    def test_one_calm_group_is_no_conflict(self) -> None:
        found = judged(group(10), group(10), group(10, 0.01), declaration=DECLARED)
        assert found.value == "similar"

    def test_conflict_comes_before_lateness(self) -> None:
        found = judged(group(10), group(10, 9.0), declaration=DECLARED, earliest=dt.date(2026, 1, 1))
        assert found.value == "conflict"

    def test_declared_different(self) -> None:
        declaration = dataclasses.replace(DECLARED, similar=False)
        found = judged(group(5), group(5), declaration=declaration)
        assert (found.value, found.source) == ("different", "Comparison plan")
        assert found.observed == "Declared different by Head of QC, 2026-11-02: Validation."
        assert all(c.name != "spread_conflict" for c in found.checks)


class TestShown:
    def test_a_large_export_shows_it_alone(self) -> None:
        found = judged(group(200), group(200), group(200))
        assert found.value == "similar"
        assert found.observed.startswith("Shown by this export: no standard deviation is more than 1.5 times")
        limit = check(found, "spread_ratio_limit")
        assert limit.met is True
        assert limit.statistic == pytest.approx(limit_by_hand([200] * 3, [1.0] * 3), rel=1e-9)
        assert limit.threshold == 1.5

    def test_the_limit_counts_and_not_the_ratio_seen(self) -> None:
        sds = [1.0, 1.25]
        found = judged(group(60), group(60, 1.25))
        limit = check(found, "spread_ratio_limit")
        assert limit.statistic == pytest.approx(limit_by_hand([60, 60], sds), rel=1e-9)
        assert limit.statistic is not None
        assert limit.statistic > 1.5
        assert found.value == "cannot be judged"

    @pytest.mark.parametrize(("sizes", "shown"), [((200, 250), True), ((200, 251), False)])
    def test_only_where_sizes_are_nearly_equal(self, sizes: tuple[int, int], shown: bool) -> None:
        found = judged(*(group(n) for n in sizes))
        assert found.value == ("similar" if shown else "cannot be judged")

    def test_a_late_declaration_may_still_be_shown(self) -> None:
        found = judged(group(200), group(200), declaration=DECLARED, earliest=dt.date(2026, 1, 1))
        assert found.value == "similar"
        assert "after the first measurement" in found.observed
        assert "Shown by this export" in found.observed


class TestOpen:
    def test_different_is_seen_by_the_median_centred_check(self) -> None:
        found = judged(group(10), group(10, 5.0))
        levene = check(found, "brown_forsythe")
        scipy = stats.levene(group(10), group(10, 5.0), center="median")
        assert levene.statistic == pytest.approx(scipy.statistic, rel=1e-9)
        assert levene.p == pytest.approx(scipy.pvalue, rel=1e-9)
        assert (levene.threshold, levene.met) == (0.05, False)
        assert found.value == "different"
        assert found.observed == "Seen in this export: the groups scatter differently."

    def test_a_check_that_does_not_object_proves_nothing(self) -> None:
        found = judged(group(5), group(5), group(5))
        assert check(found, "brown_forsythe").met is True
        assert found.value == "cannot be judged"

    def test_pairs_of_two_values_cannot_be_judged(self) -> None:
        found = judged([1.0, 2.0], [3.0, 4.5])
        levene = check(found, "brown_forsythe")
        assert (levene.statistic, levene.p, levene.met) == (None, None, None)
        assert levene.note
        assert found.value == "cannot be judged"

    def test_a_group_without_spread(self) -> None:
        found = judged([1.0] * 5, group(5), group(5))
        assert check(found, "spread_ratio_limit").statistic == math.inf
        assert check(found, "bartlett").statistic is None
        assert found.value in ("cannot be judged", "different")

    def test_description_never_decides(self) -> None:
        found = judged(group(10), group(10, 2.0))
        for name in ("bartlett", "cochran_c"):
            assert check(found, name).met is None
            assert check(found, name).p is not None
        scipy = stats.bartlett(group(10), group(10, 2.0))
        assert check(found, "bartlett").statistic == pytest.approx(scipy.statistic, rel=1e-9)


class TestTextbook:
    @pytest.mark.parametrize(
        ("sd", "value", "words"), [(1.0, "similar", "does not object"), (5.0, "different", "objects")]
    )
    def test_this_exports_own_check_decides(self, sd: float, value: str, words: str) -> None:
        found = judged(group(10), group(10, sd), table="textbook")
        assert found.value == value
        assert f"own variance check {words} at level 0.05" in found.observed

    def test_a_declaration_changes_nothing(self) -> None:
        declaration = dataclasses.replace(DECLARED, similar=False)
        assert judged(group(10), group(10), declaration=declaration, table="textbook").value == "similar"

    def test_where_the_check_is_undefined(self) -> None:
        found = judged([1.0, 2.0], [3.0, 4.5], table="textbook")
        assert found.value == "cannot be judged"


def test_evidence_in_json_has_no_infinity() -> None:
    found = judged([1.0] * 5, group(5))
    for item in found.checks:
        assert all(v is None or not isinstance(v, float) or math.isfinite(v) for v in item.to_json().values())
