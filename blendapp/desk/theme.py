"""The look of the desk: one set of tokens for light and one for dark, two text sizes, one accent.

The accent means "working wall" and nothing else. What paints asks `tokens()` while it paints: they follow the
application's palette, so that no object has to be handed round and a change of scheme repaints by itself.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from string import Template

from PySide6.QtCore import Qt
from PySide6.QtGui import QColor, QFont, QFontDatabase, QGuiApplication, QPalette
from PySide6.QtWidgets import QApplication

_FONTS = Path(__file__).resolve().parent.parent / "fonts"
_FAMILY = "IBM Plex Sans"

TEXT_PX = 13
LARGE_PX = 22
ROW_PX = 32
GAP_PX = 8
MARGIN_PX = 24


@dataclass(frozen=True)
class Tokens:
    """Colours as #rrggbb. ground: the paper; raised: header, footer and fields; text, quiet: the two inks;
    hairline: rules; band, room: permitted stretch and room left; chosen: selected cells; accent: working walls.
    """

    ground: str
    raised: str
    text: str
    quiet: str
    hairline: str
    band: str
    room: str
    chosen: str
    accent: str
    dark: bool

    def colour(self, name: str) -> QColor:
        """The colour of a token by its name."""
        return _colour(getattr(self, name))


LIGHT = Tokens(
    ground="#fcfbf7", raised="#ffffff", text="#171a1b", quiet="#63686a", hairline="#dcdad3",
    band="#cbd4ce", room="#d9dfd9", chosen="#ecebe4", accent="#b23f16", dark=False,
)
DARK = Tokens(
    ground="#17191a", raised="#1d2022", text="#eceded", quiet="#9ba0a2", hairline="#33383a",
    band="#445049", room="#353d39", chosen="#282d2f", accent="#f2894d", dark=True,
)

_cache: dict[str, QColor] = {}


def _colour(code: str) -> QColor:
    found = _cache.get(code)
    if found is None:
        found = _cache[code] = QColor(code)
    return found


def tokens() -> Tokens:
    """The tokens of the scheme in use."""
    return DARK if QGuiApplication.palette().color(QPalette.ColorRole.Window).lightness() < 128 else LIGHT


def load_fonts() -> None:
    """Make the program's own faces known to Qt; a face that cannot be read leaves the system's in use."""
    for face in ("Regular", "SemiBold", "Italic"):
        QFontDatabase.addApplicationFont(str(_FONTS / f"IBMPlexSans-{face}.ttf"))


def text_font(*, strong: bool = False, italic: bool = False) -> QFont:
    """The font of all text but the two large figures."""
    return _font(TEXT_PX, strong, italic)


def large_font() -> QFont:
    """The font of the formula's name and the cost."""
    return _font(LARGE_PX, True, False)


def _font(pixels: int, strong: bool, italic: bool) -> QFont:
    font = QFont(_FAMILY)
    font.setPixelSize(pixels)
    font.setWeight(QFont.Weight.DemiBold if strong else QFont.Weight.Normal)
    font.setItalic(italic)
    return font


def system_is_dark() -> bool:
    """Whether the person's desktop asks for a dark scheme."""
    return QGuiApplication.styleHints().colorScheme() == Qt.ColorScheme.Dark


def dress(app: QApplication, *, dark: bool | None = None) -> None:
    """Give the program its style, palette and font. dark: None follows the system, now and when it changes."""
    if app.style().objectName() != "fusion":
        app.setStyle("Fusion")
    app.setFont(text_font())
    _paint(app, system_is_dark() if dark is None else dark)
    app.setProperty("follows_system", dark is None)


def follow_system(app: QApplication) -> None:
    """From now on take over each change of the desktop's scheme, unless a scheme has been set by hand."""

    def changed() -> None:
        if app.property("follows_system"):
            _paint(app, system_is_dark())

    QGuiApplication.styleHints().colorSchemeChanged.connect(changed)


def _paint(app: QApplication, dark: bool) -> None:
    look = DARK if dark else LIGHT
    app.setPalette(palette_of(look))
    app.setStyleSheet(sheet_of(look))


def palette_of(look: Tokens) -> QPalette:
    """The Qt palette of a scheme."""
    role = QPalette.ColorRole
    palette = QPalette()
    for name, roles in {
        "ground": (role.Window, role.Base, role.AlternateBase),
        "raised": (role.Button, role.ToolTipBase, role.Light),
        "text": (role.WindowText, role.Text, role.ButtonText, role.ToolTipText, role.HighlightedText,
                 role.BrightText, role.Link, role.LinkVisited),
        "quiet": (role.PlaceholderText,),
        "hairline": (role.Mid, role.Midlight, role.Dark, role.Shadow),
        "chosen": (role.Highlight,),
    }.items():
        for one in roles:
            palette.setColor(one, look.colour(name))
    for one in (role.WindowText, role.Text, role.ButtonText):
        palette.setColor(QPalette.ColorGroup.Disabled, one, look.colour("quiet"))
    return palette


