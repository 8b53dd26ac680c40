"""The attachments of a report held against what its context and its result say of them."""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from qcreport.analysis.context import Context, context_from_json
from qcreport.audit.strict_form import deviations
from qcreport.audit.verdict import AttachmentStatus
from qcreport.canonical import sha256_hex
from qcreport.signing.attachments import CONTEXT_NAME, RESULT_NAME, is_export

EXPORT = "export"


@dataclass(frozen=True, slots=True, kw_only=True)
class Evidence:
    """What a report carries, read as far as it can be."""

    files: Mapping[str, bytes]
    """Attachments by fixed name."""
    context: Context | None
    """None where context.json is absent or not readable."""
    result: Mapping[str, Any] | None
    """None where result.json is absent or not readable."""
    attachments: tuple[AttachmentStatus, ...]
    """Every attachment that a report must carry, with its match."""

    @property
    def complete(self) -> bool:
        """Return whether every attachment is there and matches."""
        return all(a.matches for a in self.attachments)

    @property
    def export_name(self) -> str | None:
        """Return the fixed name of the attached export."""
        return next(filter(is_export, self.files), None)


def gather(files: Mapping[str, bytes]) -> Evidence:
    """Read context and result and hold every attachment against them."""
    context = _context(files.get(CONTEXT_NAME))
    result = _document(files.get(RESULT_NAME))
    export = next(filter(is_export, files), None)
    expected = _expected(context)
    told = [
        _by_digest(files, name, expected.get(name)) for name in ("plan.toml", "layout.toml", "rules.toml")
    ]
    told.append(_by_digest(files, export or EXPORT, expected.get(EXPORT)))
    told.append(_context_status(files, context))
    told.append(_result_status(files, result, expected))
    return Evidence(
        files=files,
        context=context,
        result=result,
        attachments=tuple(sorted(told, key=lambda a: a.name)),
    )


def _expected(context: Context | None) -> dict[str, str]:
    """Return the digests that the context states."""
    if context is None:
        return {}
    return {
        EXPORT: context.export_sha256,
        "plan.toml": context.plan_sha256,
        "layout.toml": context.layout_sha256,
        "rules.toml": context.rules_sha256,
    }


def _status(files: Mapping[str, bytes], name: str, problem: str | None) -> AttachmentStatus:
    if name not in files:
        return AttachmentStatus(name=name, sha256=None, matches=False, problem="it is missing")
    digest = sha256_hex(files[name])
    return AttachmentStatus(name=name, sha256=digest, matches=problem is None, problem=problem)


def _by_digest(files: Mapping[str, bytes], name: str, expected: str | None) -> AttachmentStatus:
    if expected is None:
        return _status(files, name, "context.json does not say what it should be")
    same = name in files and sha256_hex(files[name]) == expected
    return _status(files, name, None if same else "it is not the file that the report was made from")


def _context_status(files: Mapping[str, bytes], context: Context | None) -> AttachmentStatus:
    return _status(files, CONTEXT_NAME, None if context is not None else "it cannot be read")


def _result_status(
    files: Mapping[str, bytes], result: Mapping[str, Any] | None, expected: Mapping[str, str]
) -> AttachmentStatus:
    """Hold the result against export and plan; its numbers are checked by computing them anew."""
    if result is None:
        return _status(files, RESULT_NAME, "it cannot be read")
    for part, key in ((EXPORT, EXPORT), ("plan", "plan.toml")):
        stated = result.get(part)
        if not isinstance(stated, dict) or stated.get("sha256") != expected.get(key):
            return _status(files, RESULT_NAME, f"it is the result of another {part}")
    return _status(files, RESULT_NAME, None)


def _context(data: bytes | None) -> Context | None:
    """Return the context where it can be read and every value has the form in which we write it."""
    document = _document(data)
    if document is None:
        return None
    try:
        context = context_from_json(document)
    except ValueError:
        return None
    return None if any(deviations(document, context.to_json())) else context


def _document(data: bytes | None) -> dict[str, Any] | None:
    """Return a JSON object, or None for anything else; NaN and infinities are not JSON."""
    if data is None:
        return None
    try:
        document = json.loads(data.decode("utf-8"), parse_constant=_refuse_constant)
    except (ValueError, RecursionError):
        return None
    return document if isinstance(document, dict) else None


def _refuse_constant(name: str) -> float:
    raise ValueError(f"{name} is not a JSON number")
