"""Any Pillow picture as sRGB pixels, a band of rows at a time.

Working in bands keeps the memory needed at the decoded picture plus its result, and lets
the colour conversion use every core.
"""

from __future__ import annotations

import io
import logging
import os
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray
    from PIL import Image, ImageCms

_log = logging.getLogger(__name__)

_BAND_PIXELS = 1 << 20
_PROFILE_SPACES = {"L": "GRAY", "RGB": "RGB", "CMYK": "CMYK"}

PROFILE_IGNORED = "The embedded colour profile is not usable and was ignored."
CMYK_WITHOUT_PROFILE = "CMYK without a colour profile: the colours shown are approximate."
OVER_WHITE = "Transparent parts are shown over white."


def rgb_pixels(
    image: Image.Image, profile: bytes | None, *, white_is_zero: bool = False
) -> tuple[NDArray[np.uint8], tuple[str, ...]]:
    """Convert a decoded Pillow picture.

    Parameters
    ----------
    image : PIL.Image.Image
        Loaded; any of the modes Pillow's decoders produce, 16-bit grey included, of which
        the high byte is kept (0 -> 0, 65535 -> 255). Not modified.
    profile : bytes or None
        ICC profile of its colours; None or a broken one: taken as sRGB.
    white_is_zero : bool
        Whether 16-bit grey runs from white to black.

    Returns
    -------
    pixels : ndarray of uint8, shape (height, width, 3)
    notes : tuple of str
    """
    import numpy as np

    base_mode = _base_mode(image)
    transform, notes = _transform_to_srgb(profile, base_mode)
    if base_mode == "CMYK" and transform is None:
        notes += (CMYK_WITHOUT_PROFILE,)
    if _has_transparency(image):
        notes += (OVER_WHITE,)
    pixels = np.empty((image.height, image.width, 3), dtype=np.uint8)

    def fill(top: int, bottom: int) -> None:
        band = _flat(image.crop((0, top, image.width, bottom)), base_mode, white_is_zero)
        pixels[top:bottom] = np.asarray(_as_srgb(band, transform))

    _each_band(pixels.shape, fill)
    return pixels, notes


def convert_rgb_in_place(pixels: NDArray[np.uint8], profile: bytes | None) -> tuple[str, ...]:
    """Convert RGB pixels, uint8, shape (height, width, 3), from a profile to sRGB.

    Returns the notes; a profile that is broken or means sRGB changes nothing.
    """
    import numpy as np
    from PIL import Image

    transform, notes = _transform_to_srgb(profile, "RGB")
    if transform is not None:

        def fill(top: int, bottom: int) -> None:
            band = Image.fromarray(pixels[top:bottom])
            pixels[top:bottom] = np.asarray(_as_srgb(band, transform))

        _each_band(pixels.shape, fill)
    return notes


def _each_band(shape: tuple[int, ...], fill: Callable[[int, int], None]) -> None:
    """Call `fill` with the first row and the row after the last of each band."""
    rows = max(1, _BAND_PIXELS // shape[1])
    tops = range(0, shape[0], rows)
    with ThreadPoolExecutor(min(len(tops), os.cpu_count() or 1)) as pool:
        for _ in pool.map(lambda top: fill(top, min(top + rows, shape[0])), tops):
            pass  # an exception of a band is raised here


def _base_mode(image: Image.Image) -> str:
    if image.mode == "CMYK":
        return "CMYK"
    return "L" if image.mode in ("1", "L", "LA", "La") or _is_16_bit(image) else "RGB"


def _is_16_bit(image: Image.Image) -> bool:
    # Mode "I" reaches this module from 16-bit grey PNG only (Pillow before 11).
    return image.mode == "I" or image.mode.startswith("I;16")


def _has_alpha(image: Image.Image) -> bool:
    if _is_16_bit(image) or image.mode in ("1", "CMYK"):
        return False
    return image.mode in ("LA", "La", "PA", "RGBA", "RGBa") or "transparency" in image.info


def _has_transparency(image: Image.Image) -> bool:
    """Whether any pixel is really less than opaque."""
    if not _has_alpha(image):
        return False
    if image.mode in ("LA", "La", "PA", "RGBA", "RGBa"):
        lowest, _ = image.getchannel(image.getbands()[-1]).getextrema()
        return lowest != 255
    return True


def _flat(band: Image.Image, base_mode: str, white_is_zero: bool) -> Image.Image:
    """A band as 8-bit L, RGB or CMYK, opaque."""
    import numpy as np
    from PIL import Image

    if _is_16_bit(band):
        high_byte = (np.asarray(band) >> 8).astype(np.uint8)
        return Image.fromarray(255 - high_byte if white_is_zero else high_byte)
    if _has_alpha(band):
        rgba = band.convert("LA" if band.mode == "La" else "RGBA").convert("RGBA")
        paper = Image.new("RGB", band.size, "white")
        paper.paste(rgba, mask=rgba.getchannel("A"))
        band = paper
    return band.convert(base_mode)


def _as_srgb(band: Image.Image, transform: ImageCms.ImageCmsTransform | None) -> Image.Image:
    if transform is None:
        return band.convert("RGB")
    from PIL import ImageCms

    converted = ImageCms.applyTransform(band, transform)
    if converted is None:
        raise ValueError("the colour conversion gave no picture")
    return converted


def _transform_to_srgb(
    profile: bytes | None, mode: str
) -> tuple[ImageCms.ImageCmsTransform | None, tuple[str, ...]]:
    """The conversion a profile asks for; None where there is none, or where it does nothing."""
    if not profile:
        return None, ()
    from PIL import ImageCms

    try:
        source = ImageCms.ImageCmsProfile(io.BytesIO(profile))
        if source.profile.xcolor_space.strip() != _PROFILE_SPACES[mode]:
            _log.info("%s profile on a %s picture", source.profile.xcolor_space, mode)
            return None, (PROFILE_IGNORED,)
        transform = ImageCms.buildTransform(
            source,
            ImageCms.createProfile("sRGB"),
            mode,
            "RGB",
            ImageCms.Intent.RELATIVE_COLORIMETRIC,
            ImageCms.Flags.BLACKPOINTCOMPENSATION,
        )
        changes = _changes_colours(transform, mode)
    except (ImageCms.PyCMSError, OSError, TypeError, ValueError):
        _log.info("unusable colour profile", exc_info=True)
        return None, (PROFILE_IGNORED,)
    return (transform if changes else None), ()


def _changes_colours(transform: ImageCms.ImageCmsTransform, mode: str) -> bool:
    """Whether a cube of probe colours moves by more than one level of 255.

    Most pictures carry an sRGB profile of one maker or another; converting them would cost
    more than decoding did, for rounding differences.
    """
    import numpy as np
    from PIL import Image

    if mode != "RGB":
        return True
    levels = np.linspace(0, 255, 17).astype(np.uint8)
    cube = np.stack(np.meshgrid(levels, levels, levels), axis=-1).reshape(17, -1, 3)
    moved = np.asarray(_as_srgb(Image.fromarray(cube), transform)).astype(np.int16)
    return int(np.abs(moved - cube).max()) > 1
