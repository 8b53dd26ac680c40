"""Which measurements are the same one, met again in a later export.

Labs export cumulative lists, so a value is known by what it is of, not by where it stands: layout, line,
batch, sample, reading, characteristic. Without a sample the export and cell stand in, and exports are not
joined.
"""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass

from qcreport.canonical import sha256_hex, to_json_bytes
from qcreport.measurements import Measurement, MeasurementSet
from qcreport.records.facts import clean_text


@dataclass(frozen=True, slots=True, kw_only=True)
class Identified:
    """A measurement with its identity."""

    identity: str
    """SHA-256 of what makes it the same measurement."""
    measurement: Measurement
    """As read."""


def identified(measurements: MeasurementSet) -> tuple[Identified, ...]:
    """Return the measurements of an export with their identities, export order.

    A sample id that repeats within one export stands for several results, not for changes of one: the second
    is told apart from the first by its rank among equals.
    """
    ranks: Counter[str] = Counter()
    found = []
    for measurement in measurements.measurements:
        key = to_json_bytes(_key(measurements, measurement)).decode("utf-8")
        ranks[key] += 1
        identity = sha256_hex(to_json_bytes([key, ranks[key]]))
        found.append(Identified(identity=identity, measurement=measurement))
    return tuple(found)


def _key(measurements: MeasurementSet, m: Measurement) -> list[str | None]:
    parts: list[str | None]
    if m.sample is None:
        parts = ["cell", measurements.export_sha256, str(m.cell), m.characteristic]
    else:
        parts = ["sample", measurements.layout_name, m.line, m.batch, m.sample, m.reading, m.characteristic]
    return [None if part is None else clean_text(part) for part in parts]


def content_digest(measurements: MeasurementSet) -> str | None:
    """Return the digest of what an export holds, wherever it stands; None where exports are not joined.

    Two workbooks of one digest hold the same measurements with the same texts, times and marks and give the
    same notices, in whatever order of rows and whatever bytes.
    """
    if not measurements.measurements or any(m.sample is None for m in measurements.measurements):
        return None
    rows = sorted(
        to_json_bytes([item.identity, *_content(item.measurement)]) for item in identified(measurements)
    )
    notices = sorted(clean_text(notice.code) for notice in measurements.notices)
    return sha256_hex(b"\n".join([to_json_bytes(notices), *rows]))


def _content(m: Measurement) -> list[object]:
    texts = (m.text, m.unit, m.status or "", m.time or "", *m.marks)
    factors = [[clean_text(part) for part in factor] for factor in m.factors]
    censored = None if m.censored is None else m.censored.value
    return [[clean_text(text) for text in texts], factors, m.decimals, censored]
