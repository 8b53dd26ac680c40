"""The verdict in words."""

from __future__ import annotations

from typing import Any

import pytest
from signing.appending import countersigned, with_changed_page
from signing.conftest import LATER
from signing.keys_fixture import key_of

from qcreport.audit.verdict import not_judged
from qcreport.audit.verify import verify_report
from qcreport.audit.words import plain, verdict_lines
from qcreport.canonical import in_groups_of_eight
from qcreport.signing.keys import SigningKey

from .example import repeats, sealed_with


def lines(pdf: bytes, *keys: SigningKey, **options: Any) -> list[str]:
    roots = tuple(k.certificate for k in keys) or None
    settings: dict[str, Any] = {"recompute_with": repeats, **options}
    return verdict_lines(verify_report(pdf, roots=roots, now=LATER, **settings).to_json())


def test_a_valid_report_by_a_trusted_key(report: bytes, service_key: SigningKey) -> None:
    fingerprint = in_groups_of_eight(service_key.fingerprint_sha256)
    assert lines(report, service_key) == [
        "Report 2026-0042",
        "Valid: nothing changed since it was sealed; all 6 attachments match; "
        "computed anew from them, every number repeats.",
        "Sealed by QC reports, stated time 2026-11-02T06:12:00Z (B-B).",
        f"The seal is by a certificate you trust: {fingerprint}",
        "Note on the seal: the time is the signer's own statement.",
    ]


def test_without_roots_the_fingerprint_is_to_be_compared(report: bytes, service_key: SigningKey) -> None:
    fingerprint = in_groups_of_eight(service_key.fingerprint_sha256)
    assert (
        f"Who sealed this is not proven; compare the fingerprint {fingerprint} "
        "with the one the laboratory publishes."
    ) in lines(report)


def test_an_untrusted_key_is_said_to_be_one(report: bytes, person_key: SigningKey) -> None:
    assert any(
        line.startswith("The seal is not by any certificate you trust") for line in lines(report, person_key)
    )


def test_signatures_are_told(report: bytes, service_key: SigningKey, person_key: SigningKey) -> None:
    other = key_of("B. Authoriser", purpose="person")
    pdf = countersigned(countersigned(report, person_key, "Reviewed"), other, "Authorised")
    told = lines(pdf, service_key)
    assert "since it was sealed only 2 signatures were added" in told[1]
    place = told.index(
        "Signed in the field Reviewed by A. Reviewer, meaning 'Review', stated time 2026-11-02T06:12:00Z."
    )
    assert told[place + 1] == (
        "That is: somebody whose certificate says A. Reviewer signed the report as reviewed; neither the "
        "report's seal nor the certificates given vouch for that certificate."
    )
    assert told[place + 3].startswith("Signed in the field Authorised by B. Authoriser")
    assert len(told) == place + 6


def test_one_attachment_that_does_not_match(files: dict[str, bytes], service_key: SigningKey) -> None:
    told = lines(sealed_with({**files, "plan.toml": b"other"}, service_key), service_key)
    assert told[1] == "Not valid: 1 of 6 attachments does not match: plan.toml."
    assert "- plan.toml: it is not the file that the report was made from" in told


def test_a_change_after_the_seal(report: bytes, service_key: SigningKey) -> None:
    told = lines(with_changed_page(report), service_key)
    assert told[1] == "Not valid: it was changed after it was sealed."


def test_a_broken_seal_comes_first(report: bytes, service_key: SigningKey) -> None:
    broken = bytearray(report)
    broken[report.index(b"<x:xmpmeta") + 3] ^= 1
    told = lines(bytes(broken), service_key)
    assert told[1] == "Not valid: the seal does not hold: bytes that it covers were changed after signing."


@pytest.mark.parametrize(
    ("count", "words"), [(1, "1 value does not repeat"), (12, "12 values do not repeat")]
)
def test_numbers_that_do_not_repeat_are_listed_up_to_ten(
    report: bytes, service_key: SigningKey, count: int, words: str
) -> None:
    def otherwise(evidence: Any) -> dict[str, Any]:
        return {**repeats(evidence), **{f"extra{i:02}": i for i in range(count)}}

    told = lines(report, service_key, recompute_with=otherwise)
    assert words in told[1]
    assert "- extra00: nothing in the report, 0 recomputed" in told
    assert ("- and 2 more; --json lists them" in told) is (count == 12)


def test_numbers_not_computed_anew_are_said_to_be(report: bytes, service_key: SigningKey) -> None:
    told = lines(report, service_key, recompute=False, recompute_with=None)
    assert told[1].endswith("the numbers were not computed anew.")


def test_a_stopped_check_says_why() -> None:
    told = verdict_lines(not_judged("checking it took longer than 3 seconds and was stopped"))
    assert told[0] == "Not valid: checking it took longer than 3 seconds and was stopped."


def test_other_versions_are_noted(report: bytes, service_key: SigningKey) -> None:
    def newer(evidence: Any) -> dict[str, Any]:
        return {**repeats(evidence), "versions": {"qcreport": "0.1.0", "numpy": "9"}}

    assert "Note: made with numpy 2.0.0, recomputed with 9." in lines(
        report, service_key, recompute_with=newer
    )


@pytest.mark.parametrize(
    ("text", "shown"),
    [
        ("\x1b]0;owned\x07QC", "]0;owned QC"),
        ("a\u202egnp.exe", "a gnp.exe"),
        ("line\r\nbreak\u2028more", "line break more"),
        ("μm ≤ 3", "μm ≤ 3"),
        ("x" * 1000, "x" * 300 + "…"),
        (None, "None"),
    ],
)
def test_nothing_steers_the_terminal(text: object, shown: str) -> None:
    assert plain(text) == shown


def test_a_signature_that_does_not_hold_is_told() -> None:
    signature: dict[str, Any] = {
        "field": "Reviewed",
        "name": None,
        "meaning": None,
        "time": None,
        "valid": False,
    }
    verdict = {
        **not_judged("x"),
        "signatures": [
            {**signature, "trusted": False, "problems": [], "notes": [], "explanation": "it does not hold"}
        ],
    }
    told = verdict_lines(verdict)
    assert "Signed in the field Reviewed by somebody who cannot be read, no time stated." in told
    assert told[-1] == "That is: it does not hold."
