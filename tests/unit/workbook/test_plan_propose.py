"""`plan propose` as a person uses it, at a terminal and without one."""

from __future__ import annotations

import io
import tomllib
from pathlib import Path

import pytest

from qcreport.cli import main
from qcreport.cli.ask import ask
from qcreport.workbook.propose_draft import BLANK, Question
from workbook.books import parts, table, zipped
from workbook.corpus import CORPUS

EXPORT = CORPUS / "files" / "o01_plain_long.xlsx"


@pytest.fixture(autouse=True)
def _outside_a_site(tmp_path_factory: pytest.TempPathFactory, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path_factory.mktemp("nowhere"))
    monkeypatch.delenv("QCREPORT_SITE", raising=False)


class Terminal(io.StringIO):
    """Standard input as a terminal, with what a person types."""

    def isatty(self) -> bool:
        return True


def typed(monkeypatch: pytest.MonkeyPatch, *lines: str) -> None:
    monkeypatch.setattr("sys.stdin", Terminal("".join(line + "\n" for line in lines)))


def propose(*words: str) -> int:
    try:
        return int(main(["plan", "propose", *words]) or 0)
    except SystemExit as ended:
        return int(ended.code or 0)


def test_without_a_terminal_blanks_are_left(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(tmp_path)
    monkeypatch.setattr("sys.stdin", io.StringIO())
    assert propose(str(EXPORT)) == 0
    said = capsys.readouterr().out
    assert "32 values of 4 batches would be read." in said
    assert "Next: fill them in, then qcreport layout try" in said
    folder = tmp_path / "proposed-o01-plain-long"
    plan = (folder / "plans" / "o01-plain-long.toml").read_text("utf-8")
    assert plan.count(f"= {BLANK}") == 4
    layout = tomllib.loads((folder / "layouts" / "o01-plain-long.toml").read_text("utf-8"))
    assert layout["table"][0]["group"] == {"col": "A", "header": "Batch"}


def test_at_a_terminal_answers_fill_the_plan(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    typed(monkeypatch, "2", "much", "1,5", "18", "none")
    assert propose(str(EXPORT), "--out", str(tmp_path / "new")) == 0
    said = capsys.readouterr().out
    assert "A number is expected." in said
    assert "Next: qcreport layout try" in said
    plan = tomllib.loads((tmp_path / "new" / "plans" / "o01-plain-long.toml").read_text("utf-8"))
    assert plan["comparison"]["reference"] == "LA-2403"
    (characteristic,) = plan["characteristic"]
    assert (characteristic["margin"], characteristic["lower_limit"]) == (1.5, 18)
    assert "upper_limit" not in characteristic


def test_nothing_that_exists_is_touched(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "mine.txt").write_text("mine", "utf-8")
    assert propose(str(EXPORT), "--out", str(tmp_path)) == 2
    assert "nothing is overwritten" in capsys.readouterr().err
    assert [path.name for path in tmp_path.iterdir()] == ["mine.txt"]


def test_export_that_cannot_be_read_writes_nothing(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setattr("sys.stdin", io.StringIO())
    refused = CORPUS / "files" / "o44_unreadable_values.xlsx"
    assert propose(str(refused), "--out", str(tmp_path / "new")) == 3
    assert "(unreadable_values)" in capsys.readouterr().err
    assert not (tmp_path / "new").exists()


def test_absent_export_is_told(capsys: pytest.CaptureFixture[str]) -> None:
    assert propose("no-such.xlsx") == 2
    assert "no-such.xlsx is not there" in capsys.readouterr().err


def test_control_characters_of_an_export_reach_no_terminal(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setattr("sys.stdin", io.StringIO())
    rows: list[list[str | float | tuple[float, int] | None]] = [
        [f"LA-{i // 6}_x001B_[2J", f"S{i}_x0007_", 20.25 + i / 16] for i in range(18)
    ]
    path = tmp_path / "x\x1b[2J.xlsx"
    path.write_bytes(zipped(parts(table(rows, heading=("Batch", "Sample_x001B_[31m", "Shear [MPa]")))))
    assert propose(str(path), "--out", str(tmp_path / "new")) == 0
    said = capsys.readouterr()
    assert all(c.isprintable() or c == "\n" for c in said.out + said.err)
    for file in (tmp_path / "new").rglob("*.toml"):
        assert all(c.isprintable() or c == "\n" for c in file.read_text("utf-8"))
        assert file.name.isprintable()


@pytest.mark.parametrize(
    ("question", "lines", "answer"),
    [
        (Question(key="q", text="?", choices=("A", "B")), ["2"], "B"),
        (Question(key="q", text="?", choices=("A", "B")), ["7", "A"], "A"),
        (Question(key="q", text="?", choices=("A",)), ["yes"], "A"),
        (Question(key="q", text="?", choices=("A", "B")), ["yes", ""], None),
        (Question(key="q", text="?", kind="text"), ['MPa "x"'], '"MPa \\"x\\""'),
        (Question(key="q", text="?", kind="number"), ["none", "+1.5"], "1.5"),
        (Question(key="q", text="?", choices=("none",), kind="number"), ["None"], ""),
        (Question(key="q", text="?", kind="number"), ["1.", "1e", "nan", ".5", "-2"], "-2"),
        (Question(key="q", text="?", kind="number"), [], None),
    ],
)
def test_answers_as_typed(
    monkeypatch: pytest.MonkeyPatch, question: Question, lines: list[str], answer: str | None
) -> None:
    typed(monkeypatch, *lines)
    assert ask([question]) == ({} if answer is None else {"q": answer})


def test_file_name_adds_no_line_to_its_refusal(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = tmp_path / "x\nNext step: none.xlsx"
    path.write_bytes(b"no workbook")
    assert propose(str(path), "--out", str(tmp_path / "new")) == 3
    said = capsys.readouterr().err
    assert said.count("\n") == 5
    assert "x\\nNext step: none.xlsx" in said
