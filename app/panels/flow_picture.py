"""What the drawing shows of a solved flow: quantity, direction and height."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QComboBox, QGridLayout, QLabel, QWidget

from app.drawing.flow_overlay import Shown, height_text
from app.look import SPACING, font, set_role
from app.panels.field_slider import FieldSlider
from core.fields import Field

_HEIGHT = Field(
    name="height_percent", label="Height over the floor", group="Flow picture", default=50.0, unit="%",
    minimum=5.0, maximum=95.0, step=1.0, help="Height at which the flow is shown, in percent of the depth.",
)  # fmt: skip
_SHOWN_WORDS = {
    Shown.NOTHING: "No flow picture",
    Shown.SPEED: "Speed",
    Shown.PRESSURE: "Pressure",
    Shown.STREAMLINES: "Streamlines",
}


class FlowPictureChoice(QWidget):
    """Chooses the picture of the flow.

    Signals
    -------
    changed()
        Another picture is wanted: see ``shown``, ``is_forward``, ``height_share``.
    """

    changed = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.shown_box, self.direction_box = QComboBox(), QComboBox()
        for shown, words in _SHOWN_WORDS.items():
            self.shown_box.addItem(words, shown)
        self.direction_box.addItems(["Reverse", "Forward"])
        for choice in (self.shown_box, self.direction_box):
            choice.setSizeAdjustPolicy(QComboBox.SizeAdjustPolicy.AdjustToMinimumContentsLengthWithIcon)
            choice.setMinimumContentsLength(6)
        self.shown_box.setAccessibleName("What the drawing shows of the flow")
        self.direction_box.setAccessibleName("Direction of the flow shown")
        self._height = float(_HEIGHT.default)
        self.height_slider = FieldSlider(_HEIGHT)
        self.height_slider.show_value(self._height)
        self.height_label, self.hint_label = _label(height_text(0.5)), _label("")
        set_role(self.hint_label, "warning")
        self._place()
        self._connect()

    def _place(self) -> None:
        grid = QGridLayout(self)
        grid.setContentsMargins(0, 0, 0, 0)
        grid.setSpacing(SPACING.hair)
        for place, widget in enumerate((self.shown_box, self.direction_box, self.height_slider, self.height_label)):
            grid.addWidget(widget, *divmod(place, 2))
        grid.addWidget(self.hint_label, 2, 0, 1, 2)

    def _connect(self) -> None:
        self.shown_box.currentIndexChanged.connect(self.changed)
        self.direction_box.currentIndexChanged.connect(self.changed)
        self.height_slider.slid.connect(self.show_height)
        self.height_slider.stepped.connect(lambda steps, _held: self.show_height(self._height + steps * _HEIGHT.step))
        self.height_slider.end_requested.connect(
            lambda is_last: self.show_height(_HEIGHT.maximum if is_last else _HEIGHT.minimum)
        )

    @property
    def shown(self) -> Shown:
        """What of the flow the drawing should show."""
        return Shown(self.shown_box.currentData())

    @property
    def is_forward(self) -> bool:
        """Whether the forward flow should be shown."""
        return self.direction_box.currentIndex() == 1

    @property
    def height_share(self) -> float:
        """Height at which the flow should be shown: 0 floor, 1 roof."""
        return self._height / 100.0

    def show_height(self, percent: float) -> None:
        """Show the flow at another height over the floor [% of the depth]."""
        self._height = min(max(percent, _HEIGHT.minimum), _HEIGHT.maximum)
        self.height_slider.show_value(self._height)
        self.height_label.setText(height_text(self.height_share))
        self.changed.emit()

    def show_hint(self, text: str) -> None:
        """Say why the drawing shows no picture of the flow; empty when it does or need not."""
        self.hint_label.setText(text)
        self.hint_label.setVisible(bool(text))


def _label(text: str) -> QLabel:
    label = QLabel(text)
    label.setFont(font("small"))
    label.setWordWrap(True)
    label.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
    return label
