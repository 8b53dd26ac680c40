"""One report checked: seal, attachments and numbers, and every way in which they disagree."""

from __future__ import annotations

import json
from typing import Any

import jsonschema
import pytest
from signing.appending import countersigned, with_changed_page, with_swapped_attachment
from signing.conftest import LATER
from signing.keys_fixture import key_of

from qcreport.audit.evidence import Evidence
from qcreport.audit.verdict import VerifyStatus, not_judged
from qcreport.audit.verify import verify_report
from qcreport.canonical import to_readable_json_bytes
from qcreport.errors import ExportRefusedError, NotOurReportError
from qcreport.signing.keys import SigningKey

from .example import attachments, repeats, result_document, sealed_with
from .schema import schema


def verified(pdf: bytes, *keys: SigningKey, recompute_with: Any = repeats) -> VerifyStatus:
    status = verify_report(
        pdf, roots=tuple(k.certificate for k in keys), now=LATER, recompute_with=recompute_with
    )
    document = json.loads(json.dumps(status.to_json(), allow_nan=False))
    jsonschema.validate(document, schema())
    assert (document["valid"], document["trusted"]) == (status.valid, status.trusted)
    assert status.valid or document["problems"] or document["recomputed"]["differences"]
    return status


def wrong(status: VerifyStatus) -> dict[str, str | None]:
    return {a.name: a.problem for a in status.attachments if not a.matches}


def test_an_untouched_report_is_valid(report: bytes, service_key: SigningKey) -> None:
    status = verified(report, service_key)
    assert status.valid
    assert status.trusted is True
    assert [a.name for a in status.attachments] == [
        "context.json",
        "export.xlsx",
        "layout.toml",
        "plan.toml",
        "result.json",
        "rules.toml",
    ]
    assert wrong(status) == {}
    assert (status.report, status.recomputed.done) == ("2026-0042", True)


def test_its_document_has_the_promised_form(report: bytes, service_key: SigningKey) -> None:
    document = verified(report, service_key).to_json()
    assert document["sealed"]["signer"] == "QC reports"
    assert document["sealed"]["fingerprint_sha256"] == service_key.fingerprint_sha256
    assert document["sealed"]["time"] == "2026-11-02T06:12:00Z"
    assert document["signatures"] == []
    assert document["recomputed"]["matches"] is True
    assert document["recomputed"]["differences"] == []
    assert (document["pades_level"], document["changed_after_seal"]) == ("B-B", False)
    assert set(document["attachments"][0]) == {"name", "sha256", "matches"}


def test_a_countersignature_leaves_it_valid(
    report: bytes, service_key: SigningKey, person_key: SigningKey
) -> None:
    status = verified(countersigned(report, person_key, "Reviewed"), service_key, person_key)
    assert status.valid
    assert status.trusted is True
    (signature,) = status.to_json()["signatures"]
    assert (signature["name"], signature["meaning"], signature["valid"]) == ("A. Reviewer", "Review", True)
    assert signature["time"] == "2026-11-02T06:12:00Z"


def test_a_signature_by_an_unknown_key_is_not_trusted(
    report: bytes, service_key: SigningKey, person_key: SigningKey
) -> None:
    status = verified(countersigned(report, person_key, "Authorised"), service_key)
    assert status.valid
    assert status.pdf.seal.trusted is True
    assert status.trusted is False


def test_without_roots_it_is_valid_and_trust_open(report: bytes) -> None:
    status = verify_report(report, roots=None, now=LATER, recompute_with=repeats)
    assert (status.valid, status.trusted) == (True, None)
    jsonschema.validate(status.to_json(), schema())


def test_changes_after_the_seal_are_not_valid(report: bytes, service_key: SigningKey) -> None:
    for changed in (with_changed_page(report), with_swapped_attachment(report, "plan.toml", b"x")):
        status = verified(changed, service_key)
        assert not status.valid
        assert status.to_json()["changed_after_seal"] is True
        assert wrong(status) == {}, "attachments come from the sealed revision"


@pytest.mark.parametrize("name", ["plan.toml", "layout.toml", "rules.toml", "export.xlsx"])
def test_an_attachment_that_is_not_the_stated_one(
    files: dict[str, bytes], service_key: SigningKey, name: str
) -> None:
    """Sealed so by the key itself: only the digests tell."""
    status = verified(sealed_with({**files, name: files[name] + b" "}, service_key), service_key)
    assert status.pdf.holds
    assert not status.valid
    assert wrong(status) == {name: "it is not the file that the report was made from"}
    assert status.recomputed.done is False
    assert status.recomputed.matches is False


@pytest.mark.parametrize("name", ["plan.toml", "export.xlsx", "context.json", "result.json"])
def test_a_missing_attachment(files: dict[str, bytes], service_key: SigningKey, name: str) -> None:
    left = {kept: data for kept, data in files.items() if kept != name}
    status = verified(sealed_with(left, service_key), service_key)
    assert not status.valid
    told = "export" if name == "export.xlsx" else name
    assert wrong(status)[told] == "it is missing"


