"""What a measurement met again says: known, changed, corrected before or afterwards, a retest."""

from __future__ import annotations

from pathlib import Path

import pytest

from qcreport.measurements import Measurement
from qcreport.records.facade import Records
from qcreport.records.store import Survey

from .example import Handling, measured, measurement

EIGHT, NINE = "2026-11-01T08:00:00", "2026-11-01T09:00:00"


def sealed(records: Records, tmp_path: Path, data: bytes, *values: Measurement) -> Survey:
    handling = Handling(records, claim=data.decode(), data=data, values=values)
    return handling.whole(tmp_path / "reports")


def whens(survey: Survey) -> list[tuple[str, str, str]]:
    return [(c.when, c.before, c.source) for c in survey.history]


def whys(survey: Survey) -> list[str]:
    return [r.why for r in survey.retests]


@pytest.mark.parametrize(
    ("before", "after", "why"),
    [
        ({"time": EIGHT}, {"time": EIGHT, "text": "2"}, "another value at the same time"),
        ({"time": EIGHT}, {"time": NINE, "text": "2"}, "another value at another time"),
        ({"time": EIGHT}, {"time": NINE}, "the same value at another time"),
        ({}, {"text": "2"}, "another value, no time recorded"),
        ({"time": EIGHT}, {"text": "2"}, "another value, no time recorded"),
    ],
)
def test_a_second_export_of_a_sample_is_flagged(
    records: Records, tmp_path: Path, before: dict[str, str], after: dict[str, str], why: str
) -> None:
    sealed(records, tmp_path, b"first", measurement(2, "1", **before))
    survey = sealed(records, tmp_path, b"second", measurement(2, "1", **after))
    (flag,) = survey.retests
    assert (flag.why, flag.sample, flag.batch, flag.source) == (why, "s2", "LA-1", "2026-0001")
    assert len(survey.changed) == ("text" in after)
    third = sealed(records, tmp_path, b"third", measurement(2, "1", **after))
    assert (third.known, third.retests) == (1, ())


def test_a_time_that_appears_later_is_no_retest(records: Records, tmp_path: Path) -> None:
    sealed(records, tmp_path, b"first", measurement(2, "1"))
    survey = sealed(records, tmp_path, b"second", measurement(2, "1", time=EIGHT))
    assert (survey.known, survey.retests, survey.history) == (1, (), ())


def test_one_more_result_of_a_known_sample_is_flagged_once_and_again_in_a_rerun(
    records: Records, tmp_path: Path
) -> None:
    one, more = measurement(2, "1"), measurement(9, "2", sample="s2")
    assert whys(sealed(records, tmp_path, b"first", one)) == []
    assert whys(sealed(records, tmp_path, b"second", one, more)) == ["one more result"]
    assert whys(records.survey(measured(b"third", one, more))) == []
    assert whys(records.survey(measured(b"second", one, more))) == ["one more result"]
    assert whys(records.survey(measured(b"first", one))) == []


def test_two_results_of_one_sample_in_one_export_are_no_retest(records: Records, tmp_path: Path) -> None:
    values = measurement(2, "1"), measurement(3, "2", sample="s2")
    assert whys(sealed(records, tmp_path, b"first", *values)) == []


def test_the_same_sample_id_in_another_batch_is_another_sample(records: Records, tmp_path: Path) -> None:
    sealed(records, tmp_path, b"first", measurement(2, "1"))
    assert whys(records.survey(measured(b"second", measurement(2, "2", batch="LA-2")))) == []


def test_a_change_is_told_now_earlier_and_later(records: Records, tmp_path: Path) -> None:
    old, new = measurement(2, "1"), measurement(2, "2")
    sealed(records, tmp_path, b"first", old)
    assert whens(sealed(records, tmp_path, b"second", new)) == [("now", "1 MPa", "2026-0001")]
    assert whens(sealed(records, tmp_path, b"third", new)) == [("earlier", "1 MPa", "2026-0001")]
    assert whens(records.survey(measured(b"second", new))) == [("now", "1 MPa", "2026-0001")]
    assert whens(records.survey(measured(b"first", old))) == [("later", "2 MPa", "2026-0002")]
    assert whens(records.survey(measured(b"fourth", old))) == [("now", "2 MPa", "2026-0002")]


def test_an_export_compared_again_says_of_its_values_what_it_said_first(
    records: Records, tmp_path: Path
) -> None:
    values = measurement(2, "1"), measurement(3, "2")
    first = sealed(records, tmp_path, b"first", *values)
    again = records.survey(measured(b"first", *values))
    assert (first.first_seen, again.first_seen, again.new) == (2, 2, 0)
    assert records.survey(measured(b"second", *values)).first_seen == 0


def test_values_without_sample_are_counted(records: Records) -> None:
    values = measurement(2, "1", sample=None), measurement(3, "2")
    assert records.survey(measured(b"first", *values)).not_joined == 1
