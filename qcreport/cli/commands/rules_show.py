"""`qcreport rules show [TABLE]`."""

from __future__ import annotations

import argparse
import textwrap
from pathlib import Path

from qcreport.errors import UsageError
from qcreport.rules import RulesTable, parse_rules
from qcreport.rules.policy import THIS_EXPORT, SpreadPolicy
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
    """Return the site's rules, whatever its other settings are; as shipped where there is none."""
    own = root / "config" / "rules"
    return own if own.is_dir() else shipped_folder("config/rules")


def table_text(table: RulesTable) -> str:
    """Return the table as text: one block a row, in order."""
    lines = [f"{table.name}: {table.title}", _approval(table), *_policy(table.spread), ""]
    lines += ["The first row whose conditions all hold decides.", ""]
    for number, row in enumerate(table.rows, start=1):
        when = "; ".join(str(c) for c in row.when) or "everything that is left"
        lines.append(f"{number:>2}  {row.id}")
        lines.append(f"    when       {when}")
        lines.append(f"    procedure  {row.procedure}")
        lines.extend(_wrapped("reason", row.reason))
        lines.extend(_wrapped("source", row.source))
        lines.append("")
    return "\n".join(lines).rstrip()


def _approval(table: RulesTable) -> str:
    if table.approved is None:
        return "Approved: the file names nobody."
    return f"Approved: {table.approved.by}, {table.approved.on.isoformat()}"


def _policy(policy: SpreadPolicy) -> list[str]:
    """Return how the fact `spread` is judged, with every threshold."""
    if policy.policy == THIS_EXPORT:
        text = (
            "Spread is different where median-centred Levene on this export has p < "
            f"{policy.different_level:g}, else similar."
        )
        return textwrap.wrap(text, width=100)
    sentences = (
        "Spread is similar where it is declared in the plan before the data, unless one group exceeds the "
        f"others by F at p < {policy.conflict_level:g}/groups (then: conflict) or largest/smallest n is "
        f"above {policy.declared_size_ratio:g} and the plan does not accept that;",
        f"or where largest/smallest n is at most {policy.shown_size_ratio:g} and the simultaneous upper "
        f"{100 * policy.confidence:g} % limit of the largest ratio of standard deviations is at most "
        f"{policy.ratio_limit:g} (lines: with their history in the records);",
        f"or where {policy.history_batches} earlier batches with {policy.history_df} or more degrees of "
        "freedom have an upper limit of the standard deviation of ln sigma of at most "
        f"{policy.history_sd_ln:g}, for {policy.history_groups} groups at most and unless one group exceeds "
        "the others as above.",
        f"Else it is different where median-centred Levene has p < {policy.different_level:g}, or cannot be "
        "judged.",
    )
    return textwrap.wrap(" ".join(sentences), width=100)


def _wrapped(word: str, text: str) -> list[str]:
    head = f"    {word:<11}"
    return textwrap.wrap(text, width=100, initial_indent=head, subsequent_indent=" " * len(head))
