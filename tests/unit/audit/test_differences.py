"""Which differences between a reported and a recomputed result count."""

from __future__ import annotations

import copy
from typing import Any

import pytest

from qcreport.audit.differences import MOST_LISTED, compare_results

from .example import result_document


def pair_with(**values: Any) -> dict[str, Any]:
    document = result_document()
    document["characteristics"][0]["pairs"][0].update(values)
    return document


def found(reported: dict[str, Any], recomputed: dict[str, Any]) -> tuple[str, ...]:
    compared = compare_results(reported, recomputed)
    assert compared.matches is not bool(compared.differences)
    return compared.differences


def test_the_same_result_matches() -> None:
    assert found(result_document(), copy.deepcopy(result_document())) == ()


def test_a_difference_is_named_by_its_path() -> None:
    assert found(result_document(), pair_with(p=0.0124)) == (
        "characteristics[0].pairs[0].p: 0.0123 in the report, 0.0124 recomputed",
    )


@pytest.mark.parametrize(
    ("reported", "recomputed", "same"),
    [
        (1.0, 1.0 + 9e-10, True),
        (1.0, 1.0 + 2e-9, False),
        (-1.0, -1.0 - 9e-10, True),
        (1e-30, 1.1e-30, False),
        (0.5, -0.5, False),
        (0.0, 0.0, True),
        (0.0, 1e-300, False),
        (2.0, 2, True),
        (1e300, 1e300 * (1 + 1e-10), True),
    ],
)
def test_numbers_may_differ_by_one_part_in_a_thousand_million(
    reported: float, recomputed: float, same: bool
) -> None:
    assert (found(pair_with(difference=reported), pair_with(difference=recomputed)) == ()) is same
    assert (found(pair_with(difference=recomputed), pair_with(difference=reported)) == ()) is same


@pytest.mark.parametrize(
    ("reported", "recomputed", "same"),
    [
        (5e-13, 5e-13 + 9e-16, True),
        (5e-13, 5e-13 + 2e-15, False),
        (0.0, 1e-16, True),
        (1e-20, 2e-18, True),
        (2e-12, 2e-12 + 1e-15, False),
    ],
)
def test_a_tiny_p_is_held_to_an_absolute_bound(reported: float, recomputed: float, same: bool) -> None:
    assert (found(pair_with(p=reported), pair_with(p=recomputed)) == ()) is same
    assert found(pair_with(se=5e-13), pair_with(se=5e-13 + 9e-16)) != ()


@pytest.mark.parametrize(
    ("reported", "recomputed"),
    [
        ("different", "matters"),
        (10, 11),
        (10**15, 10**15 + 1),
        (None, 0.0),
        (True, 1),
        (True, False),
        ("1", 1),
        ([], {}),
    ],
)
def test_everything_else_is_exact(reported: Any, recomputed: Any) -> None:
    assert len(found(pair_with(answer=reported), pair_with(answer=recomputed))) == 1


def test_lists_of_other_length_are_a_difference() -> None:
    longer = result_document()
    longer["characteristics"][0]["pairs"] *= 2
    assert found(result_document(), longer) == (
        "characteristics[0].pairs: 1 entries in the report, 2 recomputed",
    )


def test_other_versions_are_told_and_do_not_count() -> None:
    newer = result_document()
    newer["versions"] = {"qcreport": "0.1.0", "numpy": "2.1.0", "scipy": "1.17"}
    compared = compare_results(result_document(), newer)
    assert compared.matches
    assert compared.notes == (
        "made with numpy 2.0.0, recomputed with 2.1.0",
        "made with scipy none, recomputed with 1.17",
    )


def test_a_later_version_may_add_keys_and_lose_none() -> None:
    added = pair_with(effect=0.3)
    assert found(result_document(), added) == (
        "characteristics[0].pairs[0].effect: nothing in the report, 0.3 recomputed",
    )
    added["versions"]["qcreport"] = "0.2.0"
    assert found(result_document(), added) == ()
    assert compare_results(result_document(), added).notes == (
        "made with qcreport 0.1.0, recomputed with 0.2.0",
        "characteristics[].pairs[].effect: not in the report; this version of qcreport adds it",
    )
    assert found(added, result_document()) == (
        "characteristics[0].pairs[0].effect: 0.3 in the report, nothing recomputed",
    )


def test_a_flood_of_added_keys_is_cut_and_no_difference() -> None:
    newer = {**result_document(), **{f"new_{number}": number for number in range(30)}}
    newer["versions"] = {**newer["versions"], "qcreport": "0.2.0"}
    compared = compare_results(result_document(), newer)
    assert compared.matches
    assert compared.notes[-1] == "and 10 more that this version adds"


def test_a_flood_of_differences_is_cut() -> None:
    reported, recomputed = result_document(), result_document()
    reported["notices"], recomputed["notices"] = ["a"] * 1000, ["b"] * 1000
    listed = found(reported, recomputed)
    assert len(listed) == MOST_LISTED + 1
    assert listed[-1] == "and 900 more differences"


def test_long_and_unprintable_values_are_shown_short() -> None:
    (line,) = found(pair_with(answer="x" * 500), pair_with(answer="\x1b[31m"))
    assert line.endswith('xx… in the report, "\\u001b[31m" recomputed')
    assert len(line) < 200


def test_a_report_without_versions_is_compared_all_the_same() -> None:
    bare = {key: value for key, value in result_document().items() if key != "versions"}
    compared = compare_results(bare, result_document())
    assert compared.matches
    assert compared.notes == ()
