"""One service a site."""

from __future__ import annotations

import datetime as dt
import os
from contextlib import AbstractContextManager
from pathlib import Path

from qcreport.records.lock import exclusive
from qcreport.records.moments import utc_text

LOCK_FILE = "service.lock"


def only_instance(work: Path, now: dt.datetime) -> AbstractContextManager[None]:
    """Hold the site's service lock while the block runs.

    Raises
    ------
    EnvironmentFailedError
        On entering, where another service of this site runs; the text says which and since when.
    """
    return exclusive(
        work / LOCK_FILE,
        busy="The service of this site runs already ({holder}). One is enough: stop that one first.",
        note=f"process {os.getpid()}, since {utc_text(now)}".encode("ascii"),
    )
