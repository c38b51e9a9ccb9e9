"""How the standard controls look: one style sheet, in which @names stand for the tokens of tokens.py.

Controls are told apart by object names and by the dynamic property `look`; nothing else in the window sets a style sheet.
"""

SHEET = """
QWidget { color: @ink; }
QMainWindow, QDialog, QWidget#ground { background: @ground; }
QWidget#rail { background: @rail; border-right: 1px solid @hairline; }
QFrame#card { background: @surface; border: 1px solid @hairline; border-radius: 8px; }
QLabel { background: transparent; }
QLabel[look="title"] { font-size: @size_title; font-weight: 600; }
QLabel[look="heading"] { font-size: @size_heading; font-weight: 600; }
QLabel[look="soft"] { color: @soft; }
QLabel[look="small"] { color: @soft; font-size: @size_small; }
QLabel[look="caption"] { color: @soft; font-size: @size_small; font-weight: 600; }
QLabel[look="strong"] { font-weight: 600; }
QLabel[look="differ"] { color: @differ; font-weight: 600; }

QPushButton, QToolButton[look="choice"] {
    background: @surface; border: 1px solid @outline; border-radius: @radius; padding: 5px 14px; min-height: 20px;
}
QPushButton:hover, QToolButton[look="choice"]:hover { background: @raised; border-color: @soft; }
QPushButton:focus, QToolButton[look="choice"]:focus { border: 2px solid @accent; padding: 4px 13px; }
QPushButton:disabled { color: @faint; border-color: @hairline; }
QPushButton[look="main"] { background: @accent; color: @on_accent; border: 1px solid @accent; font-weight: 600; }
QPushButton[look="main"]:hover { background: @accent_strong; border-color: @accent_strong; }
QPushButton[look="main"]:focus { border: 2px solid @ink; }
QPushButton[look="main"]:disabled { background: @hairline; color: @faint; border-color: @hairline; }
QPushButton[look="plain"] { background: transparent; border: 1px solid transparent; color: @accent; padding: 3px 8px; }
QPushButton[look="plain"]:hover { background: @wash; }
QPushButton[look="plain"]:focus { border: 1px solid @accent; }
QToolButton[look="choice"] { padding: 3px 10px; min-height: 18px; color: @soft; font-size: @size_small; }
QToolButton[look="choice"]:focus { padding: 2px 9px; }
QToolButton[look="choice"][on="true"] { color: @accent; border-color: @accent; background: @wash; font-weight: 600; }
QToolButton[look="choice"]::menu-indicator, QToolButton[look="bare"]::menu-indicator { image: none; width: 0; }
QToolButton[look="bare"] { background: transparent; border: 1px solid transparent; border-radius: @radius; padding: 4px; }
QToolButton[look="bare"]:hover { background: @wash; }
QToolButton[look="bare"]:focus { border: 1px solid @accent; }

QLineEdit, QComboBox, QAbstractSpinBox, QPlainTextEdit {
    background: @surface; border: 1px solid @outline; border-radius: @radius; padding: 5px 10px; min-height: 20px;
    selection-background-color: @accent; selection-color: @on_accent;
}
QLineEdit:focus, QComboBox:focus, QAbstractSpinBox:focus, QPlainTextEdit:focus { border: 2px solid @accent; padding: 4px 9px; }
QLineEdit#search { border-radius: 16px; padding: 5px 14px; }
QLineEdit#search:focus { padding: 4px 13px; }
QAbstractSpinBox::up-button, QAbstractSpinBox::down-button { width: 0; border: none; }
QAbstractSpinBox QLineEdit { border: none; padding: 0 10px; background: transparent; min-height: 0; }
QComboBox::drop-down { border: none; width: 26px; }
QComboBox::down-arrow { image: url("@icons/down.svg"); width: 14px; height: 14px; }
QComboBox QAbstractItemView { background: @surface; border: 1px solid @outline; selection-background-color: @wash;
    selection-color: @ink; outline: none; padding: 4px; }
QCheckBox { background: transparent; spacing: 8px; }
QCheckBox:focus { color: @accent; }

QMenu { background: @surface; border: 1px solid @outline; border-radius: @radius; padding: 6px; }
QMenu::item { padding: 6px 36px 6px 12px; border-radius: 4px; }
QMenu::item:selected { background: @wash; color: @ink; }
QMenu::item:disabled { color: @faint; }
QMenu::separator { height: 1px; background: @hairline; margin: 6px 8px; }
QMenu::indicator { width: 14px; height: 14px; left: 6px; }
QToolTip { background: @raised; color: @ink; border: 1px solid @outline; padding: 4px 6px; }

QTableView { background: @surface; border: none; outline: none; selection-background-color: transparent; selection-color: @ink; }
QTableView#framed { border: 1px solid @hairline; border-radius: 8px; }
QHeaderView { background: @surface; border: none; }
QHeaderView::section { background: @surface; border: none; }
QTableCornerButton::section { background: @surface; border: none; }
QScrollArea { background: transparent; border: none; }
QScrollArea > QWidget > QWidget#scrolled { background: transparent; }

QTabBar { background: transparent; border: none; qproperty-drawBase: 0; }
QTabBar::tab { background: transparent; border: none; border-bottom: 2px solid transparent; padding: 7px 2px 6px 2px; margin-right: 26px;
    color: @soft; }
QTabBar::tab:selected { color: @accent; border-bottom-color: @accent; font-weight: 600; }
QTabBar::tab:hover { color: @ink; }
QTabBar::tab:focus { color: @ink; border-bottom-color: @ink; }

QSplitter::handle { background: transparent; }
QSplitter::handle:hover { background: @outline; border-radius: 2px; }
QProgressBar { background: @hairline; border: none; border-radius: 3px; max-height: 6px; min-height: 6px; }
QProgressBar::chunk { background: @accent; border-radius: 3px; }

QAbstractScrollArea::corner { background: transparent; border: none; }
QScrollBar:vertical { background: transparent; width: 12px; margin: 2px; }
QScrollBar:horizontal { background: transparent; height: 12px; margin: 2px; }
QScrollBar::handle { background: @outline; border-radius: 4px; min-height: 32px; min-width: 32px; }
QScrollBar::handle:hover { background: @soft; }
QScrollBar::add-line, QScrollBar::sub-line { width: 0; height: 0; }
QScrollBar::add-page, QScrollBar::sub-page { background: transparent; }

QFrame#banner { background: @day_wash; border-radius: 8px; }
QFrame#banner QLabel { color: @ink; }
QFrame#banner[look="differ"] { background: @differ_wash; }
QFrame#banner[look="proved"] { background: @proved_wash; }
QFrame#notice { background: @proved_wash; border-radius: 8px; }
QFrame#notice QLabel#told { color: @proved; font-weight: 600; }
QFrame#notice[look="differ"] { background: @differ_wash; }
QFrame#notice[look="differ"] QLabel#told { color: @differ; }
QFrame#notice[look="silent"] { background: @silent_wash; }
QFrame#notice[look="silent"] QLabel#told { color: @silent; }
QFrame#notice[look="day"] { background: @day_wash; }
QFrame#notice[look="day"] QLabel#told { color: @day; }
QFrame#rule { background: @hairline; max-height: 1px; min-height: 1px; border: none; }
"""
