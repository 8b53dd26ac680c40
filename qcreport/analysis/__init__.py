"""From measurements, plan and rules to a frozen result."""

from qcreport.analysis.analyse import analyse, require_answerable
from qcreport.analysis.context import Context, context_from_json
from qcreport.analysis.result import Result

__all__ = ["Context", "Result", "analyse", "context_from_json", "require_answerable"]
