"""Where keys lie in a site, and how a new one gets there."""

from __future__ import annotations

import stat
from dataclasses import dataclass
from pathlib import Path

import pytest

from qcreport.errors import EnvironmentFailedError, UsageError
from qcreport.settings import Site, load_site
from qcreport.settings.keys import key_files, read_bytes, write_key
from qcreport.settings.new_site import NewSite, make_site


@dataclass(frozen=True)
class Made:
    """Stands for a key that the signing room made."""

    pkcs12: bytes = b"protected"
    certificate_pem: bytes = b"certificate"


@pytest.fixture
def site(tmp_path: Path) -> Site:
    answers = NewSite(name="Lab", address="Town", time_zone="Europe/Berlin", language="en")
    return make_site(tmp_path / "site", answers)


def test_a_service_key_is_private_and_known_to_the_site(site: Site, tmp_path: Path) -> None:
    files = key_files(site, "service", "Lab service")
    inside = site.folders.keys / "pass"
    write_key(site, files, Made(), str(inside))
    assert files.key.read_bytes() == b"protected"
    assert stat.S_IMODE(files.key.stat().st_mode) == 0o600
    assert files.certificate.read_bytes() == b"certificate"
    seal = load_site(site.root).seal
    assert (seal.key, seal.passphrase_file) == (files.key, inside)
    assert '"keys/service.p12"' in load_site(site.root).site_bytes.decode()
    assert str(tmp_path) not in load_site(site.root).site_bytes.decode()


def test_a_passphrase_outside_the_site_keeps_its_whole_path(site: Site, tmp_path: Path) -> None:
    write_key(site, key_files(site, "service", "Lab"), Made(), str(tmp_path / "pass"))
    assert load_site(site.root).seal.passphrase_file == tmp_path / "pass"


def test_without_a_passphrase_file_none_is_set(site: Site) -> None:
    write_key(site, key_files(site, "service", "Lab"), Made(), None)
    assert load_site(site.root).seal.passphrase_file is None


def test_a_persons_key_changes_no_setting(site: Site) -> None:
    files = key_files(site, "person", "Dr. Ada / Lovelace")
    write_key(site, files, Made(), "pass")
    assert files.key.name == "person-dr--ada---lovelace.p12"
    assert files.key.parent == site.folders.keys
    assert load_site(site.root).site_bytes == site.site_bytes


@pytest.mark.parametrize("name", ["..", "///", "", "../../etc/x", "a" * 500, "İ" * 200])
def test_a_name_never_leaves_the_folder_of_keys(site: Site, name: str) -> None:
    files = key_files(site, "person", name)
    assert files.key.parent == site.folders.keys
    assert len(files.key.name.encode()) < 255


def test_a_key_that_is_there_is_never_replaced(site: Site) -> None:
    write_key(site, key_files(site, "service", "Lab"), Made(), None)
    with pytest.raises(UsageError, match=r"is there already\. Move it away first"):
        key_files(site, "service", "Lab")
    site.folders.keys.joinpath("service.p12").unlink()
    with pytest.raises(UsageError, match=r"service\.crt is there already"):
        key_files(site, "service", "Lab")


def test_files_named_by_a_person(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "file"
    path.write_bytes(b"x")
    assert read_bytes(path, "The key") == b"x"
    with pytest.raises(UsageError, match="is not there"):
        read_bytes(tmp_path / "absent", "The key")
    with pytest.raises(UsageError, match="is not there"):
        read_bytes(path / "below", "The key")
    with pytest.raises(UsageError, match="is a folder"):
        read_bytes(tmp_path, "The key")

    def refuse(path: Path) -> bytes:
        raise PermissionError(13, "Permission denied", str(path))

    monkeypatch.setattr(Path, "read_bytes", refuse)
    with pytest.raises(EnvironmentFailedError, match="cannot be read: Permission denied"):
        read_bytes(path, "The key")
