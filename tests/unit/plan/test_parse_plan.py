"""The comparison plan from its text: every key, every fault, the defaults."""

from __future__ import annotations

import datetime as dt

import pytest

from qcreport.errors import ConfigError, Fault
from qcreport.plan import CharacteristicPlan, ComparisonPlan, parse_plan
from qcreport.plan.model import (
    POOLED,
    PROCEDURES,
    RANKS,
    WITH_REFERENCE,
    Approval,
    Direction,
    Family,
    Groups,
    Scale,
    SpreadDeclaration,
    Unit,
)
from qcreport.settings.shipped import shipped_files

TOP = """name = "lap-shear-batches"
title = "Lap-shear strength, batch by batch"
exports = ["lap-shear*.xlsx"]
layout = "shear-rig"
"""
CHARACTERISTIC = """[[characteristic]]
name = "lap_shear"
unit = "MPa"
"""
FULL = """name = "lap-shear-batches"
title = "Lap-shear strength, batch by batch"
exports = ["lap-shear*.xlsx", "shear-*.csv"]
layout = "shear-rig"
rules = "textbook"
product = "HA 310"
method = "Single lap shear"
approved = { by = "Head of QC", on = 2026-11-02 }

[comparison]
groups = "line"
reference = " L1 "
independent_unit = "batch"
alpha = 0.01
family = "export"
scale = "as measured"
procedure = "dunnett"
smallest_group = 4

[spread]
similar = true
by = "Head of QC"
on = 2026-11-01
reason = "Validation"
accept_unequal_sizes = true

[[characteristic]]
name = "lap_shear"
title = "Lap-shear strength"
unit = "MPa"
margin_below = 1.5
margin_above = 2
target = 24
direction = "lower_matters"
lower_limit = 18.0
upper_limit = 30

[[characteristic]]
name = "peel"
unit = "N/mm"
"""


def parse(text: str) -> ComparisonPlan:
    return parse_plan(text.encode(), "plan.toml")


def faults(text: str) -> tuple[Fault, ...]:
    with pytest.raises(ConfigError) as caught:
        parse(text)
    return caught.value.faults


def characteristic(lines: str, comparison: str = "") -> CharacteristicPlan:
    (found,) = parse(f"{TOP}[comparison]\n{comparison}\n{CHARACTERISTIC}{lines}\n").characteristics
    return found


def test_every_key_is_read() -> None:
    plan = parse(FULL)
    assert plan == ComparisonPlan(
        name="lap-shear-batches",
        title="Lap-shear strength, batch by batch",
        exports=("lap-shear*.xlsx", "shear-*.csv"),
        layout="shear-rig",
        rules="textbook",
        product="HA 310",
        method="Single lap shear",
        approved=Approval(by="Head of QC", on=dt.date(2026, 11, 2)),
        groups=Groups.LINE,
        reference="L1",
        independent_unit=Unit.BATCH,
        alpha=0.01,
        family=Family.EXPORT,
        scale=Scale.AS_MEASURED,
        procedure="dunnett",
        smallest_group=4,
        spread=SpreadDeclaration(
            similar=True,
            by="Head of QC",
            on=dt.date(2026, 11, 1),
            reason="Validation",
            accept_unequal_sizes=True,
        ),
        characteristics=(
            CharacteristicPlan(
                name="lap_shear",
                title="Lap-shear strength",
                unit="MPa",
                margin_below=-1.5,
                margin_above=2.0,
                margin_text="1.5, 2",
                target=24.0,
                direction=Direction.LOWER_MATTERS,
                lower_limit=18.0,
                upper_limit=30.0,
            ),
            CharacteristicPlan(
                name="peel",
                title="peel",
                unit="N/mm",
                margin_below=None,
                margin_above=None,
                margin_text="",
                target=None,
                direction=Direction.BOTH,
                lower_limit=None,
                upper_limit=None,
            ),
        ),
    )


