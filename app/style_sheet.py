"""The style sheet of the application; names with $ are colours and distances of ``look``."""

from __future__ import annotations

from string import Template

SHEET = Template("""
QToolTip { background: $ink; color: $panel; border: none; padding: $small; }
QMenuBar { background: $ground; padding: 2px $small; }
QMenuBar::item { padding: $hair $small; border-radius: $corner; background: transparent; }
QMenuBar::item:selected { background: $selection; color: $on_selection; }
QMenu { background: $panel; border: 1px solid $rule; padding: $hair; }
QMenu::item { padding: $hair 24px; border-radius: $corner; }
QMenu::item:selected { background: $selection; color: $on_selection; }
QMenu::item:disabled { color: $pale_edge; }
QMenu::separator { height: 1px; background: $rule; margin: $hair $small; }
QStatusBar { background: $ground; color: $ink_soft; }
QStatusBar::item { border: none; }
QSplitter::handle { background: $ground; }
QSplitter::handle:hover { background: $accent; }
QToolBar { background: $ground; border: none; spacing: $hair; padding: $hair; }
QFrame[panel="true"] { background: $panel; border: 1px solid $rule; border-radius: $corner; }
QPushButton, QToolButton {
    background: $panel; color: $ink; border: 1px solid $rule; border-radius: $corner; padding: $hair $medium;
    min-height: 20px;
}
QToolButton { padding: $hair $small; }
QPushButton:hover, QToolButton:hover { border-color: $ink_soft; }
QPushButton:pressed, QToolButton:pressed, QToolButton:checked, QPushButton:checked {
    background: $selection; color: $on_selection; border-color: $accent;
}
QPushButton:focus, QToolButton:focus { border: 2px solid $accent; padding: 2px 11px; }
QToolButton:focus { padding: 2px 5px; }
QToolButton[low="true"], QToolButton[low="true"]:focus { min-height: 0; padding: 0; }
QPushButton:default { background: $accent; color: $on_accent; border-color: $accent; }
QPushButton:disabled, QToolButton:disabled { color: $pale_edge; background: $ground; }
QSlider::groove:horizontal { height: 3px; background: $rule; border-radius: 1px; }
QSlider::sub-page:horizontal { background: $ink_soft; border-radius: 1px; }
QSlider::handle:horizontal {
    width: 9px; height: 18px; margin: -8px 0; background: $panel; border: 2px solid $ink_soft; border-radius: $corner;
}
QSlider::handle:horizontal:hover { border-color: $accent; }
QSlider:focus::handle:horizontal, QSlider::handle:horizontal:pressed { background: $accent; border-color: $accent; }
QSlider::handle:horizontal:disabled { border-color: $rule; }
QLineEdit, QPlainTextEdit, QAbstractSpinBox {
    background: $field; color: $ink; border: 1px solid $rule; border-radius: $corner; padding: 1px 6px;
    min-height: 20px;
}
QLineEdit:focus, QPlainTextEdit:focus, QAbstractSpinBox:focus { border-color: $accent; }
QLineEdit:disabled, QPlainTextEdit:disabled, QAbstractSpinBox:disabled { color: $pale_edge; }
QCheckBox::indicator, QRadioButton::indicator, QAbstractItemView::indicator {
    width: 11px; height: 11px; background: $field; border: 1px solid $ink_soft; border-radius: 2px;
}
QRadioButton::indicator { border-radius: 6px; }
QCheckBox::indicator:hover, QRadioButton::indicator:hover { border-color: $accent; }
QCheckBox::indicator:checked, QAbstractItemView::indicator:checked { background: $accent; border-color: $accent; }
QRadioButton::indicator:checked { width: 5px; height: 5px; border: 4px solid $accent; }
QCheckBox::indicator:disabled, QRadioButton::indicator:disabled { border-color: $rule; }
QCheckBox:focus, QRadioButton:focus { color: $accent; }
QTabBar::tab {
    background: transparent; color: $ink_soft; padding: $small $medium; border-bottom: 3px solid transparent;
}
QTabBar::tab:selected { color: $ink; border-bottom: 3px solid $accent; }
QTabBar::tab:hover { color: $ink; }
QTabBar::tab:focus { color: $accent; }
QTabWidget::pane { border: none; border-top: 1px solid $rule; }
QHeaderView::section {
    background: $panel; color: $ink_soft; border: none; border-bottom: 1px solid $rule; padding: $hair $small;
}
QAbstractItemView { background: $field; border: 1px solid $rule; outline: none; }
QAbstractItemView::item:selected { background: $selection; color: $on_selection; }
QAbstractItemView:focus { border: 1px solid $accent; }
QScrollArea { border: none; background: transparent; }
QScrollBar:vertical { width: 11px; background: transparent; margin: 0; }
QScrollBar:horizontal { height: 11px; background: transparent; margin: 0; }
QScrollBar::handle { background: $rule; border-radius: $corner; margin: 2px; min-height: 24px; min-width: 24px; }
QScrollBar::handle:hover { background: $ink_soft; }
QScrollBar::add-line, QScrollBar::sub-line { width: 0; height: 0; }
QScrollBar::add-page, QScrollBar::sub-page { background: transparent; }
""")
