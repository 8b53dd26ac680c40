"""Layout files: what is read, and that every fault is told with its line and key."""

from __future__ import annotations

import pytest

from qcreport.errors import ConfigError
from qcreport.workbook.layout import parse_layout
from qcreport.workbook.layout_model import MarkUse, Shape, SourceKind, UnitFrom
from workbook.books import LAYOUT
from workbook.corpus import CORPUS


@pytest.mark.parametrize("path", sorted((CORPUS / "layouts").iterdir()), ids=lambda path: path.stem)
def test_layouts_of_the_corpus_are_read(path: object) -> None:
    layout = parse_layout(path.read_bytes(), path.name)  # type: ignore[attr-defined]
    assert path.name.startswith(layout.name)  # type: ignore[attr-defined]
    assert layout.tables


def test_all_keys() -> None:
    text = """
layout_version = 1
name = "all"
[match]
cells = { B1 = "Shear rig*" }
[sheet]
name = "Data"
[numbers]
decimal = ","
thousands = "."
missing = ["n/a", ""]
not_detected = ["n.d."]
censored = { below = "<", above = ">" }
errors = "missing"
[leave_out_rows]
blank = true
group_matches = ["Mean"]
sample_matches = ["Sum*"]
[marks]
struck = "exclude"
comments = "keep"
hidden = "exclude"
[groups]
different = ["00123", "123"]
[[table]]
shape = "replicates_across"
header_rows = [3, 4]
units_row = 5
first_row = 6
end = "sheet"
group = { col = "A", repeats_below = true, header = "Batch" }
line = { from = "file_name", pattern = "line-([A-Z])" }
sample = { header = "Specimen" }
replicate = { col = "C" }
time = { from = "cell", cell = "B3" }
status = { col = "D", use = ["valid"], exclude = ["void"] }
[[table.factor]]
name = "day"
col = "E"
[[table.value]]
characteristic = "shear"
cols = "F:H"
header = "Shear"
unit = "MPa"
unit_from = "units_row"
"""
    layout = parse_layout(text.encode(), "all.toml")
    (table,) = layout.tables
    assert table.shape is Shape.REPLICATES_ACROSS
    assert table.blank_rows_end is None
    assert table.group.repeats_below
    assert table.line is not None
    assert table.line.kind is SourceKind.FILE_NAME
    assert table.status is not None
    assert table.status.exclude == ("void",)
    assert [factor.name for factor in table.factors] == ["day"]
    assert (table.values[0].first_column, table.values[0].last_column) == (6, 8)
    assert table.values[0].unit_from is UnitFrom.UNITS_ROW
    assert layout.marks.struck is MarkUse.EXCLUDE
    assert layout.marks.comments is MarkUse.KEEP
    assert layout.numbers.errors_missing
    assert layout.numbers.missing == ("n/a", "")
    assert layout.anchors[0].text == "Shear rig*"
    assert layout.different_groups == {"00123", "123"}


@pytest.mark.parametrize(
    ("old", "new", "key", "words"),
    [
        ('name = "test"', "", None, "missing"),
        ('name = "test"', 'name = "test"\nlayout_version = 2', "layout_version", "version 1"),
        ('name = "Data"', 'nam = "Data"', "sheet.nam", "did you mean"),
        ('name = "Data"', 'name = "Data"\neach = "L*"', "sheet", "only one"),
        ('shape = "long"', 'shape = "tall"', "table[1].shape", "'long'"),
        ('shape = "long"', 'shape = "wide"', "table[1].group", "header_cells"),
        ("header_rows = [1]", "header_rows = [2]", "table[1].first_row", "below the heading"),
        ("header_rows = [1]", "header_rows = [0]", "table[1].header_rows", "rows from 1"),
        ('end = "blank:2"', 'end = "blank:0"', "table[1].end", "blank:2"),
        ('{ col = "A" }', '{ col = "A1" }', "table[1].group.col", "column such as C"),
        ('{ col = "A" }', "{ }", "table[1].group", "must say where"),
        ('{ col = "A" }', '{ from = "cell" }', "table[1].group", "missing"),
        ('{ col = "A" }', '{ from = "moon" }', "table[1].group.from", "'sheet_name'"),
        ('{ col = "B" }', '{ from = "file_name", pattern = "(" }', "table[1].sample.pattern", "expression"),
        ('{ col = "B" }', '{ header_cells = "B:C" }', "table[1].sample.header_cells", "only the group"),
        ('col = "C"', 'cols = "C:E"', "table[1].value[1].cols", "replicates_across"),
        ('col = "C"', 'cols = "E:C"', "table[1].value[1].cols", "columns such as"),
        ('unit = "MPa"', "", "table[1].value[1]", "missing"),
        ('unit = "MPa"', 'unit = "MPa"\nunit_from = "units_row"', "table[1].units_row", "missing although"),
        ('unit = "MPa"', 'unit_from = "cell"', "table[1].value[1]", "missing"),
        ('name = "Data"', 'text = { delimiter = ";;" }', "sheet.text.delimiter", "one character"),
        ('name = "Data"', 'text = { encoding = "moon" }', "sheet.text.encoding", "encoding"),
    ],
)
def test_fault_names_its_key(old: str, new: str, key: str | None, words: str) -> None:
    with pytest.raises(ConfigError) as caught:
        parse_layout(LAYOUT.decode().replace(old, new, 1).encode(), "l.toml")
    faults = {fault.key: fault for fault in caught.value.faults}
    assert key in faults, caught.value
    assert words in faults[key].text
    assert faults[key].file == "l.toml"


def test_all_faults_are_told_at_once_with_their_lines() -> None:
    text = LAYOUT.decode().replace('shape = "long"', 'shape = "tall"').replace("sample =", "sampel =")
    with pytest.raises(ConfigError) as caught:
        parse_layout((text + '[numbers]\ndecimal = ";"\n').encode(), "l.toml")
    assert [(fault.key, fault.line is not None) for fault in caught.value.faults] == [
        ("table[1].shape", True),
        ("table[1].sampel", True),
        ("numbers.decimal", True),
    ]


@pytest.mark.parametrize(
    "extra", ['[numbers]\ndecimal = "."\nthousands = "."\n', '[match]\ncells = { Moon = "x" }\n']
)
def test_faults_of_the_other_parts(extra: str) -> None:
    with pytest.raises(ConfigError):
        parse_layout(LAYOUT + extra.encode(), "l.toml")


def test_bytes_that_are_no_text_or_no_toml() -> None:
    for data in (b"\xff\xfe", b"name = "):
        with pytest.raises(ConfigError):
            parse_layout(data, "l.toml")
