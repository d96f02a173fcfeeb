"""Small picture files of every kind, made in memory, and one PDF written by hand.

The scene is not square and has another colour in each corner, so that a picture turned,
mirrored or with its channels exchanged cannot pass for the right one.
"""

from __future__ import annotations

import hashlib
import io
import struct
import zlib
from functools import cache
from typing import Any

import numpy as np
import pillow_heif
import tifffile
from numpy.typing import NDArray
from PIL import Image, ImageCms

Pixels = NDArray[np.uint8]

WIDTH_PX, HEIGHT_PX = 96, 64
BLOCK_PX = 16
"""Two blocks of the coarsest chroma of a JPEG: a flat block stays flat."""

ORIENTATION_TAG = 0x0112


def scene(width_px: int = WIDTH_PX, height_px: int = HEIGHT_PX) -> Pixels:
    """White, with red, green, blue and black corners and a ramp of grey in the middle."""
    pixels = np.full((height_px, width_px, 3), 255, dtype=np.uint8)
    ramp = np.linspace(40, 220, width_px - 2 * BLOCK_PX).astype(np.uint8)
    pixels[BLOCK_PX:-BLOCK_PX, BLOCK_PX:-BLOCK_PX] = ramp[None, :, None]
    pixels[:BLOCK_PX, :BLOCK_PX] = (255, 0, 0)
    pixels[:BLOCK_PX, -BLOCK_PX:] = (0, 255, 0)
    pixels[-BLOCK_PX:, :BLOCK_PX] = (0, 0, 255)
    pixels[-BLOCK_PX:, -BLOCK_PX:] = 0
    return pixels


def grey_scene() -> Pixels:
    """One channel: white, a black and a grey corner, the ramp; shape (height, width)."""
    pixels = scene()[..., 0].copy()
    pixels[:BLOCK_PX, :BLOCK_PX] = 96
    return pixels


def saved(image: Image.Image, kind: str, **how: Any) -> bytes:
    """The bytes of a Pillow picture in one format."""
    file = io.BytesIO()
    image.save(file, kind, **how)
    return file.getvalue()


def rgb_image() -> Image.Image:
    return Image.fromarray(scene())


def grey_image() -> Image.Image:
    return Image.fromarray(grey_scene())


def bilevel_image() -> Image.Image:
    return Image.fromarray(grey_scene() > 127)


def cmyk_image() -> Image.Image:
    """Plain inks: cyan, magenta, yellow and black corners on unprinted paper."""
    inks = np.zeros((HEIGHT_PX, WIDTH_PX, 4), dtype=np.uint8)
    inks[:BLOCK_PX, :BLOCK_PX, 0] = 255
    inks[:BLOCK_PX, -BLOCK_PX:, 1] = 255
    inks[-BLOCK_PX:, :BLOCK_PX, 2] = 255
    inks[-BLOCK_PX:, -BLOCK_PX:, 3] = 255
    return Image.fromarray(inks, mode="CMYK")


CMYK_AS_RGB = {
    "top left": (0, 255, 255),
    "top right": (255, 0, 255),
    "bottom left": (255, 255, 0),
    "bottom right": (0, 0, 0),
    "middle": (255, 255, 255),
}


def corner_colours(pixels: Pixels) -> dict[str, tuple[int, int, int]]:
    """Mean colour inside each corner block and at the picture's middle."""
    margin, inner = 4, BLOCK_PX - 4
    low, high = slice(margin, inner), slice(-inner, -margin)
    middle_y, middle_x = pixels.shape[0] // 2, pixels.shape[1] // 2
    places = {
        "top left": pixels[low, low],
        "top right": pixels[low, high],
        "bottom left": pixels[high, low],
        "bottom right": pixels[high, high],
        "middle": pixels[middle_y - 2 : middle_y + 2, middle_x - 2 : middle_x + 2],
    }
    return {
        name: tuple(round(v) for v in part.reshape(-1, 3).mean(axis=0))  # type: ignore[misc]
        for name, part in places.items()
    }


# --- JPEG


def jpeg(image: Image.Image | None = None, **how: Any) -> bytes:
    return saved(image or rgb_image(), "JPEG", **{"quality": 95, "subsampling": 0} | how)


def exif_orientation(value: int) -> bytes:
    exif = Image.Exif()
    exif[ORIENTATION_TAG] = value
    return exif.tobytes()


# --- PNG


def png_chunk(kind: bytes, content: bytes) -> bytes:
    check = zlib.crc32(kind + content)
    return struct.pack(">I", len(content)) + kind + content + struct.pack(">I", check)


