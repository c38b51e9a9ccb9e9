"""Light and dark are one set of names with two sets of colours; this puts the chosen set on the whole program.

`Theme` follows the system until the user chooses; what she chose is remembered by the main window. Widgets that paint
themselves read `theme().colour(name)` each time they paint and repaint on `changed`. The style sheet is one text with the
tokens filled in. Not done: per-widget style sheets, fonts of our own (the best font present is used, with figures of one width).
"""

from __future__ import annotations

import functools

from PySide6.QtCore import QObject, QSize, Qt, Signal
from PySide6.QtGui import QColor, QFont, QFontDatabase, QGuiApplication, QIcon, QPainter, QPalette, QPixmap
from PySide6.QtWidgets import QApplication

from reconciler import resources
from reconciler.window import tokens

CHOICES = ("system", "light", "dark")


class Theme(QObject):
    """The palette in use. There is one per program: `theme()`."""

    changed = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.choice = "system"
        self.palette = tokens.LIGHT
        self._colours: dict[str, QColor] = {}
        self._family = ""

    def start(self, choice: str = "system") -> None:
        """Takes over the application's look and begins to follow the system."""
        hints = QGuiApplication.styleHints()
        hints.colorSchemeChanged.connect(self._system_changed)
        QApplication.setStyle("Fusion")
        self.choose(choice)

    def choose(self, choice: str) -> None:
        """Follows the "system", or keeps to "light" or "dark"."""
        self.choice = choice if choice in CHOICES else "system"
        self._apply()

    def colour(self, name: str) -> QColor:
        """A token's colour."""
        found = self._colours.get(name)
        if found is None:
            found = self._colours[name] = QColor(getattr(self.palette, name))
        return found

    def font(self, size: str = "body", weight: QFont.Weight = QFont.Weight.Normal) -> QFont:
        """The program's font in a size of tokens.TYPE, with figures of one width."""
        return _font(self.family(), tokens.TYPE[size], int(weight))

    def family(self) -> str:
        """The first font of tokens.FONT_FAMILIES that is present."""
        if not self._family:
            present = set(QFontDatabase.families())
            system = QFontDatabase.systemFont(QFontDatabase.SystemFont.GeneralFont).family()
            self._family = next((name for name in tokens.FONT_FAMILIES if name in present), system)
        return self._family

    def _system_changed(self) -> None:
        if self.choice == "system":
            self._apply()

    def _apply(self) -> None:
        dark = QGuiApplication.styleHints().colorScheme() == Qt.ColorScheme.Dark
        name = self.choice if self.choice != "system" else "dark" if dark else "light"
        self.palette = tokens.PALETTES[name]
        self._colours.clear()
        _icon.cache_clear()
        application = QApplication.instance()
        assert isinstance(application, QApplication)
        application.setFont(self.font())
        application.setPalette(_qt_palette(self.palette))
        application.setStyleSheet(style_sheet(self.palette))
        self.changed.emit()


@functools.cache
def theme() -> Theme:
    """The program's theme."""
    return Theme()


@functools.cache
def _font(family: str, pixels: int, weight: int) -> QFont:
    font = QFont(family)
    font.setPixelSize(pixels)
    font.setWeight(QFont.Weight(weight))
    font.setFeature(QFont.Tag("tnum"), 1)
    return font


MEDIUM, SEMIBOLD = QFont.Weight.Medium, QFont.Weight.DemiBold


def icon(name: str, colour: str = "soft", size: int = 16) -> QIcon:
    """One of our drawings in resources/icons, in a token's colour."""
    return _icon(name, colour, size)


@functools.cache
def _icon(name: str, colour: str, size: int) -> QIcon:
    from PySide6.QtSvg import QSvgRenderer

    path = resources.folder() / "icons" / f"{name}.svg"
    drawing = path.read_text(encoding="utf-8").replace("currentColor", theme().colour(colour).name())
    renderer = QSvgRenderer(drawing.encode())
    made = QIcon()
    for scale in (1, 2, 3):
        picture = QPixmap(QSize(size, size) * scale)
        picture.fill(Qt.GlobalColor.transparent)
        painter = QPainter(picture)
        renderer.render(painter)
        painter.end()
        picture.setDevicePixelRatio(scale)
        made.addPixmap(picture)
    return made


def _qt_palette(colours: tokens.Palette) -> QPalette:
    role = QPalette.ColorRole
    palette = QPalette()
    pairs = {
        role.Window: colours.ground, role.WindowText: colours.ink, role.Base: colours.surface,
        role.AlternateBase: colours.raised, role.Text: colours.ink, role.Button: colours.surface,
        role.ButtonText: colours.ink, role.ToolTipBase: colours.raised, role.ToolTipText: colours.ink,
        role.PlaceholderText: colours.faint, role.Highlight: colours.accent, role.HighlightedText: colours.on_accent,
        role.Link: colours.accent, role.Accent: colours.accent,
    }  # fmt: skip
    for which, colour in pairs.items():
        palette.setColor(which, QColor(colour))
    for which in (role.Text, role.ButtonText, role.WindowText):
        palette.setColor(QPalette.ColorGroup.Disabled, which, QColor(colours.faint))
    return palette


def style_sheet(colours: tokens.Palette) -> str:
    """The style sheet of every standard control, with the tokens filled in."""
    from reconciler.window.stylesheet import SHEET

    text = SHEET
    values = {**colours.__dict__, **{f"size_{n}": f"{v}px" for n, v in tokens.TYPE.items()}, "radius": f"{tokens.RADIUS}px",
              "icons": (resources.folder() / "icons").as_posix()}  # fmt: skip
    # longest names first, so that @differ does not eat the beginning of @differ_wash
    for name in sorted(values, key=len, reverse=True):
        text = text.replace(f"@{name}", str(values[name]))
    return text
