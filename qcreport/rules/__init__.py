"""Facts, the decision table, and the choice of procedure with its trace."""

from qcreport.rules.choose import Choice, choose, fixed_by_plan
from qcreport.rules.facts import Facts
from qcreport.rules.table import RulesTable, parse_rules

__all__ = ["Choice", "Facts", "RulesTable", "choose", "fixed_by_plan", "parse_rules"]
