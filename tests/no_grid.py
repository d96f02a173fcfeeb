"""Pictures without an ECG grid, each of which the grid finder has to refuse.

`no_grid_pictures` holds things that lie on desks and walls. `unscaled_grid_pictures` holds
square rulings other than ECG paper: a finder may refuse them or place a lattice on them, but
must not call its scale certain.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator

import cv2
import numpy as np
from numpy.typing import NDArray
from PIL import Image, ImageDraw, ImageFont

from sample_scans.pen import draw_pen_lines, line_overlap

Pixels = NDArray[np.uint8]
Plane = NDArray[np.float32]
Drawer = Callable[[np.random.Generator], Plane]

HEIGHT_PX, WIDTH_PX = 940, 1260  # not square, not a power of two
PX_PER_MM = 200.0 / 25.4


def no_grid_pictures() -> Iterator[tuple[str, Pixels]]:
    """Name and picture, shape (HEIGHT_PX, WIDTH_PX, 3), one at a time; always the same."""
    for number, draw in enumerate(NO_GRID):
        rng = np.random.default_rng(1000 + number)
        yield draw.__name__.strip("_"), _to_pixels(draw(rng), rng)


def unscaled_grid_pictures() -> Iterator[tuple[str, Pixels]]:
    """Square rulings whose bold lines do not say '1 mm, bold every 5'."""
    cases = {
        "exercise_paper_5_mm": (5.0, 0),
        "exercise_paper_4_mm": (4.0, 0),
        "quarter_inch_paper": (6.35, 0),
        "graph_paper_bold_every_10": (1.0, 10),
        "graph_paper_bold_every_4": (2.0, 4),
    }
    for number, (name, (pitch_mm, bold_every)) in enumerate(cases.items()):
        rng = np.random.default_rng(2000 + number)
        plane = _ruled_both_ways(pitch_mm * PX_PER_MM, bold_every, skew=float(rng.normal(0, 0.01)))
        yield name, _to_pixels(plane, rng)


def _to_pixels(plane: Plane, rng: np.random.Generator) -> Pixels:
    """Light levels, 0 to 1, of shape (height, width) or (height, width, 3), with some noise."""
    if plane.ndim == 2:
        plane = np.repeat(plane[:, :, None], 3, axis=2)
    noisy = 255.0 * plane + rng.normal(0.0, 2.0, plane.shape)
    return np.clip(np.rint(noisy), 0, 255).astype(np.uint8)


def _axes() -> tuple[Plane, Plane]:
    """x_px and y_px of every pixel."""
    y, x = np.mgrid[0:HEIGHT_PX, 0:WIDTH_PX]
    return x.astype(np.float32), y.astype(np.float32)


def _paper(level: float = 0.97) -> Plane:
    return np.full((HEIGHT_PX, WIDTH_PX), level, dtype=np.float32)


def _lines(place_px: Plane, pitch_px: float, width_px: float) -> Plane:
    """Coverage of lines at every multiple of the pitch."""
    return line_overlap(np.abs(place_px - pitch_px * np.round(place_px / pitch_px)), width_px)


def _ruled_both_ways(pitch_px: float, bold_every: int, skew: float) -> Plane:
    x, y = _axes()
    darkness = np.zeros_like(x)
    for place in (x + skew * y, y - skew * x):
        darkness = np.maximum(darkness, 0.3 * _lines(place, pitch_px, 1.4))
        if bold_every:
            darkness = np.maximum(darkness, 0.5 * _lines(place, pitch_px * bold_every, 2.4))
    return np.asarray(0.97 - darkness)


def _smooth(rng: np.random.Generator, sigma_px: float, shape: tuple[int, int]) -> Plane:
    """Smooth random field of mean 0 and standard deviation 1."""
    field = rng.standard_normal(shape, dtype=np.float32)
    field = cv2.GaussianBlur(field, (0, 0), sigma_px, borderType=cv2.BORDER_REFLECT)
    return np.asarray((field - field.mean()) / field.std())


def _written(
    rng: np.random.Generator, size_px: int, pitch_px: int, left_px: int, right_px: int
) -> Plane:
    """Lines of invented words between two edges."""
    picture = Image.fromarray(np.full((HEIGHT_PX, WIDTH_PX), 248, dtype=np.uint8))
    pen, font = ImageDraw.Draw(picture), ImageFont.load_default(size=size_px)
    letters = np.array(list("aaabcdeeeefghiiklmnnooprrsstttuvwy"))
    for top in range(40, HEIGHT_PX - 60, pitch_px):
        x = left_px
        while x < right_px - 120:
            word = "".join(rng.choice(letters, int(rng.integers(2, 10))))
            pen.text((x, top), word, font=font, fill=30)
            x += int(font.getlength(word)) + size_px // 3
    return np.asarray(picture, dtype=np.float32) / np.float32(255.0)


def _blank(rng: np.random.Generator) -> Plane:
    return _paper()


def _black(rng: np.random.Generator) -> Plane:
    return _paper(0.02)


def _noise(rng: np.random.Generator) -> Plane:
    return rng.random((HEIGHT_PX, WIDTH_PX, 3), dtype=np.float32)


def _text_page(rng: np.random.Generator) -> Plane:
    return _written(rng, 20, 31, 60, WIDTH_PX - 60)


def _text_in_columns(rng: np.random.Generator) -> Plane:
    half = WIDTH_PX // 2
    left, right = _written(rng, 15, 21, 40, half), _written(rng, 15, 21, half + 20, WIDTH_PX)
    return np.minimum(left, right)


def _photograph(rng: np.random.Generator) -> Plane:
    """Soft colours with a bright window and film grain."""
    x, y = _axes()
    channels = [0.45 + 0.16 * _smooth(rng, 90.0, (HEIGHT_PX, WIDTH_PX)) for _ in range(3)]
    picture = np.stack(channels, axis=2)
    window = np.exp(-(((x - 900) / 160) ** 2 + ((y - 250) / 120) ** 2))
    picture += 0.5 * window[:, :, None] + 0.02 * rng.standard_normal(picture.shape)
    return np.asarray(np.clip(picture, 0, 1), dtype=np.float32)


def _gradient(rng: np.random.Generator) -> Plane:
    x, y = _axes()
    return np.asarray(0.2 + 0.6 * x / WIDTH_PX + 0.15 * y / HEIGHT_PX)


def _ruled_notebook(rng: np.random.Generator) -> Plane:
    x, y = _axes()
    page = 0.97 - 0.3 * _lines(y + 0.004 * x, 7.0 * PX_PER_MM, 1.5)
    return np.asarray(page - 0.3 * line_overlap(np.abs(x - 150.0), 2.0))


def _narrow_rules(rng: np.random.Generator) -> Plane:
    """Level lines at 1 mm, bold at 5 mm: half of an ECG grid is not a grid."""
    _, y = _axes()
    darkness = 0.25 * _lines(y, PX_PER_MM, 1.2)
    return np.asarray(0.97 - np.maximum(darkness, 0.5 * _lines(y, 5 * PX_PER_MM, 2.2)))


def _music_staves(rng: np.random.Generator) -> Plane:
    x, y = _axes()
    page = _paper()
    for top in range(70, HEIGHT_PX - 100, 120):
        for line in range(5):
            page -= 0.8 * line_overlap(np.abs(y - (top + 12.0 * line)), 1.5)
        for note_x in rng.uniform(80, WIDTH_PX - 60, 24):
            note_y = top + 6.0 * rng.integers(0, 9)
            page -= 0.9 * (((x - note_x) / 8) ** 2 + ((y - note_y) / 6) ** 2 < 1)
            page -= 0.8 * line_overlap(np.abs(x - note_x - 7), 1.5) * (np.abs(y - note_y + 20) < 20)
        for bar_x in np.cumsum(rng.uniform(180, 330, 5)):
            page -= 0.8 * line_overlap(np.abs(x - bar_x), 2.0) * (np.abs(y - top - 24) < 24)
    return np.clip(page, 0, 1)


def _wood(rng: np.random.Generator) -> Plane:
    """Grain that runs along x, its spacing uneven."""
    _, y = _axes()
    bend = 60.0 * _smooth(rng, 120.0, (HEIGHT_PX, WIDTH_PX))
    rings = np.sin(2 * np.pi * (y + bend) / 17.0) + 0.5 * np.sin((y + 1.7 * bend) / 3.1)
    fibres = cv2.blur(rng.standard_normal((HEIGHT_PX, WIDTH_PX), dtype=np.float32), (90, 1))
    light = 0.55 + 0.06 * rings + 0.4 * fibres
    return np.asarray(np.clip(light[:, :, None] * np.array([1.0, 0.8, 0.55], np.float32), 0, 1))


def _bricks(rng: np.random.Generator) -> Plane:
    x, y = _axes()
    course = np.floor(y / 52.0)
    joint = np.maximum(_lines(y, 52.0, 6.0), _lines(x + 65.0 * np.mod(course, 2), 130.0, 6.0))
    wall = 0.5 + 0.08 * _smooth(rng, 3.0, (HEIGHT_PX, WIDTH_PX))
    return np.asarray(np.clip(wall + 0.3 * joint, 0, 1))


def _keyboard(rng: np.random.Generator) -> Plane:
    picture = Image.fromarray(np.full((HEIGHT_PX, WIDTH_PX), 60, dtype=np.uint8))
    pen, font = ImageDraw.Draw(picture), ImageFont.load_default(size=26)
    for row in range(5):
        x = 60 + 30 * row
        while x < WIDTH_PX - 140:
            width = int(rng.choice([86, 86, 86, 86, 130]))
            y = 180 + 96 * row
            pen.rounded_rectangle((x, y, x + width, y + 84), 10, fill=200, outline=120, width=2)
            pen.text((x + 12, y + 10), str(rng.choice(list("ABCDEFGHKLMNPRSTUVXYZ"))), 20, font)
            x += width + 10
    return np.asarray(picture, dtype=np.float32) / np.float32(255.0)


def _halftone(rng: np.random.Generator) -> Plane:
    """Printer's dots at 45 degrees whose size follows the picture."""
    x, y = _axes()
    u, v = (x + y) / 2**0.5, (x - y) / 2**0.5
    tone = 0.5 + 0.2 * _smooth(rng, 80.0, (HEIGHT_PX, WIDTH_PX))
    screen = 0.5 + 0.25 * (np.cos(2 * np.pi * u / 9.0) + np.cos(2 * np.pi * v / 9.0))
    return np.asarray(np.clip(0.5 + 6.0 * (tone - screen), 0, 1))


