"""Order, shift, scale and names change only what they should, whatever the values."""

from __future__ import annotations

import functools
import importlib.resources
import json
import math
from collections.abc import Mapping, Sequence

import jsonschema
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy import stats

from qcreport.analysis import Context, analyse
from qcreport.analysis.context import Laboratory
from qcreport.analysis.result import CharacteristicResult, PairResult
from qcreport.canonical import to_readable_json_bytes
from qcreport.measurements import CellRef, Measurement, MeasurementSet
from qcreport.plan import parse_plan
from qcreport.rules import RulesTable, parse_rules
from qcreport.settings.shipped import shipped_files
from qcreport.stats.equivalence import SERIOUSNESS

Groups = Mapping[str, Sequence[float]]

EVERY_PAIR = ("tukey_kramer", "games_howell", "dunnett_t3", "dunnett_c", "tamhane_t2")
WITH_REFERENCE = ("dunnett", "dunnett_unequal", "dunnett_weighted")
CONTEXT = Context(
    report_number="2026-0001",
    revision=1,
    made_at="2026-12-01T06:12:00Z",
    time_zone="UTC",
    language="en",
    page_size="A4",
    laboratory=Laboratory(name="Lab", address="Town", place_of_work="", customer=""),
    export_name="export.xlsx",
    export_sha256="a" * 64,
    received_at="2026-12-01T06:11:00Z",
    plan_name="p",
    plan_sha256="b" * 64,
    layout_sha256="c" * 64,
    rules_sha256="d" * 64,
    templates=(),
    templates_changed=(),
    run_k=1,
    run_n=1,
    run_reason="",
    ledger_sequence=0,
    ledger_hash="",
    seal_subject="",
    seal_fingerprint_sha256="",
    pades_level="B-B",
    demonstration=False,
    software_version="0.1.0",
)


@functools.cache
def rules() -> RulesTable:
    return parse_rules(shipped_files("config/rules", "default.toml")["default.toml"], "default.toml")


def result_of(groups: Groups, comparison: str = "", characteristic: str = "") -> CharacteristicResult:
    """Return the analysis of groups of values, group below group."""
    plan = parse_plan(
        f'name = "p"\ntitle = "P"\nexports = ["*"]\nlayout = "l"\n[comparison]\n{comparison}\n'
        f'[[characteristic]]\nname = "c"\nunit = "u"\n{characteristic}\n'.encode(),
        "p.toml",
    )
    pairs = [(label, value) for label, values in groups.items() for value in values]
    measurements = tuple(
        Measurement(
            characteristic="c", batch=label, line=None, sample=None, reading=None, value=value,
            text=repr(value),
            decimals=3, unit="u", censored=None, status=None, time=None,
            cell=CellRef(sheet="Data", row=row, column=2),
        )
        for row, (label, value) in enumerate(pairs, start=2)
    )  # fmt: skip
    data = MeasurementSet(
        export_name="export.xlsx", export_sha256="a" * 64, layout_name="l", measurements=measurements
    )
    return analyse(data, plan, rules(), CONTEXT).characteristics[0]


def procedure(name: str) -> str:
    return f'procedure = "{name}"'


GRID = st.integers(min_value=0, max_value=640).map(lambda i: i / 64.0)
"""Values that shift and scale without rounding."""


def varied(least: int = 3, most: int = 7) -> st.SearchStrategy[list[float]]:
    return st.lists(GRID, min_size=least, max_size=most, unique=True)


def grouped(least: int = 2, most: int = 5) -> st.SearchStrategy[dict[str, list[float]]]:
    return st.lists(varied(), min_size=least, max_size=most).map(
        lambda groups: {f"G{i}": values for i, values in enumerate(groups, start=1)}
    )


few = settings(deadline=None, max_examples=15)


def same(first: float | None, second: float | None, factor: float = 1.0) -> bool:
    if first is None or second is None:
        return first is second
    return math.isclose(first * factor, second, rel_tol=1e-9, abs_tol=1e-11 * abs(factor))


