"""Where a passphrase may come from, and which files are too open."""

from __future__ import annotations

from pathlib import Path

import pytest

from qcreport.errors import EnvironmentFailedError, SigningDeniedError
from qcreport.signing.key_checks import check_key_file_mode
from qcreport.signing.passphrase import PASSPHRASE_VARIABLE, find_passphrase


def private(path: Path, content: bytes, mode: int = 0o600) -> Path:
    path.write_bytes(content)
    path.chmod(mode)
    return path


@pytest.mark.parametrize("mode", [0o600, 0o400])
def test_a_private_file_passes(tmp_path: Path, mode: int) -> None:
    check_key_file_mode(private(tmp_path / "seal.p12", b"x", mode))


@pytest.mark.parametrize("mode", [0o640, 0o604, 0o660, 0o620, 0o644])
def test_a_file_open_to_others_is_refused_with_the_remedy(tmp_path: Path, mode: int) -> None:
    path = private(tmp_path / "seal.p12", b"x", mode)
    with pytest.raises(SigningDeniedError, match=r"chmod 600 .*seal\.p12"):
        check_key_file_mode(path)
    with pytest.raises(SigningDeniedError, match="others"):
        find_passphrase(path, {}, None)


def test_an_absent_file_is_a_failure_of_the_environment(tmp_path: Path) -> None:
    with pytest.raises(EnvironmentFailedError, match=r"absent\.p12"):
        check_key_file_mode(tmp_path / "absent.p12")


def test_a_folder_is_not_read_as_a_passphrase(tmp_path: Path) -> None:
    folder = tmp_path / "folder"
    folder.mkdir(mode=0o700)
    with pytest.raises(EnvironmentFailedError, match="cannot be read"):
        find_passphrase(folder, {}, None)


@pytest.mark.parametrize(
    ("content", "found"),
    [(b"secret\n", b"secret"), (b"secret\r\n", b"secret"), (b" two words ", b" two words ")],
)
def test_one_line_end_is_not_part_of_the_passphrase(tmp_path: Path, content: bytes, found: bytes) -> None:
    assert find_passphrase(private(tmp_path / "p", content), {}, None) == found


@pytest.mark.parametrize("content", [b"", b"\n", b"x" * 5000])
def test_an_empty_or_endless_passphrase_file_is_refused(tmp_path: Path, content: bytes) -> None:
    with pytest.raises(SigningDeniedError, match="one line"):
        find_passphrase(private(tmp_path / "p", content), {}, None)


def test_the_file_comes_first_then_the_environment_then_the_person(tmp_path: Path) -> None:
    path = private(tmp_path / "p", b"from file")
    environment = {PASSPHRASE_VARIABLE: "from environment"}
    assert find_passphrase(path, environment, lambda: "typed") == b"from file"
    assert find_passphrase(None, environment, lambda: "typed") == b"from environment"
    assert find_passphrase(None, {PASSPHRASE_VARIABLE: ""}, lambda: "tÿped") == "tÿped".encode()
    assert find_passphrase(None, {}, lambda: "") is None
    assert find_passphrase(None, {}, None) is None
