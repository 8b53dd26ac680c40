"""The designs whose error rates are published, and the rate of one of them.

A design is simulated once and answered by every table and state of knowledge, so that these are compared on
the same tables of results. No true difference anywhere; alpha 0.05.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from functools import cache

import numpy as np

from qcreport.canonical import sha256_hex
from qcreport.rates import Asked, Design, Draws, Standing, alarms, draw_moments, draw_values, needs_values
from qcreport.rules import Facts, RulesTable, parse_rules
from qcreport.settings.shipped import shipped_files
from qcreport.stats.spread_history import spread_variation

ALPHA = 0.05
LIMIT = 0.062
"""An estimate less two standard errors must not lie above it."""
CHUNK = 20_000
GROUPS = (3, 4, 6, 10, 12)
SIZES = {
    "n = 3": (3,),
    "n = 5": (5,),
    "n = 10": (10,),
    "n = 4, 8, 16": (4, 8, 16),
    "n = 10, 13, 16": (10, 13, 16),
    "n = 10 and 40": (10, 40),
}
SHAPES = ("normal", "lognormal", "t3", "uniform")
VARYING = {"ln sigma varies by 0.2": 0.2, "ln sigma varies by 0.3": 0.3}
"""Standard deviation of ln sigma over batches, drawn anew for every group of a table and its history."""
HISTORY_BATCHES, HISTORY_DF = 40, 9.0
NOTHING, DECLARED, LINES, BATCHES = (
    "nothing known",
    "declared similar",
    "lines, 60 df each",
    "40 batches of 9 df",
)


@dataclass(frozen=True)
class Block:
    """One design with its true spreads and the shape of results."""

    family: str
    sizes: tuple[int, ...]
    reference: int | None
    spread: str
    sds: tuple[float, ...]
    shape: str

    @property
    def name(self) -> str:
        """Return what the seed is made of; no two blocks share it."""
        return f"{self.sizes} {self.reference} {self.spread} {self.sds} {self.shape}"


def blocks() -> Iterator[Block]:
    """Yield every design of the grid."""
    for shape in SHAPES:
        for k, (family, pattern) in itertools.product(GROUPS, SIZES.items()):
            sizes = _repeated(pattern, k)
            for spread, sds in _spreads(sizes):
                yield Block(family, sizes, None, spread, sds, shape)
            if shape == "normal" and k <= 6 and len(pattern) == 1:
                for spread in VARYING:
                    yield Block(family, sizes, None, spread, (1.0,) * k, shape)
        for large, others, n in itertools.product((10, 30, 100), (3, 9, 11), (3, 5, 10)):
            sizes = (large, *[n] * others)
            for spread, sds in _spreads_with_reference(others):
                yield Block(f"reference, n = {n}", sizes, 0, spread, sds, shape)


def _repeated(pattern: Sequence[float], k: int) -> tuple[int, ...]:
    """Return k sizes: the pattern again and again, ascending."""
    return tuple(sorted(int(pattern[i % len(pattern)]) for i in range(k)))


def _spreads(sizes: tuple[int, ...]) -> Iterator[tuple[str, tuple[float, ...]]]:
    """Yield named standard deviations; sizes ascend, so the first groups are the small ones."""
    k = len(sizes)
    three = sorted((1.0, 2.0, 4.0)[i % 3] for i in range(k))
    half = [1.5 if i < k // 2 else 1.0 for i in range(k)]
    yield "equal", (1.0,) * k
    yield "one at 2", (2.0, *[1.0] * (k - 1))
    yield "1:2:4, small groups wide" if len(set(sizes)) > 1 else "1:2:4", tuple(reversed(three))
    yield "half at 1.5, small groups wide" if len(set(sizes)) > 1 else "half at 1.5", tuple(half)
    if len(set(sizes)) > 1:
        yield "1:2:4, large groups wide", tuple(three)
        yield "half at 1.5, large groups wide", tuple(reversed(half))


def _spreads_with_reference(others: int) -> Iterator[tuple[str, tuple[float, ...]]]:
    yield "equal", (1.0,) * (others + 1)
    yield "reference at 2", (2.0, *[1.0] * others)
    yield "others at 2", (1.0, *[2.0] * others)
    yield "one at 2", (1.0, 2.0, *[1.0] * (others - 1))


@dataclass(frozen=True)
class Cell:
    """One published rate."""

    table: str
    known: str
    block: Block
    replicates: int
    alarms: int

    @property
    def rate(self) -> float:
        return self.alarms / self.replicates

    @property
    def se(self) -> float:
        return math.sqrt(max(self.rate * (1.0 - self.rate), 1e-9) / self.replicates)

    @property
    def misdeclared(self) -> bool:
        """Whether a person declared similar what is not: no procedure can keep its level then."""
        return self.known == DECLARED and self.block.spread != "equal"

    @property
    def too_high(self) -> bool:
        return self.rate - 2.0 * self.se > LIMIT


@cache
def table(name: str) -> RulesTable:
    return parse_rules(shipped_files("config/rules", f"{name}.toml")[f"{name}.toml"], name)


def questions(block: Block) -> dict[tuple[str, str], Asked]:
    """Return what is asked of a block, by table and knowledge."""
    found = {("default", NOTHING): _asked(block, "default", Standing())}
    if block.spread in VARYING:
        return found | {("default", BATCHES): _asked(block, "default", Standing(batches=True))}
    found["textbook", NOTHING] = _asked(block, "textbook", Standing())
    if block.shape != "normal":
        return _compared(found)
    found["default", DECLARED] = _asked(block, "default", Standing(declared="similar"))
    if max(block.sizes) <= 1.25 * min(block.sizes):
        k = len(block.sizes)
        found["default", LINES] = _asked(block, "default", Standing(lines=(60.0,) * k))
        if k <= 6 and block.spread == "equal":
            found["default", BATCHES] = _asked(block, "default", Standing(batches=True))
    return _compared(found)


def _compared(found: dict[tuple[str, str], Asked]) -> dict[tuple[str, str], Asked]:
    """Return the questions that have an answer: a table may compare nothing where spread is not similar."""
    return {
        key: asked
        for key, asked in found.items()
        if asked.standing.declared == "similar" or asked.chosen()["cannot be judged"] != "none"
    }


def _asked(block: Block, name: str, standing: Standing) -> Asked:
    sizes = block.sizes
    facts = Facts(
        comparison="every pair" if block.reference is None else "each with the reference",
        groups=len(sizes),
        smallest_n=min(sizes),
        sizes="equal" if len(set(sizes)) == 1 else "unequal",
        variation="some",
        censored="none",
        spread="cannot be judged",
        scale="as measured",
    )
    design = Design(sizes=sizes, reference=block.reference, alpha=ALPHA)
    return Asked(table=table(name), facts=facts, design=design, standing=standing)


def simulate(block: Block, replicates: int, salt: str = "") -> list[Cell]:
    """Return the rates of a block; `salt` gives other draws of the same design."""
    asked = questions(block)
    counts = dict.fromkeys(asked, 0)
    digest = sha256_hex(f"{block.name} {salt}".encode())
    source = np.random.RandomState([int(digest[i : i + 8], 16) for i in range(0, 64, 8)])
    values = block.shape != "normal" or any(needs_values(a) for a in asked.values())
    done = 0
    while done < replicates:
        size = min(CHUNK, replicates - done)
        draws = _draws(block, next(iter(asked.values())).design, source, size, values=values)
        for key, question in asked.items():
            found = alarms(question, draws, block.sds, source)
            if question.standing.batches:  # the history is drawn too, and shows what it shows
                without = replace(question, standing=Standing())
                shown = _history_shows(block, question, source, size)
                found = np.where(shown, found, alarms(without, draws, block.sds, source))
            counts[key] += int(np.count_nonzero(found))
        done += size
    return [Cell(name, known, block, replicates, count) for (name, known), count in counts.items()]


def _draws(block: Block, design: Design, source: np.random.RandomState, size: int, *, values: bool) -> Draws:
    if values:
        return draw_values(source, design, block.sds, size, block.shape)
    draws = draw_moments(source, design, block.sds, size)
    if block.spread not in VARYING:
        return draws
    sds = np.exp(VARYING[block.spread] * source.standard_normal(draws.means.shape))
    return Draws(means=draws.means * sds, variances=draws.variances * sds**2, levene=None)


def _history_shows(block: Block, asked: Asked, source: np.random.RandomState, size: int) -> np.ndarray:
    """Return for each table whether its own forty earlier batches show that spread is similar.

    With equal degrees of freedom the upper limit rises with the variance of ln s**2 alone, so that one call
    of the published function gives the largest variance that passes.
    """
    policy = asked.table.spread
    shape = (HISTORY_BATCHES, size)
    logs = np.log(source.chisquare(HISTORY_DF, shape) / HISTORY_DF)
    logs += 2.0 * VARYING.get(block.spread, 0.0) * source.standard_normal(shape)
    return np.asarray(logs.var(axis=0, ddof=1) <= _largest_variance(policy.history_sd_ln, policy.confidence))


@cache
def _largest_variance(sd_ln: float, confidence: float) -> float:
    """Return the variance of ln s**2 at which the upper limit of the sd of ln sigma meets `sd_ln`."""
    low, high = 0.0, 10.0
    pattern = np.array([-1.0, 1.0] * (HISTORY_BATCHES // 2))
    pattern /= pattern.std(ddof=1)
    while high - low > 1e-12:
        middle = 0.5 * (low + high)
        variances = np.exp(np.sqrt(middle) * pattern).tolist()
        limit = spread_variation([HISTORY_DF] * HISTORY_BATCHES, variances, confidence).upper_limit
        low, high = (middle, high) if limit <= sd_ln else (low, middle)
    return low