def test_defaults() -> None:
    plan = parse(TOP + CHARACTERISTIC)
    assert (plan.rules, plan.product, plan.method) == ("default", "", "")
    assert (plan.approved, plan.reference, plan.spread) == (None, None, None)
    assert (plan.groups, plan.independent_unit) == (Groups.BATCH, Unit.SAMPLE)
    assert (plan.alpha, plan.family, plan.scale) == (0.05, Family.CHARACTERISTIC, Scale.AS_MEASURED)
    assert (plan.procedure, plan.smallest_group) == ("by rules", 3)


@pytest.mark.parametrize("name", sorted(shipped_files("config/plans", "*.toml")))
def test_the_shipped_plans_are_sound(name: str) -> None:
    plan = parse_plan(shipped_files("config/plans", "*.toml")[name], name)
    assert f"{plan.name}.toml" == name
    assert plan.approved is not None
    assert all(c.margin_below is not None and c.margin_above is not None for c in plan.characteristics)


class TestMargins:
    @pytest.mark.parametrize(
        ("lines", "below", "above", "text"),
        [
            ("", None, None, ""),
            ("margin = 1.5", -1.5, 1.5, "1.5"),
            ("margin = 2", -2.0, 2.0, "2"),
            ("margin_below = 1.5", -1.5, None, "1.5"),
            ("margin_above = 0.5", None, 0.5, "0.5"),
            ("margin_below = 1\nmargin_above = 3.0", -1.0, 3.0, "1, 3.0"),
            ('margin = "5 %"\ntarget = 24.0', -1.2, 1.2, "5 %"),
            ('margin = "12.5%"\ntarget = -8', -1.0, 1.0, "12.5%"),
            ('margin_below = "10 %"\nmargin_above = 1\ntarget = 20', -2.0, 1.0, "10 %, 1"),
        ],
    )
    def test_as_measured(self, lines: str, below: float | None, above: float | None, text: str) -> None:
        found = characteristic(lines)
        assert (found.margin_below, found.margin_above) == (
            None if below is None else pytest.approx(below, rel=1e-15),
            None if above is None else pytest.approx(above, rel=1e-15),
        )
        assert found.margin_text == text

    @pytest.mark.parametrize(
        ("lines", "below", "above"),
        [
            ('margin = "25 %"', 0.8, 1.25),
            ("margin = 1.25", 0.8, 1.25),
            ("margin_below = 2", 0.5, None),
            ('margin_above = "10 %"', None, 1.1),
        ],
    )
    def test_on_the_log_scale_they_are_ratios(
        self, lines: str, below: float | None, above: float | None
    ) -> None:
        found = characteristic(lines, 'scale = "log"')
        assert (found.margin_below, found.margin_above) == (
            None if below is None else pytest.approx(below, rel=1e-15),
            None if above is None else pytest.approx(above, rel=1e-15),
        )

    @pytest.mark.parametrize(
        ("lines", "comparison", "words"),
        [
            ("margin = 0", "", "must be a finite number greater than 0, found 0"),
            ("margin = -1.5", "", "must be a finite number greater than 0, found -1.5"),
            ("margin = inf", "", "must be a finite number greater than 0, found inf"),
            ("margin = nan", "", "must be a finite number greater than 0, found nan"),
            ("margin = 1" + "0" * 400, "", "must be a finite number greater than 0, found inf"),
            ("margin = true", "", 'must be a number or a percentage such as "5 %", found True'),
            ('margin = "5"', "", "must be a number or a percentage such as \"5 %\", found '5'"),
            ('margin = "5,5 %"\ntarget = 1', "", "a percentage such as \"5 %\", found '5,5 %'"),
            ('margin = "0 %"\ntarget = 1', "", "must be a finite number greater than 0, found 0"),
            ('margin = "5 %"', "", "a percent margin needs target, a number other than 0: it is never of"),
            ('margin = "5 %"\ntarget = 0', "", "a percent margin needs target, a number other than 0"),
            ("margin = 1", 'scale = "log"', "must be a ratio greater than 1, found 1"),
            ("margin = 0.8", 'scale = "log"', "must be a ratio greater than 1, found 0.8"),
            ('margin = "0 %"', 'scale = "log"', "must be a ratio greater than 1, found 1"),
            ("margin = 1\nmargin_below = 1", "", "give margin, or margin_below and margin_above, not both"),
        ],
    )
    def test_faults(self, lines: str, comparison: str, words: str) -> None:
        (fault,) = faults(f"{TOP}[comparison]\n{comparison}\n{CHARACTERISTIC}{lines}\n")
        assert words in fault.text
        assert (fault.key, fault.line) == ("characteristic[1].margin", 10)


