"""The reader child: bounded, without our environment, and not believed."""

from __future__ import annotations

import json
import subprocess
import sys
import time
from pathlib import Path

import pytest

from qcreport.errors import ConfigError, ExportRefusedError
from qcreport.workbook import read_in_child as module
from qcreport.workbook.layout import parse_layout
from qcreport.workbook.limits import Limits
from qcreport.workbook.read_in_child import read_in_child
from qcreport.workbook.reading import read_export
from qcreport.workbook.wire import Decoder, WireError, encode
from workbook.books import layout_with, parts, table, zipped
from workbook.corpus import export, layout_bytes

NAME = "o13_censored_missing.xlsx"


def refusal(limits: Limits, data: bytes | None = None) -> ExportRefusedError:
    with pytest.raises(ExportRefusedError) as caught:
        read_in_child(
            data if data is not None else export(NAME),
            name=NAME,
            layout_bytes=layout_bytes(NAME),
            layout_file="l.toml",
            limits=limits,
        )
    assert caught.value.file == NAME
    return caught.value


def test_wrong_layout_is_told_without_a_child() -> None:
    with pytest.raises(ConfigError):
        read_in_child(b"x", name="x.xlsx", layout_bytes=b"name = 1", layout_file="l.toml")


def test_child_out_of_memory_refuses() -> None:
    many = table([["LA-1", "S1", 24.1]]) + "".join(
        f'<row r="{i}"><c r="A{i}" t="str"><v>{i:0900d}</v></c></row>' for i in range(10, 60_000)
    )
    limits = Limits(memory_bytes=64 * 1024 * 1024)
    with pytest.raises(ExportRefusedError) as caught:
        read_in_child(
            zipped(parts(many)), name=NAME, layout_bytes=layout_with(), layout_file="l.toml", limits=limits
        )
    assert caught.value.code == "too_large_unpacked"
    assert "64 MB" in caught.value.expected


def test_late_child_is_killed(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(module, "_MODULE", "http.server")
    started = time.monotonic()
    found = refusal(Limits(wall_s=0.5))
    assert found.code == "timed_out"
    assert time.monotonic() - started < 20


@pytest.mark.parametrize(
    "lines",
    [
        [],
        [["end", "0" * 64, "x", 0]],
        [["moon"]],
        [[]],
        ["text"],
        [["notice", "no_such_code", [], "x"]],
        [["notice", "missing_values", "C2", "x"]],
        [["refused", "no_such_code", "a", "b", "c", "d", []]],
        [["measurement", "c", "b", None, None, None, 1, "1", 0, "u", None, None, None, "S", 1, 1, [], []]],
        [["measurement", "c", "b", None, None, None, 1.0, "1", 0, "u", "nd", None, None, "S", 1, 1, [], []]],
        [["measurement", "c", "b", None, None, None, None, "1", 0, "u", "<", None, None, "S", 1, 1, [], []]],
        [["measurement", "c", 7, None, None, None, 1.0, "1", 0, "u", None, None, None, "S", 1, 1, [], []]],
        [
            [
                "measurement",
                "c",
                "b",
                None,
                None,
                None,
                1.0,
                "1",
                True,
                "u",
                None,
                None,
                None,
                "S",
                1,
                1,
                [],
                [],
            ]
        ],
        [["measurement", "c", "b", None, None, None, 1.0, "1", 0, "u", None, None, None, "S", 0, 1, [], []]],
        [
            [
                "measurement",
                "c",
                "b",
                None,
                None,
                None,
                1.0,
                "1",
                0,
                "u",
                None,
                None,
                None,
                "S",
                1,
                1,
                ["x"],
                [],
            ]
        ],
        [
            [
                "measurement",
                "c",
                "b",
                None,
                None,
                None,
                1.0,
                "1",
                0,
                "u",
                None,
                None,
                None,
                "S",
                1,
                1,
                [],
                [["a"]],
            ]
        ],
        [
            [
                "measurement",
                "c",
                "\ud800",
                None,
                None,
                None,
                1.0,
                "1",
                0,
                "u",
                None,
                None,
                None,
                "S",
                1,
                1,
                [],
                [],
            ]
        ],
    ],
)
def test_answers_that_the_child_would_not_give(lines: list[object]) -> None:
    decoder = Decoder(name="x.xlsx", sha256="f" * 64, limits=Limits())
    with pytest.raises(WireError):
        _decode(decoder, [json.dumps(line).encode() for line in lines])


@pytest.mark.parametrize("line", [b"{", b"[NaN]", b"[" * 100_000, b"\xff"])
def test_answers_that_are_no_json(line: bytes) -> None:
    with pytest.raises(WireError):
        Decoder(name="x.xlsx", sha256="f" * 64, limits=Limits()).take(line)


def _decode(decoder: Decoder, lines: list[bytes]) -> object:
    for line in lines:
        decoder.take(line)
    return decoder.finished()


def test_lines_give_back_the_same_and_nothing_after_the_end() -> None:
    layout = parse_layout(layout_with('[numbers]\nnot_detected = ["nd"]\n'), "l.toml")
    data = zipped(parts(table([["LA-1", "S1", "<0.1"], ["LA-1", "S2", "nd"], ["LA-1", "S3", 24.1]])))
    result = read_export(data, name="x.xlsx", layout=layout)
    decoder = Decoder(name="x.xlsx", sha256=result.export_sha256, limits=Limits())
    assert _decode(decoder, list(encode(result))) == result
    with pytest.raises(WireError):
        decoder.take(b'["end"]')


def test_long_answers_are_cut_off() -> None:
    assert refusal(Limits(max_answer_bytes=100)).code in ("damaged_or_incomplete", "too_large_unpacked")


def test_child_sees_nothing_of_our_environment(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    (tmp_path / "qcreport.py").write_text("raise SystemExit(5)", "utf-8")
    monkeypatch.setenv("PYTHONPATH", str(tmp_path))
    monkeypatch.chdir(tmp_path)
    result = read_in_child(
        export(NAME), name=NAME, layout_bytes=layout_bytes(NAME), layout_file="l.toml", limits=Limits()
    )
    assert len(result.measurements) == 24


def test_child_loads_no_heavy_library() -> None:
    code = (
        "import sys, qcreport.workbook.reader_child;"
        "print([m for m in ('pandas', 'numpy', 'openpyxl', 'scipy', 'python_calamine') if m in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-I", "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"
