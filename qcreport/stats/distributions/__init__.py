"""Laws of the largest of several studentised differences: deterministic, vectorised, accurate in the tail."""

from __future__ import annotations

from qcreport.stats.distributions.many_to_one import many_to_one_isf, many_to_one_sf
from qcreport.stats.distributions.maximum_modulus import maximum_modulus_isf, maximum_modulus_sf
from qcreport.stats.distributions.studentized_range import studentized_range_isf, studentized_range_sf

__all__ = [
    "many_to_one_isf",
    "many_to_one_sf",
    "maximum_modulus_isf",
    "maximum_modulus_sf",
    "studentized_range_isf",
    "studentized_range_sf",
]
