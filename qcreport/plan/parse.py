"""Read a comparison plan from TOML text; every fault is told at once with line and key."""

from __future__ import annotations

import math
import re
from collections.abc import Sequence
from typing import Final

from qcreport.plan.contrasts import parse_contrasts
from qcreport.plan.model import (
    BY_RULES,
    PROCEDURES,
    WITH_REFERENCE,
    Approval,
    CharacteristicPlan,
    ComparisonPlan,
    Direction,
    Family,
    Groups,
    Scale,
    SpreadDeclaration,
    Unit,
)
from qcreport.toml_source import TableReader, TomlSource

_NAME: Final = re.compile(r"[A-Za-z0-9][A-Za-z0-9._-]{0,63}")
_PERCENT: Final = re.compile(r"\s*([0-9]+(?:\.[0-9]+)?)\s*%\s*")


def parse_plan(data: bytes, file: str) -> ComparisonPlan:
    """Return the plan of a TOML file.

    Parameters
    ----------
    data : bytes
        UTF-8 text.
    file : str
        File name for messages.

    Raises
    ------
    ConfigError
        With all faults: unknown or missing keys, values of a wrong kind, contradictions.
    """
    source = TomlSource.from_bytes(data, file)
    top = source.top
    name = top.text("name")
    if name and not _NAME.fullmatch(name):
        top.fault("name", "must be letters, digits, '.', '_' or '-', at most 64 characters")
    exports = top.texts("exports")
    if "exports" in top and not all(p.strip() for p in exports or ("",)):
        top.fault("exports", "name at least one file-name pattern, none of them blank")
    comparison = top.table("comparison")
    scale = Scale(_choice(comparison, "scale", [s.value for s in Scale], Scale.AS_MEASURED))
    readers = top.tables("characteristic")
    characteristics = tuple(_characteristic(t, scale) for t in readers)
    plan = ComparisonPlan(
        name=name,
        title=top.text("title"),
        exports=exports or (),
        layout=top.text("layout"),
        rules=top.text("rules", "default"),
        product=top.text("product", "", blank=True),
        method=top.text("method", "", blank=True),
        approved=_approval(top),
        groups=Groups(_choice(comparison, "groups", [g.value for g in Groups], Groups.BATCH)),
        reference=comparison.text("reference", "", blank=True).strip() or None,
        independent_unit=Unit(_choice(comparison, "independent_unit", [u.value for u in Unit], Unit.SAMPLE)),
        alpha=comparison.number("alpha", 0.05, above=0.0, below=0.5),
        family=Family(_choice(comparison, "family", [f.value for f in Family], Family.CHARACTERISTIC)),
        scale=scale,
        procedure=_choice(comparison, "procedure", [BY_RULES, *PROCEDURES], BY_RULES),
        smallest_group=comparison.integer("smallest_group", 3, minimum=2),
        spread=_spread(top),
        characteristics=characteristics,
        contrasts=parse_contrasts(top.tables("contrast")),
    )
    _cross_checks(top, comparison, plan)
    _named_once(readers, characteristics)
    source.finish()
    return plan


def _choice(table: TableReader, key: str, choices: list[str], default: str) -> str:
    """Return a choice, or the default where the fault has been noted."""
    value = str(table.text(key, str(default), choices=choices))
    return value if value in choices else str(default)


def _approval(top: TableReader) -> Approval | None:
    if "approved" not in top:
        top.raw("approved", None)
        return None
    table = top.table("approved")
    by, on = table.text("by"), table.date("on")
    return None if on is None else Approval(by=by, on=on)


def _spread(top: TableReader) -> SpreadDeclaration | None:
    if "spread" not in top:
        top.raw("spread", None)
        return None
    table = top.table("spread")
    similar, by, on, reason = table.flag("similar"), table.text("by"), table.date("on"), table.text("reason")
    accept = table.flag("accept_unequal_sizes", False)
    if on is None:
        return None
    return SpreadDeclaration(similar=similar, by=by, on=on, reason=reason, accept_unequal_sizes=accept)


