"""The bend of a map as JSON values and back: small, and exact to the last digit kept.

A map of a photograph has thousands of nodes and every edit is set down whole, so the nodes
are written as whole tenths of a micrometre, each as the difference from what its neighbours
lead one to expect, packed.
"""

from __future__ import annotations

import base64
import binascii
import zlib
from typing import Any

import numpy as np
from numpy.typing import NDArray

from imaging.bend import UNIT_MM, Bend

FloatArray = NDArray[np.float64]

MOST_NODES = 1_000_000
"""More than any picture that opens needs; a damaged file cannot ask for more memory."""

_UNKNOWN = -1


class NodesError(ValueError):
    """Nodes that cannot be unpacked."""


def nodes_to_text(values_mm: FloatArray) -> str:
    """Pack nodes, shape (rows, columns), whole multiples of UNIT_MM; NaN is kept."""
    whole = np.where(np.isnan(values_mm), _UNKNOWN, np.rint(values_mm / UNIT_MM)).astype(np.int64)
    steps = np.diff(np.diff(whole, axis=0, prepend=0), axis=1, prepend=0)
    packed = zlib.compress(steps.astype("<i8").tobytes(), 9)
    return base64.b64encode(packed).decode("ascii")


def nodes_from_text(text: str, shape: tuple[int, int], *, unknown: bool) -> FloatArray:
    """Unpack nodes; with `unknown`, minus one unit stands for NaN. Raises NodesError."""
    count = shape[0] * shape[1]
    if not 0 < count <= MOST_NODES:
        raise NodesError("too many nodes")
    unpack = zlib.decompressobj()
    try:
        data = unpack.decompress(base64.b64decode(text, validate=True), 8 * count + 1)
    except (zlib.error, binascii.Error, ValueError) as error:
        raise NodesError("not packed nodes") from error
    if len(data) != 8 * count:
        raise NodesError("another number of nodes")
    whole = np.cumsum(np.cumsum(np.frombuffer(data, "<i8").reshape(shape), axis=1), axis=0)
    values = whole * UNIT_MM
    return np.where(whole == _UNKNOWN, np.nan, values) if unknown else values


def bend_to_json(bend: Bend) -> dict[str, Any]:
    """The fields of a bend as JSON values."""
    return {
        "first_px": list(bend.first_px),
        "pitch_px": bend.pitch_px,
        "shape": list(bend.x_mm.shape),
        "x_mm": nodes_to_text(bend.x_mm),
        "y_mm": nodes_to_text(bend.y_mm),
        "standard_error_mm": nodes_to_text(bend.standard_error_mm),
    }
