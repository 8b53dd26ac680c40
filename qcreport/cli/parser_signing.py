"""The words of `sign`."""

from __future__ import annotations

import argparse
from collections.abc import Callable
from typing import Any, Final, TypeAlias

from qcreport.signing.roles import ROLES

Commands: TypeAlias = "argparse._SubParsersAction[Any]"
Add: TypeAlias = Callable[..., argparse.ArgumentParser]

COMMANDS: Final = {"sign": "sign"}
"""The command and its module."""


def add_sign(commands: Commands, add: Add) -> None:
    """Add `sign`."""
    p = add(commands, "sign", "Sign a report, or list what waits for a signature.", site=True, json=True)
    p.add_argument("reports", metavar="REPORT", nargs="*", help="number or file; without any: what waits")
    p.add_argument("--as", dest="role", choices=ROLES, help="what the signature means")
    p.add_argument("--key", metavar="FILE", help="your key (keys new --for person); else asked for")
    p.add_argument(
        "--passphrase-file", metavar="FILE", help="file of mode 600 with its passphrase; else asked for"
    )
    p.add_argument("--return", dest="returned", action="store_true", help="return it instead of signing")
    p.add_argument("--reason", metavar="TEXT", help="why it is returned")
