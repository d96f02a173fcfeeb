"""Panning a marked page at 1:1, beside a bare view of the same pixmap.

Run it for the figures: ``python -m tests.bench.bench_canvas``. Both views are in one process
on a real X server of their own and take turns, so that a busy machine slows both down. A
frame is over when its paint event has been handled.
"""

from __future__ import annotations

import json
import statistics
import subprocess
import sys
import time
from dataclasses import asdict, dataclass, replace
from pathlib import Path

import numpy as np
from numpy.typing import NDArray
from PySide6.QtCore import QEvent, QObject, Qt
from PySide6.QtGui import QImage, QPixmap
from PySide6.QtWidgets import QApplication, QFrame, QGraphicsScene, QGraphicsView

from app.reading import Caliper, CaliperKind, PicturePoint, Reading, new_reading
from app.window.canvas import SheetView
from app.window.document import Document
from imaging.picture import Picture
from tests.app.reading_examples import example_map
from tests.bench.screen import virtual_screen

REPOSITORY = Path(__file__).resolve().parent.parent.parent
PAGE_PX = (4000, 3000)  # 12 megapixels
PX_PER_MM = 12
VIEW_PX = (1366, 768)
FRAMES = 300
REPEATS = 9
_STEP_PX = (7, 2)
_SCREEN = "1920x1080x24"


@dataclass(frozen=True, slots=True)
class Panning:
    """Frames per second of both views, and the canvas's over the bare view's.

    Attributes
    ----------
    bare_per_s, canvas_per_s : float
        Medians over the repeats.
    ratio : float
        Median of the ratios of the two views within each repeat: what else the machine did
        meanwhile hit both.
    """

    bare_per_s: float
    canvas_per_s: float
    ratio: float


def measure_panning() -> tuple[Panning, Panning]:
    """Pan both views, in a process of their own on a real X server.

    The first figures are of panning as Qt paints it: what stays on the screen is moved, the
    strip that appears is painted. For the second every frame is painted whole.
    """
    with virtual_screen(_SCREEN) as environment:
        finished = subprocess.run(
            [sys.executable, "-m", "tests.bench.bench_canvas", "--here"],
            cwd=REPOSITORY,
            env=environment,
            stdout=subprocess.PIPE,
            text=True,
            timeout=600.0,
            check=True,
        )
    panning, whole = json.loads(finished.stdout.splitlines()[-1])
    return Panning(**panning), Panning(**whole)


class _Paints(QObject):
    """Counts the paint events of what it watches."""

    count = 0

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:  # noqa: ARG002
        self.count += event.type() == QEvent.Type.Paint
        return False


def _pan_here() -> tuple[Panning, Panning]:
    """Both views in this process, in turn, after one turn that fills caches."""
    application = QApplication(sys.argv[:1])
    if application.platformName() != "xcb":
        raise RuntimeError("this measures on a real X server")
    picture = _ruled_page()
    sheet = SheetView(_marked_document(picture))
    sheet.resize(*VIEW_PX)
    sheet.zoom_actual()
    sheet.select([1])
    bare = _bare_view(picture.pixels)
    rates: dict[bool, list[tuple[float, float]]] = {False: [], True: []}
    for _ in range(REPEATS + 1):
        for whole, found in rates.items():
            bare_per_s = _frames_per_s(application, bare, whole=whole)
            found.append((bare_per_s, _frames_per_s(application, sheet, whole=whole)))
    return _medians(rates[False][1:]), _medians(rates[True][1:])


def _medians(rates: list[tuple[float, float]]) -> Panning:
    bare, canvas = (statistics.median(column) for column in zip(*rates, strict=True))
    return Panning(bare, canvas, statistics.median(sheet / peer for peer, sheet in rates))


