"""Judging names: spaces trimmed, capitals merged, look-alikes refused."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Sequence

from qcreport.errors import ExportRefusedError
from qcreport.workbook.limits import Limits
from qcreport.workbook.lookalikes import is_unusual, skeleton
from qcreport.workbook.notices import NoticeBook
from qcreport.workbook.readings import AnyLabel, Label, Reading
from qcreport.workbook.refusals import quoted, refused

_INVISIBLE_ENDS = " \t\r\n\u00a0\u200b\u2060\ufeff"


def trimmed(text: str) -> str:
    """Return a name without white space and invisible characters around it."""
    before = None
    while before != text:
        before, text = text, text.strip().strip(_INVISIBLE_ENDS)
    return text


class Names:
    """The names of one kind (batches or lines) in one export, each with the form that counts."""

    def __init__(
        self,
        readings: Sequence[Reading],
        which: Callable[[Reading], AnyLabel | None],
        *,
        what: str,
        different: frozenset[str],
    ) -> None:
        self._what, self._different = what, different
        self._first_labels: dict[str, Label] = {}
        for reading in readings:
            label = which(reading)
            if label is not None and label.text not in self._first_labels:
                self._first_labels[label.text] = reading.placed(label)
        self._names = {text: trimmed(text) for text in self._first_labels}
        self._final: dict[str, str] = {}
        self._merged_case: list[str] = []
        spellings = self._spellings()
        self._labels = self._changed_labels(readings, which, spellings)
        self._merge_case(spellings)

    def _spellings(self) -> list[list[str]]:
        """Return the names in groups that differ only in capitals."""
        spellings: dict[str, list[str]] = {}
        for name in dict.fromkeys(self._names.values()):
            key = name if name in self._different else name.casefold()
            spellings.setdefault(key, []).append(name)
        return list(spellings.values())

    def _changed_labels(
        self,
        readings: Sequence[Reading],
        which: Callable[[Reading], AnyLabel | None],
        spellings: Sequence[Sequence[str]],
    ) -> dict[str, tuple[Label, ...]]:
        """Return all places of the texts that may not stay as they are: few, so only these are collected."""
        several = {name for group in spellings if len(group) > 1 for name in group}
        found: dict[str, dict[Label, None]] = {
            text: {} for text, name in self._names.items() if name != text or name in several
        }
        for reading in readings if found else ():
            label = which(reading)
            if label is not None and label.text in found:
                found[label.text][reading.placed(label)] = None
        return {text: tuple(labels) for text, labels in found.items()}

    def _merge_case(self, spellings: Sequence[Sequence[str]]) -> None:
        """Give names that differ only in capitals the spelling that is most frequent, or came first."""
        counts: Counter[str] = Counter()
        for text, labels in self._labels.items():
            counts[self._names[text]] += len(labels)
        best = {name: max(group, key=lambda n: counts[n]) for group in spellings for name in group}
        for text, name in self._names.items():
            self._final[text] = best[name]
            if best[name] != name:
                self._merged_case.append(text)

    def of(self, label: AnyLabel) -> str:
        """Return the form of a name that counts."""
        return self._final[label.text]

    def distinct(self) -> tuple[str, ...]:
        """Return the different names in order of first appearance."""
        return tuple(dict.fromkeys(self._final.values()))

    def check(self, limits: Limits) -> None:
        """Refuse names that are too long, too many, or that look alike."""
        for text, label in self._first_labels.items():
            if len(self._names[text]) > limits.max_name_characters:
                raise refuse_long_name(label, limits)
        names = self.distinct()
        if len(names) > limits.max_groups:
            raise self._too_many(len(names), limits)
        by_skeleton: dict[str, str] = {}
        for name in names:
            if name in self._different:
                continue
            first = by_skeleton.setdefault(skeleton(name), name)
            if first != name:
                raise self._lookalikes(first, name)

    def _first(self, name: str) -> Label:
        return next(self._first_labels[text] for text, final in self._final.items() if final == name)

    def _lookalikes(self, first: str, second: str) -> ExportRefusedError:
        labels = (self._first(first), self._first(second))
        places = [str(label.ref) if label.ref is not None else "not in a cell" for label in labels]
        cells = [str(label.ref) for label in labels if label.ref is not None]
        return refused(
            "lookalike_groups",
            where=", ".join(places),
            found=f"{self._what.capitalize()} names {quoted(first)} ({places[0]}) and {quoted(second)} "
            f"({places[1]}) may be the same.",
            expected="Names that cannot be taken for one another.",
            next_step="Correct the names, or state under [groups] different = [...] in the layout that they "
            "differ.",
            cells=cells,
        )

    def _too_many(self, found: int, limits: Limits) -> ExportRefusedError:
        return refused(
            "too_many_groups",
            where="the export",
            found=f"There are {found:,} different {self._what} names.",
            expected=f"The limit is {limits.max_groups:,}.",
            next_step="Check that the layout names the right column, or export fewer at a time.",
        )

    def note(self, notices: NoticeBook) -> None:
        """Note what was done to names and which are unusual."""
        for text, labels in self._labels.items():
            if self._names[text] != text:
                notices.add("group_name_trimmed", *(label.ref for label in labels if label.ref is not None))
        for text in self._merged_case:
            refs = [label.ref for label in self._labels[text] if label.ref is not None]
            detail = f"{quoted(self._names[text])} is read as {quoted(self._final[text])}"
            notices.add("group_case_merged", *refs, detail=detail)
        for name in self.distinct():
            if is_unusual(name):
                ref = self._first(name).ref
                notices.add("unusual_group_names", *([ref] if ref is not None else []))


def refuse_long_name(label: Label, limits: Limits) -> ExportRefusedError:
    """Return the refusal of a name that is too long."""
    place = str(label.ref) if label.ref is not None else "a name"
    return refused(
        "name_too_long",
        where=place,
        found=f"The name {quoted(label.text)} has {len(label.text):,} characters.",
        expected=f"The limit is {limits.max_name_characters} characters.",
        next_step="Check that the layout names the right column, or shorten the name.",
        cells=[str(label.ref)] if label.ref is not None else [],
    )