def turned(pair: PairResult) -> tuple[float | None, ...]:
    """Return the numbers of the pair the other way round."""
    low = None if pair.upper is None else -pair.upper
    high = None if pair.lower is None else -pair.lower
    return (-pair.difference, pair.se, -(pair.statistic or 0.0), pair.critical_value, pair.p, low, high)


def numbers(pair: PairResult) -> tuple[float | None, ...]:
    return (
        pair.difference, pair.se, pair.statistic, pair.critical_value, pair.p, pair.lower, pair.upper,
    )  # fmt: skip


@pytest.mark.parametrize("name", EVERY_PAIR)
@few
@given(groups=grouped(), data=st.data())
def test_the_order_of_groups_only_reorders(name: str, groups: Groups, data: st.DataObject) -> None:
    order = data.draw(st.permutations(list(groups)))
    before = {(p.first, p.second): p for p in result_of(groups, procedure(name)).pairs}
    after = result_of({label: groups[label] for label in order}, procedure(name))
    assert [g.label for g in after.groups] == list(order)
    assert len(before) == len(after.pairs)
    for pair in after.pairs:
        if (pair.first, pair.second) in before:
            old = numbers(before[pair.first, pair.second])
        else:
            old = turned(before[pair.second, pair.first])
        assert all(same(a, b) for a, b in zip(old, numbers(pair), strict=True))


@few
@given(groups=grouped(), data=st.data())
def test_the_order_of_values_changes_no_bit(groups: Groups, data: st.DataObject) -> None:
    mixed = {label: data.draw(st.permutations(values)) for label, values in groups.items()}
    before, after = result_of(groups), result_of(mixed)
    assert before.pairs == after.pairs
    assert (before.rule, before.checks, before.overall) == (after.rule, after.checks, after.overall)
    assert {(f.group, f.value, f.p) for f in before.flagged} == {
        (f.group, f.value, f.p) for f in after.flagged
    }


@few
@given(groups=grouped(), shift=st.integers(min_value=-1000, max_value=1000))
def test_a_shift_moves_only_the_means(groups: Groups, shift: int) -> None:
    moved = {label: [v + shift for v in values] for label, values in groups.items()}
    before, after = result_of(groups), result_of(moved)
    assert before.rule == after.rule
    for old, new in zip(before.groups, after.groups, strict=True):
        assert same(old.mean + shift if old.mean is not None else None, new.mean)
        assert same(old.sd, new.sd)
    for first, second in zip(before.pairs, after.pairs, strict=True):
        assert all(same(a, b) for a, b in zip(numbers(first), numbers(second), strict=True))


@pytest.mark.parametrize("name", EVERY_PAIR)
@few
@given(groups=grouped(), power=st.integers(min_value=-30, max_value=30))
def test_a_change_of_unit_scales_only_what_has_one(name: str, groups: Groups, power: int) -> None:
    factor = 2.0**power
    scaled = {label: [v * factor for v in values] for label, values in groups.items()}
    before, after = result_of(groups, procedure(name)), result_of(scaled, procedure(name))
    for first, second in zip(before.pairs, after.pairs, strict=True):
        for key in ("difference", "se", "lower", "upper", "detectable"):
            assert same(getattr(first, key), getattr(second, key), factor), key
        for key in ("statistic", "df", "critical_value", "p"):
            assert same(getattr(first, key), getattr(second, key)), key
        assert first.answer == second.answer


@few
@given(groups=grouped(), names=st.lists(st.text(min_size=1, max_size=8), min_size=5, max_size=5, unique=True))
def test_names_mean_nothing(groups: Groups, names: list[str]) -> None:
    renamed = dict(zip(names, groups.values(), strict=False))
    before, after = result_of(groups), result_of(renamed)
    assert [numbers(p) for p in before.pairs] == [numbers(p) for p in after.pairs]
    assert before.rule == after.rule
    assert [c.p for c in before.checks] == [c.p for c in after.checks]
    assert [g.label for g in after.groups] == list(renamed)


