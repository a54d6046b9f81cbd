"""The flow solve beside the estimate: its figures with their bands, how far it is, and what the drawing shows of it."""

from __future__ import annotations

from enum import StrEnum
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QFrame,
    QGridLayout,
    QLabel,
    QProgressBar,
    QPushButton,
    QVBoxLayout,
    QWidget,
)

from app.look import SPACING, font, set_role
from app.panels.flow_picture import FlowPictureChoice
from app.panels.verdict import FORWARD, REVERSE
from app.shown_values import number_text, screen_words

if TYPE_CHECKING:
    from app.shown_values import ShownUnits
    from core.project.solved import SolvedResult

_NOTHING = "\N{EM DASH}"


class Standing(StrEnum):
    """How a result stands to what is in hand; also the sign that is written before it."""

    NONE = "\N{WHITE CIRCLE} Not solved yet"
    CURRENT = "\N{CHECK MARK} Solved for what is in hand"
    COARSE = "\N{WHITE UP-POINTING TRIANGLE} Coarse answer; a better one is on its way"
    COARSE_ONLY = "\N{WHITE UP-POINTING TRIANGLE} Coarse answer; solve again for a better one"
    DOUBTFUL = "\N{WHITE UP-POINTING TRIANGLE} Solved, with a doubt"
    LOST = "\N{BLACK DIAMOND} No steady flow was found"
    STALE = "\N{WHITE UP-POINTING TRIANGLE} Stale"


_ROLES = {Standing.CURRENT: "good", Standing.LOST: "error", Standing.NONE: "soft"}


