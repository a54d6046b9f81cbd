"""The list of findings: what the shape objects to, to step through by keyboard."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QRect, QSize, Qt, Signal
from PySide6.QtWidgets import QLabel, QListWidget, QListWidgetItem, QVBoxLayout, QWidget

from app.look import SPACING, font, set_role
from app.shown_values import screen_words
from core.findings import Severity

if TYPE_CHECKING:
    from PySide6.QtGui import QResizeEvent

    from core.findings import Finding

_TALLEST_LIST_PX = 260
_BESIDE_TEXT_PX = 26  # frame, margins and scroll bar

# a sign and a word for each severity, so that colour is never alone
_SIGNS = {Severity.ERROR: "\N{BLACK DIAMOND} Blocks", Severity.WARNING: "\N{WHITE UP-POINTING TRIANGLE} Note"}


class FindingsPanel(QWidget):
    """Lists findings in the order in which the drawing numbers them.

    Signals
    -------
    finding_chosen(int)
        A finding is pointed at, -1 for none.
    field_requested(str)
        Enter or a double click: take me to the field that cures it.
    """

    finding_chosen = Signal(int)
    field_requested = Signal(str)

    def __init__(self) -> None:
        super().__init__()
        self._findings: tuple[Finding, ...] = ()
        self.heading = QLabel()
        self.heading.setFont(font("heading"))
        self.list = _FittedList()
        self.list.setWordWrap(True)
        self.list.setFont(font("small"))
        self.list.setAccessibleName("Findings")
        self.list.setToolTip("Up and Down step through the findings; Enter goes to the field to change.")
        self.list.setVerticalScrollMode(QListWidget.ScrollMode.ScrollPerPixel)
        self.list.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(SPACING.hair)
        layout.addWidget(self.heading)
        layout.addWidget(self.list)
        layout.addStretch(1)
        self.list.currentRowChanged.connect(self.finding_chosen)
        self.list.itemActivated.connect(lambda _item: self._request_field())
        self.show_findings(())

    @property
    def findings(self) -> tuple[Finding, ...]:
        """What is listed."""
        return self._findings

    def show_findings(self, findings: tuple[Finding, ...]) -> None:
        """List other findings; the one pointed at stays pointed at when it is still there."""
        if findings == self._findings and self.heading.text():
            return
        chosen = self.list.currentRow()
        code = self._findings[chosen].code if 0 <= chosen < len(self._findings) else None
        self._findings = findings
        self.list.blockSignals(True)
        self.list.clear()
        for finding in findings:
            self.list.addItem(QListWidgetItem(f"{_SIGNS[finding.severity]}: {screen_words(finding.message)}"))
        same = [i for i, finding in enumerate(findings) if finding.code == code]
        self.list.setCurrentRow(same[0] if same else -1)
        self.list.blockSignals(False)
        self.list.setVisible(bool(findings))
        self.list.fit_height()
        self._show_heading()

    def _show_heading(self) -> None:
        errors = sum(finding.severity is Severity.ERROR for finding in self._findings)
        warnings = len(self._findings) - errors
        if not self._findings:
            self.heading.setText("\N{CHECK MARK} No findings on the shape")
        else:
            parts = [f"{errors} blocking" if errors else "", f"{warnings} to note" if warnings else ""]
            self.heading.setText("Findings: " + ", ".join(part for part in parts if part))
        set_role(self.heading, "error" if errors else "warning" if warnings else "good")

    def point_at(self, index: int) -> None:
        """Point at a finding, as chosen on the drawing."""
        self.list.setCurrentRow(index)

    def step(self, step: int) -> None:
        """Point at the next or the previous finding, round and round."""
        if self._findings:
            row = self.list.currentRow()
            start = row if row >= 0 else -1 if step > 0 else 0
            self.list.setCurrentRow((start + step) % len(self._findings))

    def _request_field(self) -> None:
        row = self.list.currentRow()
        if 0 <= row < len(self._findings):
            self.field_requested.emit(self._findings[row].field)


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
