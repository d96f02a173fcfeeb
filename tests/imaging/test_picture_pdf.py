"""One page of a PDF, with a scan inside it at its own resolution."""

from __future__ import annotations

import threading
import zlib
from concurrent.futures import ThreadPoolExecutor

import numpy as np
import pypdfium2
import pytest

from imaging import PictureError, picture_from_bytes
from tests.imaging.picture_files import (
    Pixels,
    bilevel_image,
    corner_colours,
    grey_image,
    grey_scene,
    jpeg,
    locked_pdf,
    pdf,
    pdf_drawing,
    pdf_of_objects,
    pdf_stream,
    rgb_image,
    scene,
)


def refusal(data: bytes, page: int = 0) -> str:
    with pytest.raises(PictureError) as caught:
        picture_from_bytes(data, "page.pdf", page)
    return str(caught.value)


def noise(width_px: int, height_px: int) -> Pixels:
    return np.random.default_rng(7).integers(0, 256, (height_px, width_px, 3), dtype=np.uint8)


def image_object(content: bytes, size_px: tuple[int, int], entries: bytes) -> bytes:
    head = b"/Type /XObject /Subtype /Image /ColorSpace /DeviceRGB /BitsPerComponent 8 "
    return pdf_stream(content, head + b"/Width %d /Height %d " % size_px + entries)


def scanned_pdf(
    pixels: Pixels,
    size_pt: tuple[float, float],
    placed: bytes | None = None,
    page_entries: bytes = b"",
    beside: bytes = b"",
) -> bytes:
    """One page with a lossless image; `placed` is its matrix, the whole page by default."""
    matrix = placed or b"%g 0 0 %g 0 0" % size_pt
    page = (
        b"<< /Type /Page /Parent 2 0 R /MediaBox [0 0 %g %g] /Contents 4 0 R " % size_pt
        + page_entries
        + b" /Resources << /XObject << /I 5 0 R >> >> >>"
    )
    content = zlib.compress(pixels.tobytes())
    return pdf_of_objects(
        b"<< /Type /Catalog /Pages 2 0 R >>",
        b"<< /Type /Pages /Kids [3 0 R] /Count 1 >>",
        page,
        pdf_stream(b"q %b cm /I Do Q %b" % (matrix, beside)),
        image_object(content, (pixels.shape[1], pixels.shape[0]), b"/Filter /FlateDecode"),
    )


# --- resolution


@pytest.mark.parametrize("dpi", [100, 150, 200, 300, 600])
def test_a_scan_keeps_its_own_pixels(dpi: int) -> None:
    pixels = noise(240, 180)
    picture = picture_from_bytes(scanned_pdf(pixels, (240 * 72 / dpi, 180 * 72 / dpi)), "p")
    np.testing.assert_array_equal(picture.pixels, pixels)
    assert picture.notes == (f"PDF page rendered at {dpi} dots per inch.",)


@pytest.mark.parametrize("seed", range(12))
def test_a_scan_keeps_its_own_pixels_whatever_the_page_s_size_was_rounded_to(seed: int) -> None:
    random = np.random.default_rng(seed)
    width_px, height_px = (int(side) for side in random.integers(200, 900, size=2))
    dpi, turn = random.choice([100, 150, 200, 300, 400, 600]), int(random.integers(4))
    size_pt = tuple(round(float(px * 72 / dpi), 1 + seed % 3) for px in (width_px, height_px))
    pixels = noise(width_px, height_px)
    data = scanned_pdf(pixels, size_pt, page_entries=b"/Rotate %d" % (90 * turn))
    np.testing.assert_array_equal(picture_from_bytes(data, "p").pixels, np.rot90(pixels, -turn))


def test_an_uncompressed_scan_keeps_its_own_pixels() -> None:
    pixels = noise(240, 180)
    data = pdf_of_objects(
        b"<< /Type /Catalog /Pages 2 0 R >>",
        b"<< /Type /Pages /Kids [3 0 R] /Count 1 >>",
        b"<< /Type /Page /Parent 2 0 R /MediaBox [0 0 57.6 43.2] /Contents 4 0 R "
        b"/Resources << /XObject << /I 5 0 R >> >> >>",
        pdf_stream(b"57.6 0 0 43.2 0 0 cm /I Do"),
        image_object(pixels.tobytes(), (240, 180), b""),
    )
    np.testing.assert_array_equal(picture_from_bytes(data, "p").pixels, pixels)