def sheet_of(look: Tokens) -> str:
    """The style sheet of a scheme: only what the palette cannot say."""
    return Template(_SHEET).substitute(vars(look))


_SHEET = """
#header, #footer { background: $raised; }
#strip { background: $ground; }
#quiet { color: $quiet; }
QAbstractScrollArea { border: 0; background: $ground; }
QAbstractItemView { selection-background-color: $chosen; selection-color: $text; outline: 0; }
QTableView { selection-background-color: transparent; }
QHeaderView { background: $ground; border: 0; }
QHeaderView::section { background: $ground; color: $quiet; border: 0; padding: 0 6px; }
QTableCornerButton::section { background: $ground; border: 0; }
QLineEdit, QComboBox, QDoubleSpinBox, QPlainTextEdit { background: $raised; border: 1px solid $hairline;
  border-radius: 4px; padding: 4px 8px; selection-background-color: $chosen; selection-color: $text; }
QLineEdit:focus, QComboBox:focus, QPlainTextEdit:focus { border: 1px solid $text; }
QLineEdit#cell { border: 1px solid $text; border-radius: 0; padding: 0 5px; }
QComboBox { padding-left: 10px; }
QComboBox::drop-down { border: 0; width: 22px; }
QComboBox::down-arrow { image: none; }
QPushButton, QToolButton { background: transparent; color: $text; border: 1px solid transparent;
  border-radius: 4px; padding: 4px 8px; }
QPushButton:hover, QToolButton:hover { background: $chosen; }
QPushButton:focus, QToolButton:focus { border: 1px solid $text; }
QPushButton:disabled, QToolButton:disabled { color: $quiet; }
QPushButton#plain { border: 1px solid $hairline; }
QPushButton#plain:hover, QPushButton#plain:focus { border: 1px solid $text; }
QPushButton#first { background: $text; color: $ground; font-weight: 600; }
QPushButton#first:disabled { background: $hairline; color: $quiet; }
QPushButton#first:focus { border: 2px solid $quiet; }
QPushButton#left { text-align: left; padding: 4px 0; }
QPushButton#set, QPushButton#order { color: $quiet; padding: 4px 6px; }
QPushButton#set:checked { color: $text; border-bottom: 1px solid $text; border-radius: 0; }
QPushButton#standing { color: $quiet; text-align: left; padding: 4px 6px; }
QLabel#page { background: #ffffff; border: 1px solid $hairline; }
QListView#found { background: $raised; }
QListView#offered { background: $raised; border: 1px solid $quiet; }
QListView#offered::item { padding: 0 8px; }
QCheckBox { spacing: 8px; padding: 3px 6px; border: 1px solid transparent; border-radius: 4px; }
QCheckBox::indicator { width: 13px; height: 13px; border: 1px solid $quiet; border-radius: 3px; background: $raised; }
QCheckBox::indicator:hover, QCheckBox::indicator:focus { border: 1px solid $text; }
QCheckBox::indicator:checked { background: $text; border: 1px solid $text; }
QCheckBox::indicator:checked:disabled { background: $quiet; border: 1px solid $quiet; }
QCheckBox:focus { border: 1px solid $text; }
QToolButton#quiet { color: $quiet; }
QToolButton::menu-indicator { image: none; }
QMenu { background: $raised; border: 1px solid $hairline; padding: 6px 0; }
QMenu::item { padding: 6px 28px 6px 16px; }
QMenu::item:selected { background: $chosen; }
QMenu::item:disabled { color: $quiet; }
QMenu::separator { height: 1px; background: $hairline; margin: 6px 0; }
QToolTip { background: $raised; color: $text; border: 1px solid $hairline; padding: 6px 8px; }
QScrollBar:vertical { background: transparent; width: 10px; margin: 0; }
QScrollBar:horizontal { background: transparent; height: 10px; margin: 0; }
QScrollBar::handle { background: $hairline; border-radius: 3px; margin: 2px; min-height: 24px; min-width: 24px; }
QScrollBar::handle:hover { background: $quiet; }
QAbstractScrollArea::corner { background: transparent; border: 0; }
QScrollBar::add-line, QScrollBar::sub-line { width: 0; height: 0; }
QScrollBar::add-page, QScrollBar::sub-page { background: transparent; }
QSplitter::handle { background: $hairline; }
QProgressBar { background: $hairline; border: 0; border-radius: 2px; max-height: 4px; }
QProgressBar::chunk { background: $quiet; border-radius: 2px; }
"""
