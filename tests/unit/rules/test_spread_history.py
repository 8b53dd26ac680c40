"""Spread shown by earlier exports: of lines pooled with this export, of batches by how little they vary."""

from __future__ import annotations

import dataclasses
import datetime as dt
import math

import pytest
from scipy import stats
from test_judge_spread import DECLARED, LATER, check, group, limit_by_hand, policy

from qcreport.rules.history import BatchHistory, LineHistory, SpreadHistory, spread_history_from_json
from qcreport.rules.spread import SpreadJudgement, judge_spread
from qcreport.rules.spread_checks import Pooled
from qcreport.stats.spread_history import spread_variation
from qcreport.stats.summary import summarize


def lines(*parts: tuple[float, float]) -> SpreadHistory:
    """Return the history of lines B1, B2, … as (df, standard deviation)."""
    return SpreadHistory(
        characteristic="c",
        lines=tuple(
            LineHistory(label=f"B{i}", batches=10, n=int(df) + 10, df=df, variance=sd * sd)
            for i, (df, sd) in enumerate(parts, start=1)
        ),
    )


def batches(count: int = 40, df: float = 9.0, sd_ln: float = 0.0) -> SpreadHistory:
    """Return batches whose ln s² has the quantiles of its law, widened by a variation of ln sigma."""
    ranks = [(i + 0.5) / count for i in range(count)]
    return SpreadHistory(
        characteristic="c",
        batches=tuple(
            BatchHistory(
                label=f"P{i}",
                n=int(df) + 1,
                df=df,
                variance=float(stats.chi2.ppf(r, df) / df) * math.exp(2 * sd_ln * float(stats.norm.ppf(r))),
            )
            for i, r in enumerate(ranks)
        ),
    )


def judged(
    *groups: list[float], history: SpreadHistory, table: str = "default", declaration: object = None
) -> SpreadJudgement:
    summaries = [summarize(f"B{i}", values) for i, values in enumerate(groups, start=1)]
    within = [Pooled(df=s.n - 1.0, variance=s.variance) for s in summaries]
    earliest: dt.date | None = LATER
    return judge_spread(
        summaries,
        groups,
        policy(table),  # type: ignore[arg-type]
        declaration,  # type: ignore[arg-type]
        earliest,
        history,
        within,
    )


FOUR = [group(6)] * 4


class TestLines:
    def test_sixty_degrees_of_freedom_a_line_suffice_for_four_lines(self) -> None:
        found = judged(*FOUR, history=lines(*[(60.0, 1.0)] * 4))
        assert found.value == "similar"
        assert found.observed == (
            "Shown by the lines' history and this export together: no standard deviation is more than "
            "1.5 times another."
        )
        together = check(found, "spread_ratio_limit_with_history")
        assert together.statistic == pytest.approx(limit_by_hand([66] * 4, [1.0] * 4), rel=1e-9)
        assert (together.threshold, together.met, together.note) == (
            1.5,
            True,
            "history and this export, 65 df",
        )
        assert check(found, "spread_ratio_limit").met is False

    def test_thirty_do_not(self) -> None:
        found = judged(*FOUR, history=lines(*[(30.0, 1.0)] * 4))
        assert found.value == "cannot be judged"
        assert "this export with the lines' history is too small" in found.observed

    def test_history_and_this_export_are_pooled_by_degrees_of_freedom(self) -> None:
        found = judged(group(11, 2.0), group(11, 1.0), history=lines((90.0, 1.0), (90.0, 1.0)))
        sds = [math.sqrt((90 * 1 + 10 * 4) / 100), 1.0]
        expected = limit_by_hand([101, 101], sds)
        assert check(found, "spread_ratio_limit_with_history").statistic == pytest.approx(expected, rel=1e-9)

    def test_a_history_of_unlike_lines_decides_even_where_this_export_looks_alike(self) -> None:
        alike = [group(200), group(200)]
        assert judged(*alike, history=lines()).value == "similar"
        found = judged(*alike, history=lines((400.0, 2.0), (400.0, 1.0)))
        assert found.value == "cannot be judged"

    def test_a_line_without_history_leaves_the_others_unused(self) -> None:
        found = judged(*FOUR, history=lines(*[(60.0, 1.0)] * 3))
        assert found.value == "cannot be judged"
        assert all(c.name != "spread_ratio_limit_with_history" for c in found.checks)

    @pytest.mark.parametrize(("sizes", "value"), [((8, 10), "similar"), ((8, 11), "cannot be judged")])
    def test_sizes_must_be_nearly_equal(self, sizes: tuple[int, int], value: str) -> None:
        found = judged(*(group(n) for n in sizes), history=lines((400.0, 1.0), (400.0, 1.0)))
        assert found.value == value
        assert ("more than 1.25 times the smallest" in found.observed) is (value != "similar")

    def test_a_line_that_never_varied_is_not_similar_to_one_that_does(self) -> None:
        still = SpreadHistory(
            characteristic="c",
            lines=tuple(LineHistory(label=f"B{i}", batches=9, n=90, df=81.0, variance=0.0) for i in (1, 2)),
        )
        found = judged(group(5), [1.0] * 5, history=still)
        assert check(found, "spread_ratio_limit_with_history").statistic == math.inf
        assert found.value != "similar"


