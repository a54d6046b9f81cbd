"""Where the parts of the window lie: drawing in the middle, sliders left, verdict right, sets above, curves below."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication, QLabel, QSplitter, QStackedWidget, QVBoxLayout, QWidget

from app.curves import CurvesPanel
from app.drawing.channel_view import ChannelView
from app.look import SPACING
from app.panels.compare import ComparePanel
from app.panels.sets import SetsPanel
from app.panels.sliders import SlidersPanel
from app.panels.verdict import VerdictPanel

if TYPE_CHECKING:
    from PySide6.QtGui import QAction

    from app.document import Document
    from app.look import Palette
    from app.settings import Settings


class Arrangement(QSplitter):
    """Makes the parts and puts them in their places; the window connects them.

    Parameters
    ----------
    document : Document
        What the parts show.
    settings : Settings
        Units, and the sizes that the user has given the parts.
    palette : Palette
        Colours to begin with.
    set_buttons : tuple of QAction
        Shown as buttons beside the row of sets.
    """

    def __init__(
        self, document: Document, *, settings: Settings, palette: Palette, set_buttons: tuple[QAction, ...]
    ) -> None:
        super().__init__(Qt.Orientation.Horizontal)
        self._settings = settings
        self.sets = SetsPanel(document, palette, set_buttons)
        self.sliders = SlidersPanel(document, settings)
        self.verdict = VerdictPanel(document, settings)
        self.drawing = ChannelView()
        self.comparison = ComparePanel(document, settings, palette)
        self.curves = CurvesPanel()
        self.no_curves = QLabel("No curves while there is no score.")
        self.no_curves.setAlignment(Qt.AlignmentFlag.AlignCenter)
        self.middle = _stacked(self.drawing, self.comparison)
        self.below = _stacked(self.curves, self.no_curves)
        self.upright = QSplitter(Qt.Orientation.Vertical)
        self._place()
        self._restore()
        self.use_palette(palette)

    def _place(self) -> None:
        for part, stretch, size in ((self.middle, 2, 500), (self.below, 1, 230)):
            self.upright.addWidget(part)
            self.upright.setStretchFactor(self.upright.count() - 1, stretch)
            part.resize(part.width(), size)
        self.upright.setSizes([500, 230])
        self.upright.setChildrenCollapsible(False)
        centre = QWidget()
        layout = QVBoxLayout(centre)
        layout.setContentsMargins(0, SPACING.small, 0, SPACING.small)
        layout.setSpacing(SPACING.small)
        layout.addWidget(self.sets)
        layout.addWidget(self.upright, 1)
        for column, stretch in ((self.sliders, 0), (centre, 1), (self.verdict, 0)):
            self.addWidget(column)
            self.setStretchFactor(self.count() - 1, stretch)
        self.setChildrenCollapsible(False)

    def use_palette(self, palette: Palette) -> None:
        """Paint everything that paints for itself in other colours."""
        for part in (self.drawing, self.curves, self.comparison, self.sets):
            part.use_palette(palette)

    def show_comparison(self, is_wanted: bool) -> None:
        """Show the comparison in place of the drawing, or the drawing again."""
        self.middle.setCurrentWidget(self.comparison if is_wanted else self.drawing)

    def show_curves(self, is_wanted: bool) -> None:
        """Show the curves, or say that there are none."""
        self.below.setCurrentWidget(self.curves if is_wanted else self.no_curves)

    def go_to_part(self, step: int) -> None:
        """Give the focus to the next or the previous part that can be seen."""
        first_row = next(iter(self.sliders.editors.values()))
        parts: tuple[tuple[QWidget, QWidget | None], ...] = (
            (self.sliders, first_row.name_label.buddy()),
            (self.sets, self.sets.view),
            (self.middle, self.comparison.table if self.comparison.isVisible() else self.drawing),
            (self.below, self.curves.pressure_plot),
            (self.verdict, self.verdict.findings.list),
        )
        focus = QApplication.focusWidget()
        here = next((i for i, (part, _) in enumerate(parts) if focus and part.isAncestorOf(focus)), -step)
        for distance in range(1, len(parts) + 1):
            target = parts[(here + step * distance) % len(parts)][1]
            if target is not None and target.isVisible():
                target.setFocus(Qt.FocusReason.ShortcutFocusReason)
                return

    def remember(self) -> None:
        """Keep the sizes that the user has given the parts."""
        self._settings.set_arrangement("across", self.saveState())
        self._settings.set_arrangement("upright", self.upright.saveState())

    def _restore(self) -> None:
        for splitter, name in ((self, "across"), (self.upright, "upright")):
            if (state := self._settings.arrangement(name)) is not None:
                splitter.restoreState(state)


def _stacked(*pages: QWidget) -> QStackedWidget:
    stack = QStackedWidget()
    for page in pages:
        stack.addWidget(page)
    return stack
