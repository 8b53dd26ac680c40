"""Error rates of whole decision tables, checks included, by simulation without any true difference."""

from qcreport.rates.design import Design
from qcreport.rates.draw import Draws, Source, draw_moments, draw_values
from qcreport.rates.rejections import any_rejected
from qcreport.rates.simulate import Asked, Standing, alarms, needs_values

__all__ = [
    "Asked",
    "Design",
    "Draws",
    "Source",
    "Standing",
    "alarms",
    "any_rejected",
    "draw_moments",
    "draw_values",
    "needs_values",
]
