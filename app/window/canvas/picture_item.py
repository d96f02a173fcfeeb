"""The picture in the scene: exact when zoomed in, averaged when zoomed out."""

from __future__ import annotations

from PySide6.QtCore import QSize, Qt
from PySide6.QtGui import QImage, QPixmap, QTransform
from PySide6.QtWidgets import QGraphicsItem, QGraphicsPixmapItem

from imaging.picture import Picture

EXACT_FROM_ZOOM = 4.0
_SMALLEST_LEVEL = 3


class PictureItem(QGraphicsPixmapItem):
    """A pixmap whose scene coordinates are picture_px.

    Below half size it is drawn from copies averaged down by 2, 4 and 8, made when first
    needed: grid lines thinner than a screen pixel then fade evenly and do not break up.
    """

    def __init__(self) -> None:
        super().__init__()
        # (0, 0) of picture_px is the centre of the first pixel.
        self.setPos(-0.5, -0.5)
        self.setShapeMode(QGraphicsPixmapItem.ShapeMode.BoundingRectShape)
        self.setCacheMode(QGraphicsItem.CacheMode.NoCache)
        self._levels: dict[int, QPixmap] = {}
        self._shown_level = 0

    def set_picture(self, picture: Picture | None) -> None:
        """Show another picture."""
        self._levels.clear()
        if picture is not None:
            self._levels[0] = _pixmap(picture)
        self._show(0)

    def full_pixmap(self) -> QPixmap:
        """The picture at its own size; null before one is set."""
        return self._levels.get(0, QPixmap())

    def suit_zoom(self, zoom: float) -> None:
        """Choose the copy and the way of drawing for a zoom (view px per picture px)."""
        smooth = zoom < EXACT_FROM_ZOOM and zoom != 1.0
        mode = (
            Qt.TransformationMode.SmoothTransformation
            if smooth
            else Qt.TransformationMode.FastTransformation
        )
        if mode != self.transformationMode():
            self.setTransformationMode(mode)
        level = 0
        while level < _SMALLEST_LEVEL and zoom <= 0.5 ** (level + 1):
            level += 1
        if level != self._shown_level and self._levels:
            self._show(level)

    def _show(self, level: int) -> None:
        pixmap = self._level(level) if self._levels else QPixmap()
        self._shown_level = level
        self.setPixmap(pixmap)
        full = self.full_pixmap()
        if not pixmap.isNull():
            scale_x, scale_y = full.width() / pixmap.width(), full.height() / pixmap.height()
            self.setTransform(QTransform.fromScale(scale_x, scale_y))

    def _level(self, level: int) -> QPixmap:
        if level not in self._levels:
            larger = self._level(level - 1).toImage()
            size = QSize(max(1, larger.width() // 2), max(1, larger.height() // 2))
            smaller = larger.scaled(
                size,
                Qt.AspectRatioMode.IgnoreAspectRatio,
                Qt.TransformationMode.SmoothTransformation,
            )
            self._levels[level] = QPixmap.fromImage(smaller)
        return self._levels[level]


def _pixmap(picture: Picture) -> QPixmap:
    """Copy the pixels once; the image in between only borrows them."""
    height, width = picture.pixels.shape[:2]
    borrowed = QImage(
        picture.pixels.data, width, height, picture.pixels.strides[0], QImage.Format.Format_RGB888
    )
    return QPixmap.fromImage(borrowed)
