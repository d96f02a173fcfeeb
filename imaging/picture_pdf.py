"""Render one page of a PDF so that a scan inside it keeps its own pixels."""

from __future__ import annotations

import ctypes
import math
import threading
from typing import TYPE_CHECKING, Any

from imaging.picture_parts import (
    CUT_SHORT,
    DAMAGED,
    Decoded,
    Refused,
    check_page,
    check_size,
)

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

# PDFium keeps state of its own and may be called by one thread at a time only.
_PDFIUM_LOCK = threading.Lock()

_DEFAULT_DPI, _LOWEST_DPI, _HIGHEST_DPI = 300.0, 150.0, 600.0
_POINTS_PER_INCH = 72.0
_HAIR_PX = 0.001
"""Kept free all round: PDFium stretches an image to whole pixels, outwards, so that one that
ends a rounding error beyond the page's edge would be blurred over a pixel more."""
_SHARE_OF_PAGE = 0.05
"""An image smaller than this is a logo and does not set the resolution; no source."""


def decode_pdf_page(data: bytes, page: int, max_pixels: int) -> Decoded:
    """Render one page of a PDF.

    The resolution is that of the sharpest image covering a fair share of the page, within
    150 to 600 dots per inch (below 150 only where the page holds nothing but images, which
    enlarging would only blur); 300 where there is no such image.

    Raises
    ------
    Refused
        If the PDF is cut short, locked, has no such page, or the page is too large.
    """
    # The file must end with this mark (ISO 32000-1, 7.5.5). PDFium would mend a file
    # without it and show whatever is left of the page.
    if b"%%EOF" not in data.rstrip(b"\0\t\n\r ")[-1024:]:
        raise Refused(CUT_SHORT)
    with _PDFIUM_LOCK:
        document = _open_document(data)
        try:
            check_page(page, len(document))
            return _render(document, page, max_pixels)
        finally:
            document.close()


def _open_document(data: bytes) -> Any:
    """The document; it refers to `data`, which must outlive it."""
    import pypdfium2
    import pypdfium2.raw as pdfium

    # Not through the helper: for a file without pages it reports the last file's error.
    handle = pdfium.FPDF_LoadMemDocument64(data, len(data), None)
    if handle:
        return pypdfium2.PdfDocument(handle)
    if pdfium.FPDF_GetLastError() == pdfium.FPDF_ERR_PASSWORD:
        raise Refused("is locked with a password; save a copy without one and open the copy.")
    raise Refused(DAMAGED)


def _render(document: Any, page: int, max_pixels: int) -> Decoded:
    pdf_page = document[page]
    try:
        width_pt, height_pt = pdf_page.get_size()
        if not (width_pt > 0.0 and height_pt > 0.0):
            raise Refused("has a page without a size; scan the page again.")
        dpi = _render_dpi(pdf_page, width_pt * height_pt, max_pixels)
        fitting_dpi = _POINTS_PER_INCH * math.sqrt(max_pixels / (width_pt * height_pt))
        if dpi > fitting_dpi >= _LOWEST_DPI:
            dpi = math.floor(fitting_dpi)
        width_px = round(width_pt * dpi / _POINTS_PER_INCH)
        height_px = round(height_pt * dpi / _POINTS_PER_INCH)
        check_size(width_px, height_px, max_pixels)
        pixels = _pixels(pdf_page, (width_pt, height_pt), (width_px, height_px))
    finally:
        pdf_page.close()
    return Decoded(pixels, len(document), (f"PDF page rendered at {dpi:.0f} dots per inch.",))


