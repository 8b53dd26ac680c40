"""A site: one folder that holds everything of one laboratory, described by config/site.toml."""

from __future__ import annotations

import os
import zoneinfo
from dataclasses import dataclass
from pathlib import Path
from typing import Final

from qcreport.analysis.context import Laboratory, Statement
from qcreport.errors import ConfigError, EnvironmentFailedError, Fault, UsageError
from qcreport.settings.limits import parse_limits
from qcreport.settings.statements import parse_statements
from qcreport.toml_source import TableReader, TomlSource
from qcreport.workbook.limits import Limits

SITE_FILE: Final = "config/site.toml"
LANGUAGES: Final = ("de", "en")
PAGE_SIZES: Final = ("A4", "Letter")


@dataclass(frozen=True, slots=True, kw_only=True)
class Folders:
    """Absolute folders of a site."""

    inbox: Path
    """Exports are dropped here; may be a share."""
    reports: Path
    """Sealed reports; may be a share."""
    refused: Path
    """Refused exports with their reason."""
    archive: Path
    """Originals by digest."""
    records: Path
    """Ledger and measurement store; local."""
    work: Path
    """Claims in progress; local."""
    keys: Path
    """Keys; local."""

    def all(self) -> tuple[Path, ...]:
        """Return every folder."""
        return (
            self.inbox,
            self.reports,
            self.refused,
            self.archive,
            self.records,
            self.work,
            self.keys,
        )


@dataclass(frozen=True, slots=True, kw_only=True)
class IntakeSettings:
    """When a dropped file is taken."""

    quiet_s: float
    """Seconds without a change before a file is taken."""
    poll_s: float
    """Seconds between two listings of the inbox."""
    second_look: bool
    """Every export is compared, cell by cell, with what an independent reader finds."""


@dataclass(frozen=True, slots=True, kw_only=True)
class SealSettings:
    """The service key."""

    key: Path | None
    """PKCS#12 or PEM file; None until `keys new` has made one."""
    passphrase_file: Path | None
    """File of mode 600 with the passphrase; None: environment or prompt."""
    location: str
    """Place printed in the seal."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Site:
    """Settings of one site."""

    root: Path
    """The site's folder, absolute."""
    laboratory: Laboratory
    """Who issues the reports."""
    time_zone: str
    """IANA name."""
    language: str
    """Language of reports."""
    page_size: str
    """A4 or Letter."""
    demonstration: bool
    """True for a demo site."""
    statements: tuple[Statement, ...]
    """What reports must say and only the laboratory can; empty where the site does not ask for it."""
    folders: Folders
    """Where things are."""
    intake: IntakeSettings
    """When files are taken."""
    limits: Limits
    """Bounds on exports."""
    seal: SealSettings
    """The service key."""
    workers: int
    """Processes that compute and render."""
    site_bytes: bytes
    """config/site.toml as read."""


def load_site(root: Path) -> Site:
    """Return the settings of the site in `root`.

    Raises
    ------
    UsageError
        Where there is no site.
    ConfigError
        With all faults of config/site.toml.
    """
    root = root.resolve()
    path = root / SITE_FILE
    if not path.is_file():
        raise UsageError(f"No site here ({root}), make one: qcreport site new DIR", file=str(root))
    try:
        data = path.read_bytes()
    except OSError as error:
        raise EnvironmentFailedError(
            f"cannot read {path}: {error.strerror}. Give this account the right to read it.", file=str(path)
        ) from None
    return parse_site(data, SITE_FILE, root)


def parse_site(data: bytes, file: str, root: Path) -> Site:
    """Return the settings of site.toml bytes; a ConfigError with all faults."""
    source = TomlSource.from_bytes(data, file)
    top = source.top
    lab = top.table("lab", required=True)
    laboratory = Laboratory(
        name=lab.text("name"),
        address=lab.text("address"),
        place_of_work=lab.text("place_of_work", "", blank=True),
        customer=lab.text("customer", "", blank=True),
    )
    zone = lab.text("time_zone")
    if zone and zone not in zoneinfo.available_timezones():
        lab.fault("time_zone", f"not an IANA time zone such as Europe/Berlin, found {zone!r}")
    language = lab.text("language", "en", choices=LANGUAGES)
    demonstration = lab.flag("demonstration", False)
    report = top.table("report")
    intake = top.table("intake")
    service = top.table("service")
    site = Site(
        root=root,
        laboratory=laboratory,
        time_zone=zone,
        language=language,
        page_size=report.text("page_size", "A4", choices=PAGE_SIZES),
        demonstration=demonstration,
        statements=parse_statements(report),
        folders=_folders(top.table("folders"), root),
        intake=IntakeSettings(
            quiet_s=intake.number("quiet_s", 5.0, minimum=0.0),
            poll_s=intake.number("poll_s", 3.0, above=0.0),
            second_look=bool(intake.flag("second_look", True)),
        ),
        limits=parse_limits(top.table("limits")),
        seal=_seal(top.table("seal"), root),
        workers=service.integer("workers", 2, minimum=1),
        site_bytes=data,
    )
    source.finish()
    return site


def _folders(table: TableReader, root: Path) -> Folders:
    used: dict[Path, str] = {}

    def folder(key: str) -> Path:
        text = str(table.text(key, key))
        path = Path(os.path.normpath(root / text))  # an absolute setting replaces the root
        if text.strip() and (path in used or path == root):
            table.fault(key, f"must be a folder of its own, found that of {used.get(path, 'the site')}")
        used.setdefault(path, key)
        return path

    return Folders(
        inbox=folder("inbox"),
        reports=folder("reports"),
        refused=folder("refused"),
        archive=folder("archive"),
        records=folder("records"),
        work=folder("work"),
        keys=folder("keys"),
    )


def _seal(table: TableReader, root: Path) -> SealSettings:
    key, passphrase_file = table.text("key", None), table.text("passphrase_file", None)
    return SealSettings(
        key=None if key is None else root / key,
        passphrase_file=None if passphrase_file is None else root / passphrase_file,
        location=table.text("location", "", blank=True),
    )


def require_folders(site: Site) -> None:
    """Make missing local folders; raise EnvironmentFailedError where one cannot be written.

    inbox and reports are not made where they are absolute paths outside the site: an absent share must be
    noticed, not replaced by an empty folder.
    """
    for folder in site.folders.all():
        try:
            if not folder.exists() and folder.is_relative_to(site.root):
                folder.mkdir(parents=True)
        except OSError as error:
            raise EnvironmentFailedError(
                f"cannot make {folder}: {error.strerror}. Give this account the right to write there.",
                file=str(folder),
            ) from None
        if folder.exists() and not folder.is_dir():
            raise EnvironmentFailedError(
                f"{folder} is a file and not a folder. Move it away, or correct [folders] in {SITE_FILE}.",
                file=str(folder),
            )
        if not folder.is_dir():
            raise EnvironmentFailedError(
                f"{folder} is not there. Mount the share or correct [folders] in {SITE_FILE}.",
                file=str(folder),
            )


def no_key(site: Site) -> ConfigError:
    """Return the error for a site that has no service key yet."""
    return ConfigError(
        (
            Fault(
                text=f'no service key. Make one: qcreport keys new --for service "NAME" --site {site.root}',
                file=SITE_FILE,
                key="seal.key",
            ),
        )
    )
