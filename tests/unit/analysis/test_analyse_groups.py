"""Which units count, which groups are compared, and what is said of the others."""

from __future__ import annotations

import math

import pytest
from analysis_cases import export, measurement, of_groups, only, pair_of, plan, rules, run

from qcreport.analysis import require_answerable
from qcreport.errors import ExportRefusedError
from qcreport.measurements import CellRef, Measurement, MeasurementSet, Notice

A = [5.1, 5.4, 4.8, 5.0]
B = [6.0, 6.4, 5.9, 6.2]
C = [5.5, 5.0, 5.2, 5.3]


class TestUnits:
    """Two lines, their batches, samples and readings; unequal counts at every level."""

    READINGS = (
        ("L1", "B1", "S1", (10.0, 11.0, 12.0)),
        ("L1", "B1", "S2", (20.0,)),
        ("L1", "B2", "S1", (30.0, 31.0)),
        ("L2", "B3", "S1", (5.0, 7.0)),
        ("L2", "B4", "S9", (9.0,)),
        ("L1", "B1", "S1", (15.0,)),  # a late reading of the first sample
    )

    def data(self, *, samples: bool = True) -> MeasurementSet:
        found: list[Measurement] = []
        for line, batch, sample, values in self.READINGS:
            for value in values:
                found.append(
                    measurement(
                        value,
                        batch=batch,
                        row=len(found) + 2,
                        line=line,
                        sample=sample if samples else None,
                        decimals=1,
                    )
                )
        return export(found)

    @pytest.mark.parametrize(
        ("groups", "unit", "expected"),
        [
            (
                "batch",
                "sample",
                {"B1": (12.0, 20.0), "B2": (30.5,), "B3": (6.0,), "B4": (9.0,)},
            ),
            (
                "batch",
                "reading",
                {"B1": (10.0, 11.0, 12.0, 20.0, 15.0), "B2": (30.0, 31.0), "B3": (5.0, 7.0), "B4": (9.0,)},
            ),
            ("line", "sample", {"L1": (12.0, 20.0, 30.5), "L2": (6.0, 9.0)}),
            # reading → sample → batch, unweighted: (12 + 20)/2, never the mean of five readings
            ("line", "batch", {"L1": (16.0, 30.5), "L2": (6.0, 9.0)}),
            ("line", "reading", {"L1": (10.0, 11.0, 12.0, 20.0, 30.0, 31.0, 15.0), "L2": (5.0, 7.0, 9.0)}),
        ],
    )
    def test_readings_are_averaged_stepwise_and_unweighted(
        self, groups: str, unit: str, expected: dict[str, tuple[float, ...]]
    ) -> None:
        asked = plan(comparison=f'groups = "{groups}"\nindependent_unit = "{unit}"\nsmallest_group = 2')
        result = only(self.data(), asked)
        assert {g.label: tuple(u.value for u in g.units) for g in result.groups} == expected
        assert {g.label: g.n for g in result.groups} == {k: len(v) for k, v in expected.items()}
        assert sum(g.n_readings for g in result.groups) == 10
        assert result.independent_unit == unit

    def test_the_cells_of_every_reading_stay_with_their_unit(self) -> None:
        first = only(self.data()).groups[0].units[0]
        assert first.cells == ("Results!B2", "Results!B3", "Results!B4", "Results!B11")
        assert (first.sample, first.text) == ("S1", "")
        assert only(self.data()).groups[1].units[0].cells == ("Results!B6", "Results!B7")

    def test_a_mean_over_samples_bears_no_sample_name(self) -> None:
        asked = plan(comparison='groups = "line"\nindependent_unit = "batch"\nsmallest_group = 2')
        assert [[u.sample for u in g.units] for g in only(self.data(), asked).groups] == [
            [None, "S1"],
            ["S1", "S9"],
        ]

    def test_without_a_sample_name_each_cell_is_a_sample(self) -> None:
        result = only(self.data(samples=False))
        assert {g.label: g.n for g in result.groups} == {"B1": 5, "B2": 2, "B3": 2, "B4": 1}

    def test_the_same_sample_name_in_two_batches_is_two_samples(self) -> None:
        result = only(self.data(), plan(comparison='groups = "line"\nindependent_unit = "sample"'))
        assert result.groups[0].n == 3

    def test_a_value_without_a_line_refuses_a_comparison_of_lines(self) -> None:
        data = export([measurement(1.0, batch="A", row=5)])
        with pytest.raises(ExportRefusedError) as caught:
            run(data, plan(comparison='groups = "line"'))
        assert (caught.value.code, caught.value.cells) == ("group_missing", ("Results!B5",))


