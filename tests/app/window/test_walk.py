"""What a hand does: pick a line, click two places, read the value, go on."""

from __future__ import annotations

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from pytestqt.qtbot import QtBot

from app.window.main_window import MainWindow
from app.window.panels.row_tree import Column
from tests.app.window.bench import (
    PX_PER_MM,
    cell,
    click_cell,
    click_picture,
    line_of,
    measure,
    pick_line,
    reading_of,
)


def one_click_ms(window: MainWindow) -> float:
    """What one view px of each of two clicks may change, at 25 mm/s."""
    return 2.0 / window.view.zoom() / PX_PER_MM * 40.0


def shown_ms(text: str) -> float:
    """The number in a value cell."""
    return float(text.split(" ", maxsplit=1)[0])


def test_a_line_picked_asks_for_its_two_places_and_shows_its_value(opened: MainWindow) -> None:
    pick_line(opened, "qrs", "II")
    assert "where the QRS begins" in opened.prompt.text.words()
    click_picture(opened, 300.0, 300.0)
    assert "J point" in opened.prompt.text.words()
    click_picture(opened, 320.0, 300.0)
    (caliper,) = reading_of(opened).calipers_of("qrs", "II")
    assert caliper.beat == 1
    # 20 px at 8 px to the square are 2.5 squares, 100 ms at 25 mm/s.
    value_ms = shown_ms(cell(opened, "qrs", "II", Column.VALUE))
    assert value_ms == pytest.approx(100.0, abs=one_click_ms(opened))
    assert "±" in cell(opened, "qrs", "II", Column.VALUE)
    assert cell(opened, "qrs", "II", Column.COUNT) == "1"


def test_every_value_is_marked_until_speed_and_gain_are_confirmed(opened: MainWindow) -> None:
    measure(opened, "qrs", "II", 300.0, 320.0)
    assert cell(opened, "qrs", "II", Column.VALUE).endswith("?")
    assert opened.notices.notice("unconfirmed") is not None
    opened.settings.speed.confirm.click()
    opened.settings.gain.confirm.click()
    opened.worksheet.refresh()
    assert not cell(opened, "qrs", "II", Column.VALUE).endswith("?")
    assert opened.notices.notice("unconfirmed") is None


def test_b_marks_another_beat_and_the_line_is_the_mean(opened: MainWindow) -> None:
    measure(opened, "qrs", "II", 300.0, 320.0)
    assert opened.worksheet.another.text() == "Another QRS II  (B)"
    QTest.keyClick(opened, Qt.Key.Key_B)
    assert "beat 2" in opened.prompt.text.words()
    click_picture(opened, 500.0, 300.0)
    click_picture(opened, 524.0, 300.0)
    assert [c.beat for c in reading_of(opened).calipers_of("qrs", "II")] == [1, 2]
    assert cell(opened, "qrs", "II", Column.COUNT) == "2"
    value_ms = shown_ms(cell(opened, "qrs", "II", Column.VALUE))
    assert value_ms == pytest.approx(110.0, abs=one_click_ms(opened))


def test_the_next_line_is_offered_and_n_goes_there(opened: MainWindow) -> None:
    measure(opened, "qrs", "II", 300.0, 320.0)
    qt = line_of(opened, "qt", "II")
    assert opened.worksheet.tree.offered() == ("line", qt.line_id, None)
    assert opened.worksheet.next.text().startswith("Next: QT II")
    QTest.keyClick(opened, Qt.Key.Key_N)
    assert opened.walk.line == qt
    assert opened.walk.is_placing
    assert "QT" in opened.prompt.text.words()


def test_n_ends_a_chain_of_rr_and_goes_on(opened: MainWindow) -> None:
    pick_line(opened, "rr", "II")
    for x_px in (100.0, 260.0, 420.0):
        click_picture(opened, x_px, 300.0)
    assert opened.walk.is_placing
    QTest.keyClick(opened, Qt.Key.Key_N)
    assert len(reading_of(opened).calipers_of("rr", "II")) == 2
    assert opened.walk.line == line_of(opened, "p_duration", "II")
    assert opened.walk.is_placing


def test_n_goes_back_to_lines_passed_over_and_then_has_nothing_left(opened: MainWindow) -> None:
    lines = opened.worksheet.lines
    for line in lines.in_order()[:-1]:
        opened.walk.begin(line)
        click_picture(opened, 300.0, 300.0)
        click_picture(opened, 340.0, 260.0)
        QTest.keyClick(opened.view, Qt.Key.Key_Return)
    last = lines.in_order()[-1]
    assert opened.walk.following_line() == last
    opened.walk.begin(last)
    click_picture(opened, 300.0, 300.0)
    click_picture(opened, 340.0, 260.0)
    assert opened.walk.following_line() is None
    assert not opened.worksheet.next.isEnabled()
    assert not opened.actions_table.action("next").isEnabled()


