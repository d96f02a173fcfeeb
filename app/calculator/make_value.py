"""Values put together from an estimate, the catalogue and cautions."""

from __future__ import annotations

from collections.abc import Sequence

from app.calculator.catalogue import CATALOGUE
from app.calculator.lines import Line
from app.calculator.uncertainty import Estimate
from app.calculator.values import Caution, Value


def given(
    key: str,
    estimate: Estimate,
    method: str,
    ids: Sequence[int],
    cautions: Sequence[Caution],
    *,
    n: int,
    lead: str | None,
    spread: float | None = None,
) -> Value:
    """A value with its ±, resting on the calipers of those ids."""
    entry = CATALOGUE[key]
    return Value(
        key=key,
        label=entry.label,
        value=estimate.value,
        unit=entry.unit,
        plus_minus=estimate.plus_minus,
        method=method,
        source=entry.source,
        n=n,
        lead=lead,
        spread=spread,
        cautions=tuple(cautions),
        caliper_ids=tuple(ids),
    )


def refused(
    key: str,
    sentence: str,
    method: str,
    ids: Sequence[int],
    *,
    lead: str | None,
    cautions: Sequence[Caution] = (),
) -> Value:
    """No value, and the one sentence that says why."""
    entry = CATALOGUE[key]
    return Value(
        key=key,
        label=entry.label,
        value=None,
        unit=entry.unit,
        plus_minus=None,
        method=method,
        source=entry.source,
        n=0,
        lead=lead,
        cautions=tuple(cautions),
        caliper_ids=tuple(ids),
        refusal=sentence,
    )


def caliper_ids(lines: Sequence[Line]) -> tuple[int, ...]:
    """Every caliper of the lines, each once."""
    return tuple(dict.fromkeys(number for line in lines for number in line.caliper_ids))


def beats_in_words(line: Line, one: str = "beat") -> str:
    """What a mean rests on ("mean of 3 beats in lead II, 5 placings")."""
    where = f"in lead {line.lead}" if line.lead is not None else "in a lead not named"
    how_many = f"mean of {line.n} {one}s" if line.n > 1 else f"one {one}"
    placings = len(line.caliper_ids)
    repeats = f", {placings} placings" if placings > line.n else ""
    return f"{how_many} {where}{repeats}"
