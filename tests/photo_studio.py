"""Take a photograph: place the papers, aim the camera, draw, lay, light, develop."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from tests.photo_compose import FINGER_MARK, Canvas, empty_canvas, lay_desk, lay_sheet
from tests.photo_copies import faxed, on_screen, photocopied
from tests.photo_desk import SKINS, add_finger, desk_top, other_paper
from tests.photo_geometry import Camera, Place, Surface, View, framed
from tests.photo_light import SHRINK, blurred, developed, light_field, lit, reflection
from tests.photo_marks import add_handwriting, add_stain, add_stamp, add_sticker
from tests.photo_pages import PrintedPage, Sheet, draw_sheet, plain_sheet, strip_page
from tests.photo_recipe import Recipe, random_surface, random_waves

FloatArray = NDArray[np.float64]
Pixels = NDArray[np.uint8]

OVERSIZE = 1.5
"""Pixels of a drawing for each pixel of the photo where that is finest."""
FINGER_MM = 15.0
NEAREST_MM = 200.0
"""Nobody holds a phone nearer than this to a page, at a focal length of one picture width."""
MAIN_MARK, FIRST_STRIP_MARK, PAPER_MARK = 1, 2, 20


@dataclass(frozen=True, slots=True)
class Subject:
    """Something flat to photograph: its real size, and how to draw it at so many px for a mm."""

    paper_mm: tuple[float, float]
    draw: Callable[[float], Sheet]


@dataclass(frozen=True, slots=True, eq=False)
class Placed:
    """A sheet as it was laid: how it is seen, its mark on the canvas, its stickers' corners."""

    view: View
    sheet: Sheet
    mark: int
    stickers_mm: tuple[FloatArray, ...] = ()


@dataclass(frozen=True, slots=True, eq=False)
class Shot:
    """What the camera recorded, before any turning; the page that was aimed at comes first."""

    pixels: Pixels
    owner: Pixels
    shine: NDArray[np.float32] | None
    placed: tuple[Placed, ...]


def subject_of(printed: PrintedPage) -> Subject:
    """A printed page to photograph."""
    return Subject(printed.page.paper_mm, lambda px_per_mm: draw_sheet(printed, px_per_mm))


def take(subject: Subject, recipe: Recipe, seed: int) -> Shot:
    """Photograph a subject and what the recipe puts around it."""
    rngs = [np.random.default_rng([seed, part]) for part in range(1, 7)]
    strips = [subject_of(strip_page(rngs[0])) for _ in range(recipe.other_strips)]
    places = _places(subject, strips)
    surfaces = [recipe.surface, *(random_surface(rngs[0]) for _ in strips)]
    views = aim(recipe, [subject, *strips], places, surfaces)
    placed = [
        _drawn(one, view, recipe if number == 0 else Recipe(), number, rngs[1])
        for number, (one, view) in enumerate(zip([subject, *strips], views, strict=True))
    ]
    canvas = empty_canvas(views[0].camera.size_px)
    lamp = _lamp(rngs[2])
    desk_shift_mm = rngs[2].uniform(-200.0, 200.0, 2)
    lay_desk(canvas, views[0].camera, desk_top(recipe.desk, rngs[2]), desk_shift_mm)
    for _ in range(recipe.neighbours):
        _lay_other(canvas, views[0], rngs[3], lamp, over=False)
    for one in reversed(placed):
        lay_sheet(canvas, one.view, one.sheet, one.mark, lamp, recipe.relief)
    for _ in range(recipe.papers_over):
        _lay_other(canvas, views[0], rngs[3], lamp, over=True)
    _lay_fingers(canvas, views[0], recipe.fingers, rngs[4])
    return _exposed(canvas, placed, recipe, rngs[5])


