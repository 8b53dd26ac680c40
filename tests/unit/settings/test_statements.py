"""What a report must say by clause: all blanks are told at once, each may be left out for a reason."""

from __future__ import annotations

from pathlib import Path

import pytest

from qcreport.errors import ConfigError
from qcreport.settings.site import SITE_FILE, parse_site

LAB = '[lab]\nname = "A lab"\naddress = "A street 1"\ntime_zone = "Europe/Berlin"\n'


def test_a_site_that_states_nothing_is_asked_for_nothing() -> None:
    assert parse_site(LAB.encode(), SITE_FILE, Path("/site")).statements == ()


def test_all_blanks_are_told_at_once() -> None:
    text = LAB + '[report.states]\ncustomer = "Production"\n'
    with pytest.raises(ConfigError) as caught:
        parse_site(text.encode(), SITE_FILE, Path("/site"))
    keys = sorted(str(f.key) for f in caught.value.faults)
    assert keys == [f"report.states.{k}" for k in ("deviations", "external", "items", "sampling")]
    assert all("give the reason as left_out." in f.text for f in caught.value.faults)


def test_what_is_left_out_carries_its_reason_and_nothing_is_both() -> None:
    left = "".join(f'{k} = "not ours"\n' for k in ("items", "sampling", "deviations", "external"))
    text = LAB + '[report.states]\ncustomer = "Production"\ncopying = "Ask."\n[report.left_out]\n' + left
    found = parse_site(text.encode(), SITE_FILE, Path("/site")).statements
    assert [(s.name, s.text, s.left_out) for s in found] == [
        ("customer", "Production", ""),
        *((k, "", "not ours") for k in ("items", "sampling", "deviations", "external")),
        ("copying", "Ask.", ""),
    ]
    both = text + 'customer = "no"\n'
    with pytest.raises(ConfigError, match="stated and left out at once"):
        parse_site(both.encode(), SITE_FILE, Path("/site"))
