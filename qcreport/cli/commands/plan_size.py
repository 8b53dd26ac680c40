"""`qcreport plan size`."""

from __future__ import annotations

import argparse
import json
import math
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Final, TypeVar

from qcreport.analysis.compare import margin_on_scale
from qcreport.analysis.plan_size import SIZE_SCHEMA, Size, SizeAnswer, SizeQuestion, planned_sizes
from qcreport.cli.run import printable
from qcreport.errors import UsageError
from qcreport.plan.model import (
    BY_RULES,
    WITH_REFERENCE,
    CharacteristicPlan,
    ComparisonPlan,
    Direction,
    Family,
    Scale,
)
from qcreport.rules import RulesTable, parse_rules
from qcreport.rules.facts import CANNOT_BE_JUDGED, DIFFERENT, EVERY_PAIR, SIMILAR, WITH_THE_REFERENCE
from qcreport.settings import find_plan, load_site
from qcreport.settings.shipped import shipped_folder
from qcreport.stats.sizes import LARGEST_N

ASSUMES: Final = "Assumes independent, near-normal results, groups of one size, and this scatter in each."


@dataclass(frozen=True, slots=True, kw_only=True)
class _Asked:
    """A plan's part in the question; all None without a plan."""

    plan: ComparisonPlan | None = None
    characteristic: CharacteristicPlan | None = None
    rules: RulesTable

    @property
    def log(self) -> bool:
        """Whether differences are ratios."""
        return self.plan is not None and self.plan.scale is Scale.LOG

    @property
    def unit(self) -> str:
        """Unit of differences; empty for ratios and without a plan."""
        return "" if self.characteristic is None or self.log else self.characteristic.unit


def run(arguments: argparse.Namespace) -> int:
    """Say how many results a group are needed."""
    asked = _asked(arguments)
    question = _question(arguments, asked)
    answer = planned_sizes(question, asked.rules)
    if arguments.json:
        print(json.dumps(_document(question, answer, asked), ensure_ascii=False, indent=1, allow_nan=False))
    else:
        print(printable("\n".join(_lines(question, answer, asked))))
    return 0


def _asked(arguments: argparse.Namespace) -> _Asked:
    if arguments.plan is None:
        if arguments.characteristic is not None:
            raise UsageError("--characteristic names one of a plan; name the plan too: --plan NAME")
        path = shipped_folder("config/rules") / "default.toml"
        return _Asked(rules=parse_rules(path.read_bytes(), path.name))
    settings = find_plan(load_site(Path(arguments.site)), arguments.plan)
    names = [c.name for c in settings.plan.characteristics]
    name = arguments.characteristic or (names[0] if len(names) == 1 else None)
    if name not in names:
        raise UsageError(
            f"Name a characteristic of the plan {settings.plan.name}: --characteristic, one of "
            f"{', '.join(names)}"
        )
    characteristic = settings.plan.characteristics[names.index(name)]
    return _Asked(plan=settings.plan, characteristic=characteristic, rules=settings.rules)


def _question(arguments: argparse.Namespace, asked: _Asked) -> SizeQuestion:
    plan, entry = asked.plan, asked.characteristic
    procedure = arguments.procedure or (BY_RULES if plan is None else plan.procedure)
    reference = procedure in WITH_REFERENCE or (plan is not None and plan.reference is not None)
    margin = _margin(arguments, asked)
    difference = _distance(arguments.difference, "--difference", log=asked.log)
    sd = arguments.sd if arguments.sd is not None or entry is None else entry.scatter
    if sd is None:
        raise UsageError("Say how results scatter: --sd S, the standard deviation of a result.")
    if difference is None and margin is None:
        raise UsageError("Say what is to be seen: --difference D, or --margin M, or a plan with a margin.")
    one_way = entry is not None and entry.direction is not Direction.BOTH
    return SizeQuestion(
        procedure=procedure,
        n_groups=_checked(arguments.groups, "--groups", 2, 1000),
        comparison=WITH_THE_REFERENCE if reference else EVERY_PAIR,
        two_sided=not (reference and one_way),
        spread=_spread(plan),
        scale=(Scale.AS_MEASURED if plan is None else plan.scale).value,
        alpha=_alpha(arguments, plan),
        power=_checked(arguments.power, "--power", 0.0, 1.0, strictly=True),
        sd=_checked(sd, "--sd", 0.0, math.inf, strictly=True),
        difference=margin if difference is None else difference,
        margin=margin,
        smallest=2 if plan is None else plan.smallest_group,
    )


