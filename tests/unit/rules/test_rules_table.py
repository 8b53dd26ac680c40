"""The decision table: loaded only when total, without dead rows, and fitting its procedures."""

from __future__ import annotations

import dataclasses
import functools
import itertools

import pytest

from qcreport.errors import ConfigError, Fault
from qcreport.rules import Facts, RulesTable, choose, fixed_by_plan, parse_rules
from qcreport.rules.conditions import parse_number_condition
from qcreport.rules.facts import NUMBERS, WORDS
from qcreport.rules.table import combinations
from qcreport.settings.shipped import shipped_files

SHIPPED = shipped_files("config/rules", "*.toml")
HEAD = """name = "own"
title = "A lab's own"
[spread]
policy = "shown or declared"
"""
ROW = """[[row]]
id = "{id}"
when = {{ {when} }}
procedure = "{procedure}"
reason = "Because."
source = "Somebody (1999)."
"""
SOUND = (
    ("few", 'groups = "<2"', "none"),
    ("still", 'variation = "none"', "none"),
    ("reference", 'comparison = "each with the reference"', "dunnett"),
    ("pairs", "", "tukey_kramer"),
)

PLAIN = Facts(
    comparison="every pair",
    groups=4,
    smallest_n=10,
    sizes="equal",
    variation="some",
    censored="none",
    spread="cannot be judged",
    scale="as measured",
)


def table_of(*rows: tuple[str, str, str], head: str = HEAD) -> bytes:
    return (head + "".join(ROW.format(id=i, when=w, procedure=p) for i, w, p in rows)).encode()


def faults(data: bytes) -> tuple[Fault, ...]:
    with pytest.raises(ConfigError) as caught:
        parse_rules(data, "own.toml")
    return caught.value.faults


@functools.cache
def shipped(name: str) -> RulesTable:
    return parse_rules(SHIPPED[f"{name}.toml"], f"{name}.toml")


class TestShipped:
    @pytest.mark.parametrize("name", ["default", "textbook"])
    def test_it_loads(self, name: str) -> None:
        table = shipped(name)
        assert table.name == name
        assert len({row.id for row in table.rows}) == len(table.rows)
        assert all(row.reason.endswith(".") and row.source for row in table.rows)

    def test_the_default_policy(self) -> None:
        spread = shipped("default").spread
        assert dataclasses.astuple(spread) == (
            *("shown or declared", 0.95, 1.5, 1.25, 1.5, 0.05, 0.05),
            *(40, 4, 0.3, 6),  # earlier batches: fewest, their df, sd of ln sigma, most groups
        )
        assert shipped("textbook").spread.policy == "levene on this export"

    @pytest.mark.parametrize("name", ["default", "textbook"])
    def test_every_row_decides_something(self, name: str) -> None:
        table = shipped(name)
        used = {choose(table, facts).rule.id for facts in combinations(table)}
        assert used == {row.id for row in table.rows}


