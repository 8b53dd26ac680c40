"""A report beside the records of the site that it comes from: what the file alone cannot show."""

from __future__ import annotations

from collections.abc import Iterator

from qcreport.audit.verdict import Json
from qcreport.canonical import sha256_hex
from qcreport.errors import EnvironmentFailedError, LedgerError
from qcreport.records import ledger
from qcreport.records.chain import Kind
from qcreport.records.chain_walk import walk_chain
from qcreport.records.facade import Records
from qcreport.records.run import Run

_ATTACHED = {
    "context.json": "context_sha256",
    "result.json": "result_sha256",
}
_RECORDED = ("report_sha256", "context_sha256", "result_sha256")


def with_records(pdf: bytes, verdict: Json, records: Records) -> Json:
    """Return the verdict with what ledger and archive say: `records`, and every problem that they show.

    Parameters
    ----------
    pdf : bytes
        The report as checked.
    verdict : dict
        The document `qcreport/verify/1` of that check.
    records : Records
        Those of the site.
    """
    number = records.number_of_version(sha256_hex(pdf)) or verdict["report"]
    run = None if number is None else records.run_of_number(number)
    found = tuple(f"records: {problem}" for problem in _problems(pdf, verdict, records, run))
    state = None
    if run is not None and run.sealing is not None:
        standing = records.standings().get(run.number)
        state = "sealed" if standing is None else standing.words()
        if standing is not None and standing.reason:
            state += f" ({standing.reason})"
    return {
        **verdict,
        "valid": verdict["valid"] and not found,
        "problems": [*verdict["problems"], *found],
        "records": {"matches": not found, "state": state},
    }


def _problems(pdf: bytes, verdict: Json, records: Records, run: Run | None) -> Iterator[str]:
    if run is None or run.sealing is None:
        yield f"this site has no report {verdict['report'] or 'of that number'}"
        return
    yield from _version_problems(pdf, records, run)
    yield from _ledger_problems(verdict, records, run)
    yield from _archive_problems(records, run)


def _version_problems(pdf: bytes, records: Records, run: Run) -> Iterator[str]:
    """Yield signatures that the ledger has and the file lacks, or that this is no version of the report."""
    versions = records.versions_of(run.number)
    digest = sha256_hex(pdf)
    place = next((i for i, version in enumerate(versions) if version.sha256 == digest), None)
    if place is None:
        yield f"this file is none of the {len(versions)} versions of {run.number} that the ledger has"
        return
    for version in versions[place + 1 :]:
        if version.signature is not None:
            yield (
                f"the signature as {version.signature.role} by {version.signature.name}, which the ledger "
                "has, is missing: this is an older copy, or one cut back"
            )


def _ledger_problems(verdict: Json, records: Records, run: Run) -> Iterator[str]:
    with records.database.read() as connection:
        chain = walk_chain(lambda: ledger.entries(connection), [run.ledger_head])
        sealed = [e for e in ledger.entries(connection, kind=Kind.SEALED) if e.intact_as(e.sequence)]
    yield from (problem.text for problem in chain.problems)
    facts = next((f for f in (e.facts_object() for e in sealed) if f.get("number") == run.number), None)
    if facts is None:
        yield f"the ledger has no entry of the seal of {run.number} that holds"
        return
    listed = {
        "report_sha256": None if run.sealing is None else run.sealing.report_sha256,
        "context_sha256": run.context_sha256,
        "result_sha256": run.result_sha256,
    }
    for name in _RECORDED:
        if facts.get(name) != listed[name]:
            yield f"the {name} of {run.number} differs between the list of runs and the ledger"
    for attachment in verdict["attachments"]:
        recorded = _ATTACHED.get(attachment["name"])
        if recorded is not None and attachment["sha256"] != facts.get(recorded):
            yield f"the attached {attachment['name']} is not the one that the ledger has for {run.number}"


def _archive_problems(records: Records, run: Run) -> Iterator[str]:
    """Yield every file of this report that the archive lacks, or holds otherwise."""
    digests = [*run.inputs.digests(), run.context_sha256]
    digests += [] if run.result_sha256 is None else [run.result_sha256]
    digests += [v.sha256 for v in records.versions_of(run.number) if v.signature is not None]
    for digest in dict.fromkeys(digests):
        try:
            records.archive.read(digest)
        except (LedgerError, EnvironmentFailedError) as error:
            yield error.text
