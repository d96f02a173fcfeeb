"""Everything drawn over the picture, laid out once for each reading and each zoom.

Coordinates are canvas px: view px plus the scroll position, so that panning changes nothing.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace

from PySide6.QtCore import QLineF, QPointF, QRectF
from PySide6.QtGui import QPixmap, QTransform

from app.drawing.frame import SheetFrame, Vector, frame_of
from app.drawing.ink_map import Box, InkMap
from app.drawing.shape import CaliperShape, Lane, Segment, caliper_shape
from app.reading import Caliper, Reading
from app.window.canvas import look
from app.window.canvas.caliper_text import ValueText, caliper_name, caliper_value, short_name
from app.window.canvas.hit_test import Hit, HitTarget, hit_test
from app.window.canvas.label_layout import (
    LabelPlace,
    LabelRequest,
    Size,
    centred_place,
    place_labels,
)
from app.window.canvas.label_pixmaps import LabelPixmaps, LabelText
from app.window.canvas.label_slide import Slide, slid_labels
from app.window.canvas.lanes import choose_lanes, first_lane
from app.window.canvas.selection import Part, Selection

_MARGIN_PX = 8.0


@dataclass(frozen=True, slots=True)
class Drawn:
    """One caliper laid out for painting and for the pointer; `lines_box` leaves out the label."""

    legs: list[QLineF]
    bar: list[QLineF]
    held_legs: list[QLineF]
    handles: list[QPointF]
    label: tuple[QPointF, QPixmap] | None
    slide: Slide | None
    lines_box: QRectF
    bounds: QRectF
    chosen: bool
    target: HitTarget

    def with_label_at(self, box: Box) -> Drawn:
        """The same with its label elsewhere."""
        if self.label is None:
            return self
        # Whole px, or the text would be blended between two rows of pixels.
        left, top = round(box[0]), round(box[1])
        pixmap = self.label[1]
        label_box = QRectF(QPointF(left, top), pixmap.deviceIndependentSize())
        return replace(
            self,
            label=(label_box.topLeft(), pixmap),
            bounds=self.lines_box.united(label_box),
            target=replace(self.target, label=_as_box(label_box)),
        )


class Overlay:
    """The calipers of a reading as they are drawn, and what lies under the pointer."""

    def __init__(self, device_pixel_ratio: float) -> None:
        self._pixmaps = LabelPixmaps(device_pixel_ratio)
        self._ink: InkMap | None = None
        self._reading: Reading | None = None
        self._frame: SheetFrame | None = None
        self._lanes: dict[int, Lane] = {}
        self._texts: dict[int, tuple[str, ValueText]] = {}
        self._selection = Selection()
        self._transform = QTransform()
        self._previews: tuple[Caliper, ...] = ()
        self._view_box = QRectF()
        self._slides: dict[int, Slide] = {}
        self._slid: dict[int, Box] = {}
        self.settled: list[Drawn] = []
        self.moving: list[Drawn] = []

    def set_ink(self, ink: InkMap | None) -> None:
        """Keep clear of another picture's drawn line."""
        self._ink = ink

    def suit_screen(self, device_pixel_ratio: float) -> None:
        """Draw the labels anew when the window moved to a finer or coarser screen."""
        if device_pixel_ratio != self._pixmaps.device_pixel_ratio:
            self._pixmaps = LabelPixmaps(device_pixel_ratio)
            self.lay_out()

    def set_reading(self, reading: Reading | None, selection: Selection) -> None:
        """Lay another reading out; the only place where values are worked out anew."""
        self._reading, self._selection = reading, selection
        self._previews = ()
        if reading is None:
            self._frame, self._lanes, self._texts = None, {}, {}
        else:
            self._frame = frame_of(reading)
            self._lanes = choose_lanes(reading.calipers, self._frame, self._ink)
            self._texts = {
                c.caliper_id: (caliper_name(c), caliper_value(reading, c)) for c in reading.calipers
            }
        self.lay_out()

    def set_selection(self, selection: Selection) -> None:
        """Draw others as selected."""
        self._selection = selection
        self.lay_out()

    def set_transform(self, transform: QTransform, view_box: QRectF) -> None:
        """Lay out for another zoom or turn, and for what of it is in view (canvas px)."""
        self._transform, self._view_box = QTransform(transform), view_box
        self.lay_out()

    def show_in(self, view_box: QRectF) -> list[QRectF]:
        """Let the labels follow into another view of the same zoom; says what to paint anew."""
        self._view_box = view_box
        if not self.moving:
            return self._slide_labels()
        before = [drawn.bounds for drawn in self.moving]
        self._lay_out_previews()
        return [*before, *(drawn.bounds for drawn in self.moving), *self._slide_labels()]

    def set_previews(self, previews: Iterable[Caliper]) -> bool:
        """Draw calipers as they would be; those with a known id replace the settled ones.

        Their labels stay in view, however far away their bars are. Says whether the settled
        ones were laid out anew for it.
        """
        before = {c.caliper_id for c in self._previews}
        self._previews = tuple(previews)
        if before == {c.caliper_id for c in self._previews}:
            self._lay_out_previews()
            return False
        self.lay_out()
        return True

    def hit(self, canvas_point: QPointF) -> Hit | None:
        """The settled caliper under a point."""
        targets = [drawn.target for drawn in self.settled]
        return hit_test(targets, canvas_point.x(), canvas_point.y())

    def moving_labels(self) -> list[QRectF]:
        """Where the labels of the previews are, in canvas px."""
        return [
            QRectF(drawn.label[0], drawn.label[1].deviceIndependentSize())
            for drawn in self.moving
            if drawn.label is not None
        ]

    def lay_out(self) -> None:
        """Place every label anew."""
        self.settled, self._slides, self._slid = [], {}, {}
        if self._reading is not None and self._frame is not None:
            hidden = {c.caliper_id for c in self._previews}
            self.settled = self._lay_out_settled(
                [c for c in self._reading.calipers if c.caliper_id not in hidden], self._frame
            )
            self._slides = {
                index: drawn.slide
                for index, drawn in enumerate(self.settled)
                if drawn.slide is not None
            }
        self._slide_labels()
        self._lay_out_previews()

    def _slide_labels(self) -> list[QRectF]:
        """Bring labels into view; the boxes they left and took."""
        before, self._slid = self._slid, slid_labels(self._slides, _as_box(self._view_box))
        changed = []
        for index in before.keys() | self._slid.keys():
            drawn = self.settled[index]
            moved = drawn.with_label_at(self._slid.get(index, self._slides[index].label))
            self.settled[index] = moved
            labels = drawn.target.label, moved.target.label
            if labels[0] != labels[1]:
                changed += [_as_rect(box) for box in labels if box]
        return changed

    def _lay_out_settled(self, calipers: Sequence[Caliper], frame: SheetFrame) -> list[Drawn]:
        shapes: list[CaliperShape] = []
        requests: list[LabelRequest] = []
        texts: dict[int, tuple[LabelText, ...]] = {}
        for caliper in calipers:
            key = caliper.caliper_id
            shapes.append(self._mapped(caliper_shape(caliper, frame, self._lanes[key])))
            chosen = key in self._selection.ids
            name, value = self._texts[key]
            texts[key] = (
                LabelText(name, value.full, chosen),
                LabelText(short_name(caliper), value.short, chosen),
                LabelText("", value.short, chosen),
            )
            alone = self._selection.ids == {key}
            requests.append(self._request(key, shapes[-1], texts[key], must_show=alone))
        places = place_labels(requests, self._ink_share)
        drawn = []
        for caliper, shape in zip(calipers, shapes, strict=True):
            key = caliper.caliper_id
            place = places.get(key)
            text = None if place is None else texts[key][place.size_index]
            part = self._selection.part if key in self._selection.ids else None
            drawn.append(self._drawn(key, shape, place, text, part))
        return drawn

    def _lay_out_previews(self) -> None:
        self.moving = []
        if self._reading is None or self._frame is None:
            return
        for caliper in self._previews:
            lane = self._lanes.get(caliper.caliper_id, first_lane(caliper.kind))
            shape = self._mapped(caliper_shape(caliper, self._frame, lane))
            value = caliper_value(self._reading, caliper)
            text = LabelText(caliper_name(caliper), value.full, chosen=True)
            request = self._request(caliper.caliper_id, shape, (text,), must_show=True)
            place = kept_within(centred_place(request), request.sizes[0], self._view_box)
            held = self._selection.part if caliper.caliper_id in self._selection.ids else Part.END
            self.moving.append(self._drawn(caliper.caliper_id, shape, place, text, held))

    def _request(
        self, key: int, shape: CaliperShape, texts: Sequence[LabelText], *, must_show: bool
    ) -> LabelRequest:
        length = math.hypot(*shape.outward)
        outward = shape.outward[0] / length, shape.outward[1] / length
        sizes = [self._pixmaps.size(text) for text in texts]
        return LabelRequest(key, shape.bar, outward, sizes, must_show)

    def _drawn(
        self,
        key: int,
        shape: CaliperShape,
        place: LabelPlace | None,
        text: LabelText | None,
        part: Part | None,
    ) -> Drawn:
        legs = [QLineF(*leg) for leg in shape.legs]
        bar = [QLineF(*shape.bar), *_bar_ends(shape)]
        held: list[QLineF] = []
        handles: list[QPointF] = []
        if part in (Part.START, Part.END):
            index = 0 if part is Part.START else -1
            held, handles = [legs[index]], [QPointF(*shape.marks[index])]
        elif part is Part.WHOLE:
            handles = [QPointF(*mark) for mark in shape.marks]
        lines_box = _bounds(legs + bar)
        label, label_box, slide = None, None, None
        if place is not None and text is not None:
            # Whole px, or the text would be blended between two rows of pixels.
            label = QPointF(round(place.left), round(place.top)), self._pixmaps.pixmap(text)
            label_box = _as_box(QRectF(label[0], label[1].deviceIndependentSize()))
            alone = self._selection.ids == {key}
            slide = Slide(label_box, shape.bar, _as_box(lines_box), is_free=alone)
        target = HitTarget(key, shape.legs, shape.bar, label_box, part is not None)
        lines_box.adjust(-_MARGIN_PX, -_MARGIN_PX, _MARGIN_PX, _MARGIN_PX)
        bounds = lines_box if label_box is None else lines_box.united(_as_rect(label_box))
        chosen = part is not None
        return Drawn(legs, bar, held, handles, label, slide, lines_box, bounds, chosen, target)

    def _ink_share(self, box: Box) -> float:
        if self._ink is None:
            return 0.0
        return self._ink.share(_as_box(self._transform.inverted()[0].mapRect(_as_rect(box))))

    def _mapped(self, shape: CaliperShape) -> CaliperShape:
        """A shape of picture_px in canvas px."""
        return CaliperShape(
            legs=tuple(self._map_segment(leg) for leg in shape.legs),
            marks=(self._map_point(shape.marks[0]), self._map_point(shape.marks[1])),
            bar=self._map_segment(shape.bar),
            outward=self._map_vector(shape.outward),
        )

    def _map_segment(self, segment: Segment) -> Segment:
        return (*self._map_point(segment[:2]), *self._map_point(segment[2:]))

    def _map_point(self, point: Vector) -> Vector:
        t = self._transform
        x, y = point
        return t.m11() * x + t.m21() * y + t.dx(), t.m12() * x + t.m22() * y + t.dy()

    def _map_vector(self, vector: Vector) -> Vector:
        t = self._transform
        x, y = vector
        return t.m11() * x + t.m21() * y, t.m12() * x + t.m22() * y


