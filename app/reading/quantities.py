"""What can be marked: the lines of the worksheet and the two places each asks for.

Definitions (AHA/ACCF/HRS 2009 part III and CSE 1985):
PR runs from P onset to QRS onset, QRS from its onset to the J point, QT from QRS onset to
the end of T; PR, QRS and the QT lead rule read in secondary sources, P duration from memory.
"""

from __future__ import annotations

from dataclasses import dataclass

from app.reading.marks import CaliperKind

LIMB_LEADS = ("I", "II", "III", "aVR", "aVL", "aVF")
CHEST_LEADS = ("V1", "V2", "V3", "V4", "V5", "V6")
LEADS = LIMB_LEADS + CHEST_LEADS


@dataclass(frozen=True, slots=True)
class Quantity:
    """One thing a caliper can measure.

    Attributes
    ----------
    key : str
        Stable name, also the key of the value worked out from it.
    label : str
        Name on the worksheet.
    kind : CaliperKind
        Time or height.
    first_place, second_place : str
        The two places in plain words, each completing "Click ...".
    usual_lead : str
        Lead offered first.
    chained : bool
        Whether the second place is the first place of the next beat (R to R to R).
    """

    key: str
    label: str
    kind: CaliperKind
    first_place: str
    second_place: str
    usual_lead: str = "II"
    chained: bool = False


QUANTITIES: tuple[Quantity, ...] = (
    Quantity("rr", "RR", CaliperKind.TIME, "an R peak", "the next R peak", chained=True),
    Quantity(
        "p_duration", "P", CaliperKind.TIME, "where the P wave begins", "where the P wave ends"
    ),
    Quantity(
        "pr",
        "PR",
        CaliperKind.TIME,
        "where the P wave begins",
        "where the QRS begins (first of Q or R)",
    ),
    Quantity(
        "qrs",
        "QRS",
        CaliperKind.TIME,
        "where the QRS begins (first of Q or R)",
        "the J point, where the QRS ends",
    ),
    Quantity(
        "qt",
        "QT",
        CaliperKind.TIME,
        "where the QRS begins (first of Q or R)",
        "where the T wave ends",
    ),
    Quantity(
        "q_height",
        "Q depth",
        CaliperKind.HEIGHT,
        "the baseline just before the QRS",
        "the lowest point of Q",
        usual_lead="I",
    ),
    Quantity(
        "r_height",
        "R height",
        CaliperKind.HEIGHT,
        "the baseline just before the QRS",
        "the top of R",
        usual_lead="I",
    ),
    Quantity(
        "s_height",
        "S depth",
        CaliperKind.HEIGHT,
        "the baseline just before the QRS",
        "the lowest point of S",
        usual_lead="I",
    ),
)

_BY_KEY = {item.key: item for item in QUANTITIES}


def quantity(key: str) -> Quantity | None:
    """The quantity of that key, or None where this version knows none."""
    return _BY_KEY.get(key)
