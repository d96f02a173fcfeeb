"""Undo and redo over whole readings.

A reading is frozen, and two of them share all that did not change, so a step of the history
is simply the reading before it and the reading after it; nothing has to be run backwards.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

from app.reading.model import Reading


@dataclass(frozen=True, slots=True)
class Step:
    """A reading and the name of the edit that led to it.

    Attributes
    ----------
    label : str
        What was done, for the menu ("Move caliper").
    merge_key : str or None
        Steps in a row with the same key are one step (a run of arrow keys).
    """

    reading: Reading
    label: str = ""
    merge_key: str | None = None


@dataclass(frozen=True, slots=True)
class History:
    """Where the reader is among their edits; every change makes a new History.

    Attributes
    ----------
    steps : tuple of Step
        From the reading as opened to the last edit made, the undone ones included.
    index : int
        The step now shown.
    saved : Reading or None
        The reading as it stands in its file.
    """

    steps: tuple[Step, ...]
    index: int = 0
    saved: Reading | None = None

    @classmethod
    def start(cls, reading: Reading, *, saved: bool) -> History:
        """Begin with a reading, which may already stand in a file."""
        return cls((Step(reading),), saved=reading if saved else None)

    @property
    def reading(self) -> Reading:
        """The reading now shown."""
        return self.steps[self.index].reading

    def is_modified(self) -> bool:
        """Whether the reading differs from its file, or has none."""
        return self.reading != self.saved

    def edited(self, reading: Reading, label: str, merge_key: str | None = None) -> History:
        """Take an edit; what had been undone is dropped. An edit that changes nothing is none."""
        if reading == self.reading:
            return self
        last = self.steps[self.index]
        # The step that was saved keeps its place, so that undo can come back to it.
        may_merge = merge_key is not None and last.merge_key == merge_key
        keep = self.index if may_merge and self.saved != last.reading else self.index + 1
        steps = (*self.steps[:keep], Step(reading, label, merge_key))
        return replace(self, steps=steps, index=len(steps) - 1)

    def settled(self) -> History:
        """End a run of merging edits: the next one is a step of its own."""
        steps = list(self.steps)
        steps[self.index] = replace(steps[self.index], merge_key=None)
        return replace(self, steps=tuple(steps))

    def undo_label(self) -> str | None:
        """Name of the edit that undo takes back, or None."""
        return self.steps[self.index].label if self.index > 0 else None

    def redo_label(self) -> str | None:
        """Name of the edit that redo makes again, or None."""
        return self.steps[self.index + 1].label if self.index + 1 < len(self.steps) else None

    def undone(self) -> History:
        """One step back, or the same history at its beginning."""
        return replace(self, index=max(0, self.index - 1))

    def redone(self) -> History:
        """One step forward, or the same history at its end."""
        return replace(self, index=min(len(self.steps) - 1, self.index + 1))

    def marked_saved(self, reading: Reading) -> History:
        """Note which reading now stands in the file."""
        return replace(self, saved=reading)