def test_a_click_on_a_marked_line_shows_its_calipers_and_places_nothing(
    opened: MainWindow,
) -> None:
    measure(opened, "qrs", "II", 300.0, 320.0)
    opened.view.select(())
    pick_line(opened, "p_duration", "II")
    opened.view.cancel_gesture()
    pick_line(opened, "qrs", "II")
    assert not opened.walk.is_placing
    (caliper,) = reading_of(opened).calipers
    assert opened.view.selected_ids() == {caliper.caliper_id}


def test_a_click_on_a_marked_line_gives_up_what_another_was_asked_for(
    opened: MainWindow,
) -> None:
    measure(opened, "qrs", "II", 300.0, 320.0)
    pick_line(opened, "pr", "II")
    click_picture(opened, 260.0, 300.0)
    pick_line(opened, "qrs", "II")
    assert not opened.walk.is_placing
    assert opened.walk.line == line_of(opened, "qrs", "II")
    (caliper,) = reading_of(opened).calipers
    assert opened.view.selected_ids() == {caliper.caliper_id}
    assert opened.prompt.text.words().startswith("QRS in lead II is marked.")


def test_a_figure_typed_meanwhile_leaves_the_line_that_is_asked_for(opened: MainWindow) -> None:
    measure(opened, "qrs", "II", 300.0, 320.0)
    pick_line(opened, "pr", "II")
    click_cell(opened, "qrs", "II", Column.HAND)
    assert opened.walk.is_placing
    assert opened.walk.line == line_of(opened, "pr", "II")
    assert opened.prompt.text.words().startswith("PR, lead II")


def test_a_caliper_picked_on_the_canvas_shows_its_line(opened: MainWindow) -> None:
    measure(opened, "qrs", "II", 300.0, 320.0)
    measure(opened, "qt", "II", 300.0, 400.0)
    first = reading_of(opened).calipers[0]
    opened.view.select([first.caliper_id])
    row = opened.worksheet.tree.current_row()
    assert row is not None
    assert row.line == line_of(opened, "qrs", "II")


def test_a_beat_of_an_open_line_can_be_picked_and_removed(opened: MainWindow) -> None:
    measure(opened, "qrs", "II", 300.0, 320.0)
    QTest.keyClick(opened, Qt.Key.Key_B)
    click_picture(opened, 500.0, 300.0)
    click_picture(opened, 524.0, 300.0)
    tree = opened.worksheet.tree
    item = tree.item_of(("line", line_of(opened, "qrs", "II").line_id, None))
    assert item is not None
    item.setExpanded(True)
    second = reading_of(opened).calipers[1]
    tree.pick(("beat", second.caliper_id, None))
    assert opened.view.selected_ids() == {second.caliper_id}
    opened.actions_table.action("delete").trigger()
    opened.worksheet.refresh()
    assert [c.beat for c in reading_of(opened).calipers] == [1]
    assert tree.item_of(("beat", second.caliper_id, None)) is None
    assert item.isExpanded()


def test_a_screen_too_coarse_to_mark_on_is_said_while_marking(opened: MainWindow) -> None:
    opened.view.zoom_actual()
    pick_line(opened, "qrs", "II")
    assert not opened.prompt.hint.isVisible()
    opened.view.zoom_by(0.4)
    assert opened.prompt.hint.isVisible()
    # 0.4 view px for a picture px, 8 picture px to a small square.
    assert "One screen pixel is 0.3 mm" in opened.prompt.hint.text()
    opened.view.cancel_gesture()
    assert not opened.prompt.hint.isVisible()


def test_escape_leaves_a_line_unmarked(opened: MainWindow) -> None:
    pick_line(opened, "qrs", "II")
    click_picture(opened, 300.0, 300.0)
    QTest.keyClick(opened.view, Qt.Key.Key_Escape)
    QTest.keyClick(opened.view, Qt.Key.Key_Escape)
    assert not opened.walk.is_placing
    assert reading_of(opened).calipers == ()
    assert opened.prompt.text.words().startswith("Pick a line")


@pytest.mark.parametrize(("key", "name"), [("t", "Time 1"), ("h", "Height 1"), ("c", "Comb 1")])
def test_free_calipers_have_rows_of_their_own(opened: MainWindow, key: str, name: str) -> None:
    QTest.keyClick(opened, key)
    click_picture(opened, 300.0, 300.0)
    click_picture(opened, 340.0, 260.0)
    row = opened.worksheet.tree.row(("free", 1, None))
    assert row is not None
    assert row.name == name
    assert "±" in row.value


def test_nothing_is_placed_before_the_grid_is_known(qtbot: QtBot, window: MainWindow) -> None:
    assert not window.worksheet.isEnabled()
    QTest.keyClick(window, Qt.Key.Key_N)
    assert not window.walk.is_placing
    assert "Open a picture" in window.prompt.text.words()