def _frames_per_s(application: QApplication, view: QGraphicsView, *, whole: bool) -> float:
    """Pan from the page's corner, every frame painted before the next one is asked for."""
    view.show()
    view.raise_()
    across, down = view.horizontalScrollBar(), view.verticalScrollBar()
    across.setValue(0)
    down.setValue(0)
    _settle(application)
    paints = _Paints()
    view.viewport().installEventFilter(paints)
    begun = time.perf_counter()
    for _ in range(FRAMES):
        before = paints.count
        if isinstance(view, SheetView):
            view.pan(-_STEP_PX[0], -_STEP_PX[1])  # as a drag does
        else:
            across.setValue(across.value() + _STEP_PX[0])
            down.setValue(down.value() + _STEP_PX[1])
        if whole:
            view.viewport().update()
        while paints.count == before:
            application.processEvents()
    taken_s = time.perf_counter() - begun
    moved_px = (across.value(), down.value())
    view.hide()
    _settle(application)
    if paints.count < FRAMES or moved_px != tuple(FRAMES * step for step in _STEP_PX):
        raise RuntimeError(f"{paints.count} paints, panned by {moved_px}")
    return FRAMES / taken_s


def _settle(application: QApplication) -> None:
    """Let the window system have its say."""
    ends = time.monotonic() + 0.3
    while time.monotonic() < ends:
        application.processEvents()


def _bare_view(pixels: NDArray[np.uint8]) -> QGraphicsView:
    height, width = pixels.shape[:2]
    image = QImage(pixels.data, width, height, pixels.strides[0], QImage.Format.Format_RGB888)
    view = QGraphicsView()
    view.setScene(QGraphicsScene(view))
    view.scene().addPixmap(QPixmap.fromImage(image))
    # No scroll bars to paint: the peer is as quick as it can be.
    view.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
    view.setVerticalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
    view.setFrameShape(QFrame.Shape.NoFrame)
    view.resize(*VIEW_PX)
    return view


def _ruled_page() -> Picture:
    """A grid with wavy pen lines."""
    pixels = np.full((PAGE_PX[1], PAGE_PX[0], 3), (255, 248, 246), dtype=np.uint8)
    pixels[::PX_PER_MM] = pixels[:, ::PX_PER_MM] = (245, 190, 190)
    columns = np.arange(PAGE_PX[0])
    for baseline in range(300, PAGE_PX[1], 400):
        rows = (baseline + 60.0 * np.sin(columns / 40.0)).astype(int)
        for thickness in range(4):
            pixels[rows + thickness, columns] = 20
    return Picture(pixels, "page.png", None, "00" * 32)


def _marked_document(picture: Picture) -> Document:
    """24 calipers where the panning comes by."""
    reading = new_reading(picture, now="2026-01-02T03:04:05+00:00", software_version="bench")
    reading = replace(reading, sheet_map=example_map(PAGE_PX, float(PX_PER_MM)))
    document = Document()
    document.open(picture, _with_calipers(reading))
    return document


def _with_calipers(reading: Reading) -> Reading:
    kinds = (CaliperKind.TIME, CaliperKind.TIME, CaliperKind.HEIGHT, CaliperKind.COMB)
    for number in range(24):
        x, y = 250.0 + 400.0 * (number % 8), 300.0 + 400.0 * (number // 8)
        kind = kinds[number % 4]
        end = PicturePoint(x + (20.0 if kind is CaliperKind.HEIGHT else 240.0), y - 90.0)
        teeth = 5 if kind is CaliperKind.COMB else 2
        caliper = Caliper(number + 1, kind, PicturePoint(x, y), end, lead="II", teeth=teeth)
        reading = reading.with_caliper(caliper)
    return reading


if __name__ == "__main__":
    if "--here" in sys.argv:
        print(json.dumps([asdict(measured) for measured in _pan_here()]))
    else:
        for name, measured in zip(("panning", "whole frames"), measure_panning(), strict=True):
            print(
                f"{name}: bare view {measured.bare_per_s:.0f} frames/s, canvas "
                f"{measured.canvas_per_s:.0f}, ratio {measured.ratio:.2f}"
            )
