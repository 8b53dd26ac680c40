"""The plans of a site with the layouts and rules that they name."""

from __future__ import annotations

from pathlib import Path

import pytest

from qcreport.errors import ConfigError, EnvironmentFailedError, Fault
from qcreport.settings import Site, find_plan, load_plans
from qcreport.settings.new_site import NewSite, make_site
from qcreport.settings.shipped import shipped_files


@pytest.fixture
def site(tmp_path: Path) -> Site:
    answers = NewSite(
        name="Lab", address="Town", time_zone="Europe/Berlin", language="en", demonstration=True
    )
    return make_site(tmp_path / "site", answers)


def plan_path(site: Site, name: str = "lap-shear-batches") -> Path:
    return site.root / "config" / "plans" / f"{name}.toml"


def change(path: Path, old: str, new: str) -> None:
    text = path.read_text(encoding="utf-8")
    assert old in text
    path.write_text(text.replace(old, new), encoding="utf-8")


def faults(site: Site) -> tuple[Fault, ...]:
    with pytest.raises(ConfigError) as caught:
        load_plans(site)
    return caught.value.faults


def test_a_plan_comes_with_its_files_as_read(site: Site) -> None:
    found = find_plan(site, "lap-shear-batches")
    assert found.plan_file.data == plan_path(site).read_bytes()
    assert found.plan_file.name == "lap-shear-batches.toml"
    assert (found.layout.name, found.layout_file.name) == ("shear-rig", "shear-rig.toml")
    assert (found.rules.name, found.rules_file.name) == ("default", "default.toml")
    assert found.rules_file.data == shipped_files("config/rules", "*.toml")["default.toml"]


def test_a_plan_is_found_by_file_name_by_name_and_by_path(site: Site, tmp_path: Path) -> None:
    renamed = plan_path(site).rename(plan_path(site, "other"))
    assert find_plan(site, "lap-shear-batches").plan_file.name == "other.toml"
    assert find_plan(site, "other").plan.name == "lap-shear-batches"
    assert find_plan(site, str(renamed)).plan.name == "lap-shear-batches"
    outside = tmp_path / "mine.toml"
    outside.write_bytes(renamed.read_bytes())
    assert find_plan(site, str(outside)).plan_file.name == "mine.toml"


def test_a_plan_that_is_not_there_names_those_that_are(site: Site) -> None:
    with pytest.raises(ConfigError) as caught:
        find_plan(site, "lap-sheer")
    assert "no plan 'lap-sheer'. Plans of this site: lap-shear-batches, " in caught.value.text
    for path in (site.root / "config" / "plans").iterdir():
        path.unlink()
    with pytest.raises(ConfigError, match="Plans of this site: none"):
        find_plan(site, "lap-shear-batches")


def test_a_layout_may_lie_beside_the_plan(site: Site) -> None:
    layout = site.root / "config" / "layouts" / "shear-rig.toml"
    layout.rename(plan_path(site).with_name("near.layout.toml"))
    change(plan_path(site), 'layout = "shear-rig"', 'layout = "near.layout.toml"')
    assert find_plan(site, "lap-shear-batches").layout_file.name == "near.layout.toml"


@pytest.mark.parametrize(("key", "old"), [("layout", 'layout = "shear-rig"'), ("rules", 'rules = "default"')])
def test_a_layout_or_rules_that_are_absent_are_told_at_the_plan(site: Site, key: str, old: str) -> None:
    change(plan_path(site), old, f'{key} = "absent"')
    (fault,) = faults(site)
    assert (fault.file, fault.key) == ("lap-shear-batches.toml", key)
    assert "absent.toml is not there" in fault.text


def test_faults_of_all_files_come_at_once_and_each_once(site: Site) -> None:
    change(plan_path(site), 'groups = "batch"', 'groups = "lot"')
    change(site.root / "config" / "rules" / "textbook.toml", 'policy = "levene on this export"', "polcy = 1")
    layout = site.root / "config" / "layouts" / "shear-rig.toml"
    layout.write_text(layout.read_text(encoding="utf-8") + "\n[nonsense]\n", encoding="utf-8")
    found = [(f.file, f.key) for f in faults(site)]
    assert set(found) >= {
        ("lap-shear-batches.toml", "comparison.groups"),
        ("textbook.toml", "spread.polcy"),
        ("shear-rig.toml", "nonsense"),
    }
    assert len(found) == len(set(found))


def test_a_characteristic_that_the_layout_lacks(site: Site) -> None:
    change(plan_path(site), 'name = "lap_shear"\n', 'name = "lap_sheer"\n')
    (fault,) = faults(site)
    assert (fault.file, fault.key) == ("lap-shear-batches.toml", "characteristic.name")
    assert fault.text == "the layout shear-rig has no characteristic 'lap_sheer'. It has: lap_shear"


def test_two_plans_of_one_name(site: Site) -> None:
    plan_path(site, "copy").write_bytes(plan_path(site).read_bytes())
    assert [(f.file, f.key) for f in faults(site)] == [
        ("copy.toml", "name"),
        ("lap-shear-batches.toml", "name"),
    ]


def test_a_folder_with_a_plans_name_is_a_fault(site: Site) -> None:
    plan_path(site, "folder").mkdir()
    (fault,) = faults(site)
    assert "is a folder, expected a .toml file" in fault.text


def test_a_file_that_cannot_be_read_is_the_environments_fault(
    site: Site, monkeypatch: pytest.MonkeyPatch
) -> None:
    def refuse(path: Path) -> bytes:
        raise PermissionError(13, "Permission denied", str(path))

    monkeypatch.setattr(Path, "read_bytes", refuse)
    with pytest.raises(EnvironmentFailedError, match=r"cannot read .*lap-shear-batches.*Permission denied"):
        find_plan(site, "lap-shear-batches")
