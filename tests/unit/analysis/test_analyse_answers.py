"""Answers read off the interval, and what stands beside them."""

from __future__ import annotations

import dataclasses
import itertools
import math

import pytest
from analysis_cases import TEXTBOOK, export, measurement, of_groups, only, pair_of, plan, rules, run
from scipy import stats

from qcreport.stats.equivalence import SERIOUSNESS

A = [5.1, 5.4, 4.8, 5.0]
B = [6.0, 6.4, 5.9, 6.2]
C = [5.5, 5.0, 5.2, 5.3]
NEAR = [5.15, 5.35, 4.85, 5.05]
POOLED = 'procedure = "tukey_kramer"'


def margins(below: float | None, above: float | None) -> str:
    lines = []
    if below is not None:
        lines.append(f"margin_below = {-below!r}")
    if above is not None:
        lines.append(f"margin_above = {above!r}")
    return "\n".join(lines)


class TestAnswer:
    """Margins laid around the interval that was computed without one."""

    def interval(self, groups: dict[str, list[float]]) -> tuple[float, float]:
        (pair,) = only(groups, plan(comparison=POOLED)).pairs
        assert pair.lower is not None
        assert pair.upper is not None
        return pair.lower, pair.upper

    def answer(self, groups: dict[str, list[float]], below: float | None, above: float | None) -> str:
        result = only(groups, plan(comparison=POOLED, characteristic=margins(below, above)))
        assert result.answer == result.pairs[0].answer
        assert result.margin == (below, above)
        return result.answer

    def test_an_interval_below_zero(self) -> None:
        groups = {"A": A, "B": B}
        low, high = self.interval(groups)
        assert low < high < 0.0
        assert self.answer(groups, None, None) == "different"
        assert self.answer(groups, high / 2, 1.0) == "matters"
        assert self.answer(groups, (low + high) / 2, 1.0) == "different"
        assert self.answer(groups, 2 * low, 1.0) == "within_margin"
        # an end exactly on the margin counts as not beyond it
        assert self.answer(groups, high, 1.0) == "different"
        assert self.answer(groups, low, 1.0) == "within_margin"
        assert self.answer(groups, math.nextafter(high, 0.0), 1.0) == "matters"
        assert self.answer(groups, math.nextafter(low, 0.0), 1.0) == "different"
        # only differences upwards matter: this one lies the other way
        assert self.answer(groups, None, 0.001) == "within_margin"

    def test_an_interval_above_zero(self) -> None:
        groups = {"B": B, "A": A}
        low, high = self.interval(groups)
        assert 0.0 < low < high
        assert self.answer(groups, -1.0, low / 2) == "matters"
        assert self.answer(groups, -1.0, (low + high) / 2) == "different"
        assert self.answer(groups, -1.0, high) == "within_margin"
        assert self.answer(groups, -0.001, None) == "within_margin"

    def test_an_interval_around_zero(self) -> None:
        groups = {"A": A, "C": C}
        low, high = self.interval(groups)
        assert low < 0.0 < high
        assert self.answer(groups, None, None) == "not_shown"
        assert self.answer(groups, low, high) == "equivalent"
        assert self.answer(groups, low / 2, 2 * high) == "not_settled"
        assert self.answer(groups, 2 * low, high / 2) == "not_settled"
        assert self.answer(groups, None, high) == "equivalent"

    def test_the_characteristics_answer_is_that_of_its_most_serious_pair(self) -> None:
        for margin in ("", "margin = 0.05", "margin = 0.4", "margin = 0.7", "margin = 1", "margin = 5"):
            result = only({"A": A, "B": B, "C": C, "N": NEAR}, plan(characteristic=margin))
            assert result.answer == min((p.answer for p in result.pairs), key=SERIOUSNESS.index)

    @pytest.mark.parametrize(
        ("margin", "alone", "beside"),
        [
            ("margin = 5", "equivalent", "not_settled"),
            ("", "not_shown", "not_settled"),
            ("margin = 0.1", "not_settled", "not_settled"),
        ],
    )
    def test_a_group_not_compared_keeps_anything_from_being_cleared(
        self, margin: str, alone: str, beside: str
    ) -> None:
        asked = plan(comparison=POOLED, characteristic=margin)
        assert only({"A": A, "N": NEAR}, asked).answer == alone
        result = only({"A": A, "N": NEAR, "small": [5.0]}, asked)
        assert result.answer == beside
        if margin == "margin = 5":
            assert only({"A": A, "N": NEAR}, asked).all_within_margin is True
            assert result.all_within_margin is False

    def test_a_group_not_compared_does_not_soften_what_is_serious(self) -> None:
        asked = plan(comparison=POOLED, characteristic="margin = 0.2")
        assert only({"A": A, "B": B, "small": [5.0]}, asked).answer == "matters"

    def test_different_without_margin_is_p_below_alpha(self) -> None:
        result = only({"A": A, "B": B, "C": C, "N": NEAR})
        for pair in result.pairs:
            assert (pair.answer == "different") is (pair.p < 0.05)

    def test_all_within_margin_needs_a_margin(self) -> None:
        assert only({"A": A, "N": NEAR}, plan(comparison=POOLED)).all_within_margin is None

    def test_two_one_sided_tests_on_a_hand_made_pair(self) -> None:
        """Pooled: difference ± t(0.95, 6) s √(1/4 + 1/4), the 90 % interval."""
        s2 = (3 * stats.tvar(A) + 3 * stats.tvar(C)) / 6
        half = stats.t.ppf(0.95, 6) * math.sqrt(s2 / 2)
        low = sum(A) / 4 - sum(C) / 4 - half
        for factor, within in ((1.001, True), (0.999, False)):
            asked = plan(comparison=POOLED, characteristic=f"margin = {float(-low * factor)!r}")
            assert only({"A": A, "C": C}, asked).all_within_margin is within


