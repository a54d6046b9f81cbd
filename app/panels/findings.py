"""The list of findings: what shape, process and chip object to, to step through and cure by keyboard."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QRect, QSize, Qt, Signal
from PySide6.QtWidgets import QLabel, QListWidget, QListWidgetItem, QPushButton, QVBoxLayout, QWidget

from app.look import SPACING, font, set_role
from app.shown_values import ALL_FIELDS, ShownUnits, number_text, screen_words, value_text
from core.findings import Severity
from core.units import unit_symbol

if TYPE_CHECKING:
    from collections.abc import Sequence

    from PySide6.QtGui import QResizeEvent

    from core.findings import Finding

    Entry = tuple[str, Finding]  # whose finding it is, and the finding

_TALLEST_LIST_PX = 260
_BESIDE_TEXT_PX = 26  # frame, margins and scroll bar

# a sign and a word for each severity, so that colour is never alone
_SIGNS = {Severity.ERROR: "\N{BLACK DIAMOND} Blocks", Severity.WARNING: "\N{WHITE UP-POINTING TRIANGLE} Note"}


class FindingsPanel(QWidget):
    """Lists findings in the order in which the drawing numbers them.

    Signals
    -------
    finding_chosen(int)
        The user points at a finding, -1 for none.
    field_requested(str)
        Enter or a double click: take me to the field that cures it.
    cure_requested(int)
        Change what cures this finding.
    """

    finding_chosen = Signal(int)
    field_requested = Signal(str)
    cure_requested = Signal(int)

    def __init__(self) -> None:
        super().__init__()
        self._entries: tuple[Entry, ...] = ()
        self._units = ShownUnits()
        self._home = ""
        self._is_searching = False
        self.heading = QLabel()
        self.heading.setFont(font("heading"))
        self.list = _FittedList()
        self.list.setWordWrap(True)
        self.list.setFont(font("small"))
        self.list.setAccessibleName("Findings")
        self.list.setToolTip("Up and Down step through the findings; Enter goes to the field to change.")
        self.list.setVerticalScrollMode(QListWidget.ScrollMode.ScrollPerPixel)
        self.list.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.cure_button = QPushButton()
        self.cure_button.clicked.connect(self.use_cure)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(SPACING.hair)
        for part in (self.heading, self.list, self.cure_button):
            layout.addWidget(part)
        layout.addStretch(1)
        self.list.currentRowChanged.connect(self._on_row_changed)
        self.list.itemActivated.connect(lambda _item: self._request_field())
        self.show_findings(())

    @property
    def findings(self) -> tuple[Finding, ...]:
        """What is listed."""
        return tuple(finding for _, finding in self._entries)

    @property
    def chosen(self) -> int:
        """Which finding is pointed at, -1 for none."""
        return self.list.currentRow()

    def show_findings(self, entries: Sequence[Entry], units: ShownUnits | None = None, *, home: str = "") -> None:
        """List other findings; the one pointed at stays pointed at when it is still there.

        Parameters
        ----------
        entries : sequence of (str, Finding)
            Whose finding it is (a set's name, or empty for the chip), and the finding.
        units : ShownUnits, optional
            Units of the screen.
        home : str
            Findings of this set need not say whose they are.
        """
        shown = (tuple(entries), units or self._units, home)
        if shown == (self._entries, self._units, self._home) and self.heading.text():
            return
        chosen = self._kind_of(self.chosen)
        self._entries, self._units, self._home = shown
        self.list.blockSignals(True)
        self.list.clear()
        for origin, finding in self._entries:
            self.list.addItem(QListWidgetItem(self._text(origin, finding)))
        same = [i for i in range(len(self._entries)) if self._kind_of(i) == chosen]
        self.list.setCurrentRow(same[0] if same else -1)
        self.list.blockSignals(False)
        self.list.setVisible(bool(entries))
        self.list.fit_height()
        self._show_heading()
        self._show_cure()

    def _kind_of(self, index: int) -> tuple[str, str, int] | None:
        """Return what stays the same while a finding's figures change: whose, its code, and which of that code."""
        if not 0 <= index < len(self._entries):
            return None
        kinds = [(origin, finding.code) for origin, finding in self._entries[: index + 1]]
        return *kinds[-1], kinds.count(kinds[-1])

    def _text(self, origin: str, finding: Finding) -> str:
        whose = f", {origin or 'chip'}" if origin != self._home else ""
        text = f"{_SIGNS[finding.severity]}{whose}: {screen_words(finding.message)}"
        named = (("measured", finding.value_um), ("limit", finding.limit_um))
        figures = [f"{name} {self._length(value)}" for name, value in named if value is not None]
        return f"{text}\n\N{RIGHTWARDS ARROW} {', '.join(figures)}" if figures else text

    def _length(self, value_um: float) -> str:
        return f"{number_text(self._units.shown(value_um, 'um'))} {unit_symbol(self._units.length)}"

    def _show_heading(self) -> None:
        errors = sum(finding.severity is Severity.ERROR for finding in self.findings)
        warnings = len(self._entries) - errors
        if not self._entries:
            self.heading.setText("\N{CHECK MARK} No findings")
        else:
            parts = [f"{errors} blocking" if errors else "", f"{warnings} to note" if warnings else ""]
            self.heading.setText("Findings: " + ", ".join(part for part in parts if part))
        set_role(self.heading, "error" if errors else "warning" if warnings else "good")

    def show_searching(self, is_searching: bool) -> None:
        """Say, or no longer say, that a change that cures is being looked for."""
        self._is_searching = is_searching
        self._show_cure()

    def _show_cure(self) -> None:
        cure = self.findings[self.chosen].cure if self.chosen >= 0 else None
        self.cure_button.setVisible(self.chosen >= 0 and (cure is not None or self._is_searching))
        self.cure_button.setEnabled(cure is not None)
        if cure is None:
            self.cure_button.setText("Looking for a cure\N{HORIZONTAL ELLIPSIS}")
        else:
            name, value = cure
            field = ALL_FIELDS[name]
            self.cure_button.setText(f"&Use {field.label} {value_text(field, value, self._units)}")
            self.cure_button.setToolTip("This change was tried: the finding goes away. One step, Undo takes it back.")

    def point_at(self, index: int) -> None:
        """Point at a finding that was chosen elsewhere, as on the drawing."""
        self.list.blockSignals(True)
        self.list.setCurrentRow(index)
        self.list.blockSignals(False)
        self._show_cure()

    def step(self, step: int) -> None:
        """Point at the next or the previous finding, round and round."""
        if self._entries:
            start = self.chosen if self.chosen >= 0 else -1 if step > 0 else 0
            row = (start + step) % len(self._entries)
            if row == self.chosen:  # there is but one: take the drawing there once more
                self.finding_chosen.emit(row)
            self.list.setCurrentRow(row)

    def use_cure(self) -> None:
        """Ask for the change that cures the finding pointed at, if it has one."""
        if self.chosen >= 0 and self.findings[self.chosen].cure is not None:
            self.cure_requested.emit(self.chosen)

    def _on_row_changed(self, row: int) -> None:
        self._show_cure()
        self.finding_chosen.emit(row)

    def _request_field(self) -> None:
        if self.chosen >= 0:
            self.field_requested.emit(self.findings[self.chosen].field)


class _FittedList(QListWidget):
    """A list as high as its lines, up to a limit."""

    def fit_height(self) -> None:
        """Take the height that the lines need in this width."""
        room = QRect(0, 0, max(self.width() - _BESIDE_TEXT_PX, 40), _TALLEST_LIST_PX)
        total = 2 * self.frameWidth() + SPACING.hair
        for row in range(self.count()):
            text = self.fontMetrics().boundingRect(room, int(Qt.TextFlag.TextWordWrap), self.item(row).text())
            height = text.height() + 2 * SPACING.hair
            self.item(row).setSizeHint(QSize(0, height))
            total += height
        self.setFixedHeight(min(total, _TALLEST_LIST_PX))

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Lines wrap otherwise in another width."""
        super().resizeEvent(event)
        if event.size().width() != event.oldSize().width():
            self.fit_height()
