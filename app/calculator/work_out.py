"""Every value a reading gives."""

from __future__ import annotations

from app.calculator.axis import axis_values
from app.calculator.heights import height_values
from app.calculator.intervals import interval_values
from app.calculator.lines import measure_lines
from app.calculator.qtc import qtc_values
from app.calculator.rate import rate_values
from app.calculator.values import Value
from app.reading.model import Reading


def work_out(reading: Reading) -> list[Value]:
    """Every value a reading gives, in worksheet order: rhythm, intervals, QTc, heights, axis.

    One value for each quantity and lead; QTc by each formula for each lead with a QT; the
    axis once (its lead is None). Where marks make no sense together the value is None and
    `Value.refusal` says why in one sentence. Nothing is raised and nothing is changed.
    """
    marked = measure_lines(reading)
    return [
        *rate_values(marked),
        *interval_values(marked),
        *qtc_values(marked),
        *height_values(marked),
        *axis_values(marked),
    ]