class TestOneSided:
    def asked(self, direction: str, procedure: str, margin: str = "") -> object:
        comparison = f'procedure = "{procedure}"\nreference = "R"'
        return plan(comparison=comparison, characteristic=f'direction = "{direction}"\n{margin}')

    @pytest.mark.parametrize("procedure", ["dunnett", "dunnett_unequal", "dunnett_weighted"])
    def test_bounds_are_open_towards_the_direction(self, procedure: str) -> None:
        groups = {"R": C, "A": A, "B": B}
        lower = only(groups, self.asked("lower_matters", procedure))  # type: ignore[arg-type]
        higher = only(groups, self.asked("higher_matters", procedure))  # type: ignore[arg-type]
        both = only(groups, self.asked("both", procedure))  # type: ignore[arg-type]
        for low, high, two in zip(lower.pairs, higher.pairs, both.pairs, strict=True):
            assert (low.lower, high.upper) == (None, None)
            assert low.difference == high.difference == two.difference
            assert low.upper is not None
            assert high.lower is not None
            assert two.lower is not None
            assert two.upper is not None
            assert low.upper < two.upper
            assert high.lower > two.lower
            assert (low.upper < 0.0) is (low.p < 0.05)
            assert (high.lower > 0.0) is (high.p < 0.05)
        assert [p.answer for p in higher.pairs] == ["not_shown", "different"]
        assert [p.answer for p in lower.pairs] == ["not_shown", "not_shown"]

    def test_no_size_settles_an_interval_that_stays_open(self) -> None:
        groups = {"R": C, "A": A, "B": B}
        higher = only(groups, self.asked("higher_matters", "dunnett", "margin = 0.7"))  # type: ignore[arg-type]
        assert [p.answer for p in higher.pairs] == ["not_settled", "different"]
        assert higher.pairs[0].needed_n is None
        assert higher.pairs[1].needed_n is not None

    def test_every_pair_has_no_direction(self) -> None:
        both = only({"A": A, "B": B})
        lower = only({"A": A, "B": B}, plan(characteristic='direction = "lower_matters"'))
        assert lower.pairs == both.pairs


