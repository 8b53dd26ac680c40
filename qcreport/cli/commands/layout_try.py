"""`qcreport layout try EXPORT`."""

from __future__ import annotations

import argparse
import json
from pathlib import Path

from qcreport.cli.run import DONE, REFUSED, print_error, printable
from qcreport.errors import ConfigError, ExportRefusedError, Fault, UsageError
from qcreport.intake.listing import ignored_name
from qcreport.measurements import MeasurementSet
from qcreport.pipeline.choose_plans import fitting_plans
from qcreport.settings import load_plans, load_site
from qcreport.settings.keys import read_bytes
from qcreport.settings.plans import SettingsFile
from qcreport.workbook.layout import parse_layout
from qcreport.workbook.layout_try import layout_try_json
from qcreport.workbook.limits import Limits
from qcreport.workbook.read_in_child import read_in_child


def run(arguments: argparse.Namespace) -> int:
    """Read an export by a layout and show every value with its cell; nothing is recorded."""
    path = Path(arguments.export)
    if ignored_name(path.name):
        return _ignored(path.name, arguments.json)
    layout, limits, second_look = _layout(arguments, path.name)
    parse_layout(layout.data, layout.name)  # faults of the layout are the settings' and end with code 2
    data = read_bytes(path, "the export") if path.exists() else _absent(path)
    try:
        measurements = read_in_child(
            data,
            name=path.name,
            layout_bytes=layout.data,
            layout_file=layout.name,
            limits=limits,
            second_look=second_look,
        )
    except ExportRefusedError as error:
        if arguments.json:
            print(json.dumps(layout_try_json(error), ensure_ascii=False, indent=1))
        print_error(error, arguments)
        return REFUSED
    if arguments.json:
        print(json.dumps(layout_try_json(measurements), ensure_ascii=False, indent=1))
    else:
        print("\n".join(_table(measurements)))
        print(f"Next: write a plan with layout = {measurements.layout_name!r}, then qcreport config check")
    return DONE


def _ignored(name: str, as_json: bool) -> int:
    if as_json:
        print(json.dumps(layout_try_json(None), ensure_ascii=False, indent=1))
    else:
        print(printable(f"{name}: not an export, but a lock file or a hidden file. It is left alone."))
    return DONE


def _absent(path: Path) -> bytes:
    raise UsageError(f"{path} is not there. Name an export.", file=str(path))


def _layout(arguments: argparse.Namespace, export_name: str) -> tuple[SettingsFile, Limits, bool]:
    """Return the layout that was named, or the one of the plan that fits, with the way of reading."""
    if arguments.layout is not None and Path(arguments.layout).is_file():
        path = Path(arguments.layout)
        return SettingsFile(name=path.name, data=read_bytes(path, "the layout")), Limits(), True
    site = load_site(Path(arguments.site))
    if arguments.layout is not None:
        path = site.root / "config" / "layouts" / f"{arguments.layout}.toml"
        if not path.is_file():
            raise ConfigError((Fault(text=f"there is no layout {arguments.layout!r}", file=str(path)),))
        file = SettingsFile(name=path.name, data=read_bytes(path, "the layout"))
        return file, site.limits, site.intake.second_look
    plans = load_plans(site)
    try:
        return fitting_plans(export_name, plans)[0].layout_file, site.limits, site.intake.second_look
    except ExportRefusedError as error:
        known = ", ".join(p.stem for p in sorted((site.root / "config" / "layouts").glob("*.toml")))
        raise UsageError(
            f"{error.found} Name a layout: --layout NAME|FILE. Layouts of this site: {known or 'none'}",
            file=export_name,
        ) from None


def _table(measurements: MeasurementSet) -> list[str]:
    """Return one line a value: characteristic, batch, sample, value as read, cell."""
    rows = [("characteristic", "batch", "line", "sample", "value", "unit", "cell")]
    for m in measurements.measurements:
        value = "missing" if m.missing else f"{m.censored or ''}{'' if m.value is None else m.text}"
        rows.append((m.characteristic, m.batch, m.line or "", m.sample or "", value, m.unit, str(m.cell)))
    cells = [[printable(text.replace("\n", " ")) for text in row] for row in rows]
    widths = [max(len(row[i]) for row in cells) for i in range(len(rows[0]))]
    lines = ["  ".join(text.ljust(w) for text, w in zip(row, widths, strict=True)).rstrip() for row in cells]
    lines.extend(printable(f"Notice: {n.text} ({n.code})") for n in measurements.notices)
    lines.append(f"{len(measurements.measurements)} values read.")
    return lines