def png(samples: NDArray[Any], colour_type: int, *before_data: bytes) -> bytes:
    """A PNG written by hand, 8 or 16 bits per sample by dtype; chunks may be put in.

    Pillow writes neither 16-bit colour nor 16-bit grey with alpha.
    """
    height_px, width_px = samples.shape[:2]
    bits = 8 * samples.dtype.itemsize
    rows = samples.astype(samples.dtype.newbyteorder(">")).reshape(height_px, -1)
    lines = b"".join(b"\0" + row.tobytes() for row in rows)
    header = struct.pack(">IIBBBBB", width_px, height_px, bits, colour_type, 0, 0, 0)
    return (
        b"\x89PNG\r\n\x1a\n"
        + png_chunk(b"IHDR", header)
        + b"".join(before_data)
        + png_chunk(b"IDAT", zlib.compress(lines))
        + png_chunk(b"IEND", b"")
    )


def png_of_size(width_px: int, height_px: int) -> bytes:
    """A header that promises a size, with next to no data behind it."""
    header = struct.pack(">IIBBBBB", width_px, height_px, 8, 2, 0, 0, 0)
    chunks = png_chunk(b"IHDR", header) + png_chunk(b"IDAT", zlib.compress(b"\0" * 64))
    return b"\x89PNG\r\n\x1a\n" + chunks + png_chunk(b"IEND", b"")


# --- TIFF


def tiff(samples: NDArray[Any], **how: Any) -> bytes:
    file = io.BytesIO()
    tifffile.imwrite(file, samples, **how)
    return file.getvalue()


# --- HEIC


def heic(image: Image.Image | None = None, **how: Any) -> bytes:
    file = io.BytesIO()
    heif = pillow_heif.from_pillow(image or rgb_image())
    heif.save(file, quality=100, chroma=444, **how)
    return file.getvalue()


# --- PDF


def pdf(*pages: Image.Image, dpi: float = 72.0, **how: Any) -> bytes:
    """One page per picture, the picture filling it; lossy colour, lossless 1-bit."""
    first, *others = pages or (rgb_image(),)
    return saved(first, "PDF", resolution=dpi, save_all=True, append_images=others, **how)


def pdf_of_objects(*objects: bytes, trailer: bytes = b"") -> bytes:
    """A PDF of numbered objects, the first being the catalogue (ISO 32000-1, 7.5)."""
    content, places = b"%PDF-1.4\n", []
    for number, body in enumerate(objects, start=1):
        places.append(len(content))
        content += b"%d 0 obj\n%b\nendobj\n" % (number, body)
    table = b"xref\n0 %d\n0000000000 65535 f \n" % (len(objects) + 1)
    table += b"".join(b"%010d 00000 n \n" % place for place in places)
    end = b"trailer\n<< /Root 1 0 R /Size %d %b >>\n" % (len(objects) + 1, trailer)
    return content + table + end + b"startxref\n%d\n%%%%EOF\n" % len(content)


def pdf_stream(content: bytes, entries: bytes = b"") -> bytes:
    return b"<< /Length %d %b >>\nstream\n%b\nendstream" % (len(content), entries, content)


def pdf_drawing(content: bytes, size_pt: tuple[float, float], resources: bytes = b"") -> bytes:
    """One page that draws `content`; `resources` may refer to objects 5 on."""
    page = b"<< /Type /Page /Parent 2 0 R /MediaBox [0 0 %g %g] /Contents 4 0 R " % size_pt
    return pdf_of_objects(
        b"<< /Type /Catalog /Pages 2 0 R >>",
        b"<< /Type /Pages /Kids [3 0 R] /Count 1 >>",
        page + b"/Resources << %b >> >>" % resources,
        pdf_stream(content),
    )


_PADDING = bytes.fromhex("28bf4e5e4e758a4164004e56fffa01082e2e00b6d0683e802f0ca9fe6453697a")


def _rc4(key: bytes, content: bytes) -> bytes:
    state, j = list(range(256)), 0
    for i in range(256):
        j = (j + state[i] + key[i % len(key)]) % 256
        state[i], state[j] = state[j], state[i]
    out, i, j = bytearray(), 0, 0
    for byte in content:
        i = (i + 1) % 256
        j = (j + state[i]) % 256
        state[i], state[j] = state[j], state[i]
        out.append(byte ^ state[(state[i] + state[j]) % 256])
    return bytes(out)