class TestZeroSpread:
    GROUPS = {"A": [5.0] * 4, "B": B, "C": C}  # noqa: RUF012

    def test_its_variance_is_that_of_rounding_and_a_notice_says_so(self) -> None:
        result = run(of_groups(self.GROUPS, decimals=1), plan(comparison='procedure = "games_howell"'))
        (notice,) = result.notices
        assert notice.code == "spread_floored"
        assert notice.cells == ("Results!B2", "Results!B3", "Results!B4", "Results!B5")
        assert "0.1²/12" in notice.text
        pair = result.characteristics[0].pairs[0]
        expected = math.sqrt(0.01 / 12 / 4 + stats.tvar(B) / 4)
        assert pair.se == pytest.approx(expected, rel=1e-12)

    def test_other_groups_keep_their_own_variance(self) -> None:
        result = only(self.GROUPS, plan(comparison='procedure = "games_howell"'))
        pair = pair_of(result, "B", "C")
        assert pair.se == pytest.approx(math.sqrt((stats.tvar(B) + stats.tvar(C)) / 4), rel=1e-12)

    def test_on_the_log_scale_the_step_is_relative(self) -> None:
        result = only(
            of_groups(self.GROUPS, decimals=1), plan(comparison='procedure = "games_howell"\nscale = "log"')
        )
        logs = [math.log(b) for b in B]
        expected = math.sqrt((0.1 / 5.0) ** 2 / 12 / 4 + stats.tvar(logs) / 4)
        assert result.pairs[0].se == pytest.approx(expected, rel=1e-12)

    def test_the_overall_test_uses_it_too(self) -> None:
        result = only(of_groups(self.GROUPS, decimals=1), plan(comparison='procedure = "games_howell"'))
        assert result.overall is not None
        assert result.overall.name == "welch"
        # with a variance of rounding only, nearly all weight lies on the group without scatter
        assert result.overall.p is not None
        assert 0.0 < result.overall.p < 0.05

    def test_a_resolution_that_cannot_be_squared_gives_no_comparison(self) -> None:
        data = of_groups(self.GROUPS, decimals=200)
        result = only(data, plan(comparison='procedure = "games_howell"'))
        assert result.answer == "not_compared"
        assert result.not_compared[0].reason.startswith("games_howell cannot answer here: ")
        pooled = only(data, plan(comparison=POOLED))
        assert len(pooled.pairs) == 3
        assert pooled.sensitivity is None, "the alternative cannot answer"

    def test_a_pooled_procedure_needs_no_floor(self) -> None:
        result = run(self.GROUPS, plan(comparison=POOLED))
        assert result.notices == ()
        assert len(result.characteristics[0].pairs) == 3

    def test_means_equal_but_for_the_last_bits_count_as_without_spread(self) -> None:
        found = []
        for batch, samples in (
            ("A", [(1.1, 1.3), (1.2, 1.2), (1.0, 1.4)]),
            ("B", [(1.0, 1.2), (1.5, 1.1)] * 2),
        ):
            for sample, values in enumerate(samples):
                for value in values:
                    row = len(found) + 2
                    found.append(measurement(value, batch=batch, row=row, sample=str(sample), decimals=1))
        result = run(export(found), plan(comparison='procedure = "games_howell"'))
        assert [n.code for n in result.notices] == ["spread_floored"]
        assert result.characteristics[0].flagged == ()


