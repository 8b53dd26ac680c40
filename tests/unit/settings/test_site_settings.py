"""The settings of a site: read with every fault at once, made new from the shipped defaults."""

from __future__ import annotations

import dataclasses
import os
import stat
import tomllib
from pathlib import Path

import pytest

from qcreport.errors import ConfigError, EnvironmentFailedError, Fault, UsageError
from qcreport.settings import load_plans, load_site
from qcreport.settings.new_site import NewSite, make_site, site_toml, with_seal
from qcreport.settings.shipped import shipped_files, shipped_folder
from qcreport.settings.site import SITE_FILE, Site, parse_site, require_folders
from qcreport.workbook.limits import Limits

ANSWERS = NewSite(name="Lab", address="Street 1, Town", time_zone="Europe/Berlin", language="en")
LAB = '[lab]\nname = "Lab"\naddress = "Town"\ntime_zone = "Europe/Berlin"\n'
ROOT = Path("/site")


def parse(text: str) -> Site:
    return parse_site(text.encode(), SITE_FILE, ROOT)


def faults(text: str) -> tuple[Fault, ...]:
    with pytest.raises(ConfigError) as caught:
        parse(text)
    return caught.value.faults


class TestParse:
    def test_defaults(self) -> None:
        site = parse(LAB)
        assert (site.laboratory.name, site.laboratory.address) == ("Lab", "Town")
        assert (site.laboratory.place_of_work, site.laboratory.customer) == ("", "")
        assert (site.time_zone, site.language, site.page_size) == ("Europe/Berlin", "en", "A4")
        assert site.demonstration is False
        assert [f.name for f in site.folders.all()] == [
            "inbox", "reports", "refused", "archive", "records", "work", "keys",
        ]  # fmt: skip
        assert all(f.parent == ROOT for f in site.folders.all())
        assert (site.intake.quiet_s, site.intake.poll_s, site.workers) == (5.0, 3.0, 2)
        assert site.limits == Limits()
        assert (site.seal.key, site.seal.passphrase_file, site.seal.location) == (None, None, "")
        assert site.site_bytes == LAB.encode()

    def test_everything_said(self) -> None:
        site = parse(
            LAB + 'language = "en"\nplace_of_work = "Hall 2"\ncustomer = "internal"\ndemonstration = true\n'
            '[folders]\ninbox = "/mnt/share/in"\nreports = "out"\n[intake]\nquiet_s = 0\npoll_s = 0.5\n'
            '[limits]\nmax_rows = 1000\n[report]\npage_size = "Letter"\n'
            '[seal]\nkey = "keys/service.p12"\npassphrase_file = "/run/secret"\nlocation = "Town"\n'
            "[service]\nworkers = 4\n"
        )
        assert (site.laboratory.place_of_work, site.laboratory.customer) == ("Hall 2", "internal")
        assert site.demonstration is True
        assert (site.folders.inbox, site.folders.reports) == (Path("/mnt/share/in"), ROOT / "out")
        assert (site.intake.quiet_s, site.intake.poll_s, site.page_size) == (0.0, 0.5, "Letter")
        assert site.limits == dataclasses.replace(Limits(), max_rows=1000)
        assert site.seal.key == ROOT / "keys" / "service.p12"
        assert (site.seal.passphrase_file, site.seal.location) == (Path("/run/secret"), "Town")
        assert site.workers == 4

    @pytest.mark.parametrize(
        ("table", "line", "words"),
        [
            ("lab", 'nmae = "x"', 'unknown key; did you mean "name"?'),
            ("lab", 'demonstration = "no"', "must be true or false"),
            ("lab", 'language = "fr"', "must be one of 'de', 'en', found 'fr'"),
            ("folders", 'inbox = ""', "must not be blank"),
            ("folders", "inbox = 1", "must be a text"),
            ("folders", 'reports = "inbox"', "must be a folder of its own, found that of inbox"),
            ("folders", 'reports = "x/../inbox/"', "must be a folder of its own, found that of inbox"),
            ("folders", 'inbox = "."', "must be a folder of its own, found that of the site"),
            ("intake", "quiet_s = -1", "must be at least 0"),
            ("intake", "poll_s = 0", "must be greater than 0"),
            ("intake", "quiet_s = nan", "must be a finite number"),
            ("limits", "max_rows = 0", "must be at least 1"),
            ("limits", 'max_rows = "many"', "must be a whole number"),
            ("limits", "max_row = 5", 'did you mean "max_rows"?'),
            ("report", 'page_size = "A5"', "must be one of 'A4', 'Letter'"),
            ("seal", 'key = ""', "must not be blank"),
            ("service", "workers = 0", "must be at least 1"),
            ("service", "workers = 1.5", "must be a whole number"),
            ("nonsense", "a = 1", "unknown key"),
        ],
    )
    def test_a_fault_names_its_line(self, table: str, line: str, words: str) -> None:
        text = LAB + (f"{line}\n" if table == "lab" else f"[{table}]\n{line}\n")
        (fault,) = faults(text)
        assert words in fault.text
        assert fault.file == SITE_FILE
        assert fault.line == (5 if table in ("lab", "nonsense") else 6)

    def test_a_time_zone_must_exist(self) -> None:
        (fault,) = faults(LAB.replace("Europe/Berlin", "Europe/Nowhere"))
        assert "not an IANA time zone" in fault.text
        assert (fault.line, fault.key) == (4, "lab.time_zone")

    @pytest.mark.parametrize("key", ["name", "address", "time_zone"])
    def test_what_every_report_prints_is_required(self, key: str) -> None:
        text = "\n".join(line for line in LAB.splitlines() if not line.startswith(key))
        assert [f.text for f in faults(text)] == [f'"{key}" is missing']
        blank = "\n".join(f'{key} = ""' if x.startswith(key) else x for x in LAB.splitlines())
        assert [f.text for f in faults(blank)] == ["must not be blank"]

    def test_all_faults_come_at_once(self) -> None:
        found = faults('[lab]\nname = 1\n[intake]\npoll_s = 0\n[reprot]\npage_size = "A4"\n')
        assert [f.line for f in found] == [1, 1, 2, 4, 5]

    def test_an_empty_file_says_what_is_missing_first(self) -> None:
        assert faults("")[0].text == '"lab" is missing'