class TestNotCompared:
    @pytest.mark.parametrize(
        ("values", "n", "words"),
        [
            ([5.0, 5.2], 2, "The plan asks for at least 3 samples in a group; this one has 2 of them."),
            ([5.0], 1, "The plan asks for at least 3 samples in a group; this one has one."),
            ([None], 0, "The plan asks for at least 3 samples in a group; this one has no value."),
        ],
    )
    def test_a_group_below_the_smallest(self, values: list[float | None], n: int, words: str) -> None:
        result = only({"A": A, "B": B, "small": values})
        (left,) = result.not_compared
        assert (left.label, left.n, left.reason) == ("small", n, words)
        assert [(p.first, p.second) for p in result.pairs] == [("A", "B")]
        assert ("small" in [g.label for g in result.groups]) is (n > 0)

    def test_the_smallest_group_is_the_plans(self) -> None:
        result = only({"A": A, "B": B, "small": [5.0, 5.2]}, plan(comparison="smallest_group = 2"))
        assert result.not_compared == ()
        assert len(result.pairs) == 3

    def test_units_are_named(self) -> None:
        data = export(measurement(v, batch="B1", row=r, line="L") for r, v in enumerate(A, start=2))
        result = only(data, plan(comparison='groups = "line"\nindependent_unit = "batch"'))
        assert result.not_compared[0].reason == (
            "The plan asks for at least 3 batches in a group; this one has one."
        )

    def test_missing_values_are_counted_and_never_numbers(self) -> None:
        (group,) = only({"A": [5.0, None, 5.2, 5.1, None]}).groups
        assert (group.n, group.missing, group.n_readings) == (3, 2, 3)
        assert group.mean == pytest.approx(5.1, abs=1e-12)

    @pytest.mark.parametrize(
        ("groups", "rule"),
        [
            ({"A": A}, "too_few_groups"),
            ({"A": A, "B": [1.0]}, "too_few_groups"),
            ({"A": [5.0] * 4, "B": [5.0] * 4}, "no_variation"),
            ({"A": [5.0] * 4, "B": [6.0] * 4}, "no_variation"),
        ],
    )
    @pytest.mark.parametrize("procedure", ["by rules", "tukey_kramer", "games_howell"])
    def test_nothing_to_compare_is_an_answer_and_no_refusal(
        self, groups: dict[str, list[float]], rule: str, procedure: str
    ) -> None:
        result = only(groups, plan(comparison=f'procedure = "{procedure}"', characteristic="margin = 1"))
        assert (result.answer, result.procedure, result.rule.id) == ("not_compared", "none", rule)
        assert result.pairs == ()
        assert result.all_within_margin is None
        assert result.sensitivity is None
        assert {g.label for g in result.not_compared} == set(groups)
        assert all(g.reason for g in result.not_compared)

    def test_a_fixed_procedure_that_cannot_answer_says_why(self) -> None:
        result = only({"A": A, "B": [*B, 6.1]}, plan(comparison='procedure = "tukey_hsd"'))
        assert (result.answer, result.procedure, result.rule.id) == ("not_compared", "none", "fixed_by_plan")
        assert result.not_compared[0].reason.startswith("tukey_hsd cannot answer here: ")
        assert "Tukey-Kramer" in result.not_compared[0].reason

    def test_a_plan_may_ask_for_no_comparison(self) -> None:
        result = only({"A": A, "B": B}, plan(comparison='procedure = "none"'))
        assert (result.answer, result.procedure, result.pairs) == ("not_compared", "none", ())
        assert result.overall is not None

    def test_means_that_differ_only_in_the_last_bits_do_not_vary(self) -> None:
        """(1.1 + 1.3)/2 and (1.2 + 1.2)/2 are not the same double, but the same mean."""
        readings = [(1.1, 1.3), (1.2, 1.2), (1.0, 1.4)]
        assert len({math.fsum(r) / 2 for r in readings}) > 1
        found = []
        for batch in ("A", "B"):
            for sample, values in enumerate(readings):
                for value in values:
                    row = len(found) + 2
                    found.append(measurement(value, batch=batch, row=row, sample=str(sample), decimals=1))
        result = only(export(found))
        assert (result.rule.id, result.answer) == ("no_variation", "not_compared")

    def test_a_characteristic_that_the_export_lacks(self) -> None:
        first, second = run({"A": A, "B": B}, plan(names=("strength", "peel"))).characteristics
        assert first.pairs
        assert (second.answer, second.groups, second.not_compared) == ("not_compared", (), ())

    def test_a_reference_too_small_leaves_nothing_to_compare_with(self) -> None:
        result = only({"R": [5.0], "A": A, "B": B}, plan(comparison='reference = "R"'))
        assert result.answer == "not_compared"
        reasons = {g.label: g.reason for g in result.not_compared}
        assert reasons["R"].startswith("The plan asks for at least 3")
        assert reasons["A"] == "The reference R cannot be compared, so nothing can be compared with it."

    def test_a_reference_that_is_absent_refuses_the_export(self) -> None:
        with pytest.raises(ExportRefusedError) as caught:
            run({"A": A, "B": B}, plan(comparison='reference = "R"'))
        assert caught.value.code == "reference_missing"
        assert "A, B." in caught.value.found
        with pytest.raises(ExportRefusedError):
            require_answerable(of_groups({"A": A}), plan(comparison='reference = "R"'))

    def test_an_export_without_values_is_refused(self) -> None:
        with pytest.raises(ExportRefusedError) as caught:
            run(export([]))
        assert caught.value.code == "no_data_rows"
        assert "strength" in caught.value.expected

    def test_another_unit_is_refused_at_its_cell(self) -> None:
        data = export(measurement(1.0, batch="A", row=r, unit=u) for r, u in ((2, "u"), (3, "psi"), (4, "u")))
        with pytest.raises(ExportRefusedError) as caught:
            run(data)
        assert (caught.value.code, caught.value.cells) == ("unit_conflict", ("Results!B3",))

    @pytest.mark.parametrize("bad", [0.0, -1.0])
    def test_the_log_scale_leaves_out_what_has_no_logarithm(self, bad: float) -> None:
        result = only({"A": A, "B": B, "C": [*C, bad]}, plan(comparison='scale = "log"'))
        (left,) = result.not_compared
        assert (left.label, left.reason) == ("C", "It holds a value of 0 or below, which has no logarithm.")
        assert len(result.pairs) == 1

    @pytest.mark.parametrize("values", [[1e200, 2e200, 3e200], [0.0, 1e-80, 0.0]])
    def test_what_cannot_be_squared_is_described_at_most(self, values: list[float]) -> None:
        result = only({"A": A, "B": B, "C": values})
        assert [g.label for g in result.not_compared] == ["C"]
        assert len(result.pairs) == 1


