"""Charts, painted after the palette: asked against attained, two kinds of similarity, and parts of a whole.

What a chart shows is told in words as well, in its accessible description; the lengths it paints come from the pure
functions at the top.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from PySide6.QtCore import QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QBrush, QColor, QFontMetricsF, QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QSizePolicy, QWidget

from curator.desktop.desk import Desk

_HATCHES = (Qt.BrushStyle.BDiagPattern, Qt.BrushStyle.Dense6Pattern, Qt.BrushStyle.SolidPattern)
_MATED_HATCH, _NON_MATED_HATCH = Qt.BrushStyle.BDiagPattern, Qt.BrushStyle.Dense5Pattern
_GAP = 10.0


@dataclass(frozen=True)
class Bar:
    """What was asked and what was attained, in the same unit, and the words beside it."""

    name: str
    asked: float
    attained: float
    words: str


@dataclass(frozen=True)
class Cut:
    """A similarity, and the shares of rows that lie on its wrong side."""

    at: float
    mated_below: float
    non_mated_above: float


def bar_lengths(bars: Sequence[Bar], width: float) -> list[tuple[float, float]]:
    """Asked and attained of each bar in pixels; the longest of all takes the whole width."""
    longest = max((max(bar.asked, bar.attained) for bar in bars), default=0.0)
    scale = width / longest if longest > 0 else 0.0
    return [(bar.asked * scale, bar.attained * scale) for bar in bars]


def histogram_heights(mated: Sequence[int], non_mated: Sequence[int], half: float) -> tuple[list[float], list[float]]:
    """Heights in pixels above and below the middle line; each kind is drawn as shares of its own rows."""
    shares = [[count / max(1, sum(counts)) for count in counts] for counts in (mated, non_mated)]
    highest = max((value for values in shares for value in values), default=0.0)
    scale = half / highest if highest > 0 else 0.0
    above, below = ([value * scale for value in values] for values in shares)
    return above, below


def stack_spans(parts: Sequence[float], width: float) -> list[tuple[float, float]]:
    """Where each part begins and ends, in pixels, when all together take the width."""
    whole = sum(parts)
    spans, begin = [], 0.0
    for part in parts:
        length = part / whole * width if whole > 0 else 0.0
        spans.append((begin, begin + length))
        begin += length
    return spans


def best_cut(edges: Sequence[float], mated: Sequence[int], non_mated: Sequence[int]) -> Cut | None:
    """The bin edge at which the two shares of misplaced rows add up to least; None where a kind has no rows."""
    n_mated, n_non_mated = sum(mated), sum(non_mated)
    if n_mated == 0 or n_non_mated == 0:
        return None
    cuts = [Cut(edge, sum(mated[:k]) / n_mated, sum(non_mated[k:]) / n_non_mated) for k, edge in enumerate(edges)]
    return min(cuts, key=lambda cut: (cut.mated_below + cut.non_mated_above, cut.at))


class _Chart(QWidget):
    def __init__(self, desk: Desk, name: str) -> None:
        super().__init__()
        self._desk = desk
        self.setAccessibleName(name)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        desk.repainted.connect(self.update)

    @property
    def _line(self) -> float:
        return QFontMetricsF(self.font()).height()

    def _wide(self, texts: Sequence[str]) -> float:
        measure = QFontMetricsF(self.font())
        return max((measure.horizontalAdvance(text) for text in texts), default=0.0)

    def _colour(self, name: str) -> QColor:
        return QColor(str(getattr(self._desk.palette, name)))

    def _told(self, words: Sequence[str]) -> None:
        self.setAccessibleDescription("; ".join(words))
        self.updateGeometry()
        self.update()

    def _write(self, painter: QPainter, frame: QRectF, text: str, colour: str = "ink", *, right: bool = False) -> None:
        side = Qt.AlignmentFlag.AlignRight if right else Qt.AlignmentFlag.AlignLeft
        painter.setPen(self._colour(colour))
        painter.drawText(frame, side | Qt.AlignmentFlag.AlignVCenter | Qt.TextFlag.TextSingleLine, text)

    def _fill(self, painter: QPainter, frame: QRectF, colour: str, hatch: Qt.BrushStyle) -> None:
        """An outlined area, hatched in its colour: told apart without the colour too."""
        painter.setPen(QPen(self._colour(colour), 1))
        painter.setBrush(QBrush(self._colour(colour), hatch))
        painter.drawRect(frame)
        painter.setBrush(Qt.BrushStyle.NoBrush)


class AskedBars(_Chart):
    """One row a bar: what was attained is filled, what was asked is a frame with a heavy end."""

    def __init__(self, desk: Desk, name: str) -> None:
        super().__init__(desk, name)
        self.bars: tuple[Bar, ...] = ()

    def show_bars(self, bars: Sequence[Bar]) -> None:
        self.bars = tuple(bars)
        self._told([f"{bar.name}: {bar.words}" for bar in self.bars])

    def sizeHint(self) -> QSize:  # noqa: N802 - Qt's own name
        return QSize(360, int(len(self.bars) * self._line * 1.5) + 4)

    def minimumSizeHint(self) -> QSize:  # noqa: N802 - Qt's own name
        return QSize(200, self.sizeHint().height())

    def paintEvent(self, _event: QPaintEvent) -> None:  # noqa: N802 - Qt's own name
        painter = QPainter(self)
        left = self._wide([bar.name for bar in self.bars]) + _GAP
        right = self._wide([bar.words for bar in self.bars]) + _GAP
        room = max(20.0, self.width() - left - right - 4)
        row = self._line * 1.5
        for at, (bar, (asked, attained)) in enumerate(zip(self.bars, bar_lengths(self.bars, room), strict=True)):
            top, high = at * row, row * 0.56
            inner = QRectF(left, top + (row - high) / 2, room, high)
            self._write(painter, QRectF(0, top, left, row), bar.name)
            painter.fillRect(inner, self._colour("shade"))
            painter.fillRect(QRectF(inner.left(), inner.top(), attained, high), self._colour("accent"))
            painter.setPen(QPen(self._colour("ink"), 2))
            end = inner.left() + asked
            painter.drawLine(QPointF(end, inner.top() - 3), QPointF(end, inner.bottom() + 3))
            self._write(painter, QRectF(inner.right() + _GAP, top, right, row), bar.words, "muted")
        painter.end()


class TwoSided(_Chart):
    """Mated rows above the line, non-mated ones below it, over similarity; a marker where a cut would fall."""

    def __init__(self, desk: Desk, name: str) -> None:
        super().__init__(desk, name)
        self.edges: tuple[float, ...] = ()
        self.mated: tuple[int, ...] = ()
        self.non_mated: tuple[int, ...] = ()
        self.marker: float | None = None

    def show_counts(
        self, edges: Sequence[float], mated: Sequence[int], non_mated: Sequence[int], marker: float | None = None
    ) -> None:
        """Rows of each bin; there is one edge more than there are bins."""
        self.edges, self.mated, self.non_mated = tuple(edges), tuple(mated), tuple(non_mated)
        self.marker = marker
        told = [f"{sum(mated):,} mated rows above the line, {sum(non_mated):,} non-mated rows below it"]
        if self.edges:
            told.append(f"similarity from {edges[0]:.2f} to {edges[-1]:.2f}")
        if marker is not None:
            told.append(f"a marker at {marker:.2f}")
        self._told(told)

    def sizeHint(self) -> QSize:  # noqa: N802 - Qt's own name
        return QSize(360, int(self._line * 11))

    def minimumSizeHint(self) -> QSize:  # noqa: N802 - Qt's own name
        return QSize(200, self.sizeHint().height())

    def paintEvent(self, _event: QPaintEvent) -> None:  # noqa: N802 - Qt's own name
        if len(self.edges) < 2:
            return
        painter = QPainter(self)
        line = self._line
        wide, middle = self.width() - 2.0, (self.height() - line) / 2
        above, below = histogram_heights(self.mated, self.non_mated, middle - line)
        step = wide / len(above)
        for at, (up, down) in enumerate(zip(above, below, strict=True)):
            if up > 0:
                self._fill(painter, QRectF(1 + at * step, middle - up, step - 1, up), "same", _MATED_HATCH)
            if down > 0:
                self._fill(painter, QRectF(1 + at * step, middle, step - 1, down), "different", _NON_MATED_HATCH)
        painter.setPen(self._colour("muted"))
        painter.drawLine(QPointF(0, middle), QPointF(self.width(), middle))
        self._write(painter, QRectF(0, 0, wide, line), "mated", "same")
        self._write(painter, QRectF(0, 2 * middle - line, wide, line), "non-mated", "different")
        foot = QRectF(0, self.height() - line, wide, line)
        self._write(painter, foot, f"{self.edges[0]:.2f}", "muted")
        self._write(painter, foot, f"{self.edges[-1]:.2f}", "muted", right=True)
        self._mark(painter, foot)
        painter.end()

    def _mark(self, painter: QPainter, foot: QRectF) -> None:
        if self.marker is None:
            return
        low, high = self.edges[0], self.edges[-1]
        x = 1 + (self.marker - low) / (high - low) * foot.width()
        painter.setPen(QPen(self._colour("ink"), 1.5, Qt.PenStyle.DashLine))
        painter.drawLine(QPointF(x, 0), QPointF(x, foot.top()))
        text = f"{self.marker:.2f}"
        half = self._wide([text]) / 2
        left = min(max(x - half, 4 * half), foot.width() - 6 * half)
        self._write(painter, QRectF(left, foot.top(), 3 * half, foot.height()), text)


class Stacks(_Chart):
    """One row a whole, its parts side by side, each with a hatch of its own and its number where it fits."""

    def __init__(self, desk: Desk, name: str, parts: Sequence[str]) -> None:
        super().__init__(desk, name)
        self.parts = tuple(parts)
        self.rows: dict[str, tuple[int, ...]] = {}

    def show_rows(self, rows: Mapping[str, Sequence[int]]) -> None:
        """Name of each whole to its parts, in the order of `parts`."""
        self.rows = {name: tuple(counts) for name, counts in rows.items()}
        self._told(
            [
                f"{name}: " + ", ".join(f"{count:,} {part}" for part, count in zip(self.parts, counts, strict=True))
                for name, counts in self.rows.items()
            ]
        )

    def sizeHint(self) -> QSize:  # noqa: N802 - Qt's own name
        return QSize(360, int((len(self.rows) + 1) * self._line * 1.5) + 4)

    def minimumSizeHint(self) -> QSize:  # noqa: N802 - Qt's own name
        return QSize(200, self.sizeHint().height())

    def paintEvent(self, _event: QPaintEvent) -> None:  # noqa: N802 - Qt's own name
        painter = QPainter(self)
        row = self._line * 1.5
        left = self._wide(list(self.rows)) + _GAP
        room = self.width() - left - 4
        x = left
        for at, part in enumerate(self.parts):
            self._fill(painter, QRectF(x, row * 0.3, row * 0.5, row * 0.4), "accent", _HATCHES[at % len(_HATCHES)])
            wide = self._wide([part])
            self._write(painter, QRectF(x + row * 0.5 + 5, 0, wide + 4, row), part, "muted")
            x += row * 0.5 + wide + 5 + 2 * _GAP
        for number, (name, counts) in enumerate(self.rows.items(), 1):
            self._write(painter, QRectF(0, number * row, left, row), name)
            for at, ((begin, end), count) in enumerate(zip(stack_spans(counts, room), counts, strict=True)):
                if count:
                    frame = QRectF(left + begin, number * row + row * 0.15, max(1.0, end - begin - 1), row * 0.7)
                    self._part(painter, frame, _HATCHES[at % len(_HATCHES)], f"{count:,}")
        painter.end()

    def _part(self, painter: QPainter, frame: QRectF, hatch: Qt.BrushStyle, text: str) -> None:
        self._fill(painter, frame, "accent", hatch)
        wide = self._wide([text])
        if wide + 8 > frame.width():
            return
        if hatch == Qt.BrushStyle.SolidPattern:
            self._write(painter, frame.translated(5, 0), text, "on_accent")
            return
        label = QRectF(frame.left() + 3, frame.top() + 1, wide + 5, frame.height() - 2)
        painter.fillRect(label, self._colour("paper"))  # letters on a hatch cannot be read
        self._write(painter, label.translated(2, 0), text)
