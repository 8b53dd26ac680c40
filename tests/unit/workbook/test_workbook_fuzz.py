"""Damaged copies through the reader child: only the named outcomes occur, and the next export is read."""

from __future__ import annotations

import io
import random
import warnings
import zipfile

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from qcreport.errors import ExportRefusedError
from qcreport.measurements import MeasurementSet
from qcreport.workbook.layout import parse_layout
from qcreport.workbook.limits import Limits
from qcreport.workbook.propose import propose
from qcreport.workbook.read_in_child import read_in_child
from qcreport.workbook.reading import read_export
from qcreport.workbook.refusals import REFUSAL_CODES
from workbook.corpus import BY_NAME, CORPUS, export, layout_bytes

OLD = "o25_old_format.xls"
ZIPPED = [n for n in BY_NAME if (CORPUS / "layouts" / f"{n}.toml").exists() and export(n).startswith(b"PK")]
QUIET = settings(max_examples=40, deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))


def in_child(data: bytes, name: str) -> MeasurementSet | ExportRefusedError:
    try:
        return read_in_child(
            data,
            name=name,
            layout_bytes=layout_bytes(name),
            layout_file="l.toml",
            limits=Limits(wall_s=30.0),
            second_look=True,
        )
    except ExportRefusedError as refusal:
        return refusal


def check_named(outcome: MeasurementSet | ExportRefusedError) -> None:
    if isinstance(outcome, ExportRefusedError):
        assert outcome.code in REFUSAL_CODES
        assert outcome.five_lines().count("\n") == 5
    else:
        assert outcome.measurements


def flipped(data: bytes, *places: int) -> bytes:
    damaged = bytearray(data)
    for place in places:
        damaged[place] ^= 0xFF
    return bytes(damaged)


def test_old_workbook_that_ends_the_library_ends_the_child_alone() -> None:
    outcome = in_child(flipped(export(OLD), 1705), OLD)
    assert isinstance(outcome, ExportRefusedError)
    assert outcome.code == "too_large_unpacked"
    assert isinstance(in_child(export(OLD), OLD), MeasurementSet)


@pytest.mark.parametrize("seed", range(6))
def test_damaged_old_workbooks(seed: int) -> None:
    draw = random.Random(seed)  # noqa: S311 - damage that repeats, no secret
    data = export(OLD)
    kinds = (
        flipped(data, *(draw.randrange(len(data)) for _ in range(1 + seed))),
        data[: draw.randrange(len(data))],
        data[: 512 * draw.randrange(1, 11)] + data[512 * draw.randrange(1, 11) :],
    )
    check_named(in_child(kinds[seed % 3], OLD))


@pytest.mark.parametrize("seed", range(6))
def test_damaged_workbooks_through_the_child(seed: int) -> None:
    draw = random.Random(seed)  # noqa: S311 - as above
    name = draw.choice(ZIPPED)
    with zipfile.ZipFile(io.BytesIO(export(name))) as archive:
        found = {entry: archive.read(entry) for entry in archive.namelist()}
    chosen = draw.choice(sorted(found))
    found[chosen] = flipped(found[chosen], draw.randrange(len(found[chosen])))
    check_named(in_child(_zipped([*found.items()]), name))


def _zipped(entries: list[tuple[str, bytes]]) -> bytes:
    out = io.BytesIO()
    with warnings.catch_warnings(), zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as archive:
        warnings.simplefilter("ignore")  # doubled names are meant
        for name, data in entries:
            archive.writestr(name, data)
    return out.getvalue()


@QUIET
@given(
    name=st.sampled_from(ZIPPED),
    kind=st.sampled_from(["drop", "double", "swap", "empty", "repeat", "other"]),
    which=st.integers(0, 1000),
    other=st.integers(0, 1000),
)
def test_parts_that_are_gone_doubled_or_exchanged(name: str, kind: str, which: int, other: int) -> None:
    with zipfile.ZipFile(io.BytesIO(export(name))) as archive:
        entries = [(entry, archive.read(entry)) for entry in archive.namelist()]
    place, second = which % len(entries), other % len(entries)
    part, data = entries[place]
    changed = {
        "drop": [],
        "double": [entries[place], entries[place]],
        "swap": [(part, entries[second][1])],
        "empty": [(part, b"")],
        "repeat": [(part, data + data)],
        "other": [(part, data.replace(b"<c ", b"<row><c ", 1 + other % 3))],
    }[kind]
    damaged = _zipped([*entries[:place], *changed, *entries[place + 1 :]])
    try:
        outcome: MeasurementSet | ExportRefusedError = read_export(
            damaged, name=name, layout=parse_layout(layout_bytes(name), "l.toml"), second_look=True
        )
    except ExportRefusedError as refusal:
        outcome = refusal
    check_named(outcome)
    if kind == "double":
        assert getattr(outcome, "code", None) == "unsafe_content"


@QUIET
@given(
    name=st.sampled_from([*ZIPPED, "o26_semicolon_cp1252.csv"]),
    at=st.integers(0, 1 << 24),
    flip=st.integers(1, 255),
    which=st.integers(0, 1000),
)
def test_proposing_from_damaged_copies_ends_in_named_outcomes(
    name: str, at: int, flip: int, which: int
) -> None:
    data = export(name)
    if data.startswith(b"PK"):
        with zipfile.ZipFile(io.BytesIO(data)) as archive:
            found = {entry: archive.read(entry) for entry in archive.namelist()}
        chosen = sorted(found)[which % len(found)]
        part = found[chosen]
        found[chosen] = part[: at % len(part)] + bytes([flip]) + part[at % len(part) + 1 :]
        data = _zipped([*found.items()])
    else:
        data = data[: at % len(data)] + bytes([flip]) + data[at % len(data) + 1 :]
    outcome: object
    try:
        outcome = propose(data, name=name, plan_name="x", limits=Limits()).layout
    except ExportRefusedError as refusal:
        outcome = refusal.code
    assert outcome in REFUSAL_CODES or isinstance(outcome, tuple)
