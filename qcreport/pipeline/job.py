"""What a worker is given and what it gives back: plain bytes and frozen values, no key and no database."""

from __future__ import annotations

from dataclasses import dataclass

from qcreport.measurements import MeasurementSet
from qcreport.settings.plans import SettingsFile


@dataclass(frozen=True, slots=True, kw_only=True)
class Job:
    """Everything one report is computed and rendered from."""

    measurements: MeasurementSet
    """As read by the reader child."""
    export: bytes
    """The export itself, for attaching."""
    plan: SettingsFile
    """The plan's file."""
    layout: SettingsFile
    """The layout's file."""
    rules: SettingsFile
    """The rules' file."""
    context: bytes
    """context.json."""
    templates: tuple[tuple[str, bytes], ...]
    """The site's templates by name."""
    render: bool
    """False: compute only."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Done:
    """What a worker computed."""

    result: bytes
    """result.json."""
    answers: tuple[tuple[str, str], ...]
    """(characteristic, answer code), plan order."""
    pdf: bytes
    """The unsealed report; empty where none was asked for."""
    pages: int
    """Its pages."""
    attachments: tuple[tuple[str, bytes], ...]
    """(name, bytes) of everything attached, sorted by name."""