DEFAULT_ROWS = [
    # 1: fewer than two comparable groups, or no variation at all
    ({"groups": 1}, "none"),
    ({"groups": 0, "smallest_n": 0}, "none"),
    ({"groups": 1, "comparison": "each with the reference", "spread": "similar"}, "none"),
    ({"variation": "none"}, "none"),
    ({"variation": "none", "comparison": "each with the reference"}, "none"),
    # 2: a unit is censored
    ({"censored": "some", "comparison": "each with the reference"}, "steel"),
    ({"censored": "some"}, "steel_dwass"),
    ({"censored": "some", "spread": "similar", "smallest_n": 3}, "steel_dwass"),
    # 3: each with the reference, spread similar
    ({"comparison": "each with the reference", "spread": "similar"}, "dunnett"),
    (
        {"comparison": "each with the reference", "spread": "similar", "sizes": "unequal", "smallest_n": 2},
        "dunnett",
    ),
    # 4: each with the reference, every n ≥ 10, at most 9 comparisons
    ({"comparison": "each with the reference", "smallest_n": 10, "groups": 10}, "dunnett_unequal"),
    ({"comparison": "each with the reference", "smallest_n": 30, "groups": 2}, "dunnett_unequal"),
    # 5: each with the reference, else
    ({"comparison": "each with the reference", "smallest_n": 9, "groups": 10}, "dunnett_weighted"),
    ({"comparison": "each with the reference", "smallest_n": 10, "groups": 11}, "dunnett_weighted"),
    ({"comparison": "each with the reference", "smallest_n": 3, "groups": 3}, "dunnett_weighted"),
    # 5a: but not three results with more than nine comparisons, a small one against a large reference
    (
        {"comparison": "each with the reference", "smallest_n": 3, "groups": 11, "sizes": "unequal"},
        "none",
    ),
    (
        {"comparison": "each with the reference", "smallest_n": 3, "groups": 10, "sizes": "unequal"},
        "dunnett_weighted",
    ),
    (
        {"comparison": "each with the reference", "smallest_n": 4, "groups": 20, "sizes": "unequal"},
        "dunnett_weighted",
    ),
    ({"comparison": "each with the reference", "smallest_n": 3, "groups": 20}, "dunnett_weighted"),
    # 6, 7: every pair, spread similar
    ({"spread": "similar", "sizes": "equal"}, "tukey_hsd"),
    ({"spread": "similar", "sizes": "equal", "smallest_n": 3, "groups": 20}, "tukey_hsd"),
    ({"spread": "similar", "sizes": "unequal"}, "tukey_kramer"),
    # 8: smallest n ≤ 4, or more than 10 groups with smallest n < 10
    ({"smallest_n": 4}, "dunnett_c"),
    ({"smallest_n": 2, "groups": 12}, "dunnett_c"),
    ({"smallest_n": 9, "groups": 11}, "dunnett_c"),
    # 9: smallest n ≤ 9 or more than 6 groups
    ({"smallest_n": 5}, "dunnett_t3"),
    ({"smallest_n": 9, "groups": 10}, "dunnett_t3"),
    ({"smallest_n": 10, "groups": 7}, "dunnett_t3"),
    ({"smallest_n": 10, "groups": 11}, "dunnett_t3"),
    ({"smallest_n": 100, "groups": 24}, "dunnett_t3"),
    # 10: else
    ({"smallest_n": 10, "groups": 6}, "games_howell"),
    ({"smallest_n": 10, "groups": 2}, "games_howell"),
]


@pytest.mark.parametrize(("changed", "procedure"), DEFAULT_ROWS)
@pytest.mark.parametrize("scale", ["as measured", "log"])
def test_the_default_table_row_by_row(changed: dict[str, str | int], procedure: str, scale: str) -> None:
    facts = dataclasses.replace(PLAIN, scale=scale, **changed)  # type: ignore[arg-type]
    assert choose(shipped("default"), facts).procedure == procedure


@pytest.mark.parametrize(("changed", "procedure"), [case for case in DEFAULT_ROWS if "spread" not in case[0]])
@pytest.mark.parametrize("spread", ["different", "conflict"])
def test_different_and_contradicted_spread_lead_where_open_spread_does(
    changed: dict[str, str | int], procedure: str, spread: str
) -> None:
    facts = dataclasses.replace(PLAIN, spread=spread, **changed)  # type: ignore[arg-type]
    assert choose(shipped("default"), facts).procedure == procedure


@pytest.mark.parametrize(
    ("changed", "procedure"),
    [
        ({"groups": 1}, "none"),
        ({"variation": "none"}, "none"),
        ({"censored": "some"}, "steel_dwass"),
        ({"censored": "some", "comparison": "each with the reference"}, "steel"),
        ({"comparison": "each with the reference", "spread": "similar"}, "dunnett"),
        (
            {"comparison": "each with the reference", "spread": "different", "smallest_n": 3},
            "dunnett_unequal",
        ),
        ({"spread": "similar", "sizes": "equal", "smallest_n": 3}, "tukey_hsd"),
        ({"spread": "similar", "sizes": "unequal", "smallest_n": 3}, "tukey_kramer"),
        ({"spread": "different", "smallest_n": 3}, "games_howell"),
        ({"spread": "cannot be judged"}, "games_howell"),
    ],
)
def test_the_textbook_table_row_by_row(changed: dict[str, str | int], procedure: str) -> None:
    facts = dataclasses.replace(PLAIN, **changed)  # type: ignore[arg-type]
    assert choose(shipped("textbook"), facts).procedure == procedure