def test_a_turned_page_keeps_its_own_pixels_too() -> None:
    pixels = noise(240, 180)
    data = scanned_pdf(pixels, (57.6, 43.2), page_entries=b"/Rotate 90")
    np.testing.assert_array_equal(picture_from_bytes(data, "p").pixels, np.rot90(pixels, -1))


def test_a_sharper_scan_than_600_dots_per_inch_is_reduced_to_it() -> None:
    picture = picture_from_bytes(scanned_pdf(noise(240, 120), (14.4, 7.2)), "p")
    assert picture.size_px == (120, 60)
    assert picture.notes == ("PDF page rendered at 600 dots per inch.",)


def test_a_drawing_is_rendered_at_300_dots_per_inch() -> None:
    picture = picture_from_bytes(pdf_drawing(b"1 0 0 rg 0 0 72 72 re f", (144, 72)), "p")
    assert picture.size_px == (600, 300)
    assert (picture.pixels[:, :298] == (255, 0, 0)).all()
    assert (picture.pixels[:, 302:] == 255).all()


def test_a_logo_does_not_set_the_resolution() -> None:
    data = scanned_pdf(noise(200, 200), (240, 240), placed=b"24 0 0 24 0 0")
    assert picture_from_bytes(data, "p").size_px == (1000, 1000)


def test_a_coarse_scan_with_something_drawn_over_it_is_rendered_at_150() -> None:
    pixels = noise(100, 100)
    bare = scanned_pdf(pixels, (100, 100))
    drawn_over = scanned_pdf(pixels, (100, 100), beside=b"0 0 m 100 100 l S")
    assert picture_from_bytes(bare, "p").size_px == (100, 100)
    assert picture_from_bytes(drawn_over, "p").size_px == (208, 208)


def test_a_scan_inside_a_form_is_found() -> None:
    """ISO 32000-1, 8.10: a form is a page's content kept as an object of its own."""
    pixels = noise(240, 180)
    form = b"/Type /XObject /Subtype /Form /BBox [0 0 1 1] /Resources << /XObject << /I 6 0 R >> >>"
    data = pdf_of_objects(
        b"<< /Type /Catalog /Pages 2 0 R >>",
        b"<< /Type /Pages /Kids [3 0 R] /Count 1 >>",
        b"<< /Type /Page /Parent 2 0 R /MediaBox [0 0 86.4 64.8] /Contents 4 0 R "
        b"/Resources << /XObject << /F 5 0 R >> >> >>",
        pdf_stream(b"86.4 0 0 64.8 0 0 cm /F Do"),
        pdf_stream(b"/I Do", form),
        image_object(zlib.compress(pixels.tobytes()), (240, 180), b"/Filter /FlateDecode"),
    )
    picture = picture_from_bytes(data, "p")
    np.testing.assert_array_equal(picture.pixels, pixels)
    assert picture.notes == ("PDF page rendered at 200 dots per inch.",)


def test_a_large_page_is_rendered_coarser_rather_than_refused() -> None:
    data = pdf_drawing(b"", (720, 720))  # 3000 x 3000 pixels at 300 dots per inch
    picture = picture_from_bytes(data, "p", max_pixels=4_000_000)
    assert picture.size_px == (2000, 2000)
    assert picture.notes == ("PDF page rendered at 200 dots per inch.",)
    with pytest.raises(PictureError, match="more than the 1 million allowed"):
        picture_from_bytes(data, "p", max_pixels=1_000_000)


def test_an_image_that_promises_too_many_pixels_is_refused_before_it_is_unpacked() -> None:
    promise = image_object(zlib.compress(bytes(100)), (60_000, 60_000), b"/Filter /FlateDecode")
    data = pdf_of_objects(
        b"<< /Type /Catalog /Pages 2 0 R >>",
        b"<< /Type /Pages /Kids [3 0 R] /Count 1 >>",
        b"<< /Type /Page /Parent 2 0 R /MediaBox [0 0 100 100] /Contents 4 0 R "
        b"/Resources << /XObject << /I 5 0 R >> >> >>",
        pdf_stream(b"100 0 0 100 0 0 cm /I Do"),
        promise,
    )
    assert "60000 × 60000 pixels" in refusal(data)


# --- content