def _checkerboard(rng: np.random.Generator) -> Plane:
    x, y = _axes()
    return np.asarray(0.1 + 0.8 * np.mod(np.floor(x / 70.0) + np.floor(y / 70.0), 2))


def _fine_checkerboard(rng: np.random.Generator) -> Plane:
    x, y = _axes()
    return np.asarray(0.3 + 0.5 * np.mod(np.floor(x / 8.0) + np.floor(y / 8.0), 2))


def _table(rng: np.random.Generator) -> Plane:
    """Cells of uneven width and height with figures in them."""
    page = np.minimum(_paper(), _written(rng, 14, 34, 50, WIDTH_PX - 50))
    x, y = _axes()
    for edge in np.cumsum(rng.uniform(60, 190, 12)):
        page = np.minimum(page, 1 - 0.8 * line_overlap(np.abs(x - edge), 2.0))
    for edge in np.cumsum(rng.uniform(25, 75, 24)):
        page = np.minimum(page, 1 - 0.8 * line_overlap(np.abs(y - edge), 2.0))
    return np.asarray(page)


def _calendar(rng: np.random.Generator) -> Plane:
    """Seven wide columns, five low rows."""
    x, y = _axes()
    columns, rows = _lines(x - 35.0, 170.0, 2.0), _lines(y - 90.0, 140.0, 2.0)
    page = 0.97 - 0.7 * np.maximum(columns, rows) * (y > 85.0)
    return np.minimum(page, _written(rng, 18, 140, 50, 900))


