"""One export and the calls by which it is recorded, for the tests of this folder."""

from __future__ import annotations

from dataclasses import dataclass, replace
from pathlib import Path

from qcreport.canonical import sha256_hex, to_json_bytes
from qcreport.measurements import CellRef, Measurement, MeasurementSet
from qcreport.records.facade import Reading, Records
from qcreport.records.run import Reservation, RunInputs, Slot
from qcreport.records.store import Survey

PLAN, LAYOUT, RULES, PAGE = b"plan", b"layout", b"rules", b"page"


def measurement(row: int, number: str, **changes: object) -> Measurement:
    """Return a reading of sample `s{row}`; `changes` replace its fields."""
    plain = Measurement(
        characteristic="lap_shear",
        batch="LA-1",
        line=None,
        sample=f"s{row}",
        reading="1",
        value=float(number),
        text=number,
        decimals=2,
        unit="MPa",
        censored=None,
        status=None,
        time=None,
        cell=CellRef(sheet="Results", row=row, column=3),
    )
    return replace(plain, **changes)  # type: ignore[arg-type]


def measured(data: bytes, *measurements: Measurement) -> MeasurementSet:
    """Return what was read from an export with these bytes."""
    return MeasurementSet(
        export_name="export.xlsx",
        export_sha256=sha256_hex(data),
        layout_name="shear-rig",
        measurements=measurements,
    )


@dataclass
class Handling:
    """The steps for one export; each can be called again, as after a kill."""

    records: Records
    claim: str = "job-1"
    data: bytes = b"export"
    name: str = "export.xlsx"
    plan_name: str = "shear"
    plan: bytes = PLAN
    reason: str = ""
    report: bytes = b"%PDF sealed"
    result: bytes = b'{"schema":"qcreport/result/1"}'
    values: tuple[Measurement, ...] = (measurement(2, "24.83"), measurement(3, "25.10"))

    @property
    def inputs(self) -> RunInputs:
        return RunInputs(
            export_sha256=sha256_hex(self.data),
            plan_sha256=sha256_hex(self.plan),
            layout_sha256=sha256_hex(LAYOUT),
            rules_sha256=sha256_hex(RULES),
            templates=(("page.html", sha256_hex(PAGE)),),
        )

    @property
    def measurements(self) -> MeasurementSet:
        return measured(self.data, *self.values)

    def receive(self) -> None:
        for data in (self.data, self.plan, LAYOUT, RULES, PAGE):
            self.records.archive.store(data)
        self.records.receive(
            self.claim,
            export_sha256=sha256_hex(self.data),
            name=self.name,
            size=len(self.data),
            actor="service",
        )

    def read(self) -> None:
        reading = Reading(
            plan_name=self.plan_name,
            layout_name="shear-rig",
            layout_sha256=sha256_hex(LAYOUT),
            n_measurements=len(self.values),
            notices=("hidden_columns",),
            survey=self.records.survey(self.measurements),
        )
        digest = sha256_hex(self.data)
        self.records.read(self.claim, export_sha256=digest, name=self.name, reading=reading, actor="service")

    def reserve(self) -> Reservation:
        return self.records.reserve(
            self.inputs,
            export_name=self.name,
            plan_name=self.plan_name,
            year=2026,
            build_context=context,
            reason=self.reason,
        )

    def compared(self) -> None:
        self.records.compared(
            self.claim,
            number=self.reserve().number,
            result=self.result,
            answers=(("lap_shear", "different"),),
            actor="service",
        )

    def sealed(self, reports: Path) -> Survey:
        number = self.reserve().number
        reports.mkdir(exist_ok=True)
        (reports / f"{number}.pdf").write_bytes(self.report)
        return self.records.sealed(
            self.claim,
            number=number,
            report_name=f"{number}.pdf",
            report_sha256=sha256_hex(self.report),
            measurements=self.measurements,
            actor="service",
        )

    def whole(self, reports: Path) -> Survey:
        self.receive()
        self.read()
        self.reserve()
        self.compared()
        return self.sealed(reports)


def context(slot: Slot) -> bytes:
    """Return a context of what a reservation fixes."""
    return to_json_bytes({"number": slot.number, "made_at": slot.made_at, "head": slot.ledger_head.sequence})