def _exposed(
    canvas: Canvas, placed: list[Placed], recipe: Recipe, rng: np.random.Generator
) -> Shot:
    """Light, blur, noise and file."""
    size_px = placed[0].view.camera.size_px
    least, finest = placed[0].view.px_per_mm()
    middles = slice(SHRINK // 2, None, SHRINK)
    page = np.zeros((-(-size_px[1] // SHRINK), -(-size_px[0] // SHRINK)), dtype=bool)
    seen = canvas.owner[middles, middles] == MAIN_MARK
    page[: seen.shape[0], : seen.shape[1]] = seen
    light = light_field(size_px, recipe, page, rng)
    shine = reflection(size_px, recipe.glare, rng) if recipe.glare else None
    pixels = canvas.pixels
    if recipe.uneven or recipe.shadows or shine is not None or _is_toned(recipe):
        pixels = lit(pixels, light, shine, recipe)
    pixels = blurred(pixels, recipe, float(np.sqrt(least * finest)))
    pixels = developed(pixels, recipe, rng)
    return Shot(pixels, canvas.owner, shine, tuple(placed))


def _is_toned(recipe: Recipe) -> bool:
    return recipe.warmth != 0.0 or recipe.exposure != 1.0 or recipe.contrast != 1.0


def _lamp(rng: np.random.Generator) -> FloatArray:
    towards, high = rng.uniform(0.0, 2.0 * np.pi), rng.uniform(0.6, 1.1)
    lamp = np.array([np.cos(towards), np.sin(towards), 1.6 * high])
    return np.asarray(lamp / np.linalg.norm(lamp))


def _places(subject: Subject, strips: list[Subject]) -> list[Place]:
    """The main page in the middle, strips below and above it in turn."""
    places, reach_mm = [Place()], [subject.paper_mm[1] / 2.0] * 2
    for number, strip in enumerate(strips):
        side = number % 2
        middle_mm = reach_mm[side] + 6.0 + strip.paper_mm[1] / 2.0
        reach_mm[side] = middle_mm + strip.paper_mm[1] / 2.0
        turn_deg = (3.0, -2.0, 1.5)[number % 3]
        places.append(Place(0.0, middle_mm if side == 0 else -middle_mm, turn_deg))
    return places


def picture_size_px(recipe: Recipe) -> tuple[int, int]:
    """Width and height of a 4:3 sensor of so many megapixels."""
    longer = round(float(np.sqrt(recipe.megapixels * 1e6 * 4.0 / 3.0)))
    shorter = round(longer * 0.75)
    return (shorter, longer) if recipe.portrait else (longer, shorter)


def aim(
    recipe: Recipe, subjects: list[Subject], places: list[Place], surfaces: list[Surface]
) -> list[View]:
    """Each subject before the one camera, which is moved until they fill the frame as asked."""
    size_px = picture_size_px(recipe)
    camera = Camera(
        size_px,
        focal_px=recipe.focal * max(size_px),
        distance_mm=400.0,
        tilt_deg=recipe.tilt_deg,
        tilt_towards_deg=recipe.tilt_towards_deg,
        roll_deg=recipe.roll_deg,
        distortion=recipe.barrel,
    )
    views = [
        View(np.eye(2, 3), (one.paper_mm[0] / 2.0, one.paper_mm[1] / 2.0), surface, place, camera)
        for one, place, surface in zip(subjects, places, surfaces, strict=True)
    ]
    space_mm = [view.place.to_space(view.surface.to_space(view.samples_mm(9))) for view in views]
    camera = framed(camera, np.concatenate(space_mm), recipe.fill)
    nearest_mm = NEAREST_MM * recipe.focal
    camera = replace(camera, distance_mm=max(camera.distance_mm, nearest_mm))
    off_mm = np.array(recipe.aim) * subjects[0].paper_mm[0]
    aim_mm = (camera.aim_mm[0] + float(off_mm[0]), camera.aim_mm[1] + float(off_mm[1]))
    return [replace(view, camera=replace(camera, aim_mm=aim_mm)) for view in views]


def _drawn(
    subject: Subject, view: View, recipe: Recipe, number: int, rng: np.random.Generator
) -> Placed:
    """The subject drawn finely enough for its view, copied and marked as the recipe says."""
    _, finest = view.px_per_mm()
    sheet = subject.draw(OVERSIZE * finest)
    copies = {"photocopy": photocopied, "fax": faxed, "screen": on_screen}
    if recipe.copy_of != "none":
        sheet = copies[recipe.copy_of](sheet, rng)
    marks = [(recipe.stains, add_stain), (recipe.stamps, add_stamp)]
    for count, add in [*marks, (recipe.handwriting, add_handwriting)]:
        for _ in range(count):
            add(sheet.pixels, sheet.px_per_mm, rng)
    corners_px = [add_sticker(sheet.pixels, sheet.px_per_mm, rng) for _ in range(recipe.stickers)]
    half = np.array(sheet.half_size_mm)
    stickers_mm = tuple((corners + 0.5) / sheet.px_per_mm - half for corners in corners_px)
    view = replace(view, paper_from_sheet=sheet.paper_from_sheet, half_size_mm=sheet.half_size_mm)
    mark = MAIN_MARK if number == 0 else FIRST_STRIP_MARK + number - 1
    return Placed(view, sheet, mark, stickers_mm)


def _lay_other(
    canvas: Canvas, main: View, rng: np.random.Generator, lamp: FloatArray, *, over: bool
) -> None:
    """Another paper beside the page; half hidden under it, or over one of its edges."""
    least, finest = main.px_per_mm(5)
    px_per_mm = 1.2 * float(np.sqrt(least * finest))
    sheet = plain_sheet(other_paper(rng, px_per_mm), px_per_mm)
    reach_mm = np.array(main.half_size_mm) + np.array(sheet.half_size_mm)
    side = rng.uniform(-0.8, 0.8)
    way = [(1.0, side), (-1.0, side), (side, 1.0), (side, -1.0)][int(rng.integers(4))]
    overlap_mm = rng.uniform(8.0, 30.0) if over else rng.uniform(-10.0, 60.0)
    place_mm = np.array(way) * (reach_mm - overlap_mm)
    turn_deg = float(rng.normal(0.0, 12.0))
    view = View(
        sheet.paper_from_sheet,
        sheet.half_size_mm,
        Surface(waves=random_waves(rng, 0.4)),
        Place(float(place_mm[0]), float(place_mm[1]), turn_deg, 1.0 if over else 0.0),
        main.camera,
    )
    lay_sheet(canvas, view, sheet, PAPER_MARK, lamp, 0.6)


def _lay_fingers(canvas: Canvas, main: View, count: int, rng: np.random.Generator) -> None:
    """Fingers that hold the page down at its edges, in place."""
    skin = SKINS[int(rng.integers(len(SKINS)))]
    for _ in range(count):
        way = [(1.0, 0.0), (-1.0, 0.0), (0.0, 1.0)][int(rng.integers(3))]
        along = rng.uniform(-0.7, 0.7)
        half = np.array(main.half_size_mm)
        edge_mm = np.where(np.array(way) == 0.0, along, np.array(way)) * half
        inward_mm = -np.array(way) * rng.uniform(6.0, 22.0)
        turned = np.deg2rad(rng.normal(0.0, 15.0))
        lean = np.array([[np.cos(turned), -np.sin(turned)], [np.sin(turned), np.cos(turned)]])
        ends_mm = np.stack([edge_mm + inward_mm, edge_mm + inward_mm + lean @ np.array(way)])
        tip_px, next_px = main.paper_to_px(ends_mm)
        px_per_mm = float(np.hypot(*(next_px - tip_px)))
        outward = (next_px - tip_px) / px_per_mm
        width_px = FINGER_MM * px_per_mm * float(rng.uniform(0.85, 1.15))
        add_finger(canvas.pixels, canvas.owner, FINGER_MARK, tip_px, outward, width_px, skin)
