"""`qcreport rules show [TABLE]`."""

from __future__ import annotations

import argparse
import textwrap
from pathlib import Path

from qcreport.errors import UsageError
from qcreport.rules import RulesTable, parse_rules
from qcreport.settings import load_site
from qcreport.settings.shipped import shipped_folder


def run(arguments: argparse.Namespace) -> int:
    """Print a decision table, of the site where there is one, else as shipped."""
    folder = _folder(Path(arguments.site))
    path = folder / f"{arguments.table}.toml"
    if path.parent != folder or not path.is_file():
        known = ", ".join(p.stem for p in sorted(folder.glob("*.toml")))
        raise UsageError(f"No table {arguments.table!r} in {folder}. There are: {known}", file=str(path))
    print(table_text(parse_rules(path.read_bytes(), path.name)))
    return 0


def _folder(root: Path) -> Path:
    try:
        return load_site(root).root / "config" / "rules"
    except UsageError:
        return shipped_folder("config/rules")


def table_text(table: RulesTable) -> str:
    """Return the table as text: one block a row, in order."""
    lines = [f"{table.name}: {table.title}", "The first row whose conditions all hold decides.", ""]
    for number, row in enumerate(table.rows, start=1):
        when = "; ".join(str(c) for c in row.when) or "everything that is left"
        lines.append(f"{number:>2}  {row.id}")
        lines.append(f"    when       {when}")
        lines.append(f"    procedure  {row.procedure}")
        lines.extend(_wrapped("reason", row.reason))
        lines.extend(_wrapped("source", row.source))
        lines.append("")
    return "\n".join(lines).rstrip()


def _wrapped(word: str, text: str) -> list[str]:
    head = f"    {word:<11}"
    return textwrap.wrap(text, width=100, initial_indent=head, subsequent_indent=" " * len(head))