class TestFlagged:
    OUTLYING = [5.0, 5.1, 4.9, 5.0, 5.1, 4.95, 9.0]  # noqa: RUF012
    CALM = [5.2, 5.0, 5.1, 4.9, 5.05, 5.15, 5.0]  # noqa: RUF012

    def test_a_value_is_flagged_at_its_cell_and_never_dropped(self) -> None:
        result = only({"A": self.CALM, "B": self.OUTLYING})
        (flagged,) = result.flagged
        assert (flagged.group, flagged.cell, flagged.value, flagged.test) == (
            "B",
            "Results!B15",
            9.0,
            "grubbs",
        )
        n, mean, sd = 7, sum(self.OUTLYING) / 7, stats.tstd(self.OUTLYING)
        assert flagged.statistic == pytest.approx((9.0 - mean) / sd, rel=1e-12)
        t2 = n * (n - 2) * flagged.statistic**2 / ((n - 1) ** 2 - n * flagged.statistic**2)
        assert flagged.p == pytest.approx(n * 2 * stats.t.sf(math.sqrt(t2), n - 2), rel=1e-9)
        assert result.groups[1].n == 7
        assert result.groups[1].mean == pytest.approx(mean, rel=1e-14)

    def test_the_level_is_shared_over_the_groups(self) -> None:
        just = [4.9, 5.0, 5.1, 5.0, 5.05, 4.95, 5.45]
        (alone,) = only({"A": just, "B": self.CALM}).flagged
        assert 0.05 / 10 < alone.p < 0.05 / 2
        crowd = {"A": just} | {f"B{i}": [v + i / 100 for v in self.CALM] for i in range(9)}
        assert only(crowd).flagged == ()

    def test_an_answer_that_would_change_is_told(self) -> None:
        groups = {"A": [6.0, 6.1, 6.05, 5.95, 6.0, 6.1, 6.0], "B": self.OUTLYING}
        for procedure in ("by rules", "tukey_hsd", "games_howell"):
            asked = plan(comparison=f'procedure = "{procedure}"')
            result = only(groups, asked)
            assert result.pairs[0].answer == "not_shown"
            assert [f.changes_answer for f in result.flagged] == [True]
            without = only({"A": groups["A"], "B": self.OUTLYING[:-1]}, plan())
            assert without.pairs[0].answer == "different"

    def test_an_answer_that_would_stay_is_told(self) -> None:
        groups = {"A": [50.0, 50.1, 49.9, 50.05, 49.95, 50.0, 50.1], "B": self.OUTLYING}
        for procedure in ("by rules", "tukey_hsd", "tukey_kramer"):
            result = only(groups, plan(comparison=f'procedure = "{procedure}"'))
            assert result.pairs[0].answer == "different"
            assert [f.changes_answer for f in result.flagged] == [False], procedure

    def test_a_group_that_would_become_too_small_changes_the_answer(self) -> None:
        groups = {"A": self.CALM, "B": [5.0, 5.01, 5.0, 99.0]}
        (flagged,) = only(groups, plan(comparison="smallest_group = 4")).flagged
        assert flagged.changes_answer is True

    def test_without_a_comparison_no_answer_can_change(self) -> None:
        (flagged,) = only({"B": self.OUTLYING}).flagged
        assert flagged.changes_answer is None

    def test_two_equal_values_and_one_a_rounding_step_away_are_not_outlying(self) -> None:
        """Three values of which two are equal have the largest statistic there is, whatever the distance."""
        data = of_groups(
            {"A": [24.8, 24.8, 24.9], "B": [24.7, 25.0, 24.9], "C": [25.1, 25.0, 25.3]}, decimals=1
        )
        assert only(data).flagged == ()
        far = of_groups(
            {"A": [24.8, 24.8, 39.0], "B": [24.7, 25.0, 24.9], "C": [25.1, 25.0, 25.3]}, decimals=1
        )
        assert [f.value for f in only(far).flagged] == [39.0]
        assert [f.value for f in only(far, plan(comparison='scale = "log"')).flagged] == [39.0]


