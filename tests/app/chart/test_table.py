"""The table: every cell whole, columns that do not run into each other."""

from __future__ import annotations

import pytest

from app.chart.blocks import Block
from app.chart.fonts import face
from app.chart.table import Column, Look, table

LOOK = Look(face(12), face(14, bold=True), face(14), (90, 90, 90), (20, 20, 20))
HEADS = [Column("Value"), Column("Lead"), Column("Method", share=1.0)]
ROW = ["QTc Fridericia", "II", "QT / RR^(1/3), QT 380 ms (mean of 2 beats in lead II)"]


def right_edge(block: Block) -> float:
    return max(w.x + w.face.width_px(w.text) for w in block.words)


def texts(block: Block) -> str:
    return " ".join(w.text for w in block.words)


@pytest.mark.parametrize("width", [60.0, 200.0, 420.0, 2000.0])
def test_every_cell_is_whole_at_any_width(width: float) -> None:
    laid = table(HEADS, [ROW, ROW], width, LOOK, strong_column=0)
    assert laid.width <= width + 1.0
    # At a width no letter fits into, a letter may stand out; at the others nothing does.
    assert right_edge(laid) <= width + 14.0 if width < 100 else right_edge(laid) <= width + 1.0
    letters = texts(laid).replace(" ", "")
    assert letters.count("QTcFridericia" if width > 100 else "Q") >= 2
    assert sorted(letters) == sorted("".join(["ValueLeadMethod", *ROW, *ROW]).replace(" ", ""))


def test_with_room_each_cell_has_one_line() -> None:
    laid = table(HEADS, [ROW], 2000.0, LOOK)
    assert [w.text for w in laid.words] == ["Value", "Lead", "Method", *ROW]
    assert len({w.baseline for w in laid.words}) == 2


def test_the_column_that_takes_the_rest_breaks_its_lines_first() -> None:
    laid = table(HEADS, [ROW], 330.0, LOOK)
    assert "QTc Fridericia" in [w.text for w in laid.words]
    assert ROW[2] not in [w.text for w in laid.words]


def test_a_table_without_such_a_column_gives_way_alike() -> None:
    laid = table([Column("A"), Column("B")], [["word " * 9, "word " * 9]], 200.0, LOOK)
    assert right_edge(laid) <= 201.0


def test_an_empty_table_has_its_heads() -> None:
    assert texts(table(HEADS, [], 400.0, LOOK)) == "Value Lead Method"