class TestCensored:
    GROUPS = {"A": [*A, "<0.5"], "B": B, "C": C}  # noqa: RUF012

    @pytest.mark.parametrize("procedure", ["tukey_kramer", "games_howell", "dunnett_c"])
    def test_a_procedure_on_means_does_not_answer(self, procedure: str) -> None:
        result = only(self.GROUPS, plan(comparison=f'procedure = "{procedure}"'))
        assert (result.answer, result.procedure, result.rule.id) == ("not_compared", "none", "fixed_by_plan")
        assert {g.reason for g in result.not_compared} == {
            f"{procedure} needs numbers, but some results are known only by a limit."
        }

    def test_the_default_rules_ask_for_ranks(self) -> None:
        result = only(self.GROUPS)
        assert result.rule.id == "censored_every_pair"
        assert result.fact_values()["censored"] == "some"

    def test_no_mean_is_made_of_a_limit(self) -> None:
        group = only(self.GROUPS).groups[0]
        assert (group.n, group.censored) == (5, 1)
        assert (group.mean, group.sd, group.median, group.minimum, group.maximum) == (None,) * 5
        assert only(self.GROUPS).flagged == ()
        assert only(self.GROUPS).analysis_of_variance is None

    @pytest.mark.parametrize(
        ("readings", "censored", "value"),
        [
            ((5.0, "<1"), "<", 3.0),
            (("<1", "<=3"), "<", 2.0),
            (("<=1", 2.0), "<=", 1.5),
            ((">9", ">=7"), ">", 8.0),
            ((5.0, 5.4), None, 5.2),
            (("nd", "nd"), "nd", 0.0),
            (("nd", "<1", "<3"), "<", 3.0),
        ],
    )
    def test_a_mean_with_limits_of_one_side_lies_on_that_side(
        self, readings: tuple[float | str, ...], censored: str | None, value: float
    ) -> None:
        data = export(measurement(v, batch="A", row=r, sample="S") for r, v in enumerate(readings, start=2))
        (unit,) = only(data).groups[0].units
        assert (unit.censored, unit.placed) == (censored, True)
        assert unit.value == pytest.approx(value, abs=1e-12)

    @pytest.mark.parametrize("readings", [(5.0, "nd"), ("nd", ">9"), ("<1", ">9"), ("<1", ">9", 5.0)])
    def test_a_mean_that_may_lie_anywhere_is_not_ranked(self, readings: tuple[float | str, ...]) -> None:
        """The mean of 5 and a reading not detected is at least 2.5: it must not count as the lowest."""
        cells = [("A", str(i), v) for i, v in enumerate([*A, *A])] + [("A", "S", v) for v in readings]
        cells += [("B", str(i), v) for i, v in enumerate(B)] + [("C", str(i), v) for i, v in enumerate(C)]
        data = export(measurement(v, batch=b, row=r, sample=s) for r, (b, s, v) in enumerate(cells, start=2))
        result = only(data)
        assert [g.label for g in result.not_compared] == ["A"]
        assert result.not_compared[0].reason.startswith(
            "It holds a mean of readings with limits on both sides"
        )
        assert [(p.first, p.second) for p in result.pairs] == [("B", "C")]

    def test_a_censored_group_left_out_does_not_hinder_the_others(self) -> None:
        result = only({"A": A, "B": B, "C": [5.0, "<0.5"]}, plan(comparison='procedure = "games_howell"'))
        assert len(result.pairs) == 1
        assert [g.label for g in result.not_compared] == ["C"]