class TestProof:
    def test_a_sound_table_loads(self) -> None:
        table = parse_rules(table_of(*SOUND), "own.toml")
        assert [row.id for row in table.rows] == ["few", "still", "reference", "pairs"]

    def test_a_hole_is_told_with_a_combination_that_falls_through(self) -> None:
        rows = [*SOUND[:3], ("pairs", 'spread = "similar"', "tukey_kramer")]
        (fault,) = faults(table_of(*rows))
        assert fault.text.startswith("no row answers this combination: comparison = every pair, ")
        assert "spread = different" in fault.text
        assert fault.line is not None

    def test_a_hole_between_numbers_is_found(self) -> None:
        rows = [
            *SOUND[:3],
            ("small", 'smallest_n = "<=4"', "dunnett_c"),
            ("large", 'smallest_n = ">5"', "games_howell"),
        ]
        (fault,) = faults(table_of(*rows))
        assert "smallest_n = 5" in fault.text

    @pytest.mark.parametrize(
        "dead",
        [
            ("dead", 'groups = "=1"', "none"),
            ("dead", 'variation = "none", spread = "similar"', "none"),
            ("dead", 'groups = "<1", smallest_n = ">=0"', "none"),
            ("dead", 'comparison = "each with the reference", spread = "similar"', "dunnett"),
            ("dead", 'spread = "similar", comparison = "each with the reference"', "dunnett"),
        ],
    )
    def test_a_dead_row_is_told_by_line(self, dead: tuple[str, str, str]) -> None:
        data = table_of(*SOUND[:3], dead, SOUND[3])
        (fault,) = faults(data)
        assert fault.text == "row 'dead' can never apply: earlier rows answer all its combinations"
        assert fault.key == "row[4].when"
        assert data.decode().splitlines()[(fault.line or 0) - 1].startswith("when = {")
        assert fault.line == 4 + 3 * 6 + 3

    @pytest.mark.parametrize(
        ("procedure", "words"),
        [
            ("none", "row 'twin' can never apply: row 'still' has the same conditions"),
            (
                "dunnett",
                "row 'twin' contradicts row 'still': the same conditions lead to dunnett here and to none "
                "there",
            ),
        ],
    )
    def test_two_rows_of_the_same_conditions(self, procedure: str, words: str) -> None:
        (fault,) = faults(table_of(*SOUND[:3], ("twin", 'variation = "none"', procedure), SOUND[3]))
        assert fault.text == words
        assert (fault.key, fault.file) == ("row[4].when", "own.toml")

    def test_a_row_after_one_that_answers_everything_is_dead(self) -> None:
        (fault,) = faults(table_of(*SOUND, ("more", "", "games_howell")))
        assert fault.key == "row[5].when"

    @pytest.mark.parametrize(
        ("rows", "key", "words"),
        [
            (
                [*SOUND[:2], ("pairs", "", "tukey_kramer")],
                "row[3].procedure",
                'tukey_kramer would be used where comparison is "each with the reference"',
            ),
            (
                [*SOUND[:2], ("reference", "", "dunnett")],
                "row[3].procedure",
                'dunnett would be used where comparison is "every pair"',
            ),
            ([*SOUND[:3], ("pairs", "", "tukey_hsd")], "row[4].procedure", "tukey_hsd needs equal sizes"),
            (SOUND[1:], "row[2].procedure", "dunnett needs two groups"),
            ([SOUND[0], *SOUND[2:]], "row[2].procedure", "dunnett needs variation"),
        ],
    )
    def test_a_procedure_that_does_not_fit_is_told_by_line(
        self, rows: list[tuple[str, str, str]], key: str, words: str
    ) -> None:
        data = table_of(*rows)
        found = {f.key: f for f in faults(data)}
        assert words in found[key].text
        assert data.decode().splitlines()[(found[key].line or 0) - 1].startswith("procedure = ")


