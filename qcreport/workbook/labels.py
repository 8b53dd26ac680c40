"""Judging names: spaces trimmed, capitals merged, look-alikes refused."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable

from qcreport.errors import ExportRefusedError
from qcreport.workbook.limits import Limits
from qcreport.workbook.lookalikes import is_unusual, skeleton
from qcreport.workbook.notices import NoticeBook
from qcreport.workbook.readings import Label
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

    def __init__(self, labels: Iterable[Label], *, what: str, different: frozenset[str]) -> None:
        self._what, self._different = what, different
        by_text: dict[str, dict[Label, None]] = {}
        for label in labels:
            by_text.setdefault(label.text, {})[label] = None
        self._by_text = {text: tuple(found) for text, found in by_text.items()}
        self._final: dict[str, str] = {}
        self._merged_case: list[str] = []
        self._merge_case()

    def _merge_case(self) -> None:
        """Give names that differ only in capitals the spelling that is most frequent, or came first."""
        counts: Counter[str] = Counter()
        for text, labels in self._by_text.items():
            counts[trimmed(text)] += len(labels)
        spellings: dict[str, list[str]] = {}
        for name in counts:
            key = name if name in self._different else name.casefold()
            spellings.setdefault(key, []).append(name)
        best = {name: max(group, key=lambda n: counts[n]) for group in spellings.values() for name in group}
        for text in self._by_text:
            name = trimmed(text)
            self._final[text] = best[name]
            if best[name] != name:
                self._merged_case.append(text)

    def of(self, label: Label) -> str:
        """Return the form of a name that counts."""
        return self._final[label.text]

    def distinct(self) -> tuple[str, ...]:
        """Return the different names in order of first appearance."""
        return tuple(dict.fromkeys(self._final.values()))

    def check(self, limits: Limits) -> None:
        """Refuse names that are too long, too many, or that look alike."""
        for text, labels in self._by_text.items():
            if len(trimmed(text)) > limits.max_name_characters:
                raise refuse_long_name(labels[0], limits)
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
        return next(self._by_text[text][0] for text, final in self._final.items() if final == name)

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
        for text, labels in self._by_text.items():
            if trimmed(text) != text:
                notices.add("group_name_trimmed", *(label.ref for label in labels if label.ref is not None))
        for text in self._merged_case:
            refs = [label.ref for label in self._by_text[text] if label.ref is not None]
            detail = f"{quoted(trimmed(text))} is read as {quoted(self._final[text])}"
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
