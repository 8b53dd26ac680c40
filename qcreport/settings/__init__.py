"""A site's folders and settings files."""

from qcreport.settings.plans import PlanSettings, find_plan, load_plans
from qcreport.settings.site import Site, load_site

__all__ = ["PlanSettings", "Site", "find_plan", "load_plans", "load_site"]
