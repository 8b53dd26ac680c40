"""Settings text: every fault at once, with file, line and key."""

from __future__ import annotations

import datetime as dt

import pytest

from qcreport.errors import ConfigError, Fault
from qcreport.toml_source import TableReader, TomlSource, dotted


def source_of(text: str) -> TomlSource:
    return TomlSource(text, "site.toml")


def faults_of(source: TomlSource) -> tuple[Fault, ...]:
    with pytest.raises(ConfigError) as caught:
        source.finish()
    return caught.value.faults


def only_fault(source: TomlSource) -> Fault:
    (fault,) = faults_of(source)
    return fault


class TestText:
    def test_a_byte_order_mark_and_crlf_are_no_part_of_it(self) -> None:
        source = TomlSource.from_bytes(b'\xef\xbb\xbfname = "A"\r\nnmae = 1\r\n', "site.toml")
        assert source.top.text("name") == "A"
        assert only_fault(source).line == 2

    def test_bytes_that_are_not_utf8_are_refused(self) -> None:
        with pytest.raises(ConfigError, match=r"site\.toml: not UTF-8 text"):
            TomlSource.from_bytes('name = "Prüfung"'.encode("latin-1"), "site.toml")

    def test_a_syntax_error_names_its_line(self) -> None:
        with pytest.raises(ConfigError) as caught:
            source_of('a = 1\nb = 2\nc = "unclosed\nd = 4\n')
        (fault,) = caught.value.faults
        assert fault.line == 3
        assert fault.text.startswith("not valid TOML")
        assert str(fault).startswith("site.toml, line 3: not valid TOML")

    def test_a_syntax_error_at_the_end_names_the_last_line_with_text(self) -> None:
        with pytest.raises(ConfigError) as caught:
            source_of("a = 1\nb = [1, 2\n\n")
        assert caught.value.faults[0].line == 2

    @pytest.mark.parametrize(
        ("text", "words"),
        [
            ("a = " + "9" * 5000, "not valid TOML"),
            ("a = " + "[" * 100_000, "nested too deeply"),
        ],
    )
    def test_hostile_text_is_a_fault_and_no_crash(self, text: str, words: str) -> None:
        with pytest.raises(ConfigError, match=words):
            source_of(text)


class TestLines:
    TEXT = r'''# a comment
top = """
[not.a.table]
inner = 1
"""
list = [
  "a = 1",
  [1, 2],
  ["x"], # ]
]

[lab]
name = "A # not a comment \" ]"
path = 'C:\'
literal = """
hidden = 1
"""
"quoted key" = 1
a.b = 2

[[row]]
id = "one"
when = { x = 1 }

[[row]]
id = "two"
[row.when]
y = 2
[[row.part]]
z = 3
'''

    @pytest.fixture
    def source(self) -> TomlSource:
        return source_of(self.TEXT)

    @pytest.mark.parametrize(
        ("path", "first"),
        [
            (("top",), 'top = """'),
            (("list",), "list = ["),
            (("lab",), "[lab]"),
            (("lab", "name"), 'name = "A'),
            (("lab", "path"), "path = "),
            (("lab", "hidden"), "[lab]"),
            (("lab", "literal"), "literal = "),
            (("lab", "quoted key"), '"quoted key"'),
            (("lab", "a", "b"), "a.b = 2"),
            (("row", 0), "[[row]]"),
            (("row",), "[[row]]"),
            (("row", 0, "when", "x"), "when = { x"),
            (("row", 1, "id"), 'id = "two"'),
            (("row", 1, "when", "y"), "y = 2"),
            (("row", 1, "part", 0, "z"), "z = 3"),
            (("lab", "absent"), "[lab]"),
        ],
    )
    def test_a_path_is_found_where_it_stands(
        self, source: TomlSource, path: tuple[str | int, ...], first: str
    ) -> None:
        line = source.line_of(path)
        assert line is not None
        assert self.TEXT.split("\n")[line - 1].startswith(first)

    def test_brackets_in_a_quoted_header_are_part_of_the_name(self) -> None:
        source = source_of('[lab."a]b"] # [x]\nc = 1\n[[ row . "]]" ]]\nd = 2\n')
        assert source.line_of(("lab", "a]b", "c")) == 2
        assert source.line_of(("row", "]]", 0, "d")) == 4

    def test_a_hostile_header_costs_no_more_than_its_length(self) -> None:
        spaces = " " * 20_000
        source = source_of(f'[{spaces}"a]b"{spaces}.{spaces}c{spaces}]{spaces}# ]\nd = 1\n')
        assert source.line_of(("a]b", "c", "d")) == 2

    def test_a_quote_beside_the_closing_ones_opens_nothing(self) -> None:
        source = source_of('a = """\nx""""\nb = [ # "\n]\nc = 1\n')
        assert [source.line_of((key,)) for key in "abc"] == [1, 3, 5]

    def test_quotes_of_the_other_kind_are_text(self) -> None:
        source = source_of("a = \"it's '''\"\nb = '''\n\"\"\"\n'''\nc = 1\n")
        assert [source.line_of((key,)) for key in "abc"] == [1, 2, 5]

    def test_nothing_above_the_top_has_a_line(self, source: TomlSource) -> None:
        assert source.line_of(()) is None
        assert source.line_of(("absent",)) is None

    def test_other_line_separators_do_not_count(self) -> None:
        source = source_of('a = "x\u2028y\u0085z" # \u2028\nb = 1\n')
        source.top.text("a")
        assert only_fault(source).line == 2

    def test_a_path_is_written_as_people_count(self) -> None:
        assert dotted(("characteristic", 1, "margin")) == "characteristic[2].margin"


