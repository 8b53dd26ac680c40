"""The sections *Where this comes from*, *How to check without our software* and *Terms*."""

from __future__ import annotations

from qcreport.analysis.context import Context
from qcreport.analysis.result import Result
from qcreport.canonical import in_groups_of_eight
from qcreport.report.attachment import export_attachment_name
from qcreport.report.blocks import Facts, Paragraph, Section, Steps, Subheading
from qcreport.report.moments import local_time
from qcreport.report.words_en import Words


def origin_section(result: Result, context: Context, words: Words) -> Section:
    """Return digests, versions, records and run."""
    digests = (
        ("export", context.export_sha256),
        ("plan", context.plan_sha256),
        ("layout", context.layout_sha256),
        ("rules", context.rules_sha256),
    )
    rows = [(words.digest_of(name), in_groups_of_eight(digest)) for name, digest in digests]
    head = in_groups_of_eight(context.ledger_hash) if context.ledger_sequence else words.no_records()
    rows.append((words.records_label(context.ledger_sequence), head))
    rows.append((words.seal_label(), in_groups_of_eight(context.seal_fingerprint_sha256)))
    templates = [(name, in_groups_of_eight(digest)) for name, digest in context.templates]
    versions = ", ".join(f"{name} {version}" for name, version in result.versions)
    facts = (
        (
            words.export_label(),
            words.received(
                context.export_name, local_time(context.received_at, context.time_zone, words.DATE)
            ),
        ),
        (words.run_label(), words.run(context.run_k, context.run_n, context.run_reason)),
        (words.software_label(), versions or f"qcreport {context.software_version}"),
        (words.level_label(), words.level_aimed(context.pades_level, context.seal_subject)),
        (words.templates_label(), words.changed_by_lab(", ".join(context.templates_changed))),
    )
    return Section(
        anchor="origin",
        heading=words.ORIGIN,
        blocks=(
            Facts(rows=facts),
            Subheading(text=words.digests_heading()),
            Facts(rows=tuple(rows), digests=True),
            Subheading(text=words.template_digests_heading()),
            Facts(rows=tuple(templates), digests=True),
        ),
    )


def checking_section(context: Context, words: Words) -> Section:
    """Return the steps that need none of our software."""
    export_file = export_attachment_name(context.export_name)
    fingerprint = in_groups_of_eight(context.seal_fingerprint_sha256)
    return Section(
        anchor="checking",
        heading=words.CHECKING,
        blocks=(
            Paragraph(text=words.checking_intro()),
            Steps(rows=words.check_steps(context.report_number, export_file)),
            Facts(rows=((words.fingerprint_line(), fingerprint),), digests=True),
            Subheading(text=words.attachments_intro()),
            Facts(rows=words.attachments(export_file)),
            Paragraph(text=words.own_check(context.report_number), note=True),
        ),
    )


def terms_section(words: Words) -> Section:
    """Return what the words mean."""
    return Section(
        anchor="terms",
        heading=words.TERMS,
        blocks=(Paragraph(text=words.terms_intro()), Facts(rows=words.terms())),
    )
