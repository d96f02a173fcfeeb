"""Paper speed and gain, each with what it rests on."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import StrEnum
from typing import Any

# 25 and 50 mm/s, 10 and 5 mm/mV: found in teaching texts and AHA 2007 (secondary);
# 10, 12.5, 100 mm/s and 2.5, 20, 40 mm/mV: from memory (IEC 60601-2-25, practice).
USUAL_SPEEDS_MM_PER_S = (10.0, 12.5, 25.0, 50.0, 100.0)
USUAL_GAINS_MM_PER_MV = (2.5, 5.0, 10.0, 20.0, 40.0)


class Evidence(StrEnum):
    """Where a setting came from."""

    DEFAULT = "default"
    PULSE = "pulse"
    LEGEND = "legend"
    READER = "reader"


@dataclass(frozen=True, slots=True)
class Setting:
    """One number of the calibration; a default is never silently a fact.

    Attributes
    ----------
    value : float
        Positive; its unit is named where the setting is held.
    evidence : Evidence
        What the value rests on.
    confirmed : bool
        Whether a reader has said that it is so.
    """

    value: float
    evidence: Evidence = Evidence.DEFAULT
    confirmed: bool = False
    extra: Mapping[str, Any] = field(default_factory=dict)

    def __post_init__(self) -> None:
        if not (math.isfinite(self.value) and self.value > 0.0):
            raise ValueError(f"a calibration setting must be a positive number, not {self.value}")


@dataclass(frozen=True, slots=True)
class Calibration:
    """What turns millimetres of grid into time and amplitude.

    Attributes
    ----------
    paper_speed_mm_per_s, gain_mm_per_mv : Setting
        For the whole sheet.
    chest_gain_mm_per_mv : Setting or None
        Gain of V1-V6 where it differs (a stepped calibration pulse); None: as the limb leads.
    """

    paper_speed_mm_per_s: Setting = Setting(25.0)
    gain_mm_per_mv: Setting = Setting(10.0)
    chest_gain_mm_per_mv: Setting | None = None
    extra: Mapping[str, Any] = field(default_factory=dict)

    def duration_ms(self, width_mm: float) -> float:
        """Time of a width on the grid."""
        return 1000.0 * width_mm / self.paper_speed_mm_per_s.value

    def gain_for(self, lead: str | None) -> Setting:
        """The gain that holds in a lead."""
        if self.chest_gain_mm_per_mv is not None and lead is not None and lead.startswith("V"):
            return self.chest_gain_mm_per_mv
        return self.gain_mm_per_mv

    def height_mv(self, height_mm: float, lead: str | None = None) -> float:
        """Amplitude of a height on the grid, in a lead."""
        return height_mm / self.gain_for(lead).value
