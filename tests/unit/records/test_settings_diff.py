"""What changed between two versions of a settings file."""

from __future__ import annotations

import pytest

from qcreport.analysis.provenance import Change
from qcreport.records.settings_diff import WHOLE_FILE, settings_changes

PLAN = b"""
name = "p"
approved = { by = "A", on = 2026-11-02 }
exports = ["a*.xlsx"]
[comparison]
alpha = 0.05
[spread]
similar = true
[[characteristic]]
name = "one"
margin = 1.5
[[characteristic]]
name = "two"
margin = "5 %"
"""


def changes(old: bytes | None, new: bytes | None) -> list[tuple[str, str | None, str | None]]:
    return [(c.key, c.before, c.after) for c in settings_changes("plan", old, new)]


@pytest.mark.parametrize(
    ("old", "new", "change"),
    [
        (b"alpha = 0.05", b"alpha = 0.01", ("comparison.alpha", "0.05", "0.01")),
        (b"margin = 1.5", b"margin = 1.50001", ("characteristic[one].margin", "1.5", "1.50001")),
        (b'"5 %"', b"0.5", ("characteristic[two].margin", '"5 %"', "0.5")),
        (b"similar = true", b"similar = false", ("spread.similar", "true", "false")),
        (b"2026-11-02", b"2026-11-03", ("approved.on", "2026-11-02", "2026-11-03")),
        (b'["a*.xlsx"]', b'["a*.xlsx", "b"]', ("exports", '["a*.xlsx"]', '["a*.xlsx", "b"]')),
        (b"[spread]\nsimilar = true", b"", ("spread.similar", "true", None)),
        (b"[spread]", b"[spread]\nby = 'B'", ("spread.by", None, '"B"')),
    ],
)
def test_each_value_is_told_by_its_key(old: bytes, new: bytes, change: tuple[str, str, str]) -> None:
    assert changes(PLAN, PLAN.replace(old, new)) == [change]


def test_tables_of_an_array_are_known_by_name_not_by_place() -> None:
    one, two = PLAN.split(b"[[characteristic]]")[1:]
    swapped = PLAN.split(b"[[characteristic]]")[0] + b"[[characteristic]]".join([b"", two, one])
    ((key, _, _),) = changes(PLAN, swapped)
    assert key == WHOLE_FILE


def test_tables_without_a_name_are_known_by_place() -> None:
    old, new = b"[[t]]\na = 1\n[[t]]\na = 2\n", b"[[t]]\na = 1\n[[t]]\na = 3\n"
    assert changes(old, new) == [("t[2].a", "2", "3")]


def test_nothing_changed_is_nothing() -> None:
    assert settings_changes("plan", PLAN, PLAN) == ()


def test_a_comment_is_a_change_of_the_whole_file() -> None:
    (change,) = settings_changes("plan", PLAN, PLAN + b"# note\n")
    assert change.key == WHOLE_FILE
    assert change.before != change.after


@pytest.mark.parametrize("broken", [b"= nonsense", b"\xff\xfe", b"a = " + b"[" * 100_000])
def test_a_file_that_cannot_be_read_is_told_by_its_digest(broken: bytes) -> None:
    (change,) = settings_changes("plan", PLAN, broken)
    assert change.key == WHOLE_FILE
    assert str(change.after).startswith("SHA-256 ")


def test_a_new_and_a_removed_file() -> None:
    assert settings_changes("plan", None, b"a = 1") == (Change(what="plan", key="a", before=None, after="1"),)
    assert settings_changes("plan", b"a = 1", None) == (Change(what="plan", key="a", before="1", after=None),)


def test_a_long_value_is_cut_but_its_change_shows() -> None:
    long = b'a = "' + b"x" * 1000
    ((_, before, after),) = changes(long + b'"', long + b'y"')
    assert before != after
    assert len(str(before)) < 300