def _spreadsheet(rng: np.random.Generator) -> Plane:
    """Even oblong cells, three times as wide as high."""
    x, y = _axes()
    lines = np.maximum(_lines(x, 72.0, 1.0), _lines(y, 24.0, 1.0))
    return np.minimum(0.98 - 0.3 * lines, _written(rng, 13, 24, 5, 700))


def _cloth(rng: np.random.Generator) -> Plane:
    """A plain weave with uneven threads."""
    x, y = _axes()
    bend_x, bend_y = (9.0 * _smooth(rng, 50.0, (HEIGHT_PX, WIDTH_PX)) for _ in range(2))
    over = np.sin(2 * np.pi * (x + bend_x) / 11.0) * np.sin(2 * np.pi * (y + bend_y) / 11.0)
    return np.asarray(np.clip(0.6 + 0.15 * over + 0.05 * rng.standard_normal(x.shape), 0, 1))


def _circles(rng: np.random.Generator) -> Plane:
    x, y = _axes()
    return np.asarray(0.97 - 0.5 * _lines(np.hypot(x - 610.0, y - 480.0), PX_PER_MM * 2, 1.5))


def _diagonal_stripes(rng: np.random.Generator) -> Plane:
    x, y = _axes()
    return np.asarray(0.95 - 0.6 * _lines((x + y) / 2**0.5, 21.0, 8.0))


