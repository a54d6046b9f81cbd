"""The verdict: how much the channel rectifies here, what it costs, and how far to trust the figures."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QRectF, QSize, Qt
from PySide6.QtGui import QColor, QPainter
from PySide6.QtWidgets import QFrame, QGridLayout, QLabel, QScrollArea, QSizePolicy, QVBoxLayout, QWidget

from app.look import SPACING, font, set_role
from app.panels.cautions import applying
from app.panels.findings import FindingsPanel
from app.shown_values import ShownUnits, diodicity_text, entry_text, number_text, screen_words, word_for
from core.units import unit_symbol

if TYPE_CHECKING:
    from PySide6.QtGui import QPaintEvent

    from app.assessment import Assessment
    from app.document import Document
    from app.settings import Settings
    from core.hydraulics.estimate import Score

FORWARD, REVERSE = "Forward \N{RIGHTWARDS ARROW}", "Reverse \N{LEFTWARDS ARROW}"
_NOTHING = "\N{EM DASH}"


class ShareBar(QWidget):
    """A bar that fills with the share of the flow in the loop."""

    def __init__(self, role: str) -> None:
        super().__init__()
        self._share = 0.0
        self.setProperty("role", role)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)

    def sizeHint(self) -> QSize:
        """Return a bar as low as a line of text."""
        return QSize(60, 8)

    def show_share(self, share: float) -> None:
        """Fill to a share from 0 to 1."""
        self._share = share
        self.update()

    def paintEvent(self, _event: QPaintEvent) -> None:
        """Draw the empty and the filled part."""
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(Qt.PenStyle.NoPen)
        colour = QColor(self.palette().windowText().color())
        for width, alpha in ((1.0, 50), (self._share, 255)):
            colour.setAlpha(alpha)
            painter.setBrush(colour)
            painter.drawRect(QRectF(0.0, 0.0, width * self.width(), self.height()))


class VerdictPanel(QScrollArea):
    """Shows the score at the operating flow, its trust and cautions; holds the list of findings, which others fill."""

    def __init__(self, document: Document, settings: Settings) -> None:
        super().__init__()
        self._document, self._settings = document, settings
        self.setWidgetResizable(True)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.setMinimumWidth(270)
        self.findings = FindingsPanel()
        self._build()
        self.findings.finding_chosen.connect(lambda _row: self.ensureWidgetVisible(self.findings.list))
        document.estimate_changed.connect(self.show_assessment)
        settings.units_changed.connect(self.refresh)
        self.refresh()

    # --- building -------------------------------------------------------------------------

    def _build(self) -> None:
        column = QWidget()
        layout = QVBoxLayout(column)
        layout.setContentsMargins(SPACING.small, SPACING.small, SPACING.small, SPACING.small)
        layout.setSpacing(SPACING.small)
        layout.addWidget(self._built_score())
        layout.addWidget(self.findings)
        layout.addWidget(self._built_trust())
        layout.addStretch(1)
        self.setWidget(column)

    def add_part(self, part: QWidget) -> None:
        """Put a part under score and findings, above what says how far to trust them."""
        layout = self.widget().layout()
        assert isinstance(layout, QVBoxLayout)
        layout.insertWidget(2, part)

    def _built_score(self) -> QFrame:
        frame, layout = _framed()
        self.condition_label = _label("small", "soft")
        self.diodicity_label = _label("verdict")
        self.diodicity_label.setAccessibleName("Diodicity")
        self.excess_label = _label("body")
        for label in (self.condition_label, self.diodicity_label, self.excess_label):
            layout.addWidget(label)
        grid = QGridLayout()
        grid.setHorizontalSpacing(SPACING.small)
        grid.setVerticalSpacing(SPACING.hair)
        grid.setColumnStretch(1, 1)
        self.pressure_labels, self.share_labels, self.share_bars = {}, {}, {}
        self._add_heading(grid, 0, "Pressure drop")
        self._add_heading(grid, 3, "Share of the flow in the loop")
        for row, (role, title) in enumerate((("forward", FORWARD), ("reverse", REVERSE))):
            self.pressure_labels[role] = _label("value", role)
            self.share_labels[role] = _label("body", role)
            self.share_bars[role] = ShareBar(role)
            for place, name in ((1 + row, title), (4 + row, title)):
                name_label = _label("small", role)
                name_label.setText(name)
                grid.addWidget(name_label, place, 0)
            grid.addWidget(self.pressure_labels[role], 1 + row, 1, 1, 2, Qt.AlignmentFlag.AlignRight)
            grid.addWidget(self.share_bars[role], 4 + row, 1)
            grid.addWidget(self.share_labels[role], 4 + row, 2, Qt.AlignmentFlag.AlignRight)
        layout.addLayout(grid)
        self.reynolds_label = _label("body")
        layout.addWidget(self.reynolds_label)
        return frame

    @staticmethod
    def _add_heading(grid: QGridLayout, row: int, text: str) -> None:
        heading = _label("small", "soft")
        heading.setText(text)
        grid.addWidget(heading, row, 0, 1, 3)

    def _built_trust(self) -> QFrame:
        frame, layout = _framed()
        self.trust_label = _label("body")
        self.trust_label.setFont(font("heading"))
        self.method_label = _label("small", "soft")
        self.notes_label = _label("small")
        self.caution_label = _label("small", "warning")
        for label in (self.trust_label, self.method_label, self.notes_label, self.caution_label):
            layout.addWidget(label)
        return frame

    # --- showing --------------------------------------------------------------------------

    def refresh(self) -> None:
        """Show what the document holds."""
        self.show_assessment(self._document.assessment)

    def show_assessment(self, assessment: Assessment) -> None:
        """Show another score."""
        units = ShownUnits.of(self._settings)
        self.condition_label.setText(self._condition(assessment, units))
        if assessment.score is None:
            self._show_obstacle(assessment.obstacle)
        else:
            self._show_score(assessment.score, units)
        notes = (*assessment.making.notes, *(assessment.score.notes if assessment.score else ()))
        _show_lines(self.notes_label, [f"\N{BULLET} {_sentence(note)}" for note in notes])
        cautions = applying(self._document.operating, assessment)
        _show_lines(self.caution_label, [f"\N{WARNING SIGN} {each.title}: {each.text}" for each in cautions])

    def _condition(self, assessment: Assessment, units: ShownUnits) -> str:
        operating = self._document.operating
        flow = f"{entry_text(units.shown(assessment.flow_ul_min, 'uL/min'))} {unit_symbol(units.flow)}"
        conditions = f"At {flow}, {word_for(operating.fluid)}, {operating.temperature_c:g} \N{DEGREE SIGN}C"
        return f"{conditions}\nAs it will be made: {word_for(self._document.process.kind)}"

    def _show_obstacle(self, obstacle: str) -> None:
        self.diodicity_label.setText(f"Di {_NOTHING}")
        for label in (self.excess_label, self.reynolds_label):
            label.setText("")
        for label in (*self.pressure_labels.values(), *self.share_labels.values()):
            label.setText(_NOTHING)
        for bar in self.share_bars.values():
            bar.show_share(0.0)
        self._say_trust("\N{BLACK DIAMOND} No score", "error")
        self.method_label.setText(screen_words(obstacle))

    def _show_score(self, score: Score, units: ShownUnits) -> None:
        self.diodicity_label.setText(diodicity_text(score))
        self.excess_label.setText(
            f"Di \N{MINUS SIGN} 1 = {number_text(score.rectification, 3)}"
            f"  \N{PLUS-MINUS SIGN}{score.rectification_band_percent:.0f} %"
        )
        for role in ("forward", "reverse"):
            pressure = units.shown(getattr(score, f"{role}_pressure_pa"), "Pa")
            share = getattr(score, f"loop_share_{role}")
            self.pressure_labels[role].setText(
                f"{number_text(pressure)} {units.pressure} \N{PLUS-MINUS SIGN}{score.error_band_percent:.0f} %"
            )
            self.share_labels[role].setText(f"{share:.1%}".replace("%", " %"))
            self.share_bars[role].show_share(share)
        self.reynolds_label.setText(f"Re {number_text(score.reynolds, 3)}")
        if score.valid:
            self._say_trust("\N{CHECK MARK} Within its range", "good")
        else:
            self._say_trust("\N{WHITE UP-POINTING TRIANGLE} Outside its range", "warning")
        self.method_label.setText(
            "Estimate: published formulas put together, no flow solve. The bands say how far it may be off."
            if score.valid
            else "Estimate: the formulas are used beyond the range they were found for. Take it as a hint only."
        )

    def _say_trust(self, text: str, role: str) -> None:
        if self.trust_label.text() != text:  # dressing a label anew takes time
            self.trust_label.setText(text)
            set_role(self.trust_label, role)


def _sentence(note: str) -> str:
    text = screen_words(note)
    return text[:1].upper() + text[1:]


def _show_lines(label: QLabel, lines: list[str]) -> None:
    label.setText("\n".join(lines))
    label.setVisible(bool(lines))


def _framed() -> tuple[QFrame, QVBoxLayout]:
    frame = QFrame()
    frame.setProperty("panel", True)
    layout = QVBoxLayout(frame)
    layout.setContentsMargins(SPACING.medium, SPACING.small, SPACING.medium, SPACING.small)
    layout.setSpacing(SPACING.hair)
    return frame, layout


def _label(kind: str, role: str = "") -> QLabel:
    label = QLabel()
    label.setFont(font(kind))
    label.setWordWrap(kind in ("small", "body"))
    label.setTextFormat(Qt.TextFormat.PlainText)
    label.setTextInteractionFlags(
        Qt.TextInteractionFlag.TextSelectableByMouse | Qt.TextInteractionFlag.TextSelectableByKeyboard
        if kind == "verdict"
        else Qt.TextInteractionFlag.TextSelectableByMouse
    )
    if role:
        set_role(label, role)
    return label
