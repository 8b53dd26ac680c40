"""The lock file pins and hashes what pyproject.toml asks for, and names no place it came from."""

from __future__ import annotations

import re
import tomllib
from pathlib import Path

from packaging.requirements import Requirement
from packaging.utils import canonicalize_name

ROOT = Path(__file__).resolve().parents[2]
LOCK = (ROOT / "requirements.lock").read_text("utf-8")
PINS = dict(re.findall(r"^([a-z0-9][a-z0-9._-]*)==(\S+)", LOCK, re.MULTILINE))


def test_every_requirement_is_pinned_to_a_release_it_allows() -> None:
    project = tomllib.loads((ROOT / "pyproject.toml").read_text("utf-8"))
    groups = project["dependency-groups"]
    asked = [*project["project"]["dependencies"], *groups["dev"], *groups["build"]]
    for requirement in map(Requirement, [*asked, *project["build-system"]["requires"]]):
        name = canonicalize_name(requirement.name)
        assert name in PINS, f"{name} is not in requirements.lock: make lock"
        assert requirement.specifier.contains(PINS[name], prereleases=True), f"{name}: make lock"


def test_every_pin_has_a_hash() -> None:
    entries = re.split(r"^(?=[a-z0-9])", LOCK, flags=re.MULTILINE)[1:]
    assert len(entries) >= len(PINS) > 0
    assert [entry.split()[0] for entry in entries if "--hash=sha256:" not in entry] == []


def test_it_names_no_index_and_no_path() -> None:
    assert re.findall(r"https?:|file:|--(?:extra-)?index|--find-links|^-[a-z] |/", LOCK, re.MULTILINE) == []
