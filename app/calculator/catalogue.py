"""Label, unit and source of every value, in worksheet order."""

from __future__ import annotations

from dataclasses import dataclass

FOUND = "found"
SECONDARY = "found, secondary source"
MEMORY = "from memory"

_RATE = f"60 / RR in s (teaching texts; {SECONDARY})"
_QRS_PART_III = "AHA/ACCF/HRS 2009 part III"
_HEIGHT = "1 mV is the gain in mm; from the baseline just before the QRS (UDMI 2018; " + (
    f"{SECONDARY})"
)


@dataclass(frozen=True, slots=True)
class Entry:
    """What stays the same about a value, whatever it measures."""

    label: str
    unit: str
    source: str


CATALOGUE: dict[str, Entry] = {
    "rate": Entry("Rate", "/min", _RATE),
    "rr_mean": Entry("RR mean", "ms", "R peak to next R peak in one lead (computed)"),
    "rr_spread": Entry("RR spread", "%", "(longest - shortest) / longest (computed)"),
    "p_duration": Entry("P", "ms", f"first deflection to return to baseline: CSE 1985 ({MEMORY})"),
    "pr": Entry("PR", "ms", f"P onset to QRS onset: CSE 1985, textbooks ({SECONDARY})"),
    "qrs": Entry("QRS", "ms", f"onset to J point: {_QRS_PART_III} ({SECONDARY})"),
    "qt": Entry("QT", "ms", f"QRS onset to end of T: ESC teaching text ({SECONDARY})"),
    "qtc_bazett": Entry("QTc Bazett", "ms", f"Bazett 1920, Heart 7:353 ({SECONDARY})"),
    "qtc_fridericia": Entry(
        "QTc Fridericia", "ms", f"Fridericia 1920, Acta Med Scand 53:469 ({SECONDARY})"
    ),
    "qtc_framingham": Entry(
        "QTc Framingham", "ms", f"Sagie 1992, Am J Cardiol 70:797 ({SECONDARY})"
    ),
    "qtc_hodges": Entry("QTc Hodges", "ms", f"Hodges 1983, JACC 1:694 ({SECONDARY})"),
    "q_height": Entry("Q depth", "mV", _HEIGHT),
    "r_height": Entry("R height", "mV", _HEIGHT),
    "s_height": Entry("S depth", "mV", _HEIGHT),
    "net_qrs": Entry("Net QRS", "mV", f"Q + R + S, each with its sign: Novosel 1999 ({FOUND})"),
    "qrs_axis": Entry(
        "QRS axis", "deg", f"atan2(2/√3 aVF, I): Novosel 1999 ({FOUND}); heights, not areas"
    ),
    "span": Entry("Span", "ms", "width on the grid / paper speed (computed)"),
    "height": Entry("Height", "mV", "height on the grid / gain (computed)"),
    "comb": Entry("Comb", "ms", "width on the grid / gaps between teeth (computed)"),
    "comb_rate": Entry("Comb rate", "/min", _RATE),
}
