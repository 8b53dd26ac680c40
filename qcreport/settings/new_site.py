"""Make a new site from the shipped defaults."""

from __future__ import annotations

import json
import re
from dataclasses import dataclass
from pathlib import Path
from typing import Final

from qcreport.errors import EnvironmentFailedError, UsageError
from qcreport.settings.shipped import shipped_files, shipped_folder
from qcreport.settings.site import SITE_FILE, Site, load_site, parse_site, require_folders

_PRIVATE = ("work", "keys", "records")
_VALUE: Final = r"""\"(?:[^"\\]|\\.)*"|'[^']*'|true|false"""
"""A text or a flag on one line."""


@dataclass(frozen=True, slots=True, kw_only=True)
class NewSite:
    """What a person must say to get a site."""

    name: str
    """Name of the laboratory."""
    address: str
    """Its address."""
    time_zone: str
    """IANA name."""
    language: str
    """Language of reports."""
    demonstration: bool = False
    """True for a demo site: example plans come along and every page says so."""


def make_site(root: Path, answers: NewSite) -> Site:
    """Make folders and settings in `root`, which must be new or empty.

    Raises
    ------
    UsageError
        Where `root` holds something already.
    ConfigError
        Where an answer is wrong (time zone, language); nothing is written then.
    EnvironmentFailedError
        Where the disk refuses.
    """
    root = root.absolute()
    if root.exists() and (not root.is_dir() or any(root.iterdir())):
        raise UsageError(f"{root} is there already and not empty. Name a new folder.", file=str(root))
    text = site_toml(answers)
    parse_site(text.encode(), SITE_FILE, root)
    try:
        _write(root, text, answers)
    except OSError as error:
        raise EnvironmentFailedError(
            f"cannot write {error.filename or root}: {error.strerror}. Name a folder this account may write.",
            file=str(root),
        ) from None
    site = load_site(root)
    require_folders(site)
    for name in _PRIVATE:
        (root / name).chmod(0o700)
    return site


def _write(root: Path, site_text: str, answers: NewSite) -> None:
    config = root / "config"
    for name in ("plans", "layouts", "rules"):
        (config / name).mkdir(parents=True, exist_ok=True)
    _write_all(config, shipped_files("config", "people.toml"))
    _write_all(config / "rules", shipped_files("config/rules", "*.toml"))
    if answers.demonstration:
        _write_all(config / "plans", shipped_files("config/plans", "*.toml"))
        _write_all(config / "layouts", shipped_files("config/layouts", "*.toml"))
    (root / "templates").mkdir(exist_ok=True)
    _write_all(root / "templates", shipped_files("templates", "*"))
    (root / SITE_FILE).write_text(site_text, encoding="utf-8")


def _write_all(folder: Path, files: dict[str, bytes]) -> None:
    for name, data in files.items():
        (folder / name).write_bytes(data)


def site_toml(answers: NewSite) -> str:
    """Return the text of site.toml: the answers put into the shipped file, its comments kept."""
    text = (shipped_folder("config") / "site.toml").read_text(encoding="utf-8")
    for key, value in (
        ("name", answers.name),
        ("address", answers.address),
        ("time_zone", answers.time_zone),
        ("language", answers.language),
        ("demonstration", answers.demonstration),
    ):
        text = _with_value(text, "lab", key, value)
    return text


def with_seal(text: str, key: str, passphrase_file: str | None) -> str:
    """Return site.toml's text with the service key's file and the passphrase's file set."""
    text = _with_value(text, "seal", "key", key)
    return _with_value(text, "seal", "passphrase_file", passphrase_file) if passphrase_file else text


def _with_value(text: str, table: str, key: str, value: str | bool) -> str:
    """Return the text with a key of a table set to a value; comments stay.

    The key's own line is changed, else the line that shows it commented out, else a line is added.
    """
    lines = text.split("\n")
    setting = f"{key} = {_toml(value)}"
    start = next((i for i, line in enumerate(lines) if _is_header(line, table)), None)
    if start is None:
        return f"{text.rstrip()}\n\n[{table}]\n{setting}\n"
    after = lines[start + 1 :]
    stop = start + 1 + next((i for i, line in enumerate(after) if line.lstrip().startswith("[")), len(after))
    for marker in ("", "#"):
        shape = re.compile(rf"\s*{marker}\s*{key}\s*=\s*({_VALUE})\s*(#.*)?")
        for index in range(start + 1, stop):
            if found := shape.fullmatch(lines[index].rstrip("\r")):
                comment = found.group(2)
                lines[index] = f"{setting:<31} {comment}" if comment else setting
                return "\n".join(lines)
    lines.insert(start + 1, setting)
    return "\n".join(lines)


def _is_header(line: str, table: str) -> bool:
    return re.fullmatch(rf"\s*\[\s*{table}\s*\]\s*(#.*)?", line.rstrip("\r")) is not None


def _toml(value: str | bool) -> str:
    """Return a TOML value; a JSON string is a valid TOML basic string (save for DEL, escaped here)."""
    if isinstance(value, bool):
        return "true" if value else "false"
    return json.dumps(value, ensure_ascii=False).replace("\x7f", "\\u007f")