def _bar_code(rng: np.random.Generator) -> Plane:
    row = np.repeat(rng.integers(0, 2, 150), rng.integers(2, 5, 150) * 2)[: WIDTH_PX - 100]
    page = _paper()
    page[150:-150, 50 : 50 + row.size] = 0.05 + 0.9 * row
    return page


def _square_code(rng: np.random.Generator) -> Plane:
    """Random black and white modules of 9 px on a quiet border."""
    modules = rng.integers(0, 2, (90, 120)).astype(np.float32)
    page = _paper()
    code = np.kron(modules, np.ones((9, 9), dtype=np.float32))
    page[60 : 60 + code.shape[0], 80 : 80 + code.shape[1]] = 0.05 + 0.9 * code
    return page


def _tiles(rng: np.random.Generator) -> Plane:
    """Wall tiles with wide joints, each of its own shade."""
    x, y = _axes()
    shades = rng.uniform(0.55, 0.8, (12, 14)).astype(np.float32)
    tile = shades[(y // 96).astype(int), (x // 96).astype(int)]
    joint = np.maximum(_lines(x, 96.0, 8.0), _lines(y, 96.0, 8.0))
    return np.asarray(tile * (1 - joint) + 0.92 * joint)


def _hexagons(rng: np.random.Generator) -> Plane:
    """Three families of lines at 60 degrees."""
    x, y = _axes()
    page = _paper()
    for angle in np.deg2rad([0.0, 60.0, 120.0]):
        along = (x * np.cos(angle) + y * np.sin(angle)).astype(np.float32)
        page = np.minimum(page, 0.97 - 0.5 * _lines(along, 18.0, 1.5))
    return page


def _trace_without_grid(rng: np.random.Generator) -> Plane:
    """Drawn lines on white paper, as a recorder prints on plain paper."""
    ink = np.zeros((HEIGHT_PX, WIDTH_PX), dtype=np.float32)
    x = np.arange(60.0, WIDTH_PX - 60.0)
    for base in (180.0, 420.0, 700.0):
        spikes = 90.0 * np.exp(-(((np.mod(x, 160.0) - 80.0) / 5.0) ** 2))
        draw_pen_lines(ink, np.column_stack([x, base - spikes]), 3.0)
    return np.asarray(0.97 - 0.85 * ink)


def _screen_moire(rng: np.random.Generator) -> Plane:
    """Two gratings of nearly equal pitch at a small angle: beats, no square grid."""
    x, y = _axes()
    first = np.cos(2 * np.pi * x / 5.0)
    second = np.cos(2 * np.pi * (x * 0.995 + 0.09 * y) / 5.2)
    return np.asarray(0.5 + 0.15 * (first + second), dtype=np.float32)


NO_GRID: tuple[Drawer, ...] = (
    *(_blank, _black, _noise, _text_page, _text_in_columns, _photograph, _gradient),
    *(_ruled_notebook, _narrow_rules, _music_staves, _wood, _bricks, _keyboard, _halftone),
    *(_checkerboard, _fine_checkerboard, _table, _calendar, _spreadsheet, _cloth, _circles),
    *(_diagonal_stripes, _bar_code, _square_code, _tiles, _hexagons, _trace_without_grid),
    _screen_moire,
)
