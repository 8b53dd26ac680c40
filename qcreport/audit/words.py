"""The verdict in plain sentences for a terminal."""

from __future__ import annotations

import unicodedata
from collections.abc import Iterator, Mapping
from typing import Any

from qcreport.audit.verdict import NOT_ASKED_FOR
from qcreport.canonical import in_groups_of_eight

_LONGEST = 300
_SHOWN_DIFFERENCES = 10
# Cc control, Cf format (bidirectional overrides), Co private, Cs surrogate, Zl and Zp line separators.
_HIDDEN = {"Cc", "Cf", "Co", "Cs", "Zl", "Zp"}


def plain(text: object) -> str:
    """Return text that cannot steer a terminal: control characters become spaces, long text is cut."""
    kept = "".join(" " if unicodedata.category(c) in _HIDDEN else c for c in str(text)[: 4 * _LONGEST])
    kept = " ".join(kept.split())
    return kept if len(kept) <= _LONGEST else kept[:_LONGEST] + "…"


def verdict_lines(verdict: Mapping[str, Any]) -> list[str]:
    """Return the lines printed for a document `qcreport/verify/1`."""
    return [plain(line) for line in _lines(verdict)]


def _lines(verdict: Mapping[str, Any]) -> Iterator[str]:
    if verdict["report"] is not None:
        yield f"Report {verdict['report']}"
    yield _answer(verdict)
    yield from _against(verdict)
    yield from _seal_lines(verdict)
    for signature in verdict["signatures"]:
        yield from _signature_lines(signature)
    yield from _more(verdict)
    for note in verdict["recomputed"]["notes"]:
        yield f"Note: {note}."


def _answer(verdict: Mapping[str, Any]) -> str:
    if not verdict["valid"]:
        return f"Not valid: {_first_reason(verdict)}."
    signed = len(verdict["signatures"])
    added = "nothing changed since it was sealed"
    if signed:
        added = f"since it was sealed only {_counted(signed, 'signature was', 'signatures were')} added"
    repeats = "computed anew from them, every number repeats"
    if verdict["recomputed"]["matches"] is None:
        repeats = "the numbers were not computed anew"
    if verdict["pages"]["matches"]:
        repeats += ", and the pages show them"
    return f"Valid: {added}; all {len(verdict['attachments'])} attachments match; {repeats}."


def _first_reason(verdict: Mapping[str, Any]) -> str:
    sealed, recomputed = verdict["sealed"], verdict["recomputed"]
    wrong = [a["name"] for a in verdict["attachments"] if not a["matches"]]
    if sealed["problems"]:
        return f"the seal does not hold: {sealed['problems'][0]}"
    if verdict["changed_after_seal"]:
        return "it was changed after it was sealed"
    if wrong:
        total = len(verdict["attachments"])
        verb = "does" if len(wrong) == 1 else "do"
        return f"{len(wrong)} of {total} attachments {verb} not match: {', '.join(wrong)}"
    if verdict["problems"]:
        return str(verdict["problems"][0])
    if verdict["pages"]["matches"] is False:
        return "its pages do not show what its result says"
    if recomputed["done"]:
        found = _counted(len(recomputed["differences"]), "value does", "values do")
        return f"{found} not repeat when computed anew"
    return "its numbers could not be checked"


def _against(verdict: Mapping[str, Any]) -> Iterator[str]:
    """Yield every reason, the first one too, then what did not repeat."""
    if verdict["valid"]:
        return
    reasons = [*verdict["sealed"]["problems"], *verdict["problems"]]
    for reason in dict.fromkeys(reasons):
        yield f"  - {reason}"
    differences = [*verdict["recomputed"]["differences"], *verdict["pages"]["differences"]]
    for difference in differences[:_SHOWN_DIFFERENCES]:
        if difference not in reasons:
            yield f"  - {difference}"
    if len(differences) > _SHOWN_DIFFERENCES:
        yield f"  - and {len(differences) - _SHOWN_DIFFERENCES} more; --json lists them"


def _seal_lines(verdict: Mapping[str, Any]) -> Iterator[str]:
    sealed = verdict["sealed"]
    if sealed["fingerprint_sha256"] is None:
        return
    fingerprint = in_groups_of_eight(sealed["fingerprint_sha256"])
    yield f"Sealed by {sealed['signer']}, {_when(sealed)} ({verdict['pades_level']})."
    if sealed["trusted"] is True:
        yield f"The seal is by a certificate you trust: {fingerprint}"
    elif sealed["trusted"] is False:
        yield f"The seal is not by any certificate you trust; its own has the fingerprint {fingerprint}"
    else:
        yield (
            f"Who sealed this is not proven; compare the fingerprint {fingerprint} "
            "with the one the laboratory publishes."
        )
    for note in sealed["notes"]:
        yield f"Note on the seal: {note}."


def _signature_lines(signature: Mapping[str, Any]) -> Iterator[str]:
    meaning = f", meaning {signature['meaning']!r}" if signature["meaning"] else ""
    name = signature["name"] or "somebody who cannot be read"
    yield f"Signed in the field {signature['field']} by {name}{meaning}, {_when(signature)}."
    yield f"  That is: {signature['explanation']}."
    for note in signature["notes"]:
        yield f"  Note: {note}."


def _more(verdict: Mapping[str, Any]) -> Iterator[str]:
    """Yield what was not compared, what the records say, and the versions."""
    pages = verdict["pages"]
    if pages["matches"] is None and verdict["recomputed"]["done"] and pages["reason"] != NOT_ASKED_FOR:
        yield f"The pages were not compared with the result: {pages['reason']}."
    if verdict["records"] is not None and verdict["records"]["state"] is not None:
        yield f"By the records of the site the report is {verdict['records']['state']}."
    made, here = verdict["versions"]["report"], verdict["versions"]["here"]
    if made is not None and made != here:
        yield f"Made with qcreport {made}, checked with {here}."


def _when(signature: Mapping[str, Any]) -> str:
    return f"stated time {signature['time']}" if signature["time"] else "no time stated"


def _counted(count: int, one: str, many: str) -> str:
    return f"1 {one}" if count == 1 else f"{count} {many}"