class TestUnknownKeys:
    def test_every_one_is_told_with_line_and_nearest_key(self) -> None:
        source = source_of("[lab]\nnmae = 1\n[folders]\nqqq = 2\n[other]\nx = 1\n")
        lab, folders = source.top.table("lab"), source.top.table("folders")
        lab.raw("name", None)
        lab.raw("address", None)
        folders.raw("inbox", None)
        found = faults_of(source)
        assert [(f.line, f.key) for f in found] == [(2, "lab.nmae"), (4, "folders.qqq"), (5, "other")]
        assert found[0].text == 'unknown key; did you mean "name"? Known here: address, name'
        assert found[1].text == "unknown key. Known here: inbox"

    def test_keys_of_inline_tables_and_array_members_are_checked(self) -> None:
        source = source_of("spread = { similar = true, why = 1 }\n[[row]]\nid = 1\n[[row]]\nix = 2\n")
        source.top.table("spread").flag("similar")
        for row in source.top.tables("row"):
            row.raw("id", None)
        assert [(f.line, f.key) for f in faults_of(source)] == [(1, "spread.why"), (5, "row[2].ix")]

    def test_a_text_with_no_unknown_key_has_no_fault(self) -> None:
        source = source_of("a = 1\n")
        assert source.top.integer("a") == 1
        source.finish()
        assert source.faults == []