@pytest.mark.parametrize(
    ("line", "key", "words"),
    [
        ("name = 3", "name", "must be a text"),
        ('name = "lap shear"', "name", "must be letters, digits"),
        ('name = ""', "name", "must not be blank"),
        ('title = " "', "title", "must not be blank"),
        ("exports = []", "exports", "name at least one file-name pattern, none of them blank"),
        ('exports = ["a*.xlsx", " "]', "exports", "name at least one file-name pattern, none of them blank"),
        ('layout = ""', "layout", "must not be blank"),
        ('rules = ""', "rules", "must not be blank"),
        ("product = 1", "product", "must be a text"),
        ('groups = "batches"', "comparison.groups", "must be one of 'batch', 'line', found 'batches'"),
        ("groups = 1", "comparison.groups", "must be a text"),
        ("reference = 5", "comparison.reference", "must be a text"),
        ('independent_unit = "coupon"', "comparison.independent_unit", "must be one of 'reading', 'sample'"),
        ('independent_unit = "batch"', "comparison.independent_unit", "batches cannot be the unit"),
        ("alpha = 0", "comparison.alpha", "must be greater than 0"),
        ("alpha = 0.5", "comparison.alpha", "must be less than 0.5"),
        ("alpha = nan", "comparison.alpha", "must be a finite number"),
        ('alpha = "5 %"', "comparison.alpha", "must be a number"),
        ('family = "plan"', "comparison.family", "must be one of 'characteristic', 'export'"),
        ('scale = "ln"', "comparison.scale", "must be one of 'as measured', 'log'"),
        ('procedure = "t"', "comparison.procedure", "must be one of 'by rules', 'tukey_hsd'"),
        ('procedure = "dunnett"', "comparison.procedure", "dunnett needs a reference"),
        ('procedure = "steel"', "comparison.procedure", "steel needs a reference"),
        ("smallest_group = 1", "comparison.smallest_group", "must be at least 2, found 1"),
        ("smallest_group = 3.0", "comparison.smallest_group", "must be a whole number"),
        ("smalest_group = 3", "comparison.smalest_group", 'did you mean "smallest_group"?'),
        ("similar = 1", "spread.similar", "must be true or false"),
        ('by = ""', "spread.by", "must not be blank"),
        ('on = "2026-11-02"', "spread.on", "must be a date such as 2026-11-02"),
        ('reason = ""', "spread.reason", "must not be blank"),
        ("accept_unequal_sizes = 1", "spread.accept_unequal_sizes", "must be true or false"),
        ('unit = ""', "characteristic[1].unit", "must not be blank"),
        ('direction = "lower"', "characteristic[1].direction", "must be one of 'both', 'lower_matters'"),
        ('target = "24"', "characteristic[1].target", "must be a number"),
        ("lower_limit = 30", "characteristic[1].lower_limit", "must be below upper_limit"),
        ('limit = "x"', "characteristic[1].limit", "unknown key"),
    ],
)
def test_a_fault_names_its_key_and_line(line: str, key: str, words: str) -> None:
    tables = {
        "": TOP.splitlines(),
        "comparison": [],
        "spread": ["similar = true", 'by = "QC"', "on = 2026-11-02", 'reason = "r"'],
        "characteristic": ['name = "lap_shear"', 'unit = "MPa"', "upper_limit = 30.0"],
    }
    table, _, last = key.rpartition(".")
    table = table.removesuffix("[1]")
    kept = [text for text in tables[table] if not text.startswith(f"{last} ")]
    tables[table] = [*kept, line]
    text = "\n".join(
        [
            *tables[""],
            "[comparison]",
            *tables["comparison"],
            "[spread]",
            *tables["spread"],
            "[[characteristic]]",
            *tables["characteristic"],
        ]
    )
    (fault,) = faults(text)
    assert (fault.file, fault.key) == ("plan.toml", key)
    assert fault.line is not None
    assert text.splitlines()[fault.line - 1] == line
    assert words in fault.text