class TestText:
    @pytest.mark.parametrize(
        ("old", "new", "key", "words"),
        [
            ('name = "own"', "", None, '"name" is missing'),
            ('policy = "shown or declared"', 'policy = "guess"', "spread.policy", "must be one of"),
            ('id = "few"', 'id = "Few groups"', "row[1].id", "must be lower-case letters"),
            ('id = "few"', 'id = "still"', "row[2].id", "row id 'still' is used twice"),
            ('groups = "<2"', 'grups = "<2"', "row[1].when.grups", "unknown fact. Known: comparison"),
            ('groups = "<2"', 'groups = "few"', "row[1].when.groups", 'must be a condition such as ">=10"'),
            ('groups = "<2"', "groups = 2", "row[1].when.groups", "must be a text"),
            ('groups = "<2"', 'groups = "<2.5"', "row[1].when.groups", "must be a condition such as"),
            ('variation = "none"', 'variation = "no"', "row[2].when.variation", "must be one of 'some'"),
            ('procedure = "dunnett"', 'procedure = "scheffe"', "row[3].procedure", "must be one of"),
            ('reason = "Because."', "", "row[1]", '"reason" is missing'),
            ('source = "Somebody (1999)."', 'source = ""', "row[1].source", "must not be blank"),
            ("when = {  }", "", "row[4]", '"when" is missing'),
            ('reason = "Because."', 'reason = "B."\ncolour = 1', "row[1].colour", "unknown key"),
        ],
    )
    def test_a_fault_names_its_key(self, old: str, new: str, key: str | None, words: str) -> None:
        text = table_of(*SOUND).decode()
        assert old in text
        (fault,) = faults(text.replace(old, new, 1).encode())
        assert fault.key == key
        assert words in fault.text
        if key is not None:
            assert fault.line is not None

    @pytest.mark.parametrize(
        ("line", "words"),
        [
            ("confidence = 1.0", "must be less than 1"),
            ("confidence = 0.5", "must be greater than 0.5"),
            ("ratio_limit = 1", "must be greater than 1"),
            ("shown_size_ratio = 0.9", "must be at least 1"),
            ("declared_size_ratio = 0", "must be at least 1"),
            ("conflict_level = 0", "must be greater than 0"),
            ("different_level = 1", "must be less than 1"),
        ],
    )
    def test_numbers_of_the_policy_have_bounds(self, line: str, words: str) -> None:
        head = HEAD + line + "\n"
        (fault,) = faults(table_of(*SOUND, head=head))
        assert words in fault.text
        assert (fault.line, fault.key) == (5, f"spread.{line.split()[0]}")

    def test_without_rows_nothing_is_answered(self) -> None:
        assert [f.text for f in faults(HEAD.encode())] == ['"row" is missing']

    def test_faults_of_text_come_before_the_proof(self) -> None:
        text = table_of(SOUND[0]).decode().replace("none", "scheffe")
        assert len(faults(text.encode())) == 1


@pytest.mark.parametrize(
    ("text", "true", "false"),
    [
        ("<2", (0, 1), (2, 3)),
        ("<= 2", (1, 2), (3,)),
        (" > 2 ", (3,), (2,)),
        (">=10", (10, 11), (9,)),
        ("=4", (4,), (3, 5)),
    ],
)
def test_number_conditions(text: str, true: tuple[int, ...], false: tuple[int, ...]) -> None:
    condition = parse_number_condition("groups", text)
    assert condition is not None
    assert [condition.holds(n) for n in (*true, *false)] == [True] * len(true) + [False] * len(false)
    assert str(condition) == f"groups {condition.relation} {condition.bound}"


@pytest.mark.parametrize("text", ["", "2", "=>2", "<-1", "< 2 or > 5", "<1e2", "<12345678"])
def test_what_is_no_number_condition(text: str) -> None:
    assert parse_number_condition("groups", text) is None


