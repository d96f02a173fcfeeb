"""Marks to values: rate, intervals, QTc, axis, each with uncertainty and cautions. No Qt."""

from app.calculator.agreement import Comparison, compare_all
from app.calculator.display import format_value
from app.calculator.measure import measure_caliper
from app.calculator.values import Caution, Value
from app.calculator.work_out import work_out

__all__ = [
    "Caution",
    "Comparison",
    "Value",
    "compare_all",
    "format_value",
    "measure_caliper",
    "work_out",
]
