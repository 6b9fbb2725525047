"""The look of the window: the palette of the system's scheme, fonts from the system's size, one sheet of style."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtGui import QColor, QFont, QFontDatabase, QGuiApplication, QPalette
from PySide6.QtWidgets import QApplication

from curator.desktop.palette import DARK, LIGHT, Palette

_SERIFS = ("Charter", "Source Serif 4", "Noto Serif", "Georgia", "DejaVu Serif")


def present_palette() -> Palette:
    """The palette for the system's light or dark scheme."""
    return DARK if QGuiApplication.styleHints().colorScheme() == Qt.ColorScheme.Dark else LIGHT


def serif(scale: float, *, italic: bool = False) -> QFont:
    """The window's second voice, for titles and advice, at `scale` times the system's text size."""
    families = set(QFontDatabase.families())
    font = QFont(QApplication.font())
    font.setFamilies([name for name in _SERIFS if name in families] or ["serif"])
    font.setStyleHint(QFont.StyleHint.Serif)
    font.setPointSizeF(QApplication.font().pointSizeF() * scale)
    font.setItalic(italic)
    return font


def apply(application: QApplication, palette: Palette) -> None:
    """Dress the application."""
    application.setStyle("Fusion")
    application.setPalette(_qt_palette(palette))
    application.setStyleSheet(_sheet(palette))


def _qt_palette(p: Palette) -> QPalette:
    qt = QPalette()
    roles = QPalette.ColorRole
    for role, colour in (
        (roles.Window, p.paper),
        (roles.WindowText, p.ink),
        (roles.Base, p.leaf),
        (roles.AlternateBase, p.paper),
        (roles.Text, p.ink),
        (roles.Button, p.leaf),
        (roles.ButtonText, p.ink),
        (roles.PlaceholderText, p.muted),
        (roles.ToolTipBase, p.leaf),
        (roles.ToolTipText, p.ink),
        (roles.Highlight, p.accent),
        (roles.HighlightedText, p.on_accent),
        (roles.Link, p.accent),
        (roles.Mid, p.line),
    ):
        qt.setColor(role, QColor(colour))
    for role in (roles.Text, roles.ButtonText, roles.WindowText):
        qt.setColor(QPalette.ColorGroup.Disabled, role, QColor(p.muted))
    return qt


def _sheet(p: Palette) -> str:
    return f"""
    QWidget {{ color: {p.ink}; }}
    QMainWindow, QStackedWidget, QScrollArea, QScrollArea > QWidget > QWidget {{ background: {p.paper}; }}
    QToolTip {{ background: {p.leaf}; color: {p.ink}; border: 1px solid {p.line}; padding: 4px; }}
    QLabel[voice="muted"] {{ color: {p.muted}; }}
    QLabel[voice="warn"] {{ color: {p.warn}; }}
    QLabel[voice="same"] {{ color: {p.same}; }}
    QLabel[voice="different"] {{ color: {p.different}; }}
    QPushButton, QToolButton {{
        background: transparent; border: 1px solid transparent; border-radius: 6px; padding: 5px 10px;
    }}
    QPushButton {{ background: {p.leaf}; border-color: {p.line}; }}
    QPushButton:hover, QToolButton:hover {{ background: {p.shade}; }}
    QPushButton:focus, QToolButton:focus {{ border: 1px solid {p.accent}; }}
    QPushButton:disabled, QToolButton:disabled {{ color: {p.muted}; border-color: transparent; }}
    QPushButton[weight="main"] {{ background: {p.accent}; color: {p.on_accent}; border-color: {p.accent}; }}
    QPushButton[weight="main"]:disabled {{ background: {p.shade}; color: {p.muted}; border-color: {p.shade}; }}
    QPushButton[voice="same"] {{ color: {p.same}; }}
    QPushButton[voice="different"] {{ color: {p.different}; }}
    QPushButton:checked, QToolButton:checked {{ background: {p.shade}; border-color: {p.accent}; }}
    QLineEdit, QPlainTextEdit, QTextEdit, QListView, QTreeView, QTableView {{
        background: {p.leaf}; border: 1px solid {p.line}; border-radius: 6px; padding: 3px 6px;
        selection-background-color: {p.accent}; selection-color: {p.on_accent};
    }}
    QLineEdit:focus, QPlainTextEdit:focus, QListView:focus, QTreeView:focus, QTableView:focus {{
        border-color: {p.accent};
    }}
    QListView, QTreeView, QTableView {{ outline: 0; }}
    QListView::item, QTreeView::item, QTableView::item {{ padding: 4px 6px; }}
    QListView::item:hover, QTreeView::item:hover {{ background: {p.shade}; }}
    QListView::item:selected, QTreeView::item:selected, QTableView::item:selected {{
        background: {p.accent}; color: {p.on_accent};
    }}
    QHeaderView::section {{
        background: {p.paper}; color: {p.muted}; border: 0; border-bottom: 1px solid {p.line}; padding: 4px 6px;
    }}
    QSplitter::handle {{ background: transparent; }}
    QScrollBar {{ background: transparent; border: 0; }}
    QScrollBar:vertical {{ width: 12px; }}
    QScrollBar:horizontal {{ height: 12px; }}
    QScrollBar::handle {{ background: {p.line}; border-radius: 4px; margin: 2px; min-height: 28px; min-width: 28px; }}
    QScrollBar::handle:hover {{ background: {p.muted}; }}
    QScrollBar::add-line, QScrollBar::sub-line {{ width: 0; height: 0; }}
    QScrollBar::add-page, QScrollBar::sub-page {{ background: transparent; }}
    QProgressBar {{ background: {p.shade}; border: 0; border-radius: 4px; max-height: 8px; }}
    QProgressBar::chunk {{ background: {p.accent}; border-radius: 4px; }}
    QSlider::groove:horizontal {{ height: 4px; background: {p.shade}; border-radius: 2px; }}
    QSlider::handle:horizontal {{
        background: {p.accent}; width: 14px; height: 14px; margin: -5px 0; border-radius: 7px;
    }}
    #header {{ background: {p.paper}; border-bottom: 1px solid {p.line}; }}
    #foot {{ background: {p.paper}; border-top: 1px solid {p.line}; }}
    QToolButton#place {{ padding: 8px 10px; border-radius: 0; border: 0; border-bottom: 3px solid transparent; }}
    QToolButton#place:hover {{ background: {p.shade}; }}
    QToolButton#place:focus {{ border-bottom: 3px solid {p.muted}; }}
    QToolButton#place:checked {{ background: transparent; border-bottom: 3px solid {p.accent}; }}
    """