class TestBatches:
    def test_forty_batches_that_hardly_vary(self) -> None:
        history = batches()
        found = judged(*FOUR, history=history)
        assert found.value == "similar"
        expected = spread_variation([b.df for b in history.batches], [b.variance for b in history.batches])
        variation = check(found, "spread_variation")
        assert variation.statistic == expected.upper_limit
        assert (variation.threshold, variation.met) == (0.3, True)
        assert found.observed.startswith("Shown by 40 earlier batches: the standard deviation of ln sigma")
        assert check(found, "spread_conflict").met is True

    @pytest.mark.parametrize(
        ("history", "groups"),
        [
            (batches(39), FOUR),
            (batches(40, df=3.0), FOUR),
            (batches(60), [group(6)] * 7),
        ],
    )
    def test_too_few_too_small_or_for_too_many_groups(
        self, history: SpreadHistory, groups: list[list[float]]
    ) -> None:
        found = judged(*groups, history=history)
        assert found.value == "cannot be judged"
        assert all(c.name != "spread_variation" for c in found.checks)

    def test_small_batches_are_passed_over_not_counted(self) -> None:
        mixed = dataclasses.replace(
            batches(40), batches=(*batches(40).batches, *batches(30, df=2.0, sd_ln=1.0).batches)
        )
        assert judged(*FOUR, history=mixed).value == "similar"

    def test_batches_that_vary_show_nothing(self) -> None:
        found = judged(*FOUR, history=batches(60, sd_ln=0.5))
        assert check(found, "spread_variation").met is False
        assert found.value == "cannot be judged"

    def test_a_group_that_contradicts_the_history_sets_it_aside(self) -> None:
        found = judged(group(6), group(6), group(6, 2.4), history=batches())
        assert found.value == "cannot be judged"
        assert found.observed == (
            "Not shown: earlier batches scatter alike, but B3 scatters more than the other groups of this "
            "export together."
        )

    @pytest.mark.parametrize(("sizes", "value"), [((8, 10), "similar"), ((8, 11), "cannot be judged")])
    def test_sizes_must_be_nearly_equal(self, sizes: tuple[int, int], value: str) -> None:
        assert judged(*(group(n) for n in sizes), history=batches()).value == value


def test_the_other_policy_does_not_look_at_history() -> None:
    found = judged(*FOUR, history=lines(*[(60.0, 3.0), *[(60.0, 1.0)] * 3]), table="textbook")
    assert found.value == "similar"
    names = {c.name for c in found.checks}
    assert not names & {"spread_ratio_limit_with_history", "spread_variation", "spread_conflict"}


def test_a_declaration_that_counts_needs_no_history() -> None:
    found = judged(*FOUR, history=lines(*[(30.0, 1.0)] * 4), declaration=DECLARED)
    assert found.source == "Comparison plan"


@pytest.mark.parametrize("history", [lines((60.0, 1.0)), batches(3)])
def test_it_comes_back_as_it_was_written(history: SpreadHistory) -> None:
    assert spread_history_from_json(history.to_json()) == history


@pytest.mark.parametrize(
    ("part", "change"),
    [
        ("lines", {"df": 0}),
        ("lines", {"variance": -1.0}),
        ("lines", {"variance": math.inf}),
        ("batches", {"variance": 0.0}),
        ("batches", {"df": math.nan}),
    ],
)
def test_numbers_that_are_no_spread_are_refused(part: str, change: dict[str, float]) -> None:
    document = (lines((60.0, 1.0)) if part == "lines" else batches(3)).to_json()
    document[part][0].update(change)
    with pytest.raises(ValueError, match=r"is no variance|is not above 0"):
        spread_history_from_json(document)
