"""One command from its words to its exit code; every error ends as a sentence, never as a traceback."""

from __future__ import annotations

import argparse
import importlib
import json
import os
import sys
import traceback
from typing import Any, Final

from qcreport.cli.parser import COMMANDS, HELP, build_parser
from qcreport.errors import (
    ConfigError,
    EnvironmentFailedError,
    ExportRefusedError,
    LedgerError,
    NotOurReportError,
    QcReportError,
    SigningDeniedError,
    StatisticsError,
    UsageError,
)

DONE: Final = 0
ANSWER_IS_NO: Final = 1
WRONG_SETTINGS: Final = 2
REFUSED: Final = 3
FAILED: Final = 4
INTERRUPTED: Final = 130

EXIT_CODES: Final[tuple[tuple[type[QcReportError], int], ...]] = (
    (ConfigError, WRONG_SETTINGS),
    (UsageError, WRONG_SETTINGS),
    (ExportRefusedError, REFUSED),
    (NotOurReportError, ANSWER_IS_NO),
    (LedgerError, ANSWER_IS_NO),
    (SigningDeniedError, FAILED),  # here always the service key: the environment's fault
    (EnvironmentFailedError, FAILED),
    (StatisticsError, FAILED),
)


def run(words: list[str]) -> int:
    """Parse `words`, run the command, print what went wrong, and return the exit code."""
    if not words:
        print(HELP)
        return DONE
    arguments = argparse.Namespace(json="--json" in words)
    try:
        arguments = build_parser().parse_args(words)
        command = importlib.import_module(f"qcreport.cli.commands.{COMMANDS[arguments.command]}")
        return int(command.run(arguments))
    except QcReportError as error:
        print_error(error, arguments)
        return exit_code(error)
    except KeyboardInterrupt:
        print("Stopped.", file=sys.stderr)
        return INTERRUPTED
    except BrokenPipeError:
        # The reader of our output went away (e.g. `| head`); nothing is left to be told to anybody.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return DONE
    except OSError as error:
        failed = EnvironmentFailedError(_os_words(error), file=error.filename)
        print_error(failed, arguments)
        return FAILED
    except Exception as error:  # noqa: BLE001  the last line of defence: a person gets a sentence
        if os.environ.get("QCREPORT_TRACEBACK"):
            traceback.print_exc()
        words_out = (
            f"This should not have happened ({type(error).__name__}: {error}). Nothing was issued. "
            "Run again with QCREPORT_TRACEBACK=1 and report what it prints."
        )
        print_error(EnvironmentFailedError(words_out), arguments)
        return FAILED


def exit_code(error: QcReportError) -> int:
    """Return the exit code of an error."""
    return next((code for kind, code in EXIT_CODES if isinstance(error, kind)), FAILED)


def print_error(error: QcReportError, arguments: argparse.Namespace) -> None:
    """Print an error for people on standard error, and as JSON on standard output where asked."""
    if getattr(arguments, "json", False) and not isinstance(error, ExportRefusedError):
        print(json.dumps(error_json(error), ensure_ascii=False, indent=1))
        return
    if isinstance(error, ExportRefusedError):
        print(refusal_lines(error), file=sys.stderr, end="")
        return
    print(printable(error.text), file=sys.stderr)


def error_json(error: QcReportError) -> dict[str, Any]:
    """Return the document `{"error": …}`."""
    return {"error": {"kind": error.kind, "text": error.text, "file": error.file, "key": error.key}}


def printable(text: str) -> str:
    """Return text without control characters, which a terminal would act on; line ends stay."""
    return "".join(c if c == "\n" or c.isprintable() else f"\\x{ord(c):02x}" for c in text)


def refusal_lines(error: ExportRefusedError) -> str:
    """Return a refusal in its five lines; names of files and sheets can add none."""
    from qcreport.intake.refusals import five_safe_lines

    return five_safe_lines(error)


def _os_words(error: OSError) -> str:
    place = f" ({error.filename})" if error.filename else ""
    return f"{error.strerror or error}{place}. Check the folder, its rights and the space left on the disk."