class TestLoad:
    def test_no_site_says_how_to_make_one(self, tmp_path: Path) -> None:
        with pytest.raises(UsageError, match=r"^No site here \(.*\), make one: qcreport site new DIR$"):
            load_site(tmp_path)
        with pytest.raises(UsageError):
            load_site(tmp_path / "absent")

    def test_a_site_file_that_is_not_text(self, tmp_path: Path) -> None:
        (tmp_path / "config").mkdir()
        (tmp_path / SITE_FILE).write_bytes(b"\xff\xfe\x00")
        with pytest.raises(ConfigError, match=r"config/site\.toml: not UTF-8 text"):
            load_site(tmp_path)

    def test_an_unreadable_site_file_is_the_environments_fault(
        self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        make_site(tmp_path, ANSWERS)

        def refuse(path: Path) -> bytes:
            raise PermissionError(13, "Permission denied", str(path))

        monkeypatch.setattr(Path, "read_bytes", refuse)
        with pytest.raises(EnvironmentFailedError, match="Permission denied"):
            load_site(tmp_path)


class TestMake:
    def test_what_is_made_can_be_loaded(self, tmp_path: Path) -> None:
        root = tmp_path / "new" / "site"
        made = make_site(root, ANSWERS)
        assert load_site(root) == made
        assert (made.laboratory.name, made.laboratory.address) == ("Lab", "Street 1, Town")
        assert made.root == root
        assert all(folder.is_dir() for folder in made.folders.all())
        for name in ("work", "keys", "records"):
            assert stat.S_IMODE((root / name).stat().st_mode) == 0o700

    def test_rules_come_along_and_examples_stay_out(self, tmp_path: Path) -> None:
        make_site(tmp_path, ANSWERS)
        rules = {p.name: p.read_bytes() for p in (tmp_path / "config" / "rules").iterdir()}
        assert rules == shipped_files("config/rules", "*.toml")
        assert list((tmp_path / "config" / "plans").iterdir()) == []
        assert list((tmp_path / "config" / "layouts").iterdir()) == []
        assert load_plans(load_site(tmp_path)) == ()

    def test_a_demonstration_site_has_the_examples(self, tmp_path: Path) -> None:
        site = make_site(tmp_path, dataclasses.replace(ANSWERS, demonstration=True))
        assert site.demonstration is True
        names = [f"{p.plan.name}.toml" for p in load_plans(site)]
        assert names == sorted(shipped_files("config/plans", "*.toml"))

    def test_a_folder_that_holds_something_is_left_alone(self, tmp_path: Path) -> None:
        (tmp_path / "mine.txt").write_text("x", encoding="utf-8")
        with pytest.raises(UsageError, match="not empty"):
            make_site(tmp_path, ANSWERS)
        assert [p.name for p in tmp_path.iterdir()] == ["mine.txt"]
        with pytest.raises(UsageError):
            make_site(tmp_path / "mine.txt", ANSWERS)

    @pytest.mark.parametrize(
        ("field", "value"), [("time_zone", "Mars"), ("language", "xx"), ("name", " "), ("address", "")]
    )
    def test_a_wrong_answer_writes_nothing(self, tmp_path: Path, field: str, value: str) -> None:
        with pytest.raises(ConfigError):
            make_site(tmp_path / "site", dataclasses.replace(ANSWERS, **{field: value}))
        assert list(tmp_path.iterdir()) == []

    def test_a_disk_that_refuses(self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
        def refuse(path: Path, *_: object, **__: object) -> None:
            raise OSError(28, "No space left on device", str(path))

        monkeypatch.setattr(Path, "mkdir", refuse)
        with pytest.raises(EnvironmentFailedError, match="No space left on device"):
            make_site(tmp_path / "site", ANSWERS)

    @pytest.mark.parametrize(
        "text",
        [
            'Lab "North" \\ Süd',
            "Street 1\nTown\tHall",
            "# no comment",
            "bell \x07 and delete \x7f",
            "漢字 🧪",
            "a = b",
        ],
    )
    def test_any_answer_comes_back_as_given(self, text: str) -> None:
        written = site_toml(dataclasses.replace(ANSWERS, name=text, address=text))
        lab = tomllib.loads(written)["lab"]
        assert (lab["name"], lab["address"]) == (text, text)

    def test_every_comment_of_the_shipped_file_stays(self) -> None:
        shipped = (shipped_folder("config") / "site.toml").read_text(encoding="utf-8")
        comments = [line.partition("#")[2] for line in shipped.splitlines() if "#" in line]
        written = site_toml(ANSWERS)
        assert all(comment in written for comment in comments)
        assert len(written.splitlines()) == len(shipped.splitlines())


class TestSealKey:
    def seal(self, text: str) -> dict[str, object]:
        found: dict[str, object] = tomllib.loads(text)["seal"]
        return found

    def test_the_lines_that_are_commented_out_are_filled(self) -> None:
        text = with_seal(site_toml(ANSWERS), "keys/service.p12", "keys/pass")
        assert self.seal(text) == {"key": "keys/service.p12", "passphrase_file": "keys/pass", "location": ""}
        assert len(text.splitlines()) == len(site_toml(ANSWERS).splitlines())

    def test_a_key_set_before_is_replaced(self) -> None:
        text = with_seal(site_toml(ANSWERS), "keys/old.p12", None)
        text = with_seal(text, "keys/new.p12", None)
        assert self.seal(text) == {"key": "keys/new.p12", "location": ""}

    @pytest.mark.parametrize(
        "text",
        [
            LAB,
            f"{LAB}[seal]\n",
            f'{LAB}[ seal ] # here\nlocation = "Town"\n',
            f'{LAB}[seal]\n# key = "example"\nkey = "old"\n',
            f'{LAB}# key = "not here"\n[seal]\nlocation = ""\n[report]\npage_size = "A4"\n',
            f"{LAB}[seal]\nkey = 'literal'",
        ],
    )
    def test_a_file_that_people_have_changed(self, text: str) -> None:
        written = with_seal(text, "keys/service.p12", None)
        assert self.seal(written)["key"] == "keys/service.p12"
        before, after = tomllib.loads(text), tomllib.loads(written)
        assert after["lab"] == before["lab"]
        assert after.get("report") == before.get("report")
        assert {k: v for k, v in after["seal"].items() if k != "key"} == {
            k: v for k, v in before.get("seal", {}).items() if k != "key"
        }


class TestFolders:
    def test_local_folders_are_made_again(self, tmp_path: Path) -> None:
        site = make_site(tmp_path, ANSWERS)
        site.folders.inbox.rmdir()
        require_folders(site)
        assert site.folders.inbox.is_dir()

    def test_an_absent_share_is_noticed_and_not_replaced(self, tmp_path: Path) -> None:
        site = make_site(tmp_path / "site", ANSWERS)
        share = tmp_path / "share"
        away = dataclasses.replace(site, folders=dataclasses.replace(site.folders, inbox=share))
        with pytest.raises(EnvironmentFailedError, match=r"is not there\. Mount the share"):
            require_folders(away)
        assert not share.exists()
        share.mkdir()
        require_folders(away)

    def test_a_relative_path_out_of_the_site_is_a_share_too(self, tmp_path: Path) -> None:
        text = LAB + '[folders]\ninbox = "../share"\n'
        site = parse_site(text.encode(), SITE_FILE, tmp_path / "site")
        assert site.folders.inbox == tmp_path / "share"
        with pytest.raises(EnvironmentFailedError, match="Mount the share"):
            require_folders(site)
        assert not (tmp_path / "share").exists()

    def test_a_file_in_the_place_of_a_folder(self, tmp_path: Path) -> None:
        (tmp_path / "inbox").write_text("a file", encoding="utf-8")
        site = parse_site(LAB.encode(), SITE_FILE, tmp_path)
        with pytest.raises(EnvironmentFailedError, match="is a file and not a folder"):
            require_folders(site)

    def test_a_folder_that_cannot_be_made(self, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
        def refuse(path: Path, *_: object, **__: object) -> None:
            raise PermissionError(13, "Permission denied", str(path))

        monkeypatch.setattr(Path, "mkdir", refuse)
        site = parse_site(LAB.encode(), SITE_FILE, tmp_path)
        with pytest.raises(EnvironmentFailedError, match=r"cannot make .*inbox: Permission denied"):
            require_folders(site)


def test_shipped_folders_hold_the_defaults() -> None:
    assert (shipped_folder("config") / "site.toml").is_file()
    assert set(shipped_files("config/rules", "*.toml")) == {"default.toml", "textbook.toml"}
    assert os.fspath(shipped_folder("absent")).endswith("absent")
    assert shipped_files("absent", "*") == {}