class TestSensitivity:
    def test_the_pooled_choice_is_held_against_the_unequal_one(self) -> None:
        groups = {"A": A, "B": [v + 0.7 for v in A], "C": C}
        result = only(groups, plan(comparison='procedure = "tukey_hsd"'))
        assert result.sensitivity is not None
        assert result.sensitivity.procedure == "dunnett_c"
        other = only(groups, plan(comparison='procedure = "dunnett_c"'))
        assert other.sensitivity is not None
        assert other.sensitivity.procedure == "tukey_hsd"
        here = {(p.first, p.second): p.answer for p in result.pairs}
        there = {(p.first, p.second): p.answer for p in other.pairs}
        expected = {key: answer for key, answer in there.items() if here[key] != answer}
        assert {(c.first, c.second): c.answer for c in result.sensitivity.changed} == expected
        assert expected, "these groups are made so that the policies disagree"

    def test_with_a_reference(self) -> None:
        result = only({"A": A, "B": B, "C": C}, plan(comparison='reference = "A"'))
        assert result.procedure == "dunnett_weighted"
        assert result.sensitivity is not None
        assert result.sensitivity.procedure == "dunnett"

    def test_a_table_that_knows_one_policy_has_no_alternative(self) -> None:
        default = rules()
        kept = [
            row for row in default.rows if "similar" not in {str(getattr(c, "word", "")) for c in row.when}
        ]
        table = dataclasses.replace(default, rows=tuple(kept))
        assert only({"A": A, "B": B}, table=table).sensitivity is None

    def test_textbook(self) -> None:
        result = only({"A": A, "B": B, "C": C}, table=rules(TEXTBOOK))
        assert (result.procedure, result.rule.id) == ("tukey_hsd", "levene_passed_equal_sizes")
        assert result.sensitivity is not None
        assert result.sensitivity.procedure == "games_howell"


class TestAlpha:
    def test_a_family_over_the_export_shares_alpha(self) -> None:
        pairs = itertools.product(("strength", "peel"), (("A", A), ("B", B)))
        found = []
        for name, (batch, values) in pairs:
            for value in values:
                found.append(measurement(value, batch=batch, row=len(found) + 2, characteristic=name))
        asked = plan(comparison=f'family = "export"\nalpha = 0.04\n{POOLED}', names=("strength", "peel"))
        first, second = run(export(found), asked).characteristics
        assert (first.alpha, second.alpha) == (0.02, 0.02)
        alone = only({"A": A, "B": B}, plan(comparison=f"alpha = 0.02\n{POOLED}"))
        assert first.pairs == alone.pairs

    def test_a_smaller_alpha_widens_every_interval(self) -> None:
        wide = only({"A": A, "B": B, "C": C}, plan(comparison="alpha = 0.01")).pairs
        narrow = only({"A": A, "B": B, "C": C}, plan(comparison="alpha = 0.10")).pairs
        for w, n in zip(wide, narrow, strict=True):
            assert w.lower is not None
            assert n.lower is not None
            assert w.lower < n.lower
            assert w.p == n.p


