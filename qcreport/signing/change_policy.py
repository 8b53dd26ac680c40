"""Which changes may follow a seal: signatures in the fields that exist, and proofs of signatures."""

from __future__ import annotations

from collections.abc import Iterator
from functools import cache
from typing import Any

from pyhanko.pdf_utils import generic
from pyhanko.pdf_utils.reader import HistoricalResolver, RawPdfPath
from pyhanko.sign.diff_analysis import DEFAULT_DIFF_POLICY, ModificationLevel, StandardDiffPolicy
from pyhanko.sign.diff_analysis.rules_api import Context, ReferenceUpdate, WhitelistRule


class TaggedSignatureField(WhitelistRule):
    """Let a signature field be reached through the structure tree while it is filled.

    A tagged field is also named by its structure element, and the stock policy clears only one form of that
    path. What may change inside the field stays the business of the rules for form fields: this rule clears
    the way to the widget, never its content.
    """

    def apply(self, old: HistoricalResolver, new: HistoricalResolver) -> Iterator[ReferenceUpdate]:
        """Yield each structure path of each signature widget that the new revision overrides."""
        for reference in new.explicit_refs_in_revision():  # type: ignore[no-untyped-call]
            if old.is_ref_unassignable(reference) or not _is_signature_widget(old(reference)):
                continue
            for path in old._get_usages_of_ref(reference):
                if _is_structure_path(path):
                    yield ReferenceUpdate(reference, context_checked=Context.from_absolute(old, path))


def _is_signature_widget(item: Any) -> bool:
    return (
        isinstance(item, generic.DictionaryObject)
        and item.get("/FT") == "/Sig"
        and item.get("/Subtype") == "/Widget"
    )


def _is_structure_path(path: RawPdfPath) -> bool:
    steps = tuple(path)
    return steps[:2] == ("/Root", "/StructTreeRoot") and steps[-1] == "/Obj"


@cache
def change_policy() -> StandardDiffPolicy:
    """Return the policy by which everything appended after a seal is judged."""
    tagged = TaggedSignatureField().as_qualified(ModificationLevel.LTA_UPDATES)
    return StandardDiffPolicy(
        global_rules=[*DEFAULT_DIFF_POLICY.global_rules, tagged],
        form_rule=DEFAULT_DIFF_POLICY.form_rule,
    )
