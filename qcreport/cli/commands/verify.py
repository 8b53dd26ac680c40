"""`qcreport verify REPORT.pdf`."""

from __future__ import annotations

import argparse
import json
from pathlib import Path
from typing import TYPE_CHECKING

from qcreport.analysis.context import Signer
from qcreport.audit.in_child import verify_in_child
from qcreport.audit.words import verdict_lines
from qcreport.cli.now import now
from qcreport.cli.run import ANSWER_IS_NO, DONE
from qcreport.errors import ConfigError, Fault, SigningDeniedError, UsageError
from qcreport.settings.keys import read_bytes
from qcreport.settings.people import load_people
from qcreport.settings.site import Site, load_site

if TYPE_CHECKING:
    from cryptography import x509


def run(arguments: argparse.Namespace) -> int:
    """Verify a report; done only if it is valid and its trust is not denied."""
    report = read_bytes(Path(arguments.report), "the report")
    site = None if arguments.site is None else load_site(Path(arguments.site))
    verdict = verify_in_child(
        report,
        roots=_roots(arguments, site),
        now=now(),
        people=() if site is None else _people(site),
        templates=None if site is None else _templates(site),
    )
    if site is not None:
        verdict = _with_records(report, verdict, site)
    if arguments.json:
        print(json.dumps(verdict, ensure_ascii=False, indent=1))
    else:
        print("\n".join(verdict_lines(verdict)))
    return DONE if verdict["valid"] and verdict["trusted"] is not False else ANSWER_IS_NO


def _roots(arguments: argparse.Namespace, site: Site | None) -> tuple[x509.Certificate, ...] | None:
    """Return the certificates that were named to be trusted; None where none was."""
    paths = []
    if arguments.trust is not None:
        paths.append(Path(arguments.trust))
    if site is not None:
        paths.append(_site_certificate(site))
    if not paths:
        return None
    roots: list[x509.Certificate] = []
    for path in paths:
        roots.extend(_certificates(path))
    return tuple(roots)


def _certificates(path: Path) -> tuple[x509.Certificate, ...]:
    from qcreport.signing.keys import load_certificates

    try:
        found = load_certificates(read_bytes(path, "the certificate"))
    except SigningDeniedError as error:
        raise ConfigError((Fault(text=error.text, file=str(path)),)) from None
    if not found:
        raise ConfigError((Fault(text="holds no certificate (PEM or DER)", file=str(path)),))
    return found


def _site_certificate(site: Site) -> Path:
    key = site.seal.key or site.folders.keys / "service.p12"
    return key.with_suffix(".crt")


def _people(site: Site) -> tuple[Signer, ...]:
    persons = load_people(site.root).persons
    return tuple(Signer(name=p.name, certificate_sha256=p.certificate_sha256, may=p.may) for p in persons)


def _templates(site: Site) -> dict[str, bytes]:
    folder = site.root / "templates"
    return {p.name: p.read_bytes() for p in sorted(folder.glob("*")) if p.is_file()}


def _with_records(report: bytes, verdict: dict[str, object], site: Site) -> dict[str, object]:
    """Add what the site's records say; they are only looked at, never made."""
    from qcreport.audit.site_check import with_records
    from qcreport.records.database import FILE_NAME
    from qcreport.records.facade import Records

    if not (site.folders.records / FILE_NAME).is_file():
        raise UsageError(f"The site {site.root} has no records yet; verify without --site.")
    records = Records.open(site.folders.records, now, archive_folder=site.folders.archive)
    return with_records(report, verdict, records)
