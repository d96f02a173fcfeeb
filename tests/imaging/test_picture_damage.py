"""Damaged files of every kind: a picture or one sentence, and nothing else, ever."""

from __future__ import annotations

import io
import logging
import warnings
from contextlib import suppress
from pathlib import Path

import numpy as np
import pytest
from PIL import Image

from imaging import Picture, PictureError, open_picture, picture_from_bytes
from tests.imaging.damage import damaged_files
from tests.imaging.picture_files import one_of_each, scene


def opened_or_refused(data: bytes, how: str) -> Picture | str:
    """The picture, or the sentence; anything else fails the test, saying how to repeat it."""
    with warnings.catch_warnings(record=True) as leaked:
        warnings.simplefilter("always")
        try:
            result: Picture | str = picture_from_bytes(data, "page")
        except PictureError as error:
            result = str(error)
        except BaseException as error:
            raise AssertionError(f"{how}: {error!r}") from error
    assert not leaked, f"{how}: {leaked[0].message}"
    if isinstance(result, str):
        assert result.startswith("“page” "), how
        assert result.endswith("."), how
        assert ". " not in result, how
        assert result.isprintable(), how
    else:
        pixels = result.pixels
        assert (pixels.dtype, pixels.ndim, pixels.shape[2]) == (np.uint8, 3, 3), how
        assert pixels.flags.c_contiguous, how
        assert min(result.size_px) >= 32, how
    return result


def try_all(seed: int, count: int) -> None:
    results = [opened_or_refused(data, how) for how, data in damaged_files(seed, count)]
    refused = sum(isinstance(result, str) for result in results)
    # Damage that does nothing, or that nobody could miss, would test nothing.
    assert 0.4 * count < refused < 0.95 * count


def test_three_hundred_damaged_files() -> None:
    try_all(seed=1, count=300)


@pytest.mark.slow
def test_ten_thousand_damaged_files() -> None:
    try_all(seed=2, count=10_000)


FIRST_OF_SEVERAL = {"tiff, pages", "gif, animated"}
"""Where a later page or frame is what was lost, the first is whole and may be shown."""


@pytest.mark.parametrize("kind", one_of_each())
def test_a_file_cut_anywhere_is_refused_and_the_terminal_stays_clean(
    kind: str, capfd: pytest.CaptureFixture[str], tmp_path: Path
) -> None:
    whole = one_of_each()[kind]
    meant = picture_from_bytes(whole, "page").pixels
    lengths = {round(share * len(whole)) for share in np.linspace(0.02, 0.98, 25)}
    path = tmp_path / "page"
    for length in sorted(lengths | {len(whole) - 3}):
        path.write_bytes(whole[:length])
        if kind in FIRST_OF_SEVERAL and length > 0.4 * len(whole):
            with suppress(PictureError):
                np.testing.assert_array_equal(open_picture(path).pixels, meant)
        else:
            with pytest.raises(PictureError, match=r"^“page” "):
                open_picture(path)
    assert list(tmp_path.iterdir()) == [path]
    assert capfd.readouterr() == ("", "")


def test_what_went_wrong_is_in_the_log_below_warning_level(
    caplog: pytest.LogCaptureFixture,
) -> None:
    """Where nobody set logging up, Python prints warnings, and this one with its traceback."""
    caplog.set_level(logging.INFO, logger="imaging")
    opened_or_refused(one_of_each()["gif"][:400], "cut")
    [record] = caplog.records
    assert record.levelno == logging.INFO
    assert record.exc_info is not None


def test_a_large_file_cut_short_is_refused_too() -> None:
    page = Image.fromarray(scene(1600, 1200))
    for kind in ("JPEG", "PNG", "TIFF", "WEBP", "GIF", "BMP", "PDF"):
        file = io.BytesIO()
        page.save(file, kind)
        for share in (0.5, 0.95):
            cut = file.getvalue()[: int(share * file.tell())]
            assert isinstance(opened_or_refused(cut, kind), str), kind