class SolvePanel(QFrame):
    """Shows what the flow solve found and starts and stops it; knows no process and no document.

    Signals
    -------
    solve_requested(), curve_requested(), cancel_requested()
        Solve at the operating flow, along the curve; stop.
    picture_requested(), numbers_requested()
        Save the drawing as a picture, the results as a table.
    """

    solve_requested = Signal()
    curve_requested = Signal()
    cancel_requested = Signal()
    picture_requested = Signal()
    numbers_requested = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.setProperty("panel", True)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(SPACING.medium, SPACING.small, SPACING.medium, SPACING.small)
        layout.setSpacing(SPACING.hair)
        layout.addWidget(_label("heading", "Flow solve"))
        self.standing_label = _label("body", Standing.NONE)
        self.remark_label = _label("small")
        layout.addWidget(self.standing_label)
        layout.addWidget(self.remark_label)
        self.figures = self._built_figures()
        layout.addWidget(self.figures)
        self.notes_label = _label("small")
        layout.addWidget(self.notes_label)
        layout.addWidget(self._built_buttons())
        self.progress = QProgressBar()
        self.progress.setTextVisible(False)
        self.progress.setAccessibleName("Progress of the flow solve")
        self.progress_label = _label("small")
        layout.addWidget(self.progress)
        layout.addWidget(self.progress_label)
        self.picture = FlowPictureChoice()
        layout.addWidget(self.picture)
        layout.addWidget(self._built_saving())
        self.show_running(False)
        self.show_nothing()

    # --- building -------------------------------------------------------------------------

    def _built_figures(self) -> QWidget:
        figures = QWidget()
        grid = QGridLayout(figures)
        grid.setContentsMargins(0, 0, 0, 0)
        grid.setHorizontalSpacing(SPACING.small)
        grid.setVerticalSpacing(SPACING.hair)
        grid.setColumnStretch(1, 1)
        self.values = {name: _label("body") for name in ("di", "forward", "reverse", "shares", "reynolds")}
        rows = (
            ("di", "Di", ""),
            ("forward", FORWARD, "forward"),
            ("reverse", REVERSE, "reverse"),
            ("shares", "In the loop", ""),
            ("reynolds", "Re", ""),
        )
        for row, (name, title, role) in enumerate(rows):
            heading = _label("small", title)
            for label in (heading, self.values[name]):
                set_role(label, role)
            self.values[name].setAccessibleName(f"Flow solve, {title}")
            grid.addWidget(heading, row, 0)
            grid.addWidget(self.values[name], row, 1, Qt.AlignmentFlag.AlignRight)
        return figures

    def _built_buttons(self) -> QWidget:
        box = QWidget()
        grid = QGridLayout(box)
        grid.setContentsMargins(0, 0, 0, 0)
        grid.setSpacing(SPACING.hair)
        self.solve_button = _button("Solve &here", "Solve the flow at the operating point", self.solve_requested)
        self.curve_button = _button("Solve c&urve", "Solve at eight flows along the curve", self.curve_requested)
        self.cancel_button = _button("Sto&p", "Stop the flow solve", self.cancel_requested)
        grid.addWidget(self.solve_button, 0, 0)
        grid.addWidget(self.curve_button, 0, 1)
        grid.addWidget(self.cancel_button, 0, 0, 1, 2)
        return box

    def _built_saving(self) -> QWidget:
        box = QWidget()
        grid = QGridLayout(box)
        grid.setContentsMargins(0, 0, 0, 0)
        grid.setSpacing(SPACING.hair)
        self.picture_button = _button(
            "P&icture\N{HORIZONTAL ELLIPSIS}", "Save the drawing as it is seen, PNG or SVG", self.picture_requested
        )
        self.numbers_button = _button(
            "&Numbers\N{HORIZONTAL ELLIPSIS}", "Save the solved figures, CSV", self.numbers_requested
        )
        grid.addWidget(self.picture_button, 0, 0)
        grid.addWidget(self.numbers_button, 0, 1)
        return box

    # --- showing --------------------------------------------------------------------------

    def show_nothing(self) -> None:
        """Say that nothing has been solved."""
        self._say(Standing.NONE, "")
        self.figures.hide()
        _show_text(self.notes_label, "")
        self.numbers_button.setEnabled(False)

    def show_result(self, result: SolvedResult, units: ShownUnits, *, standing: Standing, remark: str) -> None:
        """Show a result and how it stands to what is in hand.

        Parameters
        ----------
        result : SolvedResult
            What was found.
        units : ShownUnits
            Units of the screen.
        standing : Standing
            Whether it belongs to what is in hand.
        remark : str
            What to say about that; may be empty.
        """
        self._say(standing, remark)
        self.figures.show()
        self.numbers_button.setEnabled(True)
        di, band = result.diodicity, result.diodicity_band
        self.values["di"].setText(_with_band(di, 4, None if band is None else number_text(band, 2)))
        for role in ("forward", "reverse"):
            pressure = getattr(result, f"{role}_pressure_pa")
            percent = None if result.error_band_percent is None else f"{number_text(result.error_band_percent, 2)} %"
            shown = None if pressure is None else units.shown(pressure, "Pa")
            self.values[role].setText(_with_band(shown, 4, percent, unit=units.pressure))
        shares = (result.loop_share_forward, result.loop_share_reverse)
        self.values["shares"].setText(
            " / ".join(_NOTHING if s is None else f"{s:.1%}".replace("%", " %") for s in shares)
        )
        self.values["reynolds"].setText(number_text(result.reynolds, 3))
        _show_text(self.notes_label, "\n".join(f"\N{BULLET} {screen_words(note)}" for note in result.notes))

    def _say(self, standing: Standing, remark: str) -> None:
        if self.standing_label.text() != standing:
            self.standing_label.setText(standing)
            set_role(self.standing_label, _ROLES.get(standing, "warning"))
        _show_text(self.remark_label, remark)

    def show_running(self, is_running: bool) -> None:
        """Show that a solve runs, or that none does."""
        for button in (self.solve_button, self.curve_button):
            button.setVisible(not is_running)
        self.cancel_button.setVisible(is_running)
        self.progress.setVisible(is_running)
        self.progress.setRange(0, 0)
        _show_text(self.progress_label, "Starting" if is_running else "")

    def show_progress(self, step: int, total: int, text: str) -> None:
        """Show how far the solve is and what it is doing."""
        self.progress.setRange(0, total)
        self.progress.setValue(step)
        _show_text(self.progress_label, text)

    def show_failure(self, text: str) -> None:
        """Say why the last solve gave no answer; empty when it gave one."""
        _show_text(self.remark_label, text)


def _with_band(value: float | None, digits: int, band: str | None, *, unit: str = "") -> str:
    if value is None:
        return _NOTHING
    number = f"{number_text(value, digits)} {unit}".rstrip()
    return number if band is None else f"{number} \N{PLUS-MINUS SIGN}{band}"


def _show_text(label: QLabel, text: str) -> None:
    label.setText(text)
    label.setVisible(bool(text))


def _label(kind: str, text: str = "") -> QLabel:
    label = QLabel(text)
    label.setFont(font(kind))
    label.setWordWrap(True)
    label.setTextFormat(Qt.TextFormat.PlainText)
    label.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
    return label


def _button(text: str, tip: str, clicked: object) -> QPushButton:
    button = QPushButton(text)
    button.setToolTip(tip)
    button.clicked.connect(clicked)
    button.setMinimumWidth(40)  # two of them fit into the narrowest column
    return button
