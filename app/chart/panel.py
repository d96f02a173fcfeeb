"""What stands below the picture: values, cautions, calibration, and where all of it is from."""

from __future__ import annotations

from itertools import chain

from app.calculator import Value
from app.calculator.display import UNCONFIRMED_MARK, is_unconfirmed, shown_number, with_unit
from app.chart.blocks import Area, Block, beside, columns, paragraph, stack
from app.chart.fonts import Colour, face
from app.chart.report import Report, footnotes
from app.chart.table import Column, Look, table
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

PAPER: Colour = (251, 252, 252)
_INK: Colour = (28, 38, 43)
_QUIET: Colour = (84, 99, 106)
_TEAL: Colour = (11, 85, 99)
_WARN_GROUND: Colour = (255, 239, 210)
_WARN: Colour = (150, 52, 8)
_CALIPER_COLUMN = 21


class Panel:
    """Lays the panel out for one width and letter size.

    Parameters
    ----------
    report : Report
    width_px : float
        Of the whole panel.
    letter_px : int
        Height of the letters.
    shown_sha256 : str
        Of the picture above.
    without_label : tuple of int
        Calipers whose label found no room on the picture.
    """

    def __init__(
        self,
        report: Report,
        width_px: float,
        letter_px: int,
        shown_sha256: str,
        without_label: tuple[int, ...] = (),
    ) -> None:
        self._report = report
        self._width = width_px
        self._shown_sha256 = shown_sha256
        self._without_label = without_label
        self._margin = round(1.4 * letter_px)
        self._gap = round(1.6 * letter_px)
        self._title = face(round(1.35 * letter_px), bold=True)
        self._strong = face(letter_px, bold=True)
        self._plain = face(letter_px)
        self._small = face(max(10, round(0.86 * letter_px)))
        self._notes = footnotes(report.values)

    def block(self) -> Block:
        """The whole panel; its height follows from what there is to say."""
        room = self._width - 2 * self._margin
        parts = [
            self._heading(room),
            *self._banner(room),
            self._values(room),
            self._basis(room),
            *self._cautions(room),
            *self._calipers(room),
            self._foot(room),
        ]
        body = stack(parts, self._gap).moved(self._margin, self._margin)
        height = body.height + 2 * self._margin
        ground = Area(0, 0, self._width, height, PAPER)
        return Block(self._width, height, (ground, *body.areas), body.words)

    def _heading(self, room: float) -> Block:
        reading = self._report.reading
        page = f", page {reading.picture.page + 1}" if reading.picture.page else ""
        reader = reading.reader.strip() or "a reader who is not named"
        return stack(
            [
                paragraph(
                    f"Reading of {reading.picture.file_name}{page}", self._title, room, _TEAL
                ),
                paragraph(
                    f"Marked by {reader}, begun {moment(reading.created_at)}, last changed "
                    f"{moment(reading.changed_at)}",
                    self._plain,
                    room,
                    _INK,
                ),
            ]
        )

    def _banner(self, room: float) -> list[Block]:
        said = unconfirmed_sentences(self._report.reading, self._shown_sha256)
        if not said:
            return []
        inset = self._margin * 0.6
        head = "NOT CONFIRMED"
        measured = chain(self._report.values, *self._report.by_caliper)
        if any(is_unconfirmed(value) for value in measured):
            head += f": values marked {UNCONFIRMED_MARK} rest on that"
        words = stack(
            [
                paragraph(head, self._strong, room - 3 * inset, _WARN),
                *(paragraph(line, self._plain, room - 3 * inset, _INK) for line in said),
            ]
        ).moved(2 * inset, inset)
        height = words.height + 2 * inset
        areas = (Area(0, 0, room, height, _WARN_GROUND), Area(0, 0, inset * 0.6, height, _WARN))
        return [Block(room, height, areas, words.words)]

    def _titled(self, title: str, content: Block) -> Block:
        return stack(
            [paragraph(title, self._strong, content.width, _TEAL), content],
            self._plain.size_px * 0.3,
        )

    def _values(self, room: float) -> Block:
        report = self._report
        if not report.values:
            none = paragraph("No values: nothing was marked.", self._plain, room, _INK)
            return self._titled("Values", stack([none, *self._colleague(room)]))
        compared = any(report.comparison(v.key, v.lead) for v in report.values)
        heads = [Column("Value"), Column("Lead"), Column(""), Column("n"), Column("SD")]
        if compared:
            heads += [Column("Colleague"), Column("Difference")]
        heads += [Column("Caution"), Column("Method", share=1.0)]
        rows = [self._row(value, compared) for value in report.values]
        look = Look(self._small, self._strong, self._plain, _QUIET, _INK)
        laid = table(heads, rows, room, look, strong_column=2)
        return self._titled("Values", stack([laid, *self._colleague(room)], self._gap / 2))

    def _row(self, value: Value, compared: bool) -> list[str]:
        spread = ""
        if value.spread is not None and value.plus_minus is not None:
            spread = shown_number(value.spread, value.plus_minus)
        row = [value.label, value.lead or "", value_text(value), str(value.n or ""), spread]
        if compared:
            row += self._colleague_cells(value)
        numbers = sorted(self._notes[c.code, c.text][0] for c in value.cautions)
        return [*row, ", ".join(map(str, numbers)), value.refusal or value.method]

    def _colleague_cells(self, value: Value) -> list[str]:
        figure = self._report.reading.hand_figure(value.key, value.lead)
        comparison = self._report.comparison(value.key, value.lead)
        if figure is None or comparison is None:
            return ["", ""]
        said = with_unit(f"{figure.value:g}", value.unit)
        if comparison.difference is None or value.plus_minus is None:
            return [said, ""]
        number = shown_number(comparison.difference, value.plus_minus)
        sign = "+" if comparison.difference > 0.0 else ""
        return [said, f"{sign}{number}, {'within' if comparison.within else 'outside'} ±"]

    def _colleague(self, room: float) -> list[Block]:
        """Whose figures they are, and those beside which there is no value of ours."""
        reading = self._report.reading
        if not reading.hand_figures:
            return []
        said = f"Colleague: {reading.colleague.strip() or 'not named'}."
        ours = {(value.key, value.lead) for value in self._report.values}
        left = [figure for figure in reading.hand_figures if (figure.key, figure.lead) not in ours]
        if left:
            listed = "; ".join(hand_figure_text(figure) for figure in left)
            said += f" Figures without a value here: {listed}."
        return [paragraph(said, self._plain, room, _INK)]

    def _basis(self, room: float) -> Block:
        """Calibration, grid, picture and versions."""
        reading = self._report.reading
        picture = reading.picture
        calibration = [
            *(setting_sentence(reading, *row) for row in settings_of(reading.calibration)),
            *grid_sentences(reading.sheet_map),
        ]
        versions = self._report.software
        if reading.software_version and reading.software_version != versions:
            versions += f"; reading last changed with {reading.software_version}"
        source = [
            f"File {picture.file_name}, page {picture.page + 1}, "
            f"{picture.size_px[0]} × {picture.size_px[1]} px",
            f"SHA-256 {picture.sha256}",
            f"Software: {versions}",
        ]
        width = (room - self._gap) / 2.0
        return self._in_columns(
            [
                self._titled("Calibration", self._lines(calibration, width)),
                self._titled("Source picture", self._lines(source, width)),
            ]
        )

    def _in_columns(self, blocks: list[Block]) -> Block:
        return columns(blocks, 2, self._gap, self._plain.size_px * 0.4)

    def _lines(self, lines: list[str], room: float) -> Block:
        return stack([paragraph(line, self._plain, room, _INK) for line in lines])

    def _cautions(self, room: float) -> list[Block]:
        if not self._notes:
            return []
        width = (room - self._gap) / 2.0
        number_width = self._plain.width_px("00  ")
        notes = []
        for number, caution in self._notes.values():
            words = stack(
                [
                    paragraph(caution.text, self._plain, width - number_width, _INK),
                    paragraph(
                        f"{caution.reason} Source: {caution.source}",
                        self._small,
                        width - number_width,
                        _QUIET,
                    ),
                ]
            )
            notes.append(
                beside([paragraph(str(number), self._strong, number_width, _WARN), words], 0.0)
            )
        return [self._titled("Cautions", self._in_columns(notes))]

    def _calipers(self, room: float) -> list[Block]:
        reading = self._report.reading
        if not reading.calipers:
            return []
        size = self._small.size_px
        count = min(max(1, int(room // (_CALIPER_COLUMN * size))), len(reading.calipers))
        width = (room - self._gap * (count - 1)) / count
        listed = []
        for caliper, values in zip(reading.calipers, self._report.by_caliper, strict=True):
            text = f"{caliper.caliper_id}  {caliper_name(caliper)}: {spoken(values)}"
            listed.append(paragraph(text, self._small, width, _INK))
        content = [columns(listed, count, self._gap)]
        if self._without_label:
            numbers = ", ".join(str(number) for number in self._without_label)
            said = f"No room for a label on the picture: caliper {numbers}."
            content.append(paragraph(said, self._small, room, _QUIET))
        return [self._titled("Each caliper by itself", stack(content, size * 0.4))]

    def _foot(self, room: float) -> Block:
        return stack(
            [
                paragraph(PLUS_MINUS_MEANS, self._small, room, _QUIET),
                paragraph(DISCLAIMER, self._strong, room, _TEAL),
            ],
            self._plain.size_px * 0.3,
        )
