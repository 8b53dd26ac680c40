"""One characteristic decided: facts, choice and comparison, as one function of the groups.

It is a function of its own because it is run again for what a report says beside the answer: with a flagged
value left out, and under the other variance policy.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Sequence
from dataclasses import dataclass, replace

from qcreport.analysis.comparable import Comparable, comparable
from qcreport.analysis.compare import Comparison, compare
from qcreport.analysis.facts import Gathered, gather
from qcreport.analysis.known_scatter import known_scatter
from qcreport.analysis.result import ChangedAnswer, PairResult, Sensitivity
from qcreport.analysis.screen import Group
from qcreport.errors import StatisticsError
from qcreport.plan.model import BY_RULES, POOLED, RANKS, CharacteristicPlan, ComparisonPlan
from qcreport.rules import Choice, Facts, RulesTable, choose, fixed_by_plan
from qcreport.rules.facts import CANNOT_BE_JUDGED, SIMILAR
from qcreport.rules.history import SpreadHistory
from qcreport.stats.equivalence import most_serious

NOT_COMPARED = "not_compared"


@dataclass(frozen=True, slots=True, kw_only=True)
class Question:
    """What is asked of one characteristic."""

    plan: ComparisonPlan
    """The plan."""
    characteristic: CharacteristicPlan
    """Its entry for this characteristic."""
    rules: RulesTable
    """The decision table."""
    alpha: float
    """Family-wise error rate of this characteristic."""
    earliest: dt.date | None
    """Date of the earliest measurement."""
    beside: bool = False
    """True for what is asked beside the answer: only the answers are wanted, no planning of sizes."""
    left_out: frozenset[str] = frozenset()
    """Cells that a person left out."""
    history: SpreadHistory | None = None
    """Spread of earlier exports; None where the records hold none."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Outcome:
    """What facts, rules and statistics say about one characteristic."""

    ready: Comparable
    """Who was compared."""
    gathered: Gathered
    """Facts and checks."""
    choice: Choice
    """The row that chose."""
    comparison: Comparison | None
    """Numbers and answers; None where nothing is compared."""
    why_none: str
    """Why nothing is compared; empty where something is."""

    @property
    def procedure(self) -> str:
        """The procedure that ran, `none` where none did."""
        return self.choice.procedure if self.comparison is not None else "none"

    @property
    def answer(self) -> str:
        """The most serious pair's answer; what was left uncompared keeps anything from being cleared."""
        if self.comparison is None or not self.comparison.pairs:
            return NOT_COMPARED
        left_out = [NOT_COMPARED] if self.ready.not_compared else []
        return most_serious([*(p.answer for p in self.comparison.pairs), *left_out])


def decide(groups: Sequence[Group], question: Question) -> Outcome:
    """Return what is compared, by which row, with which answers."""
    ready = comparable(groups, question.plan)
    gathered = gather(ready, question.plan, question.rules, question.earliest, question.history)
    choice = chosen_by(question.rules, gathered.facts, question.plan)
    comparison, why = _run(choice.procedure, ready, question)
    return Outcome(ready=ready, gathered=gathered, choice=choice, comparison=comparison, why_none=why)


def chosen_by(rules: RulesTable, facts: Facts, plan: ComparisonPlan) -> Choice:
    """Return the table's choice, or the procedure the plan fixes where anything can be compared at all."""
    by_table = choose(rules, facts)
    fixed = plan.procedure
    nothing = facts.groups < 2 or facts.variation == "none"
    if fixed == BY_RULES or (nothing and by_table.procedure == "none"):
        return by_table
    return fixed_by_plan(rules, facts, fixed)


def _run(procedure: str, ready: Comparable, question: Question) -> tuple[Comparison | None, str]:
    if procedure == "none":
        return None, "Nothing can be compared."
    if ready.censored and procedure not in RANKS:
        return None, f"{procedure} needs numbers, but some results are known only by a limit."
    try:
        comparison = compare(
            procedure,
            ready,
            question.characteristic,
            alpha=question.alpha,
            scale=question.plan.scale,
            known=known_scatter(question.characteristic, question.history),
            sizes=not question.beside,
        )
    except StatisticsError as error:
        return None, f"{procedure} cannot answer here: {error.text}"
    if comparison is None:
        return None, f"The procedure {procedure} is not available in this version, so nothing was compared."
    return comparison, ""


def sensitivity(outcome: Outcome, question: Question) -> Sensitivity | None:
    """Return the one alternative: the other variance policy's procedure and the answers it would change."""
    if outcome.comparison is None:
        return None
    if outcome.procedure in RANKS:
        return None  # ranks do not rest on how spread is judged
    pooled = outcome.procedure in POOLED
    facts = replace(outcome.gathered.facts, spread=CANNOT_BE_JUDGED if pooled else SIMILAR)
    procedure = choose(question.rules, facts).procedure
    if procedure == outcome.procedure:
        return None
    other, _ = _run(procedure, outcome.ready, replace(question, beside=True))
    if other is None:
        return None
    return Sensitivity(procedure=procedure, changed=changed_answers(outcome.comparison.pairs, other.pairs))


def changed_answers(here: Sequence[PairResult], there: Sequence[PairResult]) -> tuple[ChangedAnswer, ...]:
    """Return the pairs of `there` whose answer is not that of the same pair `here`."""
    answers = {(p.first, p.second): p.answer for p in here}
    return tuple(
        ChangedAnswer(first=p.first, second=p.second, answer=p.answer)
        for p in there
        if answers.get((p.first, p.second)) != p.answer
    )
