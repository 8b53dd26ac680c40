"""The decision table: read from TOML, proven total and without dead rows, then asked."""

from __future__ import annotations

import itertools
import re
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from typing import Final

from qcreport.plan.model import PROCEDURES, WITH_REFERENCE, Approval
from qcreport.rules.conditions import Condition, NumberCondition, WordCondition, parse_number_condition
from qcreport.rules.facts import NUMBERS, WITH_THE_REFERENCE, WORDS, Facts
from qcreport.rules.policy import SpreadPolicy, parse_policy
from qcreport.toml_source import TableReader, TomlSource

_ID: Final = re.compile(r"[a-z][a-z0-9_]{0,63}")


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """One row of the table."""

    id: str
    """Unique in the table."""
    when: tuple[Condition, ...]
    """All must hold; empty: always."""
    procedure: str
    """The procedure it chooses."""
    reason: str
    """One sentence for the page."""
    source: str
    """Publication or measurement."""

    def fails_on(self, facts: Facts) -> Condition | None:
        """Return the first condition that does not hold, or None where the row applies."""
        return next((c for c in self.when if not c.holds(facts.value(c.fact))), None)


@dataclass(frozen=True, slots=True, kw_only=True)
class RulesTable:
    """A decision table; the first row whose conditions all hold decides."""

    name: str
    """default, textbook or a lab's own."""
    title: str
    """The policy in a few words."""
    spread: SpreadPolicy
    """How spread is judged."""
    rows: tuple[Row, ...]
    """In order."""
    approved: Approval | None = None
    """Who approved it, as the file says; None where it says nothing."""


def parse_rules(data: bytes, file: str) -> RulesTable:
    """Return the decision table of a TOML file.

    Raises
    ------
    ConfigError
        With all faults: unknown keys, facts or procedures, a combination no row answers, a row that can never
        apply, a procedure that does not fit the comparison it would be used for.
    """
    source = TomlSource.from_bytes(data, file)
    top = source.top
    name, title = top.text("name"), top.text("title")
    approved = _approval(top)
    spread = parse_policy(top.table("spread", required=True))
    readers = top.tables("row", required=True)
    rows = tuple(_row(reader) for reader in readers)
    table = RulesTable(name=name, title=title, spread=spread, rows=rows, approved=approved)
    for index, (row, reader) in enumerate(zip(rows, readers, strict=True)):
        if row.id and any(earlier.id == row.id for earlier in rows[:index]):
            reader.fault("id", f"row id {row.id!r} is used twice")
    if not source.faults:
        _prove(table, top, readers)
    source.finish()
    return table


def _approval(top: TableReader) -> Approval | None:
    if "approved" not in top:
        top.raw("approved", None)
        return None
    table = top.table("approved")
    return Approval(by=table.text("by"), on=table.date("on"))


def _row(table: TableReader) -> Row:
    row_id = table.text("id")
    if row_id and not _ID.fullmatch(row_id):
        table.fault("id", "must be lower-case letters, digits and '_'")
    return Row(
        id=row_id,
        when=tuple(_conditions(table.table("when", required=True))),
        procedure=table.text("procedure", choices=PROCEDURES),
        reason=table.text("reason"),
        source=table.text("source"),
    )


def _conditions(table: TableReader) -> Iterator[Condition]:
    for fact in table.names():
        text = table.text(fact)
        if not text.strip():  # not a text, or blank: the fault is noted
            continue
        if fact in WORDS:
            if text not in WORDS[fact]:
                table.fault(fact, f"must be one of {', '.join(map(repr, WORDS[fact]))}, found {text!r}")
            yield WordCondition(fact=fact, word=text)
        elif fact in NUMBERS:
            condition = parse_number_condition(fact, text)
            if condition is None:
                table.fault(fact, f'must be a condition such as ">=10", found {text!r}')
            else:
                yield condition
        else:
            table.fault(fact, f"unknown fact. Known: {', '.join([*WORDS, *NUMBERS])}")


def combinations(table: RulesTable) -> Iterator[Facts]:
    """Yield one set of facts for every combination the table can tell apart.

    Number facts are cut into bins at the table's own thresholds; one number stands for each bin.
    """
    domains: dict[str, tuple[str | int, ...]] = dict(WORDS)
    for fact in NUMBERS:
        domains[fact] = tried_numbers(table, fact)
    names = list(domains)
    for values in itertools.product(*domains.values()):
        yield Facts(**dict(zip(names, values, strict=True)))  # type: ignore[arg-type]


def tried_numbers(table: RulesTable, fact: str) -> tuple[int, ...]:
    """Return numbers that stand for every bin of a fact, cut at the table's own thresholds."""
    return _bins(_bounds(table, fact))


def _bounds(table: RulesTable, fact: str) -> Iterator[int]:
    for row in table.rows:
        for condition in row.when:
            if isinstance(condition, NumberCondition) and condition.fact == fact:
                yield condition.bound


def _bins(bounds: Iterable[int]) -> tuple[int, ...]:
    """Return representatives: each bound and its two neighbours, 0 included, none negative."""
    members = {0, 1}
    for bound in bounds:
        members |= {bound - 1, bound, bound + 1}
    return tuple(sorted(m for m in members if m >= 0))


def _prove(table: RulesTable, top: TableReader, readers: tuple[TableReader, ...]) -> None:
    """Note a fault for the first unanswered combination, each dead row and each ill-fitting procedure."""
    used: set[int] = set()
    unanswered: Facts | None = None
    misfits: dict[int, str] = {}
    for facts in combinations(table):
        index = next((i for i, row in enumerate(table.rows) if row.fails_on(facts) is None), None)
        if index is None:
            unanswered = unanswered or facts
            continue
        used.add(index)
        if index not in misfits and (words := _misfit(table.rows[index].procedure, facts)):
            misfits[index] = words
    if unanswered is not None:
        words = ", ".join(f"{f} = {unanswered.value(f)}" for f in (*WORDS, *NUMBERS))
        top.fault("row", f"no row answers this combination: {words}")
    for index, reader in enumerate(readers):
        if index not in used:
            reader.fault("when", _dead(table.rows, index))
        elif index in misfits:
            reader.fault("procedure", f"row {table.rows[index].id!r}: {misfits[index]}")


def _dead(rows: tuple[Row, ...], index: int) -> str:
    """Return why a row can never apply: a twin above it, or earlier rows together."""
    row = rows[index]
    twin = next((r for r in rows[:index] if set(r.when) == set(row.when)), None)
    if twin is None:
        return f"row {row.id!r} can never apply: earlier rows answer all its combinations"
    if twin.procedure == row.procedure:
        return f"row {row.id!r} can never apply: row {twin.id!r} has the same conditions"
    return (
        f"row {row.id!r} contradicts row {twin.id!r}: the same conditions lead to {row.procedure} here and "
        f"to {twin.procedure} there"
    )


def _misfit(procedure: str, facts: Facts) -> str:
    """Return why a procedure does not fit facts it would be chosen for; empty where it fits."""
    with_reference = facts.comparison == WITH_THE_REFERENCE
    if procedure in ("none", "nested"):
        return ""
    if (procedure in WITH_REFERENCE) != with_reference:
        return f'{procedure} would be used where comparison is "{facts.comparison}"; add that condition'
    if procedure == "tukey_hsd" and facts.sizes == "unequal":
        return 'tukey_hsd needs equal sizes; add sizes = "equal"'
    if facts.groups < 2:
        return f'{procedure} needs two groups; let an earlier row answer groups = "<2" with "none"'
    if facts.variation == "none":
        return f'{procedure} needs variation; let an earlier row answer variation = "none" with "none"'
    return ""
