"""Who may sign reports, and as what: config/people.toml."""

from __future__ import annotations

import json
import re
from dataclasses import dataclass
from pathlib import Path
from typing import Final

from qcreport.canonical import in_groups_of_eight
from qcreport.errors import EnvironmentFailedError
from qcreport.signing.roles import ROLES
from qcreport.toml_source import TableReader, TomlSource

PEOPLE_FILE: Final = "config/people.toml"
REVIEWED_FIRST: Final = "reviewed first"
ANY_ORDER: Final = "any"
_NOT_HEX = re.compile(r"[\s:]")
_DIGEST = re.compile(r"[0-9a-f]{64}")


@dataclass(frozen=True, slots=True, kw_only=True)
class Person:
    """One certificate of one person; who renews a certificate has two entries of one name for a while."""

    name: str
    """As printed beside the signature; the same name is the same person."""
    certificate_sha256: str
    """Digest of the certificate, hexadecimal in lower case."""
    may: tuple[str, ...]
    """What the person may sign as: `reviewed`, `authorised`."""


@dataclass(frozen=True, slots=True, kw_only=True)
class People:
    """Everybody who may sign, and in which order."""

    persons: tuple[Person, ...] = ()
    """In the order of the file."""
    reviewed_first: bool = True
    """A report is authorised only once it is reviewed."""

    def by_certificate(self, sha256: str | None) -> Person | None:
        """Return the person of a certificate."""
        return next((p for p in self.persons if p.certificate_sha256 == sha256), None)


def load_people(root: Path) -> People:
    """Return the people of the site in `root`; nobody where there is no such file.

    Raises
    ------
    ConfigError
        With all faults of config/people.toml.
    EnvironmentFailedError
        Where it cannot be read.
    """
    path = root / PEOPLE_FILE
    try:
        data = path.read_bytes()
    except FileNotFoundError:
        return People()
    except OSError as error:
        raise EnvironmentFailedError(f"cannot read {path}: {error.strerror}.", file=str(path)) from None
    return parse_people(data, PEOPLE_FILE)


def parse_people(data: bytes, file: str) -> People:
    """Return the people of people.toml bytes; a ConfigError with all faults."""
    source = TomlSource.from_bytes(data, file)
    order = source.top.text("order", REVIEWED_FIRST, choices=(REVIEWED_FIRST, ANY_ORDER))
    seen: set[str] = set()
    persons = tuple(_person(table, seen) for table in source.top.tables("person"))
    source.finish()
    return People(persons=persons, reviewed_first=order == REVIEWED_FIRST)


def _person(table: TableReader, seen: set[str]) -> Person:
    may = table.texts("may")
    for role in may:
        if role not in ROLES:
            table.fault("may", f"must name {' or '.join(map(repr, ROLES))}, found {role!r}")
    if "may" in table and not may:
        table.fault("may", f"must name at least one of {', '.join(map(repr, ROLES))}")
    return Person(
        name=" ".join(table.text("name").split()),
        certificate_sha256=_fingerprint(table, seen),
        may=tuple(dict.fromkeys(may)),
    )


def _fingerprint(table: TableReader, seen: set[str]) -> str:
    written = table.text("certificate_sha256")
    digest = _NOT_HEX.sub("", written).lower()
    if written.strip() and not _DIGEST.fullmatch(digest):
        table.fault(
            "certificate_sha256",
            f"must be the SHA-256 of the certificate, 64 hexadecimal digits, found {len(digest)} characters",
        )
    elif digest in seen:
        table.fault("certificate_sha256", "is the certificate of another entry; each entry needs its own")
    seen.add(digest)
    return digest


def person_block(name: str, certificate_sha256: str) -> str:
    """Return the lines that enter a person into people.toml; whoever keeps it decides what the person may."""
    return (
        "[[person]]\n"
        f"name = {json.dumps(name, ensure_ascii=False)}\n"
        f'certificate_sha256 = "{in_groups_of_eight(certificate_sha256)}"\n'
        'may = ["reviewed"]               # what this person may sign as: "reviewed", "authorised" or both'
    )
