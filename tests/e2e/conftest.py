"""Sites that all tests of a run share, and copies of them that a test may spoil."""

from __future__ import annotations

from pathlib import Path

import pytest
from rig import NAME, Demo, Site, copied, export, made_once, make_demo, make_site


@pytest.fixture(scope="session")
def site_as_made(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return a site as the README makes it; never to be written to."""
    return made_once(tmp_path_factory, "readme", lambda folder: make_site(folder / "site")) / "site"


@pytest.fixture
def site(site_as_made: Path, tmp_path: Path) -> Site:
    """Return a site of its own: settings and key as the README makes them, nothing reported yet."""
    return copied(site_as_made, tmp_path / "site")


@pytest.fixture(scope="session")
def reported_once(site_as_made: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return a folder with `export/NAME` and a site that reported it; never to be written to."""

    def make(folder: Path) -> None:
        site = copied(site_as_made, folder / "site")
        (folder / "export").mkdir()
        site.done("compare", export(folder / "export" / NAME))

    return made_once(tmp_path_factory, "reported", make)


@pytest.fixture
def reported(reported_once: Path, tmp_path: Path) -> Site:
    """Return a site of its own with one sealed report."""
    return copied(reported_once / "site", tmp_path / "site")


@pytest.fixture
def an_export(tmp_path: Path) -> Path:
    """Return an export that fits the README's plan and layout."""
    return export(tmp_path / NAME)


@pytest.fixture(scope="session")
def demo(tmp_path_factory: pytest.TempPathFactory) -> Demo:
    """Return a demonstration that ran twice on one folder; never to be written to."""
    return Demo(made_once(tmp_path_factory, "demo", make_demo))