class TestDesign:
    def test_the_detectable_difference_has_its_power(self) -> None:
        for pair in only({"A": A, "B": B, "C": C}, plan(comparison=POOLED)).pairs:
            assert pair.detectable is not None
            assert pair.se is not None
            assert pair.critical_value is not None
            power = stats.nct.sf(pair.critical_value, pair.df, pair.detectable / pair.se)
            assert power == pytest.approx(0.80, abs=1e-9)

    def test_it_describes_the_design_and_not_the_result(self) -> None:
        near = only({"A": A, "B": [v + 0.01 for v in A]}, plan(comparison=POOLED)).pairs[0]
        far = only({"A": A, "B": [v + 100.0 for v in A]}, plan(comparison=POOLED)).pairs[0]
        assert near.detectable == pytest.approx(far.detectable, rel=1e-9)

    def test_more_results_detect_less(self) -> None:
        few = only({"A": A, "B": B}).pairs[0].detectable
        many = only({"A": A * 5, "B": B * 5}).pairs[0].detectable
        assert few is not None
        assert many is not None
        assert many < few

    @pytest.mark.parametrize("procedure", ["tukey_hsd", "games_howell", "dunnett_t3"])
    def test_the_needed_number_would_settle_a_pair_with_this_scatter(self, procedure: str) -> None:
        asked = plan(comparison=f'procedure = "{procedure}"', characteristic="margin = 0.3")
        first, second = [-0.3, 0.3, -0.1, 0.1], [-0.2, 0.4, 0.0, 0.2]
        pair = only({"A": first, "B": second}, asked).pairs[0]
        assert pair.answer == "not_settled"
        assert pair.needed_n is not None
        assert pair.needed_n > 4
        n = pair.needed_n
        for size, settled in ((n, True), (max(n - 2, 2), False)):
            # groups of that size with the same mean and variance: two values, half each, and a correction
            big = {label: stretched(values, size) for label, values in (("A", first), ("B", second))}
            answer = only(big, asked).pairs[0].answer
            assert (answer != "not_settled") is settled, (size, answer)

    def test_no_number_settles_a_difference_on_the_margin_itself(self) -> None:
        groups = {"A": [0.0, 1.0, 2.0], "B": [1.0, 2.0, 3.0]}
        (pair,) = only(groups, plan(comparison=POOLED, characteristic="margin = 1")).pairs
        assert (pair.difference, pair.answer, pair.needed_n) == (-1.0, "not_settled", None)

    def test_settled_pairs_and_plans_without_margin_need_none(self) -> None:
        assert only({"A": A, "B": B}).pairs[0].needed_n is None
        assert only({"A": A, "N": NEAR}, plan(characteristic="margin = 9")).pairs[0].needed_n is None


def stretched(values: list[float], n: int) -> list[float]:
    """Return n values with the mean and the variance of `values`."""
    mean, variance = sum(values) / len(values), stats.tvar(values)
    raw = [(-1.0) ** i if i < n - n % 2 else 0.0 for i in range(n)]
    scale = math.sqrt(variance / stats.tvar(raw))
    return [mean + scale * r for r in raw]


class TestLogScale:
    LOG = f'scale = "log"\n{POOLED}'

    def test_differences_are_ratios_of_geometric_means(self) -> None:
        result = only({"A": A, "B": B}, plan(comparison=self.LOG, characteristic='margin = "40 %"'))
        (pair,) = result.pairs
        assert pair.difference == pytest.approx(stats.gmean(A) / stats.gmean(B), rel=1e-12)
        assert result.margin == pytest.approx((1 / 1.4, 1.4), rel=1e-15)
        assert pair.lower is not None
        assert pair.upper is not None
        assert pair.se is not None
        assert pair.statistic is not None
        assert math.log(pair.upper / pair.lower) / 2 == pytest.approx(
            float(pair.critical_value or 0) * pair.se, rel=1e-12
        )
        assert pair.statistic == pytest.approx(math.log(pair.difference) / pair.se, rel=1e-12)
        assert pair.answer == "within_margin"
        assert result.groups[0].mean == pytest.approx(sum(A) / 4, rel=1e-12), "described as measured"
        assert result.fact_values()["scale"] == "log"

    def test_a_common_factor_does_not_change_it(self) -> None:
        pair = only({"A": A, "B": B}, plan(comparison=self.LOG)).pairs[0]
        scaled = only({"A": [7 * v for v in A], "B": [7 * v for v in B]}, plan(comparison=self.LOG)).pairs[0]
        assert (scaled.difference, scaled.p) == pytest.approx((pair.difference, pair.p), rel=1e-9)

    def test_a_ratio_beyond_double_precision_is_open(self) -> None:
        wild = {"A": [1e-60, 1.0, 1e60], "B": [1e-50, 1e10, 1e60]}
        pair = only(wild, plan(comparison='scale = "log"\nprocedure = "dunnett_c"\nalpha = 0.001')).pairs[0]
        assert pair.upper is None
        assert pair.lower == 0.0
        assert pair.answer == "not_shown"