def test_groups_and_pairs_come_in_order_of_first_appearance() -> None:
    pairs = [("B", 6.0), ("A", 5.0), ("C", 5.5), ("B", 6.2), ("A", 5.3), ("C", 5.1)] * 2
    data = export(measurement(v + r / 100, batch=b, row=r) for r, (b, v) in enumerate(pairs, start=2))
    result = only(data)
    assert [g.label for g in result.groups] == ["B", "A", "C"]
    assert [(p.first, p.second) for p in result.pairs] == [("B", "A"), ("B", "C"), ("A", "C")]
    with_reference = only(data, plan(comparison='reference = "A"'))
    assert [(p.first, p.second) for p in with_reference.pairs] == [("B", "A"), ("C", "A")]


def test_notices_of_the_reading_stay_and_come_first() -> None:
    read = Notice(code="decimal_comma", cells=("Results!B2",), text="Decimal commas.")
    plain = of_groups({"A": A, "B": [6.0] * 4})
    data = MeasurementSet(
        export_name="x.xlsx",
        export_sha256="a" * 64,
        layout_name="rig",
        measurements=plain.measurements,
        notices=(read,),
    )
    assert [n.code for n in run(data).notices] == ["decimal_comma", "spread_floored"]


@pytest.mark.parametrize(
    ("approved", "time", "late"),
    [
        ("2026-11-02", "2026-11-03T08:00:00", False),
        ("2026-11-02", "2026-11-02T08:00:00", False),
        ("2026-11-02", "2026-11-01T23:59:59", True),
        ("2026-11-02", None, False),
    ],
)
def test_a_plan_approved_after_the_data_is_said(approved: str, time: str | None, late: bool) -> None:
    asked = plan(top=f'approved = {{ by = "QC", on = {approved} }}')
    data = export(
        [
            measurement(5.0, batch="A", row=2, time="2026-12-01T10:00:00"),
            measurement(5.1, batch="A", row=3, time=time),
        ]
    )
    codes = [n.code for n in run(data, asked).notices]
    assert codes == (["plan_set_after_data"] if late else [])


def test_cells_of_a_text_export_are_records() -> None:
    data = export(
        measurement(v, batch="A", row=r, cell=CellRef(sheet=None, row=r, column=3))
        for r, v in enumerate(A, 1)
    )
    assert only(data, table=rules()).groups[0].cells[0] == "record 1, column 3"


def test_a_pair_is_found_by_its_labels() -> None:
    assert pair_of(only({"A": A, "B": B}), "A", "B").difference == pytest.approx(
        sum(A) / 4 - sum(B) / 4, rel=1e-12
    )