def locked_pdf(password: bytes) -> bytes:
    """A blank page that opens with a password only (ISO 32000-1, 7.6.3, revision 2)."""
    padded = (password + _PADDING)[:32]
    file_id, permissions = b"0123456789abcdef", -4
    owner = _rc4(hashlib.md5(padded).digest()[:5], padded)
    seed = padded + owner + struct.pack("<i", permissions) + file_id
    user = _rc4(hashlib.md5(seed).digest()[:5], _PADDING)
    lock = b"<< /Filter /Standard /V 1 /R 2 /O <%b> /U <%b> /P %d >>" % (
        owner.hex().encode(),
        user.hex().encode(),
        permissions,
    )
    return pdf_of_objects(
        b"<< /Type /Catalog /Pages 2 0 R >>",
        b"<< /Type /Pages /Kids [3 0 R] /Count 1 >>",
        b"<< /Type /Page /Parent 2 0 R /MediaBox [0 0 200 100] >>",
        trailer=b"/ID [<%b> <%b>] /Encrypt %b" % (*[file_id.hex().encode()] * 2, lock),
    )


# --- colour profiles


@cache
def swapped_profile() -> bytes:
    """An sRGB profile whose red and blue columns are exchanged: impossible to overlook."""
    profile = bytearray(ImageCms.ImageCmsProfile(ImageCms.createProfile("sRGB")).tobytes())
    red, blue = profile.find(b"rXYZ", 128, 400), profile.find(b"bXYZ", 128, 400)
    profile[red : red + 1], profile[blue : blue + 1] = b"b", b"r"
    return bytes(profile)


@cache
def srgb_profile() -> bytes:
    return ImageCms.ImageCmsProfile(ImageCms.createProfile("sRGB")).tobytes()


@cache
def linear_grey_profile() -> bytes:
    """A grey profile whose numbers are light itself (ICC.1:2010, 7.2, 8.3.2, 10.5: gamma 1)."""
    media_white = b"XYZ \0\0\0\0" + struct.pack(">3i", 63190, 65536, 54061)  # D50, s15Fixed16
    curve = b"curv\0\0\0\0" + struct.pack(">I", 0)
    tags = struct.pack(">I", 2)
    tags += b"wtpt" + struct.pack(">II", 156, len(media_white))
    tags += b"kTRC" + struct.pack(">II", 156 + len(media_white), len(curve))
    head = bytearray(128)
    head[0:4] = struct.pack(">I", 156 + len(media_white) + len(curve))
    head[8:12], head[12:24], head[36:40] = b"\2\x10\0\0", b"scnrGRAYXYZ ", b"acsp"
    head[68:80] = media_white[8:]
    return bytes(head) + tags + media_white + curve


# --- one of each


@cache
def one_of_each() -> dict[str, bytes]:
    """A whole, right file of each kind, for damage to be done to."""
    rgb, grey, bilevel = rgb_image(), grey_image(), bilevel_image()
    deep = scene().astype(np.uint16) * 257
    frames = [rgb, rgb.transpose(Image.Transpose.ROTATE_180)]
    return {
        "jpeg": jpeg(),
        "jpeg, subsampled, restart markers": jpeg(subsampling=2, restart_marker_rows=1),
        "jpeg, progressive": jpeg(progressive=True),
        "jpeg, grey": jpeg(grey),
        "jpeg, CMYK": jpeg(cmyk_image()),
        "jpeg, EXIF and profile": jpeg(exif=exif_orientation(6), icc_profile=swapped_profile()),
        "png": saved(rgb, "PNG"),
        "png, palette": saved(rgb.quantize(16), "PNG"),
        "png, 16-bit": png(deep, 2),
        "tiff": saved(rgb, "TIFF"),
        "tiff, LZW": saved(rgb, "TIFF", compression="tiff_lzw"),
        "tiff, JPEG": saved(rgb, "TIFF", compression="jpeg"),
        "tiff, G4": saved(bilevel, "TIFF", compression="group4"),
        "tiff, 16-bit grey": tiff(deep[..., 0], photometric="minisblack"),
        "tiff, tiles": tiff(scene(), tile=(16, 16), compression="zlib", photometric="rgb"),
        "tiff, pages": saved(rgb, "TIFF", save_all=True, append_images=frames[1:]),
        "webp": saved(rgb, "WEBP", quality=90),
        "webp, lossless": saved(rgb, "WEBP", lossless=True),
        "webp, animated": saved(rgb, "WEBP", save_all=True, append_images=frames[1:]),
        "gif": saved(rgb, "GIF"),
        "gif, animated": saved(rgb, "GIF", save_all=True, append_images=frames[1:]),
        "bmp": saved(rgb, "BMP"),
        "heic": heic(),
        "pdf": pdf(rgb),
        "pdf, 1-bit": pdf(bilevel),
        "pdf, pages": pdf(rgb, grey),
    }
