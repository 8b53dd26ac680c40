"""Asking a bounded child for a proposal, and trying it before it is offered."""

from __future__ import annotations

from typing import Final

from qcreport.errors import ExportRefusedError
from qcreport.measurements import MeasurementSet
from qcreport.workbook.limits import Limits
from qcreport.workbook.propose_draft import Draft, DraftError, from_json, render
from qcreport.workbook.read_in_child import ask_child, read_in_child
from qcreport.workbook.wire import WireError, decode_line, decode_refusal, limits_as_json

_MODULE: Final = "qcreport.workbook.propose_child"


class _Answer:
    """Takes the one line of the proposing child."""

    def __init__(self, name: str) -> None:
        self._name = name
        self._draft: Draft | None = None

    def take(self, line: bytes) -> None:
        """Take the draft, or raise the refusal."""
        kind, *rest = decode_line(line)
        if kind == "refused":
            raise decode_refusal(rest, name=self._name)
        if kind != "draft" or len(rest) != 1 or self._draft is not None:
            raise WireError("a draft")
        try:
            self._draft = from_json(rest[0])
        except DraftError as error:
            raise WireError(str(error)) from None

    def finished(self) -> Draft:
        """Return the draft."""
        if self._draft is None:
            raise WireError("no draft")
        return self._draft


def propose_in_child(data: bytes, *, name: str, plan_name: str, limits: Limits | None = None) -> Draft:
    """Return a draft of layout and plan, made by a bounded child process.

    Parameters
    ----------
    data : bytes
        The file as dropped.
    name : str
        Its name, without folders.
    plan_name : str
        What layout and plan are to be called.
    limits : Limits or None
        Bounds of the child; the shipped ones where None.
    """
    limits = limits if limits is not None else Limits()
    header = {"name": name, "plan_name": plan_name, "limits": limits_as_json(limits)}
    return ask_child(_MODULE, header, data, _Answer(name), limits=limits, name=name)


def try_draft(
    draft: Draft, answers: dict[str, str], data: bytes, *, name: str, limits: Limits | None = None
) -> MeasurementSet:
    """Return what a drafted layout reads from its export; the proposed values stand for open answers.

    Raises
    ------
    ExportRefusedError
        The drafted layout does not read the export: it is not to be offered.
    """
    text = render(draft.layout, answers, trial=True)
    try:
        return read_in_child(
            data,
            name=name,
            layout_bytes=text.encode(),
            layout_file="the proposed layout",
            limits=limits,
            second_look=True,
        )
    except ExportRefusedError as refusal:
        refusal.next_step += " Nothing was written: propose from an export that can be read."
        raise