def _render_dpi(pdf_page: Any, page_area_pt2: float, max_pixels: int) -> float:
    """Resolution for a page, from the images on it; damaged images are refused here."""
    import pypdfium2.raw as pdfium

    resolutions, only_images = [], True
    for item in pdf_page.get_objects():
        if item.type == pdfium.FPDF_PAGEOBJ_FORM:
            continue  # its content follows in the same list
        if item.type != pdfium.FPDF_PAGEOBJ_IMAGE:
            only_images = False
            continue
        width_px, height_px = _image_size_px(item)
        if width_px * height_px > max_pixels:
            check_size(width_px, height_px, max_pixels)
        _check_embedded_jpeg(item)
        across_pt, down_pt = _image_size_pt(item)
        if across_pt * down_pt >= _SHARE_OF_PAGE * page_area_pt2:
            resolutions.append(max(width_px / across_pt, height_px / down_pt) * _POINTS_PER_INCH)
    if not resolutions:
        return _DEFAULT_DPI
    lowest_dpi = 0.0 if only_images else _LOWEST_DPI
    return min(max(*resolutions, lowest_dpi), _HIGHEST_DPI)


def _image_size_px(item: Any) -> tuple[int, int]:
    import pypdfium2.raw as pdfium

    width, height = ctypes.c_uint(), ctypes.c_uint()
    if not pdfium.FPDFImageObj_GetImagePixelSize(item, width, height):
        raise Refused(DAMAGED)
    return width.value, height.value


def _image_size_pt(item: Any) -> tuple[float, float]:
    """Lengths on the page of an image's two sides (ISO 32000-1, 8.9.5: the unit square)."""
    matrix = item.get_matrix()
    container = getattr(item, "container", None)
    while container is not None:
        matrix = matrix.multiply(container.get_matrix())
        container = container.container
    # Never zero: a side folded away has a resolution of no meaning, and no area either.
    tiny = 1e-6
    return max(math.hypot(matrix.a, matrix.b), tiny), max(math.hypot(matrix.c, matrix.d), tiny)


def _check_embedded_jpeg(item: Any) -> None:
    """A scan cut short before it was put into the PDF would be shown half grey."""
    import pypdfium2.raw as pdfium

    from imaging.picture_jpeg import jpeg_layout

    if pdfium.FPDFImageObj_GetImageFilterCount(item) != 1:
        return
    name = ctypes.create_string_buffer(16)
    pdfium.FPDFImageObj_GetImageFilter(item, 0, name, len(name))
    if name.value != b"DCTDecode":
        return
    length = pdfium.FPDFImageObj_GetImageDataRaw(item, None, 0)
    content = ctypes.create_string_buffer(length)
    pdfium.FPDFImageObj_GetImageDataRaw(item, content, length)
    jpeg_layout(content.raw)


def _pixels(
    pdf_page: Any, size_pt: tuple[float, float], size_px: tuple[int, int]
) -> NDArray[np.uint8]:
    """PDFium draws into the array itself; the page is stretched to its exact size."""
    import numpy as np
    import pypdfium2.raw as pdfium

    width_px, height_px = size_px
    pixels = np.full((height_px, width_px, 3), 255, dtype=np.uint8)
    bitmap = pdfium.FPDFBitmap_CreateEx(
        width_px,
        height_px,
        pdfium.FPDFBitmap_BGR,
        pixels.ctypes.data_as(ctypes.c_void_p),
        3 * width_px,
    )
    if not bitmap:
        raise MemoryError("PDFium could not make a bitmap")
    x_scale, y_scale = ((px - 2 * _HAIR_PX) / pt for px, pt in zip(size_px, size_pt, strict=True))
    matrix = pdfium.FS_MATRIX(x_scale, 0.0, 0.0, y_scale, _HAIR_PX, _HAIR_PX)
    whole = pdfium.FS_RECTF(0.0, 0.0, float(width_px), float(height_px))
    try:
        flags = pdfium.FPDF_ANNOT | pdfium.FPDF_REVERSE_BYTE_ORDER
        pdfium.FPDF_RenderPageBitmapWithMatrix(bitmap, pdf_page, matrix, whole, flags)
    finally:
        pdfium.FPDFBitmap_Destroy(bitmap)
    return pixels
