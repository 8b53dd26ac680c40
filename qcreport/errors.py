"""Every error that a stage may raise, and nothing else.

QcReportError
├── ConfigError          settings, plan, layout, rules: the person's text is wrong      (exit 2)
├── UsageError           the command was called wrongly                                  (exit 2)
├── ExportRefusedError   the export cannot be read as it is                              (exit 3)
├── StatisticsError      a procedure was asked something it cannot answer
│   ├── TooFewObservationsError
│   └── DegenerateDataError
├── NotOurReportError    a file that should be one of our reports is not                 (exit 1)
├── SigningDeniedError   a key or certificate that must not sign                         (exit 1 or 4)
├── EnvironmentFailedError   disk, key, lock, system library                             (exit 4)
└── LedgerError          the chain of records does not hold                              (exit 1)

No library exception leaves a stage raw. Messages say what was found, what was expected and what to do next.
"""

from __future__ import annotations

from dataclasses import dataclass


class QcReportError(Exception):
    """Base of all errors; `kind` is a stable word for machines, `text` is for people."""

    kind = "error"

    def __init__(self, text: str, *, file: str | None = None, key: str | None = None) -> None:
        super().__init__(text)
        self.text = text
        self.file = file
        self.key = key


@dataclass(frozen=True, slots=True, kw_only=True)
class Fault:
    """One fault in a settings file."""

    text: str
    """What is wrong and what would be right, one sentence."""
    file: str
    """File name as the person knows it."""
    line: int | None = None
    """Line, 1-based, where known."""
    key: str | None = None
    """Dotted key, e.g. `comparison.alpha` or `characteristic[2].margin`."""

    def __str__(self) -> str:
        """Return `file, line N, key K: text`."""
        place = self.file
        if self.line is not None:
            place += f", line {self.line}"
        if self.key is not None:
            place += f", {self.key}"
        return f"{place}: {self.text}"


class ConfigError(QcReportError):
    """Settings are wrong; all faults are told at once."""

    kind = "settings"

    def __init__(self, faults: tuple[Fault, ...]) -> None:
        first = faults[0]
        super().__init__("\n".join(str(f) for f in faults), file=first.file, key=first.key)
        self.faults = faults


class UsageError(QcReportError):
    """The command was called in a way that cannot be meant."""

    kind = "usage"


class ExportRefusedError(QcReportError):
    """An export is refused; the five lines of why.txt follow from these fields."""

    kind = "refused"

    def __init__(
        self,
        code: str,
        *,
        file: str,
        where: str,
        found: str,
        expected: str,
        next_step: str,
        cells: tuple[str, ...] = (),
    ) -> None:
        super().__init__(f"{where}: {found} {expected} {next_step}".strip(), file=file)
        self.code = code
        self.where = where
        self.found = found
        self.expected = expected
        self.next_step = next_step
        self.cells = cells

    def five_lines(self) -> str:
        """Return the refusal as printed to people and kept in why.txt."""
        return (
            f"Not read:  {self.file}\n"
            f"Where:     {self.where}\n"
            f"Found:     {self.found}\n"
            f"Expected:  {self.expected}\n"
            f"Next step: {self.next_step} ({self.code})\n"
        )


class StatisticsError(QcReportError):
    """A statistical procedure cannot answer."""

    kind = "statistics"


class TooFewObservationsError(StatisticsError):
    """Fewer groups or observations than the procedure needs."""


class DegenerateDataError(StatisticsError):
    """Values that are not finite, or no variation where the procedure divides by it."""


class NotOurReportError(QcReportError):
    """The file is not a PDF, or not a report sealed by this software."""

    kind = "not_our_report"


class SigningDeniedError(QcReportError):
    """A key must not be used: expired, mismatched, weak, readable by others, wrong passphrase."""

    kind = "key"


class EnvironmentFailedError(QcReportError):
    """The machine failed: disk, permission, lock, missing system library."""

    kind = "environment"


class LedgerError(QcReportError):
    """The ledger or the archive does not hold together."""

    kind = "ledger"
