"""How many results a group a plan needs, before anything is measured."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, Final, cast, get_args

from qcreport.canonical import finite_or_none
from qcreport.errors import UsageError
from qcreport.plan.model import BY_RULES
from qcreport.rules import Facts, RulesTable, choose
from qcreport.rules.conditions import NumberCondition
from qcreport.stats.sizes import LARGEST_N, Design, Procedure, sample_size_for, sample_size_to_detect

SIZE_SCHEMA: Final = "qcreport/plan_size/1"


@dataclass(frozen=True, slots=True, kw_only=True)
class SizeQuestion:
    """What is to be planned; differences, margin and scatter on the scale of the comparison."""

    procedure: str
    """A procedure based on means, or `by rules`."""
    n_groups: int
    """Groups to be compared, the reference included."""
    comparison: str
    """`every pair` or `each with the reference`."""
    two_sided: bool
    """False where the plan asks for one direction from a reference."""
    spread: str
    """Fact that the decision table will find: `similar` where declared, else `cannot be judged`."""
    scale: str
    """`as measured` or `log`."""
    alpha: float
    """Family-wise error rate."""
    power: float
    """Probability that the difference is seen."""
    sd: float
    """Standard deviation of a result."""
    difference: float | None
    """True difference that is to be seen; None: not asked."""
    margin: float | None
    """Smallest difference that matters, the nearer one; None where none is set."""
    smallest: int
    """Least number that the plan compares."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Size:
    """One answer: a number of results a group and what it gives."""

    n: int
    """Results in each group."""
    procedure: str
    """What compares groups of this size."""
    critical_value: float
    """What |statistic| must exceed."""
    detectable: float
    """True difference seen with the wanted power."""
    half_width: float
    """Half the width of an interval, if the scatter is as said."""

    def to_json(self) -> dict[str, Any]:
        """Return the form of the JSON document."""
        return {
            "n": self.n,
            "procedure": self.procedure,
            "critical_value": finite_or_none(self.critical_value),
            "detectable": finite_or_none(self.detectable),
            "half_width": finite_or_none(self.half_width),
        }


@dataclass(frozen=True, slots=True, kw_only=True)
class SizeAnswer:
    """The sizes that a question asks for."""

    to_detect: Size | None
    """Least size that sees the difference; None where not asked or above the largest tried."""
    to_settle: Size | None
    """Least size whose intervals are narrower than the margin; None without one or above the largest."""


def planned_sizes(question: SizeQuestion, rules: RulesTable) -> SizeAnswer:
    """Return the least sizes that see the difference, and that put intervals within the margin.

    Raises
    ------
    UsageError
        A procedure, or one the rules may choose, for which no size is known.
    StatisticsError
        A number outside its range.
    """
    difference, margin = question.difference, question.margin
    to_detect = to_settle = None
    if difference is not None:
        to_detect = _least(
            question,
            rules,
            lambda d: sample_size_to_detect(d, sd=question.sd, difference=difference, power=question.power),
        )
    if margin is not None:
        variance = question.sd * question.sd
        to_settle = _least(question, rules, lambda d: sample_size_for(d, variance=variance, margin=margin))
    return SizeAnswer(to_detect=to_detect, to_settle=to_settle)


def _least(question: SizeQuestion, rules: RulesTable, needed: Callable[[Design], int | None]) -> Size | None:
    """Return the least n that is enough for the procedure which compares groups of that very n."""
    enough: dict[str, int] = {}
    last = _last_threshold(rules) + 1
    for n in range(question.smallest, max(last, question.smallest) + 1):
        procedure = _procedure(question, rules, n)
        if procedure not in enough:
            enough[procedure] = needed(_design(question, procedure)) or LARGEST_N + 1
        if enough[procedure] <= n:
            return _size(question, procedure, n)
    # above the last threshold of the table the procedure stays
    n = enough[procedure]
    return _size(question, procedure, n) if n <= LARGEST_N else None


def _size(question: SizeQuestion, procedure: str, n: int) -> Size:
    design = _design(question, procedure)
    return Size(
        n=n,
        procedure=procedure,
        critical_value=design.critical_value(n),
        detectable=design.detectable(n, question.sd, question.power),
        half_width=design.half_width(n, question.sd),
    )


def _design(question: SizeQuestion, procedure: str) -> Design:
    if procedure not in get_args(Procedure):
        known = ", ".join(get_args(Procedure))
        raise UsageError(f"No size can be planned for {procedure}. Give --procedure, one of: {known}.")
    return Design(
        procedure=cast(Procedure, procedure),
        n_groups=question.n_groups,
        alpha=question.alpha,
        two_sided=question.two_sided,
    )


def _procedure(question: SizeQuestion, rules: RulesTable, n: int) -> str:
    if question.procedure != BY_RULES:
        return question.procedure
    facts = Facts(
        comparison=question.comparison,
        groups=question.n_groups,
        smallest_n=n,
        sizes="equal",
        variation="some",
        censored="none",
        spread=question.spread,
        scale=question.scale,
    )
    return choose(rules, facts).procedure


def _last_threshold(rules: RulesTable) -> int:
    """Return the largest size that the table names; a size of 2 where it names none."""
    conditions = [c for row in rules.rows for c in row.when if isinstance(c, NumberCondition)]
    return max((c.bound for c in conditions if c.fact == "smallest_n"), default=2)