@pytest.mark.parametrize(
    "data", [b"", b"[]", b'{"schema": 1}', b"\xff", b"[" * 200_000, b'{"schema": NaN}'], ids=repr
)
def test_context_and_result_that_cannot_be_read(
    files: dict[str, bytes], service_key: SigningKey, data: bytes
) -> None:
    status = verified(sealed_with({**files, "context.json": data}, service_key), service_key)
    assert not status.valid
    assert wrong(status)["context.json"] == "it cannot be read"
    assert wrong(status)["plan.toml"] == "context.json does not say what it should be"


@pytest.mark.parametrize(
    ("part", "key", "value"),
    [
        ("run", "k", "1"),
        ("run", "k", True),
        ("report", "revision", 1.9),
        (None, "demonstration", "false"),
        (None, "demonstration", 0),
        (None, "templates_changed", "ab"),
        ("plan", "name", 7),
    ],
)
def test_a_context_with_a_value_of_another_kind(
    files: dict[str, bytes], service_key: SigningKey, part: str | None, key: str, value: object
) -> None:
    context = json.loads(files["context.json"])
    (context if part is None else context[part])[key] = value
    pdf = sealed_with({**files, "context.json": to_readable_json_bytes(context)}, service_key)
    status = verified(pdf, service_key)
    assert not status.valid
    assert wrong(status)["context.json"] == "it cannot be read"


def test_a_context_of_a_later_version_may_say_more(files: dict[str, bytes], service_key: SigningKey) -> None:
    context = {**json.loads(files["context.json"]), "weather": {"rain": True}}
    pdf = sealed_with({**files, "context.json": to_readable_json_bytes(context)}, service_key)
    assert verified(pdf, service_key).valid


@pytest.mark.parametrize("part", ["export", "plan"])
def test_a_result_of_something_else(files: dict[str, bytes], service_key: SigningKey, part: str) -> None:
    other = result_document()
    other[part]["sha256"] = "0" * 64
    pdf = sealed_with({**files, "result.json": to_readable_json_bytes(other)}, service_key)
    status = verified(pdf, service_key)
    assert wrong(status) == {"result.json": f"it is the result of another {part}"}
    assert not status.valid


def test_a_seal_by_another_key_than_the_report_names(service_key: SigningKey) -> None:
    stranger = key_of("QC reports")
    status = verified(sealed_with(attachments(service_key), stranger), service_key)
    assert not status.valid
    assert status.trusted is False
    assert status.problems == ("the report was sealed with another key than the one it names",)


def test_a_whole_forgery_is_consistent_and_not_trusted(service_key: SigningKey) -> None:
    stranger = key_of("QC reports")
    status = verified(sealed_with(attachments(stranger), stranger), service_key)
    assert status.valid
    assert status.trusted is False


def test_numbers_that_do_not_repeat(report: bytes, service_key: SigningKey) -> None:
    def otherwise(evidence: Evidence) -> dict[str, Any]:
        document = repeats(evidence)
        document["characteristics"][0]["answer"] = "matters"
        return document

    status = verified(report, service_key, recompute_with=otherwise)
    assert not status.valid
    assert status.recomputed.differences == (
        "characteristics[0].answer: different in the report, matters recomputed",
    )


REFUSED = ExportRefusedError(
    "unreadable", file="export.xlsx", where="Whole file", found="No sheet.", expected="One.", next_step="Ask."
)


@pytest.mark.parametrize(
    ("failure", "words"),
    [(REFUSED, "No sheet"), (ValueError("x"), "do not fit together"), (KeyError("x"), "do not fit together")],
)
def test_what_cannot_be_computed_anew_is_not_valid(
    report: bytes, service_key: SigningKey, failure: Exception, words: str
) -> None:
    def fails(_: Evidence) -> dict[str, Any]:
        raise failure

    status = verified(report, service_key, recompute_with=fails)
    assert not status.valid
    assert words in status.recomputed.differences[0]


def test_it_can_be_checked_without_computing_anew(report: bytes, service_key: SigningKey) -> None:
    status = verify_report(report, roots=(service_key.certificate,), now=LATER, recompute=False)
    assert status.valid
    assert status.to_json()["recomputed"]["matches"] is None
    jsonschema.validate(status.to_json(), schema())


def test_the_evidence_handed_over_is_what_was_attached(
    report: bytes, files: dict[str, bytes], service_key: SigningKey
) -> None:
    seen: list[Evidence] = []

    def watch(evidence: Evidence) -> dict[str, Any]:
        seen.append(evidence)
        return repeats(evidence)

    verified(report, service_key, recompute_with=watch)
    assert seen[0].files == files
    assert seen[0].export_name == "export.xlsx"


def test_what_is_no_report_is_refused() -> None:
    with pytest.raises(NotOurReportError, match="not a PDF"):
        verify_report(b"no pdf", roots=None, now=LATER)


def test_a_stopped_check_has_the_same_form() -> None:
    document = not_judged("it took too long")
    jsonschema.validate(document, schema())
    assert document["valid"] is False


@pytest.mark.parametrize(
    "spoil", [{"valid": None}, {"trusted": "yes"}, {"pades_level": "B-X"}, {"sealed": {}}, {"report": 1}]
)
def test_the_schema_refuses_other_forms(spoil: dict[str, object]) -> None:
    with pytest.raises(jsonschema.ValidationError):
        jsonschema.validate({**not_judged("x"), **spoil}, schema())
