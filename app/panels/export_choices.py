"""What the user chooses about mask files: which sets, which formats, where to."""

from __future__ import annotations

from contextlib import suppress
from pathlib import Path
from typing import TYPE_CHECKING, Any

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QCheckBox,
    QComboBox,
    QFormLayout,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QListWidget,
    QListWidgetItem,
    QPushButton,
    QVBoxLayout,
    QWidget,
)

from app.assessment import shape_of
from app.look import SPACING
from app.shown_values import entry_text
from core.errors import CoreError, ExportError
from core.masks.options import MASK_FIELDS, DxfVersion, IslandMode, MaskFormat, MaskOptions
from core.units import unit_symbol

if TYPE_CHECKING:
    from collections.abc import Mapping

    from app.panels.ask import Ask
    from core.project import ParameterSet

_ISLAND_WORDS = {
    IslandMode.PIECES: "pieces without holes",
    IslandMode.LOOPS: "loops on their own layer",
}


class ExportChoices(QWidget):
    """The left half of the export dialog.

    Signals
    -------
    changed()
        Any choice is different.
    """

    changed = Signal()

    def __init__(self, sets: tuple[ParameterSet, ...], *, in_hand: int, folder: Path, ask: Ask) -> None:
        super().__init__()
        self._sets, self._ask = sets, ask
        self.setFixedWidth(330)
        self.set_list = self._built_set_list(in_hand)
        self.format_boxes = {kind: QCheckBox(str(kind)) for kind in MaskFormat}
        self.version_box = _built_box({version: str(version) for version in DxfVersion}, "Version of DXF files")
        self.islands_box = _built_box(_ISLAND_WORDS, "Islands in DXF files")
        self.combined_box = QCheckBox("All sets on &one mask")
        self.preview_box = QCheckBox("A &picture of each mask (SVG)")
        self.number_entries = {name: QLineEdit() for name in MASK_FIELDS}
        self.folder_entry = QLineEdit(str(folder))
        self.folder_button = QPushButton("Choose f&older\N{HORIZONTAL ELLIPSIS}")
        self.show_options(MaskOptions())
        self._arrange()
        self._connect()

    def _built_set_list(self, in_hand: int) -> QListWidget:
        rows = QListWidget()
        rows.setAccessibleName("Sets to write")
        for index, each in enumerate(self._sets):
            item = QListWidgetItem(each.name, rows)
            if shape_of(each.channel).is_usable:
                item.setFlags(
                    Qt.ItemFlag.ItemIsEnabled | Qt.ItemFlag.ItemIsUserCheckable | Qt.ItemFlag.ItemIsSelectable
                )
                item.setCheckState(Qt.CheckState.Checked)
            else:
                item.setText(f"{each.name} \N{EM DASH} blocked by a finding")
                item.setFlags(Qt.ItemFlag.NoItemFlags)
            if index == in_hand:
                rows.setCurrentItem(item)
        return rows

    def _arrange(self) -> None:
        self.set_list.setMinimumHeight(80)
        form = QFormLayout()
        form.setVerticalSpacing(SPACING.small)
        formats = QHBoxLayout()
        for box in self.format_boxes.values():
            formats.addWidget(box)
        form.addRow("Formats", formats)
        form.addRow("DXF &version", self.version_box)
        form.addRow("&Islands in DXF", self.islands_box)
        for name, entry in self.number_entries.items():
            field = MASK_FIELDS[name]
            entry.setToolTip(f"{field.help}\nAllowed: {field.limit}.")
            entry.setAlignment(Qt.AlignmentFlag.AlignRight)
            form.addRow(f"{field.label} [{unit_symbol(field.unit)}]", entry)
        form.addRow(self.combined_box)
        form.addRow(self.preview_box)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(SPACING.small)
        sets_label = QLabel("&Sets to write")
        sets_label.setBuddy(self.set_list)
        folder_label = QLabel("&Folder")
        folder_label.setBuddy(self.folder_entry)
        above: tuple[QWidget, ...] = (sets_label, self.set_list)
        under: tuple[QWidget, ...] = (folder_label, self.folder_entry, self.folder_button)
        for widget in above:
            layout.addWidget(widget)
        layout.addLayout(form)
        for widget in under:
            layout.addWidget(widget)

    def _connect(self) -> None:
        self.set_list.itemChanged.connect(lambda _item: self.changed.emit())
        for box in (*self.format_boxes.values(), self.combined_box, self.preview_box):
            box.toggled.connect(lambda _is_on: self.changed.emit())
        for choice in (self.version_box, self.islands_box):
            choice.currentIndexChanged.connect(lambda _index: self.changed.emit())
        for entry in (*self.number_entries.values(), self.folder_entry):
            entry.textChanged.connect(lambda _text: self.changed.emit())
        self.folder_button.clicked.connect(self._choose_folder)

    def _choose_folder(self) -> None:
        if (folder := self._ask.folder(self, self.folder)) is not None:
            self.folder_entry.setText(str(folder))

    # --- what is chosen -------------------------------------------------------------------

    @property
    def folder(self) -> Path:
        """Where the files go."""
        return Path(self.folder_entry.text().strip() or ".").expanduser()

    def chosen_sets(self) -> list[ParameterSet]:
        """Return the ticked sets in their order; raises ``ExportError`` when none is."""
        is_on = Qt.CheckState.Checked
        chosen = [each for i, each in enumerate(self._sets) if self.set_list.item(i).checkState() == is_on]
        if not chosen:
            raise ExportError("No set is ticked; tick at least one that no finding blocks.")
        return chosen

    def options(self) -> MaskOptions:
        """Return the choices, checked.

        Raises
        ------
        DesignValueError
            If a number cannot be used or no format is ticked.
        """
        return MaskOptions().with_values(
            {
                "formats": tuple(kind for kind, box in self.format_boxes.items() if box.isChecked()),
                "dxf_version": self.version_box.currentData(),
                "islands": self.islands_box.currentData(),
                "one_file_per_set": not self.combined_box.isChecked(),
                "has_preview": self.preview_box.isChecked(),
                **{name: entry.text().strip() for name, entry in self.number_entries.items()},
            }
        )

    def show_options(self, options: MaskOptions) -> None:
        """Show other choices."""
        for kind, box in self.format_boxes.items():
            box.setChecked(kind in options.formats)
        self.version_box.setCurrentIndex(self.version_box.findData(options.dxf_version))
        self.islands_box.setCurrentIndex(self.islands_box.findData(options.islands))
        self.combined_box.setChecked(not options.one_file_per_set)
        self.preview_box.setChecked(options.has_preview)
        for name, entry in self.number_entries.items():
            entry.setText(entry_text(getattr(options, name)))

    # --- remembering ----------------------------------------------------------------------

    def to_remember(self) -> dict[str, object]:
        """Return the choices as plain values; the folder belongs to the chip and is not among them."""
        options = self.options()
        return {
            "formats": [str(kind) for kind in options.formats],
            "dxf_version": str(options.dxf_version),
            "islands": str(options.islands),
            "one_file_per_set": options.one_file_per_set,
            "has_preview": options.has_preview,
            **{name: getattr(options, name) for name in MASK_FIELDS},
        }

    def take_remembered(self, choices: Mapping[str, object]) -> None:
        """Show remembered choices; those that no longer make sense are passed over together."""
        with suppress(CoreError, TypeError):
            self.show_options(MaskOptions().with_values(choices))


def _built_box(words: Mapping[Any, str], name: str) -> QComboBox:
    box = QComboBox()
    box.setAccessibleName(name)
    for value, text in words.items():
        box.addItem(text, value)
    return box
