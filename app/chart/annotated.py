"""The annotated picture: the whole picture with the calipers on it, and the panel below."""

from __future__ import annotations

import io
import math
from pathlib import Path

from PIL import Image, ImageDraw
from PIL.PngImagePlugin import PngInfo

from app.calculator import Value
from app.calculator.display import with_mark
from app.chart.caliper_lines import mark_ticks
from app.chart.errors import PictureDiffers
from app.chart.fonts import Colour, Face, face
from app.chart.panel import PAPER, Panel
from app.chart.placing import Label, PlacedCaliper, place_calipers
from app.chart.report import Report, report_of
from app.chart.strokes import draw_stroke
from app.chart.targets import check_target
from app.chart.values_file import values_as_json
from app.chart.wording import (
    DISCLAIMER,
    caliper_name,
    short_value_text,
    value_text,
)
from app.drawing.frame import SheetFrame, frame_of
from app.drawing.ink_map import InkMap
from app.reading import Caliper, Reading, quantity
from app.reading.file_format import write_whole
from app.version import software_version
from imaging.picture import Picture

ENDING = ".png"
_TEAL: Colour = (11, 85, 99)
_PLATE: Colour = (250, 253, 253)
_PLATE_EDGE: Colour = (127, 166, 173)
_RIM: Colour = (255, 255, 255)
_SMALLEST_LETTER_PX = 14
# Width of the panel in letter heights: room for the whole table, but no endless lines.
_LEAST_PANEL, _MOST_PANEL = 96, 130
_ROWS_AT_ONCE = 512


def annotate(picture: Picture, reading: Reading) -> Image.Image:
    """Draw a reading on its picture.

    Parameters
    ----------
    picture : Picture
        Not modified.
    reading : Reading
        Of that picture.

    Returns
    -------
    Image
        Mode RGB. Its pixel (x, y) is the picture's, as far as the picture reaches; below it
        stands the panel, as high as it needs to be.

    Raises
    ------
    PictureDiffers
        If the picture is not as large as the one that was read.
    """
    if picture.size_px != reading.picture.size_px:
        raise PictureDiffers(
            f"{picture.file_name} is not as large as the picture that was read, so the marks "
            "would lie in the wrong places; nothing was written."
        )
    report = report_of(reading)
    width_px, height_px = picture.size_px
    letter_px = _letter_px(width_px, height_px)
    placed = _placed(picture, report, letter_px)
    unlabelled = tuple(p.caliper.caliper_id for p in placed if p.label is None)
    panel_width = min(max(width_px, _LEAST_PANEL * letter_px), _MOST_PANEL * letter_px)
    block = Panel(report, panel_width, letter_px, picture.sha256, unlabelled).block()
    size_px = (max(width_px, panel_width), height_px + math.ceil(block.height))
    image = Image.new("RGB", size_px, PAPER)
    for top in range(0, height_px, _ROWS_AT_ONCE):
        image.paste(Image.fromarray(picture.pixels[top : top + _ROWS_AT_ONCE]), (0, top))
    _draw_calipers(image, placed, letter_px, report.reading)
    block.moved(0.0, height_px).draw(ImageDraw.Draw(image))
    return image


def write_annotated(
    picture: Picture, reading: Reading, path: Path, *, overwrite: bool = False
) -> None:
    """Write the annotated picture as a PNG, whole or not at all.

    Raises
    ------
    PictureDiffers
        As `annotate`.
    TargetRefused
        If `path` is the picture itself, a reading, or not called a PNG.
    FileExistsRefused
        If something is there and `overwrite` is false.
    ReadingFileError
        If the folder or disk refuses.
    """

    def check() -> None:
        check_target(
            path,
            reading.picture,
            ending=ENDING,
            overwrite=overwrite,
            picture_path=picture.path,
        )

    check()
    data = _png_bytes(annotate(picture, reading), reading)
    # Drawing takes a while, in which somebody else may have written there.
    check()
    write_whole(path, data)


def _png_bytes(image: Image.Image, reading: Reading) -> bytes:
    """PNG with the values as text beside the pixels (W3C PNG, 11.3.3: iTXt is UTF-8)."""
    info = PngInfo()
    for key, text in (
        ("Source", f"{reading.picture.file_name}, SHA-256 {reading.picture.sha256}"),
        ("Software", software_version()),
        ("Disclaimer", DISCLAIMER),
        ("smallsquare values", values_as_json(reading)),
    ):
        info.add_itxt(key, text.encode("utf-8", "backslashreplace").decode("utf-8"), zip=True)
    buffer = io.BytesIO()
    image.save(buffer, "PNG", pnginfo=info, compress_level=4)
    return buffer.getvalue()


