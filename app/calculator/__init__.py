"""Marks to values: rate, intervals, QTc, axis, each with uncertainty and cautions. No Qt."""

from app.calculator.values import Caution, Value
from app.calculator.work_out import work_out

__all__ = ["Caution", "Value", "work_out"]