def test_colour_grey_and_one_bit_pages() -> None:
    data = pdf(rgb_image(), grey_image(), bilevel_image())
    colour, grey, bilevel = (picture_from_bytes(data, "p", page) for page in range(3))
    assert [colour.page, grey.page, bilevel.page] == [0, 1, 2]
    assert {colour.page_count, grey.page_count, bilevel.page_count} == {3}
    for place, meant in corner_colours(scene()).items():
        assert corner_colours(colour.pixels)[place] == pytest.approx(meant, abs=6), place
    assert corner_colours(grey.pixels)["top left"] == pytest.approx((96, 96, 96), abs=6)
    black_and_white = np.where(grey_scene() > 127, 255, 0)
    np.testing.assert_array_equal(bilevel.pixels[..., 1], black_and_white)


def test_an_unprinted_page_is_white() -> None:
    assert (picture_from_bytes(pdf_drawing(b"", (72, 72)), "p").pixels == 255).all()


def test_a_pdf_may_begin_and_end_with_a_few_other_bytes() -> None:
    data = b"\r\n%!mail\r\n" + pdf_drawing(b"", (72, 72)) + b"\0\n  \r\n"
    assert picture_from_bytes(data, "p").size_px == (300, 300)


# --- refusals


def test_a_pdf_locked_with_a_password_is_refused_and_one_with_an_empty_password_opens() -> None:
    data = locked_pdf(b"secret")
    with pypdfium2.PdfDocument(data, password="secret") as document:
        assert len(document) == 1  # the file is right: only the password is missing
    assert "is locked with a password" in refusal(data)
    assert picture_from_bytes(locked_pdf(b""), "p").size_px == (833, 417)


@pytest.mark.parametrize("share", [0.1, 0.5, 0.9, 0.99])
def test_a_pdf_cut_short_is_refused(share: float) -> None:
    whole = pdf(rgb_image(), grey_image())
    assert "is cut short" in refusal(whole[: int(share * len(whole))])


def test_a_scan_cut_short_before_it_was_put_into_the_pdf_is_refused() -> None:
    half = jpeg()[: len(jpeg()) // 2]
    data = pdf_of_objects(
        b"<< /Type /Catalog /Pages 2 0 R >>",
        b"<< /Type /Pages /Kids [3 0 R] /Count 1 >>",
        b"<< /Type /Page /Parent 2 0 R /MediaBox [0 0 96 64] /Contents 4 0 R "
        b"/Resources << /XObject << /I 5 0 R >> >> >>",
        pdf_stream(b"96 0 0 64 0 0 cm /I Do"),
        image_object(half, (96, 64), b"/Filter /DCTDecode"),
    )
    assert "is cut short" in refusal(data)


def test_a_pdf_without_pages_and_one_without_content_are_refused() -> None:
    empty = pdf_of_objects(
        b"<< /Type /Catalog /Pages 2 0 R >>", b"<< /Type /Pages /Kids [] /Count 0 >>"
    )
    assert "has no pages" in refusal(empty)
    refusal(locked_pdf(b"secret"))
    assert "has no pages" in refusal(empty)  # and not what was wrong with the file before it
    assert "is damaged" in refusal(b"%PDF-1.4\nnothing\n%%EOF")


def test_a_page_out_of_range_is_refused() -> None:
    data = pdf(rgb_image(), grey_image())
    assert "has 2 pages, so there is no page 3; choose a page from 1 to 2." in refusal(data, 2)
    assert "there is no page 0" in refusal(data, -1)


def test_no_memory_for_the_page_is_one_sentence(monkeypatch: pytest.MonkeyPatch) -> None:
    import pypdfium2.raw

    monkeypatch.setattr(pypdfium2.raw, "FPDFBitmap_CreateEx", lambda *_: None)
    assert "needs more memory than is free" in refusal(pdf(rgb_image()))


# --- threads


def test_several_threads_may_open_pages_at_once() -> None:
    """PDFium itself falls over when two threads call it; a lock keeps them apart."""
    pictures = [noise(150, 120) for _ in range(4)]
    for number, pixels in enumerate(pictures):
        pixels[0, 0] = number
    files = [scanned_pdf(pixels, (54.0, 43.2)) for pixels in pictures] * 10
    together = threading.Barrier(4)

    def opened(data: bytes) -> Pixels:
        return picture_from_bytes(data, "p").pixels

    with ThreadPoolExecutor(4, initializer=together.wait) as pool:
        for shown, meant in zip(pool.map(opened, files), pictures * 10, strict=True):
            np.testing.assert_array_equal(shown, meant)


def test_the_lock_is_free_after_a_refusal() -> None:
    refusal(locked_pdf(b"secret"))
    refusal(pdf(rgb_image()), page=5)
    assert picture_from_bytes(pdf(rgb_image()), "p").page_count == 1
