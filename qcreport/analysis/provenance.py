"""What the records say of an export, carried in `context.json` so that a report explains itself.

Earlier runs and what changed against them, values left out, a report that is replaced, values that earlier
exports gave otherwise, and who approved the settings.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, fields
from typing import Any, TypeVar

Json = dict[str, Any]
_T = TypeVar("_T")


@dataclass(frozen=True, slots=True, kw_only=True)
class Change:
    """One thing that was otherwise in another run."""

    what: str
    """`plan`, `layout`, `rules`, `template`, `value`, `left out` or `replaces`."""
    key: str
    """Dotted key of a setting, name of a template, or cell."""
    before: str | None
    """As it was in the other run; None where it was not there."""
    after: str | None
    """As it is in this one; None where it is not there."""


@dataclass(frozen=True, slots=True, kw_only=True)
class OtherRun:
    """Another run over the same data by the same plan."""

    number: str
    """Its report number."""
    k: int
    """It was run k."""
    made_at: str
    """UTC time."""
    reason: str
    """Why it was made; empty for run 1."""
    state: str
    """`reserved` (never finished), `sealed`, `withdrawn`, `replaced`, …"""
    answers: tuple[tuple[str, str], ...]
    """(characteristic, answer code)."""
    changes: tuple[Change, ...]
    """What this run changed against it."""


@dataclass(frozen=True, slots=True, kw_only=True)
class LeftOut:
    """Values that a person left out of the comparison."""

    cells: tuple[str, ...]
    """Their cells, export order."""
    reason: str
    """The person's reason."""
    by: str
    """Who."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Replaces:
    """The report that this one replaces."""

    number: str
    """Its number."""
    reason: str
    """Why."""
    changes: tuple[Change, ...]
    """What this report changed against it."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ValueChange:
    """A value that another export gave otherwise."""

    cell: str
    """Where it stands in this export."""
    before: str
    """Text and unit of the other export."""
    after: str
    """Text and unit of this export."""
    source: str
    """Report that recorded the other text; `an imported export` where there is none."""
    when: str
    """`now`: first met here; `earlier`: corrected by an earlier export; `later`: by a later one."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Retest:
    """A sample that an earlier export had measured already."""

    cell: str
    """Where its value stands in this export."""
    sample: str
    """Sample id."""
    batch: str
    """Its batch."""
    why: str
    """What is other than before, in words."""
    source: str
    """Report that recorded the earlier value."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Approval:
    """One approval of plan, layout and rules by a person's key."""

    by: str
    """Name in the person's certificate."""
    fingerprint_sha256: str
    """SHA-256 of that certificate."""
    at: str
    """UTC time."""
    sequence: int
    """Ledger entry that holds it."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Provenance:
    """All that the records add to one report."""

    others: tuple[OtherRun, ...] = ()
    """Other runs over the same data by the same plan, in order."""
    without_report: int = 0
    """Under how many other settings the same data were computed by the same plan without a report."""
    left_out: LeftOut | None = None
    """What a person left out."""
    replaces: Replaces | None = None
    """The report that is replaced."""
    new: int = 0
    """Values that no earlier export held."""
    known: int = 0
    """Values that an earlier export held with the same text."""
    not_joined: int = 0
    """Values without a sample id, which cannot be recognised in another export."""
    changed: tuple[ValueChange, ...] = ()
    """Values that another export gave otherwise."""
    retests: tuple[Retest, ...] = ()
    """Samples that were measured before."""
    approvals: tuple[Approval, ...] = ()
    """Approvals of exactly these settings."""

    def to_json(self) -> Json:
        """Return the form that stands in `context.json`."""
        return {f.name: _plain(getattr(self, f.name)) for f in fields(self)}

    def run_json(self) -> Json:
        """Return what `result.json` says of other runs."""
        return {"others": _plain(self.others), "without_report": self.without_report}

    def decisions_json(self) -> Json:
        """Return what `result.json` says of people's decisions and of values met before."""
        names = ("left_out", "replaces", "new", "known", "not_joined", "changed", "retests", "approvals")
        whole = {name: _plain(getattr(self, name)) for name in names}
        values = {name: whole.pop(name) for name in ("new", "known", "not_joined", "changed", "retests")}
        return {**whole, "values": values}


NO_PROVENANCE = Provenance()
"""Where no records are kept."""


def provenance_from_json(data: Mapping[str, Any]) -> Provenance:
    """Return what `Provenance.to_json` wrote; keys of later versions are passed over.

    Raises
    ------
    KeyError, TypeError, ValueError
        Where a part is missing or of another kind.
    """
    left_out, replaces = data["left_out"], data["replaces"]
    return Provenance(
        others=tuple(_other(item) for item in data["others"]),
        without_report=int(data["without_report"]),
        left_out=None if left_out is None else _of(LeftOut, left_out, cells=_texts(left_out["cells"])),
        replaces=(
            None if replaces is None else _of(Replaces, replaces, changes=_changes(replaces["changes"]))
        ),
        new=int(data["new"]),
        known=int(data["known"]),
        not_joined=int(data["not_joined"]),
        changed=tuple(_of(ValueChange, item) for item in data["changed"]),
        retests=tuple(_of(Retest, item) for item in data["retests"]),
        approvals=tuple(_of(Approval, item, sequence=int(item["sequence"])) for item in data["approvals"]),
    )


def _other(item: Mapping[str, Any]) -> OtherRun:
    answers = tuple((str(name), str(code)) for name, code in item["answers"])
    return _of(OtherRun, item, k=int(item["k"]), answers=answers, changes=_changes(item["changes"]))


def _changes(items: Sequence[Mapping[str, Any]]) -> tuple[Change, ...]:
    return tuple(
        _of(Change, item, before=_text_or_none(item["before"]), after=_text_or_none(item["after"]))
        for item in items
    )


def _of(kind: type[_T], item: Mapping[str, Any], **given: Any) -> _T:
    """Return one value: the fields given, and every other one as text."""
    names = [f.name for f in fields(kind)]  # type: ignore[arg-type]
    return kind(**{name: given[name] if name in given else str(item[name]) for name in names})


def _texts(items: Sequence[Any]) -> tuple[str, ...]:
    return tuple(str(item) for item in items)


def _text_or_none(value: Any) -> str | None:
    return None if value is None else str(value)


def _plain(value: Any) -> Any:
    if isinstance(value, tuple):
        return [_plain(item) for item in value]
    if hasattr(value, "__dataclass_fields__"):
        return {f.name: _plain(getattr(value, f.name)) for f in fields(value)}
    return value