class TestChoice:
    def test_the_first_row_that_holds_decides_and_the_trace_says_why(self) -> None:
        table = shipped("default")
        choice = choose(table, dataclasses.replace(PLAIN, smallest_n=5))
        assert choice.procedure == "dunnett_t3"
        assert (choice.rule.table, choice.rule.id) == ("default", "unequal_spread_small")
        assert choice.rule.source.startswith("Dunnett (1980)")
        index = [r.id for r in table.rows].index("unequal_spread_small")
        assert [step.id for step in choice.trace] == [row.id for row in table.rows[: index + 1]]
        assert [step.applied for step in choice.trace] == [False] * index + [True]
        why = {step.id: step.why for step in choice.trace}
        assert why["too_few_groups"] == "needs groups < 2; here it is 4"
        assert why["similar_equal_sizes"] == "needs spread is similar; here it is cannot be judged"
        assert why["unequal_spread_tiny"] == "needs smallest_n <= 4; here it is 5"
        assert why["unequal_spread_small"] == "smallest_n <= 9"

    def test_the_last_row_says_that_it_takes_the_rest(self) -> None:
        assert choose(shipped("default"), PLAIN).trace[-1].why == "applies to everything that is left"

    def test_a_table_that_was_never_proven_has_no_answer_of_its_own(self) -> None:
        table = dataclasses.replace(shipped("default"), rows=())
        with pytest.raises(AssertionError):
            choose(table, PLAIN)

    def test_a_fixed_procedure_that_the_table_shares(self) -> None:
        choice = fixed_by_plan(shipped("default"), PLAIN, "games_howell")
        assert choice.procedure == "games_howell"
        assert (choice.rule.table, choice.rule.id) == ("plan", "fixed_by_plan")
        assert choice.rule.reason.endswith("the table default would choose the same.")
        (step,) = choice.trace
        assert (step.id, step.applied) == ("fixed_by_plan", True)

    def test_a_fixed_procedure_that_the_table_would_not_choose(self) -> None:
        choice = fixed_by_plan(shipped("default"), PLAIN, "tukey_hsd")
        assert choice.procedure == "tukey_hsd"
        assert choice.rule.reason.endswith("would choose games_howell by its row unequal_spread.")


class TestApproval:
    APPROVED = HEAD.replace("[spread]", 'approved = { by = "Head of QC", on = 2026-11-02 }\n[spread]')

    def test_it_is_carried_by_every_choice(self) -> None:
        table = parse_rules(table_of(*SOUND, head=self.APPROVED), "own.toml")
        rule = choose(table, PLAIN).rule
        assert rule.to_json()["approved"] == {"by": "Head of QC", "on": "2026-11-02"}

    def test_without_it_nothing_is_claimed(self) -> None:
        rule = choose(parse_rules(table_of(*SOUND), "own.toml"), PLAIN).rule
        assert rule.to_json()["approved"] is None

    @pytest.mark.parametrize(
        ("approved", "key"),
        [
            ('{ by = "Head of QC" }', "approved"),
            ('{ by = "", on = 2026-11-02 }', "approved.by"),
            ('{ by = "A", on = "today" }', "approved.on"),
            ('{ by = "A", on = 2026-11-02, at = 1 }', "approved.at"),
        ],
    )
    def test_half_an_approval_is_refused(self, approved: str, key: str) -> None:
        head = HEAD.replace("[spread]", f"approved = {approved}\n[spread]")
        (fault,) = faults(table_of(*SOUND, head=head))
        assert fault.key == key


def test_combinations_hold_every_word_and_both_sides_of_every_threshold() -> None:
    table = shipped("default")
    seen = list(combinations(table))
    assert len(seen) == len(set(seen))
    for fact, words in WORDS.items():
        assert {f.value(fact) for f in seen} == set(words)
    for fact, thresholds in {"groups": (2, 6, 10), "smallest_n": (4, 9, 10)}.items():
        assert fact in NUMBERS
        found = {f.value(fact) for f in seen}
        assert all({t - 1, t, t + 1} <= found for t in thresholds)
    assert all(int(f.value(n)) >= 0 for f, n in itertools.product(seen[:1000], NUMBERS))
