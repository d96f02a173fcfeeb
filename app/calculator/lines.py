"""Calipers grouped into worksheet lines: one quantity in one lead, beat by beat."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from app.calculator.spans import NO_SCALE, Span, measure_spans
from app.calculator.uncertainty import Estimate, mean_of, plain_mean, repeated, sample_sd
from app.reading.marks import CaliperKind
from app.reading.model import Reading
from app.reading.quantities import LEADS, Quantity, quantity

LineKey = tuple[str, str | None]
# A deflection must point to its own side of the baseline.
_SIGN = {"q_height": -1.0, "r_height": 1.0, "s_height": -1.0}


@dataclass(frozen=True, slots=True, eq=False)
class Line:
    """One quantity in one lead.

    Attributes
    ----------
    key : str
        Of the quantity.
    lead : str or None
    beats : tuple of Estimate
        One for each beat, in beat order (ms or mV); empty where refused.
    mean : Estimate or None
        None where refused.
    caliper_ids : tuple of int
    covered : bool
        Whether the grid was seen at every mark.
    step_mm : float
        The coarsest step in which its marks could be placed; see `Span`.
    refusal : str
        One sentence where there is no mean, else empty.
    """

    key: str
    lead: str | None
    beats: tuple[Estimate, ...]
    mean: Estimate | None
    caliper_ids: tuple[int, ...]
    covered: bool
    step_mm: float = 0.0
    refusal: str = ""

    @property
    def n(self) -> int:
        """Beats it rests on."""
        return len(self.beats)

    @property
    def spread(self) -> float | None:
        """Sample standard deviation over the beats."""
        return sample_sd([beat.value for beat in self.beats])

    @property
    def place(self) -> str:
        """Name and lead in a sentence."""
        return place(self.key, self.lead)


@dataclass(frozen=True, slots=True, eq=False)
class Marked:
    """A reading with its lines measured."""

    reading: Reading
    lines: dict[LineKey, Line]

    def line(self, key: str, lead: str | None) -> Line | None:
        """The line of a quantity in a lead, or None where nothing was marked."""
        return self.lines.get((key, lead))

    def lines_of(self, key: str) -> list[Line]:
        """The lines of one quantity, leads in their usual order, no lead last."""
        found = [line for line in self.lines.values() if line.key == key]
        return sorted(found, key=lambda line: lead_order(line.lead))

    def rhythm(self) -> Line | None:
        """The RR line that counts: the lead with most intervals, a refused one last.

        Among equals the one with the usual lead order's first lead.
        """
        return max(self.lines_of("rr"), key=lambda line: line.n, default=None)


def place(key: str, lead: str | None) -> str:
    """A quantity and its lead in a sentence ("QRS in lead II")."""
    known = quantity(key)
    label = known.label if known is not None else key
    return f"{label} in lead {lead}" if lead is not None else f"{label} (no lead)"


def lead_order(lead: str | None) -> tuple[int, str]:
    """Sorting key: the twelve leads, then others by name, then none."""
    if lead is None:
        return len(LEADS) + 1, ""
    return (LEADS.index(lead) if lead in LEADS else len(LEADS)), lead


def measure_lines(reading: Reading) -> Marked:
    """Measure every caliper that names a known quantity and group them into lines."""
    known = [
        (item, found)
        for item in reading.calipers
        if item.quantity is not None and (found := quantity(item.quantity)) is not None
    ]
    groups: dict[LineKey, list[Span]] = {}
    for span, (item, found) in zip(
        measure_spans(reading, [item for item, _ in known]), known, strict=True
    ):
        groups.setdefault((found.key, item.lead), []).append(span)
    return Marked(reading, {key: _line(key, spans) for key, spans in groups.items()})


def _line(line_key: LineKey, spans: Sequence[Span]) -> Line:
    key, lead = line_key
    ids = tuple(span.caliper.caliper_id for span in spans)
    covered = all(span.covered for span in spans)
    step_mm = max(span.step_mm for span in spans)
    refusal = next((said for span in spans if (said := _refusal(line_key, span))), "")
    if refusal:
        return Line(key, lead, (), None, ids, covered, step_mm, refusal)
    beats = _beats(spans)
    # Chained intervals make up one stretch, whose mean is what it is however they differ.
    known = quantity(key)
    mean = plain_mean(beats) if known is not None and known.chained else mean_of(beats)
    return Line(key, lead, beats, mean, ids, covered, step_mm)


def _beats(spans: Sequence[Span]) -> tuple[Estimate, ...]:
    """One estimate for each beat; placings with the same beat number are one beat.

    Calipers without a beat number are a beat each, after the others.
    """
    by_beat: dict[tuple[int, int], list[Span]] = {}
    for order, span in enumerate(spans):
        beat = span.caliper.beat
        by_beat.setdefault((1, order) if beat is None else (0, beat), []).append(span)
    beats = []
    for _, same in sorted(by_beat.items(), key=lambda item: item[0]):
        estimates = [span.estimate for span in same if span.estimate is not None]
        beats.append(repeated(estimates, same[0].resolution_share))
    return tuple(beats)


def _refusal(line_key: LineKey, span: Span) -> str:
    key, lead = line_key
    item = span.caliper
    name = place(key, lead) + (f", beat {item.beat}," if item.beat is not None else "")
    if span.refusal == NO_SCALE:
        return NO_SCALE
    if not _kind_fits(quantity(key), item.kind):
        return f"{name} was marked with another kind of caliper: mark it anew."
    if span.estimate is None:
        return f"{name} {span.refusal}"
    sign = _SIGN.get(key)
    if sign is not None and sign * span.estimate.value < -span.estimate.plus_minus:
        side, foot = ("below", "top") if sign > 0.0 else ("above", "lowest point")
        return (
            f"{name} ends {side} its baseline: its first leg belongs on the baseline, "
            f"its second on the {foot}."
        )
    return ""


def _kind_fits(known: Quantity | None, kind: CaliperKind) -> bool:
    return known is not None and kind is known.kind