def kept_within(place: LabelPlace, size: Size, box: QRectF) -> LabelPlace:
    """A label's place moved so that all of it is inside a box."""
    left = max(min(place.left, box.right() - size[0] - _MARGIN_PX), box.left() + _MARGIN_PX)
    top = max(min(place.top, box.bottom() - size[1] - _MARGIN_PX), box.top() + _MARGIN_PX)
    return LabelPlace(left, top, place.size_index)


def _as_box(rect: QRectF) -> Box:
    return rect.left(), rect.top(), rect.right(), rect.bottom()


def _as_rect(box: Box) -> QRectF:
    return QRectF(QPointF(box[0], box[1]), QPointF(box[2], box[3]))


def _bar_ends(shape: CaliperShape) -> list[QLineF]:
    """Slanted ticks where the bar meets the first and the last leg."""
    x1, y1, x2, y2 = shape.bar
    half = look.TICK_PX
    return [QLineF(x - half, y + half, x + half, y - half) for x, y in ((x1, y1), (x2, y2))]


def _bounds(lines: Iterable[QLineF]) -> QRectF:
    xs, ys = [], []
    for line in lines:
        xs += [line.x1(), line.x2()]
        ys += [line.y1(), line.y2()]
    return QRectF(min(xs), min(ys), max(xs) - min(xs), max(ys) - min(ys))
