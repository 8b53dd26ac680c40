"""config/people.toml: who may sign, every fault at once."""

from __future__ import annotations

from pathlib import Path

import pytest

from qcreport.canonical import in_groups_of_eight
from qcreport.errors import ConfigError, EnvironmentFailedError
from qcreport.settings.people import PEOPLE_FILE, People, load_people, parse_people, person_block
from qcreport.settings.shipped import shipped_files

DIGEST = "0123456789abcdef" * 4
PLAIN = f'[[person]]\nname = "Ada"\ncertificate_sha256 = "{DIGEST}"\nmay = ["reviewed"]\n'


def faults(text: str) -> str:
    with pytest.raises(ConfigError) as caught:
        parse_people(text.encode(), "people.toml")
    return caught.value.text


def test_a_person_is_found_by_certificate() -> None:
    people = parse_people(PLAIN.encode(), "people.toml")
    person = people.by_certificate(DIGEST)
    assert person is not None
    assert (person.name, person.may, people.reviewed_first) == ("Ada", ("reviewed",), True)
    assert people.by_certificate("f" * 64) is None
    assert people.by_certificate(None) is None


@pytest.mark.parametrize(
    "written",
    [DIGEST.upper(), in_groups_of_eight(DIGEST), ":".join(DIGEST[i : i + 2] for i in range(0, 64, 2))],
)
def test_a_fingerprint_may_be_written_as_tools_print_it(written: str) -> None:
    (person,) = parse_people(PLAIN.replace(DIGEST, written).encode(), "people.toml").persons
    assert person.certificate_sha256 == DIGEST


def test_what_the_block_says_is_read_back() -> None:
    block = person_block('Åsa "Q" Ek', DIGEST)
    (person,) = parse_people(block.encode(), "people.toml").persons
    assert (person.name, person.certificate_sha256) == ('Åsa "Q" Ek', DIGEST)


def test_one_person_with_a_renewed_certificate() -> None:
    people = parse_people((PLAIN + PLAIN.replace(DIGEST, "f" * 64)).encode(), "people.toml")
    assert [p.name for p in people.persons] == ["Ada", "Ada"]


@pytest.mark.parametrize(
    ("text", "told"),
    [
        (PLAIN.replace("reviewed", "released"), "must name 'reviewed' or 'authorised', found 'released'"),
        (PLAIN.replace('["reviewed"]', "[]"), "must name at least one"),
        (PLAIN.replace(DIGEST, "abc"), "64 hexadecimal digits, found 3 characters"),
        (PLAIN + PLAIN, "is the certificate of another entry"),
        (PLAIN.replace("name", "nmae"), "unknown key"),
        ('order = "authorised first"\n', "must be one of 'reviewed first', 'any'"),
        ("[[person]]\n", '"certificate_sha256" is missing'),
    ],
)
def test_faults_are_told(text: str, told: str) -> None:
    assert told in faults(text)


def test_all_faults_at_once() -> None:
    told = faults('order = 1\n[[person]]\nname = ""\ncertificate_sha256 = "x"\nmay = ["all"]\n')
    assert len(told.splitlines()) == 4


def test_the_file_of_a_site(tmp_path: Path) -> None:
    assert load_people(tmp_path) == People()
    path = tmp_path / PEOPLE_FILE
    path.parent.mkdir()
    path.write_bytes(shipped_files("config", "people.toml")["people.toml"])
    assert load_people(tmp_path) == People(), "as shipped nobody may sign"
    path.write_text('order = "any"\n' + PLAIN)
    assert load_people(tmp_path).reviewed_first is False
    path.unlink()
    path.mkdir()
    with pytest.raises(EnvironmentFailedError, match="cannot read"):
        load_people(tmp_path)
