"""Comparing with a printed number."""

from __future__ import annotations


def rounds_to(value: float, printed: str) -> bool:
    """Whether a value may be printed so: no more than half of the last digit away.

    Half itself may go either way (386.25 is printed 386.3).
    """
    decimals = len(printed.partition(".")[2])
    return abs(value - float(printed)) <= 0.5 * 10.0**-decimals + 1e-9
