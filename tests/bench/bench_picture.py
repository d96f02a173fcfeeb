"""Opening a JPEG, beside nothing but its decoder.

Run it for the figures: ``python -m tests.bench.bench_picture [PICTURE]``. The two take turns
on the same bytes, so that a busy machine slows both down; the best of each is compared.
"""

from __future__ import annotations

import sys
import time
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import cv2
import numpy as np

from imaging import picture_from_bytes

SAMPLE = Path(__file__).resolve().parent.parent.parent / "sample_scans" / "twelve_lead_25.jpg"


@dataclass(frozen=True, slots=True)
class Opening:
    """Best of several runs, in ms."""

    opened_ms: float
    decoded_ms: float

    @property
    def ratio(self) -> float:
        return self.opened_ms / self.decoded_ms


def measure_opening(path: Path = SAMPLE, runs: int = 15) -> Opening:
    """Time `picture_from_bytes`, checks and hash included, against `cv2.imdecode`."""
    data = path.read_bytes()
    buffer = np.frombuffer(data, np.uint8)

    def opened() -> object:
        return picture_from_bytes(data, path.name)

    def decoded() -> object:
        return cv2.imdecode(buffer, cv2.IMREAD_COLOR_RGB)

    times_ms = [(_ms(opened), _ms(decoded)) for _ in range(runs)]
    return Opening(*(min(column) for column in zip(*times_ms, strict=True)))


def _ms(action: Callable[[], object]) -> float:
    begin = time.perf_counter()
    action()
    return 1000.0 * (time.perf_counter() - begin)


if __name__ == "__main__":
    measured = measure_opening(*(Path(word) for word in sys.argv[1:2]))
    print(
        f"opened {measured.opened_ms:.1f} ms, decoder alone {measured.decoded_ms:.1f} ms, "
        f"ratio {measured.ratio:.2f}"
    )