def _characteristic(table: TableReader, scale: Scale) -> CharacteristicPlan:
    name = table.text("name")
    target = table.number("target", None)
    below, above, text = _margins(table, scale, target)
    direction = Direction(_choice(table, "direction", [d.value for d in Direction], Direction.BOTH))
    lower, upper = table.number("lower_limit", None), table.number("upper_limit", None)
    if lower is not None and upper is not None and not lower < upper:
        table.fault("lower_limit", "must be below upper_limit")
    return CharacteristicPlan(
        name=name,
        title=table.text("title", name),
        unit=table.text("unit"),
        margin_below=below,
        margin_above=above,
        margin_text=text,
        target=target,
        direction=direction,
        lower_limit=lower,
        upper_limit=upper,
        scatter=table.number("scatter", None, above=0.0),
    )


def _margins(
    table: TableReader, scale: Scale, target: float | None
) -> tuple[float | None, float | None, str]:
    """Return (below, above, text): differences in the unit, or ratios on the log scale."""
    given = [k for k in ("margin", "margin_below", "margin_above") if k in table]
    sizes = {k: _margin_size(table, k, scale, target) for k in given}
    for key in ("margin", "margin_below", "margin_above"):
        table.raw(key, None)
    if "margin" in given and len(given) > 1:
        table.fault("margin", "give margin, or margin_below and margin_above, not both")
    below = sizes.get("margin_below", sizes.get("margin"))
    above = sizes.get("margin_above", sizes.get("margin"))
    text = ", ".join(str(table.raw(k)) for k in given)
    if scale is Scale.LOG:
        return (
            None if below is None else 1.0 / below,
            above,
            text,
        )
    return (None if below is None else -below, above, text)


def _margin_size(table: TableReader, key: str, scale: Scale, target: float | None) -> float | None:
    """Return a margin's positive size; on the log scale the ratio above 1."""
    value = table.raw(key)
    if isinstance(value, str):
        percent = _PERCENT.fullmatch(value)
        if percent is None:
            table.fault(key, f'must be a number or a percentage such as "5 %", found {value!r}')
            return None
        share = float(percent.group(1)) / 100.0
        if scale is Scale.LOG:
            return _positive(table, key, 1.0 + share, 1.0)
        if target is None or target == 0.0:
            table.fault(key, "a percent margin needs target, a number other than 0: it is never of the data")
            return None
        return _positive(table, key, share * abs(target), 0.0)
    if isinstance(value, bool) or not isinstance(value, (int, float)):
        table.fault(key, f'must be a number or a percentage such as "5 %", found {value!r}')
        return None
    return _positive(table, key, _double(value), 1.0 if scale is Scale.LOG else 0.0)


def _double(value: float) -> float:
    """Return a number as a double; infinite where a whole number lies beyond its range."""
    try:
        return float(value)
    except OverflowError:
        return math.inf


def _positive(table: TableReader, key: str, size: float, least: float) -> float | None:
    if not (math.isfinite(size) and size > least):
        what = "a ratio greater than 1" if least else "a finite number greater than 0"
        table.fault(key, f"must be {what}, found {size:g}")
        return None
    return size


def _cross_checks(top: TableReader, comparison: TableReader, plan: ComparisonPlan) -> None:
    """Note what each key alone cannot show."""
    if not plan.characteristics:
        top.fault(None, "name at least one [[characteristic]]")
    if plan.procedure in WITH_REFERENCE and plan.reference is None:
        comparison.fault("procedure", f"{plan.procedure} needs a reference")
    fixed_pairs = plan.procedure not in (BY_RULES, "none", "nested") and plan.procedure not in WITH_REFERENCE
    if plan.reference is not None and fixed_pairs:
        comparison.fault("procedure", f"{plan.procedure} compares every pair, but a reference is set")
    if plan.groups is Groups.BATCH and plan.independent_unit is Unit.BATCH:
        comparison.fault("independent_unit", "batches cannot be the unit where batches are compared")


def _named_once(readers: Sequence[TableReader], characteristics: Sequence[CharacteristicPlan]) -> None:
    seen: set[str] = set()
    for reader, characteristic in zip(readers, characteristics, strict=True):
        if characteristic.name and characteristic.name in seen:
            reader.fault("name", f"{characteristic.name!r} is named twice")
        seen.add(characteristic.name)