class TestKinds:
    @pytest.mark.parametrize(
        ("value", "method", "words"),
        [
            ("1", "text", "must be a text, found 1"),
            ('" "', "text", "must not be blank"),
            ('"1"', "number", "must be a number, found '1'"),
            ("true", "number", "must be a number, found True"),
            ("nan", "number", "must be a finite number"),
            ("-inf", "number", "must be a finite number"),
            ("1" + "0" * 400, "number", "must be a finite number"),
            ("1.0", "integer", "must be a whole number, found 1.0"),
            ("false", "integer", "must be a whole number, found False"),
            ("1", "flag", "must be true or false, found 1"),
            ('"2026-11-02"', "date", "must be a date such as 2026-11-02, found '2026-11-02'"),
            ("12:00:00", "date", "must be a date such as 2026-11-02, found datetime.time(12, 0)"),
            ('"a"', "texts", "must be a list of texts, found 'a'"),
            ("[1]", "texts", "must be a list of texts, found [1]"),
            ("[true]", "integers", "must be a list of whole numbers, found [True]"),
            ("1", "table", "must be a table [key], found 1"),
            ("1", "tables", "must be tables [[key]], found 1"),
            ("[1]", "tables", "must be tables [[key]]"),
        ],
    )
    def test_a_wrong_kind_is_one_fault_at_its_key(self, value: str, method: str, words: str) -> None:
        source = source_of(f"\nkey = {value}\n")
        getattr(source.top, method)("key")
        fault = only_fault(source)
        assert (fault.text, fault.line, fault.key) == (words, 2, "key")

    @pytest.mark.parametrize("method", ["text", "number", "integer", "flag", "date", "texts", "integers"])
    def test_a_missing_key_is_told_unless_it_has_a_default(self, method: str) -> None:
        source = source_of("[lab]\n")
        reader = source.top.table("lab")
        assert getattr(reader, method)("other", None) is None
        getattr(reader, method)("key")
        assert str(only_fault(source)) == 'site.toml, line 1, lab: "key" is missing'

    def test_required_tables_are_told(self) -> None:
        source = source_of("")
        source.top.table("lab", required=True)
        source.top.tables("row", required=True)
        assert [str(f) for f in faults_of(source)] == [
            'site.toml: "lab" is missing',
            'site.toml: "row" is missing',
        ]

    def test_values_come_as_written(self) -> None:
        top = source_of(
            'text = "a"\nblank = ""\nnumber = 2\nwhole = 3\nflag = false\nday = 2026-11-02\n'
            'moment = 2026-11-02T06:00:00Z\ntexts = ["a", "b"]\nwholes = [1, 2]\n'
        ).top
        assert top.text("text") == "a"
        assert top.text("blank", blank=True) == ""
        number = top.number("number")
        assert number == 2.0
        assert isinstance(number, float)
        assert top.integer("whole") == 3
        assert top.flag("flag") is False
        assert top.date("day") == dt.date(2026, 11, 2)
        assert top.date("moment") == dt.date(2026, 11, 2)
        assert top.texts("texts") == ("a", "b")
        assert top.integers("wholes") == (1, 2)
        assert "text" in top
        assert next(iter(top.names())) == "text"

    @pytest.mark.parametrize(
        ("value", "bounds", "words"),
        [
            ("0", {"above": 0.0}, "must be greater than 0, found 0"),
            ("0.5", {"below": 0.5}, "must be less than 0.5, found 0.5"),
            ("-1", {"minimum": 0.0}, "must be at least 0, found -1"),
        ],
    )
    def test_bounds_of_numbers(self, value: str, bounds: dict[str, float], words: str) -> None:
        source = source_of(f"key = {value}\n")
        source.top.number("key", **bounds)
        assert only_fault(source).text == words

    def test_bounds_of_whole_numbers_and_choices(self) -> None:
        source = source_of('n = 1\nword = "c"\n')
        source.top.integer("n", minimum=2)
        source.top.text("word", choices=("a", "b"))
        assert [f.text for f in faults_of(source)] == [
            "must be at least 2, found 1",
            "must be one of 'a', 'b', found 'c'",
        ]


def test_all_faults_come_at_once_in_line_order() -> None:
    source = source_of("a = 1\nb = 2\nc = 3\n")
    source.top.text("c")
    source.top.flag("b")
    found = faults_of(source)
    assert [f.line for f in found] == [1, 2, 3]
    with pytest.raises(ConfigError) as caught:
        source.finish()
    assert str(caught.value).count("\n") >= 2
    assert (caught.value.file, caught.value.key) == ("site.toml", "a")


def test_a_reader_may_note_a_fault_at_itself() -> None:
    source = source_of("\n[lab]\n")
    reader: TableReader = source.top.table("lab")
    reader.fault(None, "is not enough")
    assert str(only_fault(source)) == "site.toml, line 2, lab: is not enough"
