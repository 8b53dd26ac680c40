"""`qcreport verify REPORT.pdf`."""

from __future__ import annotations

import argparse
import json
from pathlib import Path
from typing import TYPE_CHECKING

from qcreport.audit.in_child import verify_in_child
from qcreport.audit.words import verdict_lines
from qcreport.cli.now import now
from qcreport.cli.run import ANSWER_IS_NO, DONE
from qcreport.errors import ConfigError, Fault, SigningDeniedError
from qcreport.settings.keys import read_bytes
from qcreport.settings.site import load_site

if TYPE_CHECKING:
    from cryptography import x509

LARGEST_REPORT = 512 * 1024 * 1024


def run(arguments: argparse.Namespace) -> int:
    """Verify a report; done only if it is valid and its trust is not denied."""
    report = read_bytes(Path(arguments.report), "the report")
    verdict = verify_in_child(report, roots=_roots(arguments), now=now())
    if arguments.json:
        print(json.dumps(verdict, ensure_ascii=False, indent=1))
    else:
        print("\n".join(verdict_lines(verdict)))
    return DONE if verdict["valid"] and verdict["trusted"] is not False else ANSWER_IS_NO


def _roots(arguments: argparse.Namespace) -> tuple[x509.Certificate, ...] | None:
    """Return the certificates that were named to be trusted; None where none was."""
    paths = []
    if arguments.trust is not None:
        paths.append(Path(arguments.trust))
    if arguments.site is not None:
        paths.append(_site_certificate(Path(arguments.site)))
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


def _site_certificate(root: Path) -> Path:
    site = load_site(root)
    key = site.seal.key or site.folders.keys / "service.p12"
    return key.with_suffix(".crt")
