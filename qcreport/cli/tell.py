"""The service's progress on a terminal: results on standard output, the rest on standard error."""

from __future__ import annotations

import sys

from qcreport.cli.run import printable, refusal_lines
from qcreport.cli.words import outcome_lines
from qcreport.errors import ExportRefusedError
from qcreport.pipeline.inbox import Handled
from qcreport.service.model import Counts, Event, EventKind
from qcreport.service.serve import Audience, copy_words


class TerminalAudience(Audience):
    """Prints what is issued and what is refused, with a running count while it works."""

    def __init__(self) -> None:
        self.handled_exports: list[Handled] = []
        self.refused: list[tuple[ExportRefusedError, str]] = []
        self._shown = False

    def handled(self, handled: Handled) -> None:
        """Print the outcomes and refusals of one export."""
        self.handled_exports.append(handled)
        self._clear()
        if handled.copy is not None:
            print(printable(copy_words(handled.name, handled.copy)) + "\n", flush=True)
        for outcome in handled.outcomes:
            print("\n".join(outcome_lines(outcome)) + "\n", flush=True)
        for refused in handled.refusals:
            self._refusal(refused.error, str(refused.folder))

    def event(self, event: Event) -> None:
        """Print a refusal before reading; other events go to standard error."""
        self._clear()
        if event.kind is EventKind.REFUSED and event.refusal is not None:
            self._refusal(event.refusal, str(event.folder))
        else:
            print(printable(event.text), file=sys.stderr, flush=True)

    def progress(self, counts: Counts) -> None:
        """Show the running count where standard error is a terminal."""
        if not sys.stderr.isatty():
            return
        text = f"{counts.done} done, {counts.refused} refused, {counts.waiting} to go"
        print(f"\r{text:<60}", end="", file=sys.stderr, flush=True)
        self._shown = True

    def _refusal(self, error: ExportRefusedError, folder: str) -> None:
        self.refused.append((error, folder))
        print(refusal_lines(error) + f"Kept in:   {folder}\n", flush=True)

    def _clear(self) -> None:
        if self._shown:
            print("\r" + " " * 60 + "\r", end="", file=sys.stderr, flush=True)
            self._shown = False