def _letter_px(width_px: int, height_px: int) -> int:
    """Letters of the panel that can be read when the whole picture fills a screen."""
    return round(
        max(_SMALLEST_LETTER_PX, min(width_px / 110, math.sqrt(width_px * height_px) / 92))
    )


def _label_face(frame: SheetFrame, letter_px: int) -> Face:
    """Letters of the labels: as high as a printed lead name, within what can be read."""
    wanted = 2.3 * frame.pitch_px_per_mm
    return face(round(max(10.0, 0.62 * letter_px, min(wanted, 0.9 * letter_px))))


def _plate_margins(letters: Face) -> tuple[float, float]:
    return 0.3 * letters.size_px, 0.12 * letters.size_px


def _placed(picture: Picture, report: Report, letter_px: int) -> list[PlacedCaliper]:
    calipers = report.reading.calipers
    if not calipers:
        return []
    frame = frame_of(report.reading)
    letters = _label_face(frame, letter_px)
    margin_x, margin_y = _plate_margins(letters)

    def plate_size(text: str) -> tuple[float, float]:
        return letters.width_px(text) + 2 * margin_x, letters.line_px + 2 * margin_y

    texts = {}
    for caliper, values in zip(calipers, report.by_caliper, strict=True):
        said = _label_texts(caliper_name(caliper), caliper.caliper_id, values)
        if _is_chained(caliper):
            # Neighbours stand end to end: a label wider than its bar would push the next away.
            bar_px = abs(caliper.end.x_px - caliper.start.x_px)
            said = [text for text in said if plate_size(text)[0] < bar_px] or said[-1:]
        texts[caliper.caliper_id] = said
    ink = InkMap(picture.pixels)
    return place_calipers(calipers, texts, frame, ink, picture.size_px, plate_size)


def _is_chained(caliper: Caliper) -> bool:
    known = None if caliper.quantity is None else quantity(caliper.quantity)
    return known is not None and known.chained


def _label_texts(name: str, caliper_id: int, values: tuple[Value, ...]) -> list[str]:
    """A label's words, the fullest first; the last is the number it has in the panel's list."""
    first = values[0] if values else None
    if first is None or first.value is None:
        return [name, f"#{caliper_id}"]
    return [
        f"{name} {value_text(first)}",
        f"{name} {short_value_text(first)}",
        with_mark(name, first),
        f"#{caliper_id}",
    ]


def _draw_calipers(
    image: Image.Image, placed: list[PlacedCaliper], letter_px: int, reading: Reading
) -> None:
    """Every rim first, so that none lies over another caliper's line; the labels last."""
    stroke_px = max(1.2, letter_px / 13.0)
    size_px = reading.picture.size_px
    frame = frame_of(reading)
    segments = [
        segment
        for item in placed
        for segment in (*item.lines.legs, item.lines.bar, *mark_ticks(item.caliper, frame))
    ]
    for segment in segments:
        draw_stroke(image, segment, stroke_px * 2.6, _RIM, opacity=0.4, within_px=size_px)
    for segment in segments:
        draw_stroke(image, segment, stroke_px, _TEAL, within_px=size_px)
    for item in placed:
        if item.label is not None and item.label.leader is not None:
            draw_stroke(image, item.label.leader, stroke_px * 0.7, _TEAL, within_px=size_px)
    letters = _label_face(frame, letter_px)
    draw = ImageDraw.Draw(image)
    for item in placed:
        if item.label is not None:
            _draw_label(draw, item.label, letters)


def _draw_label(draw: ImageDraw.ImageDraw, label: Label, letters: Face) -> None:
    margin_x, margin_y = _plate_margins(letters)
    left, top, right, bottom = label.box
    draw.rounded_rectangle(
        (round(left), round(top), round(right) - 1, round(bottom) - 1),
        radius=0.25 * letters.size_px,
        fill=_PLATE,
        outline=_PLATE_EDGE,
        width=max(1, letters.size_px // 14),
    )
    baseline = top + margin_y + letters.rise_px
    letters.draw(draw, left + margin_x, baseline, label.text, _TEAL)
