"""What is known of a grid, for other programs."""

from __future__ import annotations

from typing import Any

from imaging.sheet_map import SheetMap


def grid_document(sheet_map: SheetMap) -> dict[str, Any]:
    """A grid as plain JSON values with keys in a fixed order."""
    return {
        "source": sheet_map.source,
        "x_pitch_px_per_mm": sheet_map.x_pitch_px_per_mm,
        "y_pitch_px_per_mm": sheet_map.y_pitch_px_per_mm,
        "largest_standard_error_mm": sheet_map.largest_standard_error_mm(),
        "scale_is_certain": sheet_map.scale_is_certain,
        "turn_deg": sheet_map.turn_deg,
        "mirrored": sheet_map.mirrored,
        "evidence": list(sheet_map.evidence),
    }