@pytest.mark.parametrize(
    ("left_out", "words"),
    [
        ("name = ", '"name" is missing'),
        ("title = ", '"title" is missing'),
        ("exports = ", '"exports" is missing'),
        ("layout = ", '"layout" is missing'),
    ],
)
def test_a_missing_key_at_the_top(left_out: str, words: str) -> None:
    text = "\n".join(line for line in TOP.splitlines() if not line.startswith(left_out))
    (fault,) = faults(f"{text}\n{CHARACTERISTIC}")
    assert fault.text == words


@pytest.mark.parametrize(
    ("text", "words"),
    [
        (TOP, "name at least one [[characteristic]]"),
        (f"{TOP}[[characteristic]]\nunit = 'u'\n", '"name" is missing'),
        (f"{TOP}[[characteristic]]\nname = 'n'\n", '"unit" is missing'),
        (f"{TOP}[spread]\nsimilar = true\nby = 'x'\nreason = 'r'\n{CHARACTERISTIC}", '"on" is missing'),
        (f"{TOP}approved = {{ by = 'x' }}\n{CHARACTERISTIC}", '"on" is missing'),
        (f"{TOP}approved = {{ on = 2026-11-02 }}\n{CHARACTERISTIC}", '"by" is missing'),
        (f"{TOP}comparison = 3\n{CHARACTERISTIC}", "must be a table [comparison], found 3"),
        (f"{TOP}[comparisons]\n{CHARACTERISTIC}", 'unknown key; did you mean "comparison"?'),
    ],
)
def test_missing_and_wrong_tables(text: str, words: str) -> None:
    (fault,) = faults(text)
    assert words in fault.text


def test_a_characteristic_named_twice_is_told_at_the_second() -> None:
    (fault,) = faults(TOP + CHARACTERISTIC + CHARACTERISTIC)
    assert (fault.text, fault.line, fault.key) == (
        "'lap_shear' is named twice",
        9,
        "characteristic[2].name",
    )


def test_every_pair_procedures_refuse_a_reference() -> None:
    for procedure in PROCEDURES:
        text = f'{TOP}[comparison]\nreference = "R"\nprocedure = "{procedure}"\n{CHARACTERISTIC}'
        if procedure in WITH_REFERENCE or procedure in ("nested", "none"):
            assert parse(text).procedure == procedure
        else:
            (fault,) = faults(text)
            assert fault.text == f"{procedure} compares every pair, but a reference is set"
            assert (fault.line, fault.key) == (7, "comparison.procedure")


def test_procedures_are_sorted_into_their_kinds() -> None:
    assert set(PROCEDURES) >= WITH_REFERENCE | POOLED | RANKS
    assert len(set(PROCEDURES)) == len(PROCEDURES) == 13


def test_all_faults_come_at_once() -> None:
    text = f"{TOP}colour = 1\n[comparison]\nalpha = 2\nscale = 'x'\n{CHARACTERISTIC}margin = 0\ntargett = 1\n"
    assert [(f.line, f.key) for f in faults(text)] == [
        (5, "colour"),
        (7, "comparison.alpha"),
        (8, "comparison.scale"),
        (12, "characteristic[1].margin"),
        (13, "characteristic[1].targett"),
    ]
