"""From measurements to groups of independent units: who is compared, who is only described."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import TypeVar

from qcreport.analysis.result import UnitValue
from qcreport.errors import ExportRefusedError
from qcreport.measurements import LIMITS_BELOW, Censoring, Measurement, MeasurementSet
from qcreport.plan.model import CharacteristicPlan, ComparisonPlan, Groups, Unit

_Key = tuple[str, ...]
_K = TypeVar("_K")
_V = TypeVar("_V")


@dataclass(frozen=True, slots=True, kw_only=True)
class Group:
    """One batch or line with its independent units, export order."""

    label: str
    """Batch or line."""
    units: tuple[UnitValue, ...]
    """Independent units that hold a value or a limit."""
    n_readings: int
    """Readings behind them."""
    missing: int
    """Cells with a marker for a missing value."""

    @property
    def n(self) -> int:
        """Number of independent units."""
        return len(self.units)

    @property
    def values(self) -> tuple[float, ...]:
        """Values of the units, in the unit of the characteristic (a limit where censored)."""
        return tuple(u.value for u in self.units)

    @property
    def censored(self) -> int:
        """Units known only by a limit."""
        return sum(u.censored is not None for u in self.units)


def groups_of(
    measurements: MeasurementSet, plan: ComparisonPlan, characteristic: CharacteristicPlan
) -> tuple[Group, ...]:
    """Return the groups of one characteristic, order of first appearance.

    Readings finer than the independent unit are averaged to it, stepwise and unweighted. A value that is not
    detected enters as 0 with the mark `nd`: it can only be ranked or counted, never averaged with a number.

    Raises
    ------
    ExportRefusedError
        `unit_conflict` where the unit is not the plan's; `group_missing` where lines are compared and
        a value has none.
    """
    mine = [m for m in measurements.measurements if m.characteristic == characteristic.name]
    _check_units(measurements, mine, characteristic)
    by_label = _gathered((group_label(measurements, m, plan.groups), m) for m in mine)
    return tuple(group_from(label, members, plan.independent_unit) for label, members in by_label.items())


def _gathered(pairs: Iterable[tuple[_K, _V]]) -> dict[_K, list[_V]]:
    """Return the values of each key; keys in order of first appearance, values in order."""
    found: dict[_K, list[_V]] = {}
    for key, value in pairs:
        found.setdefault(key, []).append(value)
    return found


def _check_units(
    measurements: MeasurementSet, mine: Iterable[Measurement], characteristic: CharacteristicPlan
) -> None:
    for m in mine:
        if m.unit != characteristic.unit:
            raise ExportRefusedError(
                "unit_conflict",
                file=measurements.export_name,
                where=str(m.cell),
                found=f"{characteristic.name} comes in {m.unit!r}.",
                expected=f"The plan compares it in {characteristic.unit!r}.",
                next_step="Correct the unit in the plan or the layout, whichever is wrong.",
                cells=(str(m.cell),),
            )


def group_label(measurements: MeasurementSet, m: Measurement, groups: Groups) -> str:
    """Return the label under which a measurement is compared.

    Raises
    ------
    ExportRefusedError
        `group_missing` where lines are compared and it has none.
    """
    if groups is Groups.BATCH:
        return m.batch
    if m.line is None:
        raise ExportRefusedError(
            "group_missing",
            file=measurements.export_name,
            where=str(m.cell),
            found="This value has no production line.",
            expected="The plan compares lines, so every value needs one.",
            next_step="Fill in the line in the export, or tell the layout where it stands (line = …).",
            cells=(str(m.cell),),
        )
    return m.line


def group_from(label: str, members: Sequence[Measurement], unit: Unit) -> Group:
    """Return one group of its measurements, averaged to the independent unit."""
    present = [m for m in members if not m.missing]
    readings = [(_unit_key(m, unit), unit_value(m)) for m in present]
    if unit is not Unit.READING:
        readings = _averaged(readings)  # reading → sample
    if unit is Unit.BATCH:
        readings = _averaged([(key[:1], value) for key, value in readings])  # sample → batch
    return Group(
        label=label,
        units=tuple(value for _, value in readings),
        n_readings=len(present),
        missing=len(members) - len(present),
    )


def _unit_key(m: Measurement, unit: Unit) -> _Key:
    """Return the batch and sample a reading belongs to; without a sample id each cell is its own sample."""
    if unit is Unit.READING or m.sample is None:
        return (m.batch, str(m.cell), "")
    return (m.batch, m.sample, "sample")


def unit_value(m: Measurement) -> UnitValue:
    """Return one reading as a value of its own."""
    return UnitValue(
        value=0.0 if m.value is None else m.value,
        text=m.text,
        decimals=m.decimals,
        sample=m.sample,
        cells=(str(m.cell),),
        censored=m.censored,
        marks=m.marks,
        batch=m.batch,
    )


def _averaged(readings: list[tuple[_Key, UnitValue]]) -> list[tuple[_Key, UnitValue]]:
    """Return one value for each key, order of first appearance."""
    return [(key, _mean_of(values)) for key, values in _gathered(readings).items()]


def _mean_of(values: list[UnitValue]) -> UnitValue:
    """Return the mean of readings; censored as soon as one of them is (the mean is then no number)."""
    if len(values) == 1:
        return values[0]
    censored, placed = _joint({v.censored for v in values})
    return UnitValue(
        value=_mean_or_limit(values),
        text="",
        decimals=max(v.decimals for v in values),
        sample=values[0].sample if len({v.sample for v in values}) == 1 else None,
        cells=tuple(cell for v in values for cell in v.cells),
        censored=censored,
        placed=placed and all(v.placed for v in values),
        marks=tuple(dict.fromkeys(mark for v in values for mark in v.marks)),
        batch=values[0].batch,
    )


def _mean_or_limit(values: list[UnitValue]) -> float:
    """Return the mean; a reading that was not detected beside limits counts as below the highest of them."""
    limits = [v.value for v in values if v.censored is not Censoring.NOT_DETECTED]
    if len(limits) < len(values) and limits and all(v.censored for v in values):
        return max(limits)
    return math.fsum(v.value for v in values) / len(values)


def _joint(readings: set[Censoring | None]) -> tuple[Censoring | None, bool]:
    """Return the censoring of a mean, and whether the mean has a place among the others.

    With limits of one side the mean lies on that side of the mean of limits and numbers. A mean of a number
    and a reading that was not detected, or of limits on both sides, may lie anywhere between others.
    """
    limits = readings - {None}
    if not limits:
        return None, True
    if readings == {Censoring.NOT_DETECTED}:
        return Censoring.NOT_DETECTED, True
    if limits <= LIMITS_BELOW and (Censoring.NOT_DETECTED not in limits or None not in readings):
        return (Censoring.AT_MOST if limits == {Censoring.AT_MOST} else Censoring.BELOW), True
    if limits <= {Censoring.ABOVE, Censoring.AT_LEAST}:
        return (Censoring.ABOVE if Censoring.ABOVE in limits else Censoring.AT_LEAST), True
    return Censoring.NOT_DETECTED, False
