"""`qcreport plan propose EXPORT`."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path

from qcreport.cli.ask import ask
from qcreport.cli.run import DONE, printable
from qcreport.errors import UsageError
from qcreport.settings import load_site
from qcreport.settings.keys import read_bytes
from qcreport.settings.site import SITE_FILE
from qcreport.workbook.limits import Limits
from qcreport.workbook.propose_draft import BLANK, Draft, render
from qcreport.workbook.propose_in_child import propose_in_child, try_draft
from qcreport.workbook.propose_words import kind_of, slug


def run(arguments: argparse.Namespace) -> int:
    """Write a proposed layout and plan for a person to complete; nothing is applied."""
    path = Path(arguments.export)
    if not path.is_file():
        raise UsageError(f"{path} is not there. Name an export.", file=str(path))
    name = slug(kind_of(path.stem), "export").replace("_", "-")
    folder = Path(arguments.out) if arguments.out is not None else Path(f"proposed-{name}")
    _refuse_existing(folder)
    limits = _limits(Path(arguments.site))
    data = read_bytes(path, "the export")
    draft = propose_in_child(data, name=path.name, plan_name=name, limits=limits)
    answers = ask(draft.questions) if sys.stdin.isatty() else {}
    measurements = try_draft(draft, answers, data, name=path.name, limits=limits)
    layout, plan = _write(folder, name, draft, answers)
    batches = dict.fromkeys(m.batch for m in measurements.measurements)
    print(printable(f"{len(measurements.measurements)} values of {len(batches)} batches would be read."))
    for notice in measurements.notices:
        print(printable(f"Notice: {notice.text} ({notice.code})"))
    print(f"Confidence {draft.confidence:.2f}.")
    print(printable(f"Layout: {layout}\nPlan:   {plan}"))
    _print_next(layout, plan, path, draft, answers)
    return DONE


def _refuse_existing(folder: Path) -> None:
    if folder.exists() and (not folder.is_dir() or any(folder.iterdir())):
        raise UsageError(
            f"{folder} is there already; nothing is overwritten. Name a new folder with --out.",
            file=str(folder),
        )


def _limits(root: Path) -> Limits:
    """Return the site's limits; the shipped ones where there is no site yet."""
    return load_site(root).limits if (root / SITE_FILE).is_file() else Limits()


def _write(folder: Path, name: str, draft: Draft, answers: dict[str, str]) -> tuple[Path, Path]:
    layout, plan = folder / "layouts" / f"{name}.toml", folder / "plans" / f"{name}.toml"
    for path, lines in ((layout, draft.layout), (plan, draft.plan)):
        path.parent.mkdir(parents=True, exist_ok=True)
        with path.open("x", encoding="utf-8", newline="\n") as file:
            file.write(render(lines, answers))
    return layout, plan


def _print_next(layout: Path, plan: Path, export: Path, draft: Draft, answers: dict[str, str]) -> None:
    still_open = [q for q in draft.questions if q.key not in answers]
    if still_open:
        print(f"{len(still_open)} questions are open, marked {BLANK}; the files cannot be used before:")
        for question in still_open:
            print(printable(f"  {question.text}"))
        print(f"Next: fill them in, then qcreport layout try {_word(export)} --layout {_word(layout)}")
    else:
        print(f"Next: qcreport layout try {_word(export)} --layout {_word(layout)}")
    print(
        printable(f"Then who answers for them puts {layout} into config/layouts, {plan} into config/plans.")
    )


def _word(path: Path) -> str:
    """Return a path as it may be typed at a shell."""
    import shlex

    return printable(shlex.quote(str(path)))
