"""Where the parts of the window lie: drawing in the middle, sliders left, verdict right, sets above, curves below."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QApplication, QLabel, QSplitter, QStackedWidget, QTabWidget, QVBoxLayout, QWidget

from app.curves import CurvesPanel
from app.drawing.channel_view import ChannelView
from app.drawing.chip_view import ChipView
from app.look import SPACING
from app.panels.chip import ChipPanel
from app.panels.chip_places import PlacesPanel
from app.panels.compare import ComparePanel
from app.panels.process import ProcessPanel
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
    place_buttons : tuple of QAction
        Shown as buttons beside the table of what is placed on the chip.

    Signals
    -------
    page_changed()
        Another page of the left column is open; that of the chip brings its drawing and its table.
    """

    page_changed = Signal()

    def __init__(
        self,
        document: Document,
        *,
        settings: Settings,
        palette: Palette,
        set_buttons: tuple[QAction, ...],
        place_buttons: tuple[QAction, ...],
    ) -> None:
        super().__init__(Qt.Orientation.Horizontal)
        self._settings = settings
        self.sets = SetsPanel(document, palette, set_buttons)
        self.sliders = SlidersPanel(document, settings)
        self.process = ProcessPanel(document, settings)
        self.left = QTabWidget()
        self.left.addTab(self.sliders, "C&hannel")
        self.left.addTab(self.process, "&Making it")
        self.chip = ChipPanel(document, settings)
        self.left.addTab(self.chip, "Chi&p")
        self.verdict = VerdictPanel(document, settings)
        self.drawing = ChannelView()
        self.chip_view = ChipView()
        self.places = PlacesPanel(place_buttons)
        self.comparison = ComparePanel(document, settings, palette)
        self.curves = CurvesPanel()
        self.no_curves = QLabel("No curves while there is no score.")
        self.no_curves.setAlignment(Qt.AlignmentFlag.AlignCenter)
        self.middle = _stacked(self.drawing, self.comparison, self.chip_view)
        self.below = _stacked(self.curves, self.no_curves, self.places)
        self._is_comparing = False
        self._has_curves = True
        self.upright = QSplitter(Qt.Orientation.Vertical)
        self._place()
        self._restore()
        self.use_palette(palette)
        self.left.currentChanged.connect(self._on_left_current_changed)

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
        for column, stretch in ((self.left, 0), (centre, 1), (self.verdict, 0)):
            self.addWidget(column)
            self.setStretchFactor(self.count() - 1, stretch)
        self.setChildrenCollapsible(False)

    def use_palette(self, palette: Palette) -> None:
        """Paint everything that paints for itself in other colours."""
        for part in (self.drawing, self.chip_view, self.curves, self.comparison, self.sets):
            part.use_palette(palette)

    @property
    def is_chip_shown(self) -> bool:
        """Whether the page of the chip is open."""
        return self.left.currentWidget() is self.chip

    @property
    def view(self) -> ChannelView | ChipView:
        """The drawing that is open, or would be if no comparison were in its place."""
        return self.chip_view if self.is_chip_shown else self.drawing

    def show_page(self, page: QWidget) -> None:
        """Open a page of the left column."""
        self.left.setCurrentWidget(page)

    def show_comparison(self, is_wanted: bool) -> None:
        """Show the comparison in place of the drawing, or the drawing again."""
        self._is_comparing = is_wanted
        self._show_parts()

    def show_curves(self, is_wanted: bool) -> None:
        """Show the curves, or say that there are none."""
        self._has_curves = is_wanted
        self._show_parts()

    def _show_parts(self) -> None:
        self.middle.setCurrentWidget(self.comparison if self._is_comparing else self.view)
        curves = self.curves if self._has_curves else self.no_curves
        self.below.setCurrentWidget(self.places if self.is_chip_shown else curves)

    def _on_left_current_changed(self) -> None:
        self._show_parts()
        self.page_changed.emit()

    def reveal_field(self, name: str) -> None:
        """Turn to the page of the left column that has a field, and give the field the focus."""
        for number in range(self.left.count()):
            page = self.left.widget(number)
            if name in getattr(page, "editors", {}):
                self.left.setCurrentIndex(number)
                page.reveal(name)  # type: ignore[attr-defined]  # pages with editors have it
                return

    def go_to_part(self, step: int) -> None:
        """Give the focus to the next or the previous part that can be seen."""
        page = self.left.currentWidget()
        parts: tuple[tuple[QWidget, QWidget | None], ...] = (
            (page, page.first_target),  # type: ignore[attr-defined]  # every page has one
            (self.sets, self.sets.view),
            (self.middle, self.comparison.table if self.comparison.isVisible() else self.view),
            (self.below, self.places.table if self.is_chip_shown else self.curves.pressure_plot),
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
