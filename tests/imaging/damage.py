"""Seeded damage to whole files: what a bad disk, a broken copy or a malicious sender does."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from tests.imaging.picture_files import one_of_each


def damaged_files(seed: int, count: int) -> Iterator[tuple[str, bytes]]:
    """`count` damaged files, kinds in turn, each with the words that say how it was made."""
    kinds = list(one_of_each().items())
    for number in range(count):
        kind, whole = kinds[number % len(kinds)]
        random = np.random.default_rng([seed, number])
        how = _HOW[int(random.integers(len(_HOW)))]
        yield f"{kind}, {how.__name__.strip('_')}, seed [{seed}, {number}]", how(whole, random)


def _flip_some_bytes(whole: bytes, random: np.random.Generator) -> bytes:
    content = np.frombuffer(whole, np.uint8).copy()
    at = random.integers(len(whole), size=int(random.integers(1, 12)))
    content[at] ^= random.integers(1, 256, size=len(at), dtype=np.uint8)
    return content.tobytes()


def _flip_the_header(whole: bytes, random: np.random.Generator) -> bytes:
    content = np.frombuffer(whole, np.uint8).copy()
    at = random.integers(min(160, len(whole)), size=int(random.integers(1, 4)))
    content[at] ^= random.integers(1, 256, size=len(at), dtype=np.uint8)
    return content.tobytes()


def _cut_short(whole: bytes, random: np.random.Generator) -> bytes:
    return whole[: int(random.integers(len(whole)))]


def _blank_a_stretch(whole: bytes, random: np.random.Generator) -> bytes:
    begin, length = int(random.integers(len(whole))), int(random.integers(1, 256))
    fill = bytes([int(random.integers(256))])
    return (whole[:begin] + fill * length + whole[begin + length :])[: len(whole)]


def _drop_a_stretch(whole: bytes, random: np.random.Generator) -> bytes:
    begin, length = int(random.integers(len(whole))), int(random.integers(1, 64))
    return whole[:begin] + whole[begin + length :]


def _put_in_a_stretch(whole: bytes, random: np.random.Generator) -> bytes:
    begin, length = int(random.integers(len(whole))), int(random.integers(1, 64))
    return whole[:begin] + random.bytes(length) + whole[begin:]


_HOW = (
    _flip_some_bytes,
    _flip_the_header,
    _cut_short,
    _blank_a_stretch,
    _drop_a_stretch,
    _put_in_a_stretch,
)
