"""The values as plain lines for a terminal."""

from __future__ import annotations

from collections.abc import Sequence

from app.chart.report import footnotes, report_of
from app.chart.wording import (
    DISCLAIMER,
    PLUS_MINUS_MEANS,
    caliper_name,
    grid_sentences,
    hand_figure_text,
    moment,
    setting_sentence,
    settings_of,
    spoken,
    unconfirmed_sentences,
    value_text,
)
from app.reading import Reading


def values_as_text(reading: Reading) -> str:
    """Everything `values_as_json` says of the values, for reading: one value to a line."""
    report = report_of(reading)
    notes = footnotes(report.values)
    picture = reading.picture
    lines = [
        f"Reading of {picture.file_name}, page {picture.page + 1} (SHA-256 {picture.sha256})",
        f"Marked by {reading.reader.strip() or 'a reader who is not named'}, "
        f"last changed {moment(reading.changed_at)}; {report.software}",
        "",
        *(f"NOT CONFIRMED: {sentence}" for sentence in unconfirmed_sentences(reading)),
        *(setting_sentence(reading, *row) for row in settings_of(reading.calibration)),
        *grid_sentences(reading.sheet_map),
        "",
    ]
    rows = [["Value", "Lead", "", "n", "Caution"]]
    for value in report.values:
        numbers = sorted(notes[c.code, c.text][0] for c in value.cautions)
        said = value.refusal or value_text(value)
        rows.append(
            [value.label, value.lead or "", said, str(value.n or ""), ", ".join(map(str, numbers))]
        )
    lines += _aligned(rows) if report.values else ["No values: nothing was marked."]
    free = [
        f"{caliper_name(caliper)}: {spoken(values)}"
        for caliper, values in zip(reading.calipers, report.by_caliper, strict=True)
        if caliper.quantity is None
    ]
    if free:
        lines += ["", "Free calipers:", *free]
    if notes:
        lines += ["", *(f"{number}  {caution.text}" for number, caution in notes.values())]
    if reading.hand_figures:
        lines += ["", f"Figures of {reading.colleague.strip() or 'a colleague'}:"]
    for figure, comparison in zip(reading.hand_figures, report.comparisons, strict=True):
        lines.append(f"{hand_figure_text(figure)}: {comparison.sentence}")
    return "\n".join([*lines, "", PLUS_MINUS_MEANS, DISCLAIMER])


def _aligned(rows: Sequence[Sequence[str]]) -> list[str]:
    """Rows with their cells below each other; a cell too long for its column runs on."""
    widths = [min(max(len(row[n]) for row in rows), 24) for n in range(len(rows[0]))]
    return [
        "  ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)).rstrip()
        for row in rows
    ]
