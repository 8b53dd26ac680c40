"""What is compared, against which margin, on which independent unit."""

from qcreport.plan.model import CharacteristicPlan, ComparisonPlan
from qcreport.plan.parse import parse_plan

__all__ = ["CharacteristicPlan", "ComparisonPlan", "parse_plan"]
