"""Every value a reading gives."""

from __future__ import annotations

from app.calculator.values import Value
from app.reading.model import Reading


def work_out(reading: Reading) -> list[Value]:
    raise NotImplementedError
