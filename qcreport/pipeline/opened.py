"""A site opened for work: settings read, records open, key loaded, workers ready."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from datetime import datetime

from qcreport.durable import clear_temporaries
from qcreport.pipeline.issue import Progress
from qcreport.pipeline.key import load_service_key
from qcreport.pipeline.pipeline import Pipeline
from qcreport.pipeline.templates import load_site_templates
from qcreport.pipeline.workers import Workers
from qcreport.records.facade import Records
from qcreport.settings.site import Site, require_folders

_A_DAY_S = 86_400.0
"""Age from which a half-written file was surely left behind by a killed process."""


@dataclass(frozen=True, slots=True)
class Opened:
    """What commands and the service work with."""

    site: Site
    """Its settings."""
    records: Records
    """Its records."""
    pipeline: Pipeline
    """The stages."""


@contextmanager
def opened(
    site: Site,
    clock: Callable[[], datetime],
    *,
    workers: int,
    seals: bool = True,
    progress: Progress = lambda _: None,
) -> Iterator[Opened]:
    """Open a site; stop its workers at the end.

    The key is loaded first: where it must not be used, nothing is written.

    Raises
    ------
    ConfigError, SigningDeniedError, EnvironmentFailedError
        Settings, key or disk are not as they must be.
    """
    key = load_service_key(site, clock()) if seals else None
    templates = load_site_templates(site)
    require_folders(site)
    records = Records.open(site.folders.records, clock, archive_folder=site.folders.archive)
    for folder in (site.folders.archive, site.folders.reports):
        clear_temporaries(folder, before_s=clock().timestamp() - _A_DAY_S)
    with Workers(workers) as pool:
        pipeline = Pipeline(
            site=site,
            records=records,
            workers=pool,
            templates=templates,
            key=key,
            clock=clock,
            progress=progress,
        )
        pipeline.watch_settings("qcreport")
        pipeline.checkpoint()
        try:
            yield Opened(site, records, pipeline)
        finally:
            pipeline.checkpoint()
