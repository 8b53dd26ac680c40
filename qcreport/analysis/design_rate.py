"""The error rate of the choice at the sizes at hand, from what one comparison knows."""

from __future__ import annotations

from dataclasses import replace

from qcreport.analysis.outcome import Outcome, Question
from qcreport.plan.model import BY_RULES, RANKS, Direction
from qcreport.rates import Asked, Design, Standing
from qcreport.rates.at_hand import ErrorRate, no_rate, rate_at_hand
from qcreport.rules.facts import CANNOT_BE_JUDGED


def design_rate(outcome: Outcome, question: Question) -> ErrorRate:
    """Return how often this way of choosing finds a difference where there is none, at these sizes."""
    if outcome.comparison is None:
        return no_rate("Nothing was compared.")
    if outcome.procedure in RANKS:
        return no_rate("Ranks: the error rate depends on the law of the results, so none is simulated.")
    fixed = outcome.choice.procedure if question.plan.procedure != BY_RULES else None
    # What decides nothing here is put to one value, so that characteristics of one design share one answer.
    facts = replace(outcome.gathered.facts, spread=CANNOT_BE_JUDGED)
    asked = Asked(
        table=question.rules,
        facts=facts,
        design=Design(
            sizes=tuple(g.n for g in outcome.ready.groups),
            reference=outcome.ready.reference,
            alpha=question.alpha,
            one_sided=outcome.ready.reference is not None
            and question.characteristic.direction is not Direction.BOTH,
        ),
        standing=Standing() if fixed is not None else _standing(outcome, question),
        procedure=fixed,
    )
    if not asked.on_means():
        return no_rate("The table may choose a procedure that does not compare means; none is simulated.")
    return rate_at_hand(asked)


def _standing(outcome: Outcome, question: Question) -> Standing:
    checks = {check.name: check for check in outcome.gathered.checks}
    variation = checks.get("spread_variation")
    lines: tuple[float, ...] = ()
    if question.history is not None and "spread_ratio_limit_with_history" in checks:
        known = (question.history.line(g.label) for g in outcome.ready.groups)
        lines = tuple(line.df for line in known if line is not None)
    return Standing(
        declared=_declared(outcome, question),
        lines=lines,
        batches=variation is not None and variation.met is True,
    )


def _declared(outcome: Outcome, question: Question) -> str:
    declaration = question.plan.spread
    if declaration is None:
        return "nothing"
    if not declaration.similar:
        return "different"
    late = question.earliest is not None and declaration.on > question.earliest
    sizes = [g.n for g in outcome.ready.groups]
    unequal = max(sizes) > question.rules.spread.declared_size_ratio * min(sizes)
    set_aside = late or (unequal and not declaration.accept_unequal_sizes)
    return "set aside" if set_aside else "similar"
