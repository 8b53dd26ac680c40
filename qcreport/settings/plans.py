"""The plans of a site, each with its layout and rules: what an export is compared by."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from qcreport.errors import ConfigError, EnvironmentFailedError, Fault
from qcreport.plan import ComparisonPlan, parse_plan
from qcreport.rules import RulesTable, parse_rules
from qcreport.settings.site import Site
from qcreport.workbook.layout import Layout, parse_layout


@dataclass(frozen=True, slots=True, kw_only=True)
class SettingsFile:
    """One settings file as read."""

    name: str
    """File name."""
    data: bytes
    """Its bytes."""


@dataclass(frozen=True, slots=True, kw_only=True)
class PlanSettings:
    """A plan with everything it refers to."""

    plan: ComparisonPlan
    """The plan."""
    layout: Layout
    """Its layout."""
    rules: RulesTable
    """Its decision table."""
    plan_file: SettingsFile
    """The plan's file."""
    layout_file: SettingsFile
    """The layout's file."""
    rules_file: SettingsFile
    """The rules' file."""


def load_plans(site: Site) -> tuple[PlanSettings, ...]:
    """Return every plan of the site, by file name; a ConfigError with the faults of all files."""
    return load_plans_below(site.root)


def load_plans_below(root: Path) -> tuple[PlanSettings, ...]:
    """Return every plan below a site's folder, also where its site.toml is faulty.

    Raises
    ------
    ConfigError
        With the faults of all files.
    """
    folder = root / "config" / "plans"
    plans: list[PlanSettings] = []
    faults: list[Fault] = []
    for path in sorted(folder.glob("*.toml")):
        try:
            plans.append(load_plan(root, path))
        except ConfigError as error:
            faults.extend(error.faults)
    names = [p.plan.name for p in plans]
    for plan in plans:
        if names.count(plan.plan.name) > 1:
            faults.append(
                Fault(text=f"{plan.plan.name!r} names two plans", file=plan.plan_file.name, key="name")
            )
    if faults:
        raise ConfigError(tuple(dict.fromkeys(faults)))
    return tuple(plans)


def load_plan(root: Path, path: Path) -> PlanSettings:
    """Return one plan with its layout and rules; a ConfigError with all faults found."""
    plan_file = _read(path, None)
    plan = parse_plan(plan_file.data, path.name)
    faults: list[Fault] = []
    layout_file = rules_file = None
    layout, rules = None, None
    try:
        layout_file = _read(_layout_path(root, plan.layout, path), (path.name, "layout"))
        layout = parse_layout(layout_file.data, layout_file.name)
    except ConfigError as error:
        faults.extend(error.faults)
    try:
        rules_file = _read(root / "config" / "rules" / f"{plan.rules}.toml", (path.name, "rules"))
        rules = parse_rules(rules_file.data, rules_file.name)
    except ConfigError as error:
        faults.extend(error.faults)
    if layout is not None:
        faults.extend(_unknown_characteristics(plan, layout, path.name))
    if faults or layout is None or rules is None or layout_file is None or rules_file is None:
        raise ConfigError(tuple(faults))
    return PlanSettings(
        plan=plan,
        layout=layout,
        rules=rules,
        plan_file=plan_file,
        layout_file=layout_file,
        rules_file=rules_file,
    )


def find_plan(site: Site, name_or_file: str) -> PlanSettings:
    """Return the plan of that name in config/plans, or of that file."""
    path = Path(name_or_file)
    if path.suffix == ".toml" and path.is_file():
        return load_plan(site.root, path)
    inside = site.root / "config" / "plans" / f"{name_or_file}.toml"
    if inside.is_file():
        return load_plan(site.root, inside)
    plans = load_plans(site)
    for plan in plans:
        if plan.plan.name == name_or_file:
            return plan
    known = ", ".join(p.plan.name for p in plans) or "none"
    raise ConfigError(
        (Fault(text=f"no plan {name_or_file!r}. Plans of this site: {known}", file=name_or_file),)
    )


def _layout_path(root: Path, layout: str, plan_path: Path) -> Path:
    if layout.endswith(".toml"):
        return plan_path.parent / layout
    return root / "config" / "layouts" / f"{layout}.toml"


def _read(path: Path, asked_by: tuple[str, str] | None) -> SettingsFile:
    try:
        return SettingsFile(name=path.name, data=path.read_bytes())
    except FileNotFoundError:
        file, key = asked_by or (str(path), None)
        raise ConfigError(
            (Fault(text=f"{path} is not there. Write it, or correct the name.", file=file, key=key),)
        ) from None
    except IsADirectoryError:
        raise ConfigError(
            (Fault(text=f"{path} is a folder, expected a .toml file", file=str(path)),)
        ) from None
    except OSError as error:
        raise EnvironmentFailedError(f"cannot read {path}: {error.strerror}", file=str(path)) from None


def _unknown_characteristics(plan: ComparisonPlan, layout: Layout, file: str) -> list[Fault]:
    known = tuple(dict.fromkeys(v.characteristic for t in layout.tables for v in t.values))
    return [
        Fault(
            text=f"the layout {layout.name} has no characteristic {c.name!r}. It has: {', '.join(known)}",
            file=file,
            key="characteristic.name",
        )
        for c in plan.characteristics
        if c.name not in known
    ]