def _margin(arguments: argparse.Namespace, asked: _Asked) -> float | None:
    """Return the nearer margin, as a distance on the scale of the comparison."""
    if arguments.margin is not None or asked.plan is None or asked.characteristic is None:
        return _distance(arguments.margin, "--margin", log=asked.log)
    ends = [abs(m) for m in margin_on_scale(asked.characteristic, asked.plan.scale) if m is not None]
    return min(ends, default=None)


def _distance(value: float | None, option: str, *, log: bool) -> float | None:
    if value is None:
        return None
    _checked(value, option, 0.0, math.inf, strictly=True)
    distance = abs(math.log(value)) if log else value
    if distance == 0.0:
        raise UsageError(f"{option} is a ratio here, since the plan compares on the log scale; 1 is none.")
    return distance


def _alpha(arguments: argparse.Namespace, plan: ComparisonPlan | None) -> float:
    if arguments.alpha is not None or plan is None:
        given = 0.05 if arguments.alpha is None else arguments.alpha
        return _checked(given, "--alpha", 0.0, 0.5, strictly=True)
    shared = len(plan.characteristics) if plan.family is Family.EXPORT else 1
    return plan.alpha / shared


def _spread(plan: ComparisonPlan | None) -> str:
    if plan is None or plan.spread is None:
        return CANNOT_BE_JUDGED
    return SIMILAR if plan.spread.similar else DIFFERENT


_Number = TypeVar("_Number", int, float)


def _checked(value: _Number, option: str, least: float, most: float, *, strictly: bool = False) -> _Number:
    inside = least < value < most if strictly else least <= value <= most
    if not inside:
        raise UsageError(f"{option} must lie between {least:g} and {most:g}, found {value:g}.")
    return value


def _document(question: SizeQuestion, answer: SizeAnswer, asked: _Asked) -> dict[str, Any]:
    return {
        "schema": SIZE_SCHEMA,
        "plan": None if asked.plan is None else asked.plan.name,
        "characteristic": None if asked.characteristic is None else asked.characteristic.name,
        "unit": asked.unit,
        "scale": question.scale,
        "procedure": question.procedure,
        "comparison": question.comparison,
        "two_sided": question.two_sided,
        "n_groups": question.n_groups,
        "alpha": question.alpha,
        "power": question.power,
        "sd": question.sd,
        "difference": question.difference,
        "margin": question.margin,
        "to_detect": None if answer.to_detect is None else answer.to_detect.to_json(),
        "to_settle": None if answer.to_settle is None else answer.to_settle.to_json(),
    }


def _lines(question: SizeQuestion, answer: SizeAnswer, asked: _Asked) -> list[str]:
    of = "" if asked.characteristic is None or asked.plan is None else f"{asked.characteristic.title}, "
    sides = "" if question.two_sided else ", one direction"
    scatter = f"{question.sd:g} (of natural logarithms)" if asked.log else f"{question.sd:g} {asked.unit}"
    lines = [
        f"{of}{question.n_groups} groups, {question.comparison}{sides}, {question.procedure}, "
        f"alpha {question.alpha:g}, standard deviation of a result {scatter}".rstrip()
    ]
    if question.difference is not None:
        seen = _shown(question.difference, asked)
        wanted = f"To see a true difference of {seen} with power {question.power:g}"
        lines.extend(_size_lines(wanted, answer.to_detect, question, asked))
    if question.margin is not None:
        wanted = f"For intervals narrower than the margin of {_shown(question.margin, asked)}"
        lines.extend(_size_lines(wanted, answer.to_settle, question, asked))
    return [*lines, ASSUMES]


def _size_lines(wanted: str, size: Size | None, question: SizeQuestion, asked: _Asked) -> list[str]:
    if size is None:
        return [f"{wanted}: more than {LARGEST_N:,} results a group."]
    width, seen = _shown(size.half_width, asked), _shown(size.detectable, asked)
    return [
        f"{wanted}: {size.n} results a group.",
        f"  By {size.procedure}; the interval reaches {'a factor of ' if asked.log else ''}{width} to either "
        f"side; a true difference of {seen} is seen with power {question.power:g}.",
    ]


def _shown(distance: float, asked: _Asked) -> str:
    """Return a distance as a person reads it: a ratio on the log scale."""
    value = math.exp(distance) if asked.log and distance < 700.0 else distance
    return f"{value:.4g} {asked.unit}".rstrip()
