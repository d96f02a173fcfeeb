"""What is done to a page when it is photographed, and by chance how much."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any, Literal

import numpy as np

from tests.photo_geometry import Fold, Surface, Wave

Copy = Literal["none", "photocopy", "fax", "screen"]
FLAT = Surface()
DESKS = ("wood", "dark_wood", "laminate", "sheet", "steel", "dark", "card")


@dataclass(frozen=True, slots=True)
class Recipe:
    """Every degradation, by amount; the defaults leave the page as it is, from above.

    Attributes
    ----------
    megapixels, portrait, focal, fill, aim
        Size and shape of the picture; focal length over its longer side; share of the frame
        that the page spans; how far from the page's centre the camera aims, in page widths.
    tilt_deg, tilt_towards_deg, roll_deg, barrel
        The camera's lean and turn; radial distortion at the corner, second and fourth order.
    surface : Surface
        Curl, crumple and fold.
    quarter_turns, mirrored
        Of the finished picture: clockwise turns, after a left-right mirroring.
    handwriting, stamps, stains, stickers
        How many of each on the page.
    copy_of
        The page was photocopied, faxed, or is shown on a screen.
    desk, neighbours, papers_over, other_strips, fingers
        What it lies on, papers beside it, papers over it, further ECG strips, fingers.
    uneven, shadows, glare, relief
        Light falling off over the picture (share), number of shadow edges, strength of the
        reflection, strength of the shading by the paper's slope.
    blur_mm, motion_mm, motion_deg, sharpen
        Defocus as the standard deviation, and length of the motion, on the paper.
    noise, warmth, exposure, contrast, jpeg_quality
        Grey levels of 255; -1 (blue) to 1 (yellow); factor; factor; None for no JPEG.
    """

    megapixels: float = 8.0
    portrait: bool = False
    focal: float = 0.8
    fill: float = 0.9
    aim: tuple[float, float] = (0.0, 0.0)
    tilt_deg: float = 0.0
    tilt_towards_deg: float = 0.0
    roll_deg: float = 0.0
    barrel: tuple[float, float] = (0.0, 0.0)
    surface: Surface = FLAT
    quarter_turns: int = 0
    mirrored: bool = False
    handwriting: int = 0
    stamps: int = 0
    stains: int = 0
    stickers: int = 0
    copy_of: Copy = "none"
    desk: str = "laminate"
    neighbours: int = 0
    papers_over: int = 0
    other_strips: int = 0
    fingers: int = 0
    uneven: float = 0.0
    shadows: int = 0
    glare: float = 0.0
    relief: float = 0.0
    blur_mm: float = 0.0
    motion_mm: float = 0.0
    motion_deg: float = 0.0
    sharpen: float = 0.0
    noise: float = 0.0
    warmth: float = 0.0
    exposure: float = 1.0
    contrast: float = 1.0
    jpeg_quality: int | None = None


def random_recipe(rng: np.random.Generator, megapixels: float) -> Recipe:
    """A bedside photo: most of them mild, each with a few things wrong."""
    recipe = Recipe(
        megapixels=megapixels,
        portrait=bool(rng.random() < 0.12),
        surface=random_surface(rng),
        **_random_pose(rng),
        **_random_marks(rng),
        **_random_desk(rng),
        **_random_light(rng),
        **_random_camera(rng),
    )
    return replace(recipe, blur_mm=0.5 * recipe.blur_mm) if recipe.motion_mm else recipe


def _chance(rng: np.random.Generator, share: float) -> bool:
    return bool(rng.random() < share)


def _random_pose(rng: np.random.Generator) -> dict[str, Any]:
    tilt_deg = float(min(abs(rng.normal(0.0, 15.0)) + 1.0, 35.0))
    turned = [0, 1, 2, 3][int(rng.choice(4, p=[0.7, 0.12, 0.06, 0.12]))]
    return {
        "focal": float(rng.uniform(0.66, 1.3)),
        "fill": float(rng.uniform(0.72, 1.1)),
        "aim": (float(rng.normal(0.0, 0.03)), float(rng.normal(0.0, 0.03))),
        "tilt_deg": tilt_deg,
        "tilt_towards_deg": float(rng.choice([0.0, 180.0, rng.uniform(0.0, 360.0)])),
        "roll_deg": float(np.clip(rng.normal(0.0, 4.0), -15.0, 15.0)),
        "barrel": (float(rng.normal(0.0, 0.018)), float(rng.normal(0.0, 0.006))),
        "quarter_turns": turned,
        "mirrored": _chance(rng, 0.04),
    }


def random_surface(rng: np.random.Generator) -> Surface:
    """Curl, crumple and fold, each now and then."""
    curl_per_m, along_deg = 0.0, 0.0
    if _chance(rng, 0.5):
        curl_per_m = float(rng.choice([-1.0, 1.0]) * rng.uniform(0.3, 2.5))
        along_deg = float(rng.choice([0.0, 90.0, rng.uniform(0.0, 180.0)]))
    return Surface(
        curl_per_m=curl_per_m,
        curl_along_deg=along_deg,
        fold=_random_fold(rng) if _chance(rng, 0.3) else None,
        waves=random_waves(rng, float(rng.uniform(0.2, 0.8))) if _chance(rng, 0.4) else (),
    )


def _random_fold(rng: np.random.Generator) -> Fold:
    return Fold(
        angle_deg=float(rng.choice([-1.0, 1.0]) * rng.uniform(6.0, 28.0)),
        across_deg=float(rng.choice([0.0, 90.0]) + rng.normal(0.0, 2.0)),
        offset_mm=float(rng.normal(0.0, 18.0)),
        crease_mm=float(rng.uniform(1.2, 3.0)),
    )


def random_waves(rng: np.random.Generator, height_mm: float) -> tuple[Wave, ...]:
    """Five ripples; the longer are the higher, so that all are about equally steep."""
    lengths_mm = rng.uniform(45.0, 160.0, 5)
    return tuple(
        Wave(
            height_mm=float(height_mm * length_mm / 120.0),
            length_mm=float(length_mm),
            along_deg=float(rng.uniform(0.0, 180.0)),
            phase=float(rng.uniform(0.0, 2.0 * np.pi)),
        )
        for length_mm in lengths_mm
    )


def _random_marks(rng: np.random.Generator) -> dict[str, Any]:
    copies: list[Copy] = ["none", "photocopy", "fax", "screen"]
    return {
        "handwriting": int(rng.choice([0, 0, 1, 2, 3])),
        "stamps": int(rng.choice([0, 0, 0, 1, 2])),
        "stains": int(rng.choice([0, 0, 0, 1, 2])),
        "stickers": int(rng.choice([0, 0, 0, 0, 1])),
        "copy_of": copies[int(rng.choice(4, p=[0.85, 0.08, 0.03, 0.04]))],
    }


def _random_desk(rng: np.random.Generator) -> dict[str, Any]:
    return {
        "desk": str(rng.choice(DESKS)),
        "neighbours": int(rng.choice([0, 0, 1, 2, 3])),
        "papers_over": int(rng.choice([0, 0, 0, 0, 1])),
        "other_strips": int(rng.choice([0, 0, 0, 0, 1, 2])),
        "fingers": int(rng.choice([0, 0, 0, 1, 2])),
    }


def _random_light(rng: np.random.Generator) -> dict[str, Any]:
    return {
        "uneven": float(rng.uniform(0.05, 0.5)),
        "shadows": int(rng.choice([0, 0, 1, 1, 2])),
        "glare": float(rng.choice([0.0, 0.0, 0.0, rng.uniform(0.15, 0.95)])),
        "relief": float(rng.uniform(0.3, 1.0)),
    }


def _random_camera(rng: np.random.Generator) -> dict[str, Any]:
    return {
        "blur_mm": float(rng.choice([0.03, rng.uniform(0.03, 0.1), rng.uniform(0.05, 0.2)])),
        "motion_mm": float(rng.choice([0.0, 0.0, 0.0, rng.uniform(0.1, 0.45)])),
        "motion_deg": float(rng.uniform(0.0, 180.0)),
        "sharpen": float(rng.choice([0.0, rng.uniform(0.2, 0.9)])),
        "noise": float(rng.choice([rng.uniform(0.5, 3.0), rng.uniform(2.0, 9.0)])),
        "warmth": float(np.clip(rng.normal(0.15, 0.4), -1.0, 1.0)),
        "exposure": float(rng.uniform(0.72, 1.04)),
        "contrast": float(rng.uniform(0.8, 1.2)),
        "jpeg_quality": int(rng.choice([95, 90, 85, 75, 60, 45])),
    }
