"""Charts: the lengths they paint, the pixels where they are painted, and what they say to those who cannot see them."""

from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st
from PySide6.QtGui import QColor, QImage
from PySide6.QtWidgets import QWidget
from pytestqt.qtbot import QtBot

from curator.desktop.desk import Desk
from curator.desktop.memory import Memory
from curator.desktop.palette import DARK, LIGHT
from curator.desktop.widgets.charts import (
    AskedBars,
    Bar,
    Cut,
    Stacks,
    TwoSided,
    bar_lengths,
    best_cut,
    histogram_heights,
    stack_spans,
)

counts = st.lists(st.integers(0, 1000), min_size=1, max_size=12)


@pytest.fixture
def desk(qtbot: QtBot) -> Desk:
    del qtbot  # the application is there
    return Desk(Memory())


def _painted(qtbot: QtBot, chart: QWidget, width: int = 600) -> QImage:
    qtbot.addWidget(chart)
    chart.resize(width, chart.sizeHint().height())
    return chart.grab().toImage()


def _pixels(image: QImage, colour: str, y: int) -> int:
    return sum(image.pixelColor(x, y) == QColor(colour) for x in range(image.width()))


def test_bars_share_one_scale_and_the_longest_takes_the_width() -> None:
    bars = [Bar("train", 0.8, 0.6, ""), Bar("val", 0.2, 0.4, "")]
    assert bar_lengths(bars, 400) == [(400, pytest.approx(300)), (pytest.approx(100), pytest.approx(200))]
    assert bar_lengths([Bar("none", 0, 0, "")], 400) == [(0, 0)]


@given(counts, st.floats(1, 2000))
def test_the_parts_of_a_stack_touch_and_fill_the_width(parts: list[int], width: float) -> None:
    spans = stack_spans(parts, width)
    assert spans[0][0] == 0
    for (_, end), (begin, _) in pairwise(spans):
        assert end == begin
    if sum(parts):
        assert spans[-1][1] == pytest.approx(width)
        for (begin, end), part in zip(spans, parts, strict=True):
            assert end - begin == pytest.approx(width * part / sum(parts), abs=1e-6)


def test_each_side_of_a_histogram_is_drawn_as_shares_of_its_own_kind() -> None:
    above, below = histogram_heights([1, 3], [300, 100], 90)
    assert above == pytest.approx([30, 90])
    assert below == pytest.approx([90, 30])
    assert histogram_heights([0, 0], [0, 0], 90) == ([0, 0], [0, 0])


@given(st.lists(st.tuples(st.integers(0, 50), st.integers(0, 50)), min_size=1, max_size=10))
def test_no_edge_misplaces_fewer_rows_than_the_best_cut(bins: list[tuple[int, int]]) -> None:
    mated, non_mated = [m for m, _ in bins], [n for _, n in bins]
    edges = [k / len(bins) for k in range(len(bins) + 1)]
    cut = best_cut(edges, mated, non_mated)
    if not sum(mated) or not sum(non_mated):
        assert cut is None
        return
    assert cut is not None
    rows = [(k, True) for k, n in enumerate(mated) for _ in range(n)]
    rows += [(k, False) for k, n in enumerate(non_mated) for _ in range(n)]
    for edge in range(len(edges)):
        below = sum(is_mated and k < edge for k, is_mated in rows) / sum(mated)
        above = sum(not is_mated and k >= edge for k, is_mated in rows) / sum(non_mated)
        assert cut.mated_below + cut.non_mated_above <= below + above + 1e-9


def test_a_clean_cut_misplaces_nothing() -> None:
    assert best_cut([0.0, 0.5, 1.0], [0, 4], [7, 0]) == Cut(0.5, 0, 0)


def test_bars_are_painted_as_long_as_they_say(qtbot: QtBot, desk: Desk) -> None:
    chart = AskedBars(desk, "Shares")
    chart.show_bars([Bar("train", 0.8, 0.8, "80 %"), Bar("val", 0.2, 0.4, "40 %")])
    image = _painted(qtbot, chart)
    row = image.height() // 2
    first, second = (_pixels(image, LIGHT.accent, at * row + row // 2) for at in (0, 1))
    assert first > 100
    assert second == pytest.approx(first / 2, abs=4)  # the mark of what was asked stands on it
    assert chart.accessibleName() == "Shares"
    assert chart.accessibleDescription() == "train: 80 %; val: 40 %"


def test_the_two_sides_say_what_they_hold_and_differ_without_colour(qtbot: QtBot, desk: Desk) -> None:
    chart = TwoSided(desk, "Similarity")
    chart.show_counts([0.0, 0.5, 1.0], [0, 2000], [10, 0], 0.5)
    assert chart.accessibleDescription() == (
        "2,000 mated rows above the line, 10 non-mated rows below it; similarity from 0.00 to 1.00; a marker at 0.50"
    )
    image = _painted(qtbot, chart).convertToFormat(QImage.Format.Format_Grayscale8)
    middle = image.height() // 2
    mated = [[image.pixel(420 + x, middle // 2 + y) for x in range(24)] for y in range(24)]
    non_mated = [[image.pixel(120 + x, middle + 10 + y) for x in range(24)] for y in range(24)]
    assert len({tuple(row) for row in mated}) > 1  # hatched, not flat
    assert sum(map(sum, mated)) != sum(map(sum, non_mated))


def test_stacks_name_every_part_and_follow_the_palette(qtbot: QtBot, desk: Desk) -> None:
    chart = Stacks(desk, "Bands", ("easy", "middle", "hard"))
    chart.show_rows({"train": (200, 400, 1400), "val": (0, 0, 0)})
    assert chart.accessibleDescription() == "train: 200 easy, 400 middle, 1,400 hard; val: 0 easy, 0 middle, 0 hard"
    before = _painted(qtbot, chart)
    desk.palette = DARK
    desk.repainted.emit()
    after = chart.grab().toImage()
    row = int(before.height() / 3 * 1.5)
    assert _pixels(before, LIGHT.accent, row) > 200
    assert _pixels(after, DARK.accent, row) == _pixels(before, LIGHT.accent, row)
