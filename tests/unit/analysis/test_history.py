"""From recorded measurements to the spread of earlier exports, and from there to the choice."""

from __future__ import annotations

import dataclasses
import json
import math
import statistics

import pytest
from analysis_cases import CONTEXT, export, measurement, plan, rules

from qcreport.analysis import analyse, context_from_json
from qcreport.analysis.comparable import comparable
from qcreport.analysis.history import spread_histories, within_batches
from qcreport.analysis.screen import groups_of
from qcreport.canonical import to_readable_json_bytes
from qcreport.measurements import Measurement, MeasurementSet

LINES = 'groups = "line"\nindependent_unit = "sample"'
SHAPE = (-1.2, -0.6, -0.1, 0.3, 0.7, 0.9)


def readings(*cells: tuple[str, str, float | str], **more: object) -> list[Measurement]:
    """Return one reading each of (line, batch, value), each a sample of its own."""
    return [
        measurement(value, batch=batch, row=row, line=line, sample=f"s{row}", **more)
        for row, (line, batch, value) in enumerate(cells, start=2)
    ]


def batch(line: str, label: str, middle: float, scale: float = 1.0) -> list[tuple[str, str, float]]:
    return [(line, label, middle + scale * x) for x in SHAPE]


def past(lines: int = 4, batches: int = 15) -> list[Measurement]:
    cells = [
        cell
        for number in range(batches)
        for line in range(lines)
        for cell in batch(f"L{line}", f"{line}-{number}", 10.0 + number)
    ]
    return readings(*cells)


def tonight(lines: int = 4) -> MeasurementSet:
    return export(readings(*(c for i in range(lines) for c in batch(f"L{i}", f"new-{i}", 12.0 + 0.1 * i))))


class TestLines:
    def test_scatter_inside_batches_is_pooled(self) -> None:
        (found,) = spread_histories(past(), plan(comparison=LINES))
        assert [line.label for line in found.lines] == ["L0", "L1", "L2", "L3"]
        for line in found.lines:
            assert (line.batches, line.n, line.df) == (15, 90, 75.0)
            assert line.variance == pytest.approx(statistics.variance(SHAPE), rel=1e-12)

    def test_readings_of_a_sample_are_averaged_first(self) -> None:
        pairs = [
            measurement(v, batch="B", row=row, line="L", sample=f"s{row // 2}")
            for row, v in enumerate((1.0, 3.0, 4.0, 6.0))
        ]
        (found,) = spread_histories(pairs, plan(comparison=LINES))
        assert (found.lines[0].n, found.lines[0].df, found.lines[0].variance) == (2, 1.0, 4.5)

    def test_batch_means_are_what_counts_where_the_batch_is_the_unit(self) -> None:
        asked = plan(comparison='groups = "line"\nindependent_unit = "batch"')
        (found,) = spread_histories(past(), asked)
        assert (found.lines[0].batches, found.lines[0].df) == (15, 14.0)
        means = [10.0 + n + statistics.mean(SHAPE) for n in range(15)]
        assert found.lines[0].variance == pytest.approx(statistics.variance(means), rel=1e-12)

    def test_single_results_say_nothing_of_scatter(self) -> None:
        assert spread_histories(readings(("L", "B", 1.0), ("L", "C", 2.0)), plan(comparison=LINES)) == ()


class TestBatches:
    def test_each_batch_by_itself(self) -> None:
        (found,) = spread_histories(past(lines=2, batches=3), plan())
        assert [b.label for b in found.batches] == ["0-0", "1-0", "0-1", "1-1", "0-2", "1-2"]
        assert {(b.n, b.df) for b in found.batches} == {(6, 5.0)}
        assert found.lines == ()

    def test_equal_values_have_the_variance_of_rounding(self) -> None:
        (found,) = spread_histories(readings(*[("L", "B", 2.5)] * 4), plan())
        assert found.batches[0].variance == pytest.approx(0.01**2 / 12, rel=1e-12)

    def test_the_log_scale(self) -> None:
        values = (1.0, 2.0, 4.0)
        (found,) = spread_histories(
            readings(*[("L", "B", v) for v in values]), plan(comparison='scale = "log"')
        )
        assert found.batches[0].variance == pytest.approx(math.log(2.0) ** 2, rel=1e-12)

    @pytest.mark.parametrize(
        ("spoilt", "comparison"),
        [
            (readings(("L", "B", "<0.5"), ("L", "B", 1.0), ("L", "B", 2.0)), ""),
            (readings(("L", "B", 0.0), ("L", "B", 1.0), ("L", "B", 2.0)), 'scale = "log"'),
            (readings(("L", "B", 3.0), ("L", "B", 1.0), ("L", "B", 2.0), unit="psi"), ""),
            (readings(("L", "B", 3.0), ("L", "B", 1.0), characteristic="other"), ""),
        ],
    )
    def test_a_batch_with_limits_no_logarithm_another_unit_or_name_is_passed_over(
        self, spoilt: list[Measurement], comparison: str
    ) -> None:
        assert spread_histories(spoilt, plan(comparison=comparison)) == ()


def test_this_exports_part_is_the_scatter_inside_its_batches() -> None:
    asked = plan(comparison=LINES)
    cells = [*batch("L", "one", 10.0), *batch("L", "two", 30.0), *batch("M", "three", 10.0, 2.0)]
    data = export(readings(*cells))
    ready = comparable(groups_of(data, asked, asked.characteristics[0]), asked)
    first, second = within_batches(ready, asked)
    assert (first.df, second.df) == (10.0, 5.0)
    assert first.variance == pytest.approx(statistics.variance(SHAPE), rel=1e-12)
    assert second.variance == pytest.approx(4 * statistics.variance(SHAPE), rel=1e-12)


def test_history_decides_and_travels_in_the_context() -> None:
    asked = plan(comparison=LINES)
    context = dataclasses.replace(CONTEXT, history=spread_histories(past(), asked))
    read_back = context_from_json(json.loads(to_readable_json_bytes(context.to_json())))
    assert read_back == context
    with_history = analyse(tonight(), asked, rules(), read_back).characteristics[0]
    without = analyse(tonight(), asked, rules(), CONTEXT).characteristics[0]
    assert (with_history.fact_values()["spread"], with_history.procedure) == ("similar", "tukey_hsd")
    assert (without.fact_values()["spread"], without.procedure) == ("cannot be judged", "dunnett_t3")


def test_forty_earlier_batches_speak_for_the_batches_of_an_export() -> None:
    asked = plan()
    context = dataclasses.replace(CONTEXT, history=spread_histories(past(lines=1, batches=40), asked))
    found = analyse(tonight(3), asked, rules(), context).characteristics[0]
    assert (found.fact_values()["spread"], found.procedure) == ("similar", "tukey_hsd")
    fewer = dataclasses.replace(CONTEXT, history=spread_histories(past(lines=1, batches=39), asked))
    assert analyse(tonight(3), asked, rules(), fewer).characteristics[0].procedure == "dunnett_t3"