@pytest.mark.parametrize("equal", [True, False])
@few
@given(groups=grouped(2, 2))
def test_two_groups_are_a_t_test(groups: Groups, equal: bool) -> None:
    first, second = groups.values()
    expected = stats.ttest_ind(first, second, equal_var=equal)
    interval = expected.confidence_interval(0.95)
    names = (
        ("tukey_kramer", "dunnett")
        if equal
        else ("games_howell", "dunnett_t3", "tamhane_t2", "dunnett_unequal")
    )
    for name in names:
        reference = '\nreference = "G2"' if name in WITH_REFERENCE else ""
        (pair,) = result_of(groups, procedure(name) + reference).pairs
        assert same(pair.statistic, float(expected.statistic))
        assert same(pair.df, float(expected.df))
        assert same(pair.p, float(expected.pvalue))
        assert same(pair.lower, float(interval.low))
        assert same(pair.upper, float(interval.high))


@pytest.mark.parametrize("name", [*EVERY_PAIR, *WITH_REFERENCE])
@few
@given(
    groups=grouped(),
    alpha=st.sampled_from([0.001, 0.01, 0.05, 0.2]),
    direction=st.sampled_from(["both", "lower_matters", "higher_matters"]),
)
def test_the_interval_excludes_zero_exactly_when_p_is_below_alpha(
    name: str, groups: Groups, alpha: float, direction: str
) -> None:
    reference = '\nreference = "G1"' if name in WITH_REFERENCE else ""
    comparison = f"{procedure(name)}\nalpha = {alpha}{reference}"
    for pair in result_of(groups, comparison, f'direction = "{direction}"').pairs:
        assume(abs(pair.p - alpha) > 1e-9)
        low = -math.inf if pair.lower is None else pair.lower
        high = math.inf if pair.upper is None else pair.upper
        assert (low > 0.0 or high < 0.0) is (pair.p < alpha)
        assert (pair.answer == "different") is (pair.p < alpha)
        assert low < pair.difference < high


@few
@given(groups=grouped(), margins=st.lists(st.floats(0.01, 20.0), min_size=2, max_size=2))
def test_a_wider_margin_never_makes_an_answer_more_serious(groups: Groups, margins: list[float]) -> None:
    narrow, wide = (result_of(groups, procedure("tukey_kramer"), f"margin = {m!r}") for m in sorted(margins))
    for first, second in zip(narrow.pairs, wide.pairs, strict=True):
        assert numbers(first) == numbers(second)
        assert SERIOUSNESS.index(first.answer) <= SERIOUSNESS.index(second.answer)
    if narrow.all_within_margin:
        assert wide.all_within_margin


@functools.cache
def schema() -> jsonschema.Draft202012Validator:
    text = (importlib.resources.files("qcreport") / "schemas" / "result.schema.json").read_text("utf-8")
    return jsonschema.Draft202012Validator(
        json.loads(text)["$defs"]["characteristic"] | {"$defs": json.loads(text)["$defs"]}
    )


ANY = st.one_of(
    st.floats(allow_nan=False, allow_infinity=False),
    st.floats(allow_nan=False, allow_infinity=False, width=16),
    st.integers(-3, 3).map(float),
    st.sampled_from([0.1, 0.3, 1e-300, 5e-324, 1e300, 1e70, 1e-70]),
)


@pytest.mark.parametrize("scale", ["as measured", "log"])
@settings(deadline=None, max_examples=80)
@given(
    groups=st.lists(st.lists(ANY, min_size=1, max_size=6), min_size=1, max_size=5),
    name=st.sampled_from(["by rules", *EVERY_PAIR, "tukey_hsd", *WITH_REFERENCE, "none", "nested"]),
    margin=st.sampled_from(["", "margin = 1.5", "margin_below = 2"]),
)
def test_whatever_the_numbers_there_is_an_answer(
    scale: str, groups: list[list[float]], name: str, margin: str
) -> None:
    reference = '\nreference = "G0"' if name in WITH_REFERENCE else ""
    named = {f"G{i}": values for i, values in enumerate(groups)}
    result = result_of(named, f'{procedure(name)}\nscale = "{scale}"{reference}', margin)
    document = json.loads(to_readable_json_bytes(result.to_json()))
    schema().validate(document)
    assert {g.label for g in result.groups} == set(named)
    compared = {label for p in result.pairs for label in (p.first, p.second)}
    assert compared | {g.label for g in result.not_compared} == set(named)
