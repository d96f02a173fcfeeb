"""Q, R and S heights, and the net height of the QRS in each lead."""

from __future__ import annotations

import math
from dataclasses import dataclass

from app.calculator.caution_rules import line_cautions, single_beat
from app.calculator.cautions import caution
from app.calculator.lines import Line, Marked, lead_order
from app.calculator.make_value import beats_in_words, caliper_ids, given, refused
from app.calculator.uncertainty import Axis, Estimate, combine
from app.calculator.values import Caution, Value

PARTS = {"q_height": "Q", "r_height": "R", "s_height": "S"}
NET_METHOD = "R less Q and S: the sum of the signed heights"


@dataclass(frozen=True, slots=True, eq=False)
class NetHeight:
    """The net QRS height of one lead.

    Attributes
    ----------
    lead : str or None
    lines : tuple of Line
        Of the parts that were marked, in the order Q, R, S.
    estimate : Estimate or None
        mV, up is positive; None where a part was refused.
    refusal : str
    """

    lead: str | None
    lines: tuple[Line, ...]
    estimate: Estimate | None
    refusal: str = ""

    @property
    def n(self) -> int:
        """Beats of the part with the fewest."""
        return min(line.n for line in self.lines)

    @property
    def marked_parts(self) -> str:
        """The parts in words ("R + S")."""
        return " + ".join(PARTS[line.key] for line in self.lines)


def height_values(marked: Marked) -> list[Value]:
    """Each part in each lead, then the net height of each lead."""
    parts = [_part_value(marked, line) for key in PARTS for line in marked.lines_of(key)]
    return [*parts, *(_net_value(marked, net) for net in net_heights(marked))]


def net_heights(marked: Marked) -> list[NetHeight]:
    """The net height of every lead in which a part of the QRS was marked."""
    leads = {line.lead for key in PARTS for line in marked.lines_of(key)}
    return [_net(marked, lead) for lead in sorted(leads, key=lead_order)]


def _net(marked: Marked, lead: str | None) -> NetHeight:
    found = (marked.line(key, lead) for key in PARTS)
    lines = tuple(line for line in found if line is not None)
    means = [line.mean for line in lines if line.mean is not None]
    if len(means) < len(lines):
        refusal = next(line.refusal for line in lines if line.refusal)
        return NetHeight(lead, lines, None, refusal)
    total_mv = math.fsum(mean.value for mean in means)
    return NetHeight(lead, lines, combine(total_mv, *((1.0, mean) for mean in means)))


def not_marked(net: NetHeight) -> list[Caution]:
    """Parts of the QRS that nobody marked, which count as none."""
    marked = {line.key for line in net.lines}
    missing = [name for key, name in PARTS.items() if key not in marked]
    if not missing:
        return []
    lead = net.lead if net.lead is not None else "not named"
    return [caution("one_sided_deflection", parts=" and ".join(missing), lead=lead)]


def _part_value(marked: Marked, line: Line) -> Value:
    gain = marked.reading.calibration.gain_for(line.lead).value
    method = f"height in mm / {gain:g} mm/mV"
    if line.mean is None:
        return refused(line.key, line.refusal, method, line.caliper_ids, lead=line.lead)
    cautions = [
        *line_cautions(marked.reading, Axis.DOWN, [line]),
        *single_beat(beats=line.n),
    ]
    return given(
        line.key,
        line.mean,
        f"{method}, {beats_in_words(line)}",
        line.caliper_ids,
        cautions,
        n=line.n,
        lead=line.lead,
        spread=line.spread,
    )


def _net_value(marked: Marked, net: NetHeight) -> Value:
    ids = caliper_ids(net.lines)
    if net.estimate is None:
        return refused("net_qrs", net.refusal, NET_METHOD, ids, lead=net.lead)
    cautions = [
        *line_cautions(marked.reading, Axis.DOWN, net.lines),
        *not_marked(net),
        *single_beat(beats=net.n),
    ]
    method = f"{NET_METHOD}; {net.marked_parts} marked"
    return given("net_qrs", net.estimate, method, ids, cautions, n=net.n, lead=net.lead)
