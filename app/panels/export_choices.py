"""What the user chooses about mask files: the chip or bare channels, where to, and whether in spite of findings."""

from __future__ import annotations

from contextlib import suppress
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QCheckBox,
    QFormLayout,
    QLabel,
    QLineEdit,
    QListWidget,
    QListWidgetItem,
    QPushButton,
    QRadioButton,
    QVBoxLayout,
    QWidget,
)

from app.look import SPACING, font, set_role
from app.panels.export_work import ExportTask, What
from app.shown_values import entry_text
from core.errors import CoreError, ExportError
from core.geometry.shape import build_shape
from core.masks.options import MASK_FIELDS, MaskOptions
from core.units import unit_symbol

if TYPE_CHECKING:
    from collections.abc import Mapping

    from app.panels.ask import Ask
    from core.project import ChipProject

_WORDS = {What.ORDER: "The &chip, as an order with its sheet", What.BARE: "&Bare channels, one set or several"}
_CLEARANCE = MASK_FIELDS["clearance_um"]
_MOST_ROOM = 100  # for the list of sets, against what is left over


class ExportChoices(QWidget):
    """The left half of the export dialog.

    Signals
    -------
    changed()
        Any choice of what is written, or where to, is different.
    forced_changed()
        The user wants to write in spite of findings, or no longer.
    process_requested()
        The user wants to change the file choices, which belong to the process.
    """

    changed = Signal()
    forced_changed = Signal()
    process_requested = Signal()

    def __init__(self, project: ChipProject, *, in_hand: int, folder: Path, ask: Ask) -> None:
        super().__init__()
        self._project, self._ask = project, ask
        self.setFixedWidth(340)
        self.what_buttons = {what: QRadioButton(words) for what, words in _WORDS.items()}
        self.what_buttons[What.ORDER].setChecked(True)
        self.set_list = self._built_set_list(in_hand)
        self.combined_box = QCheckBox("All sets on &one mask")
        self.preview_box = QCheckBox("A &picture of each mask (SVG)")
        self.clearance_entry = QLineEdit()
        self.force_box = QCheckBox()
        self.process_button = QPushButton("Change the &files on the page of the making")
        self.folder_entry = QLineEdit(str(folder))
        self.folder_button = QPushButton("Choose f&older\N{HORIZONTAL ELLIPSIS}")
        self.bare_part = QWidget()
        self._show_bare(MaskOptions())
        self._arrange()
        self._connect()
        self.show_errors(0)

    def _built_set_list(self, in_hand: int) -> QListWidget:
        rows = QListWidget()
        rows.setAccessibleName("Sets to write")
        rows.setMinimumHeight(80)
        for index, each in enumerate(self._project.sets):
            item = QListWidgetItem(each.name, rows)
            if build_shape(each.channel).is_usable:
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
        self.clearance_entry.setToolTip(f"{_CLEARANCE.help}\nAllowed: {_CLEARANCE.limit}.")
        self.clearance_entry.setAlignment(Qt.AlignmentFlag.AlignRight)
        form = QFormLayout()
        form.addRow(self.combined_box)
        form.addRow(f"{_CLEARANCE.label} [{unit_symbol(_CLEARANCE.unit)}]", self.clearance_entry)
        form.addRow(self.preview_box)
        bare = QVBoxLayout(self.bare_part)
        bare.setContentsMargins(SPACING.large, 0, 0, 0)
        bare.setSpacing(SPACING.small)
        bare.addWidget(self.set_list, 1)
        bare.addWidget(_note("Bare channels are drawn as wanted: without ports, marks, words, and allowance."))
        bare.addLayout(form)
        folder_label = QLabel("Fol&der")
        folder_label.setBuddy(self.folder_entry)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(SPACING.small)
        for button in self.what_buttons.values():
            layout.addWidget(button)
        layout.addWidget(self.bare_part, _MOST_ROOM)
        layout.addSpacing(SPACING.medium)
        layout.addWidget(_note("Formats, tone and reading side of the files are choices of the process."))
        layout.addWidget(self.process_button)
        for widget in (folder_label, self.folder_entry, self.folder_button, self.force_box):
            layout.addWidget(widget)
        layout.addStretch(1)
        self.bare_part.hide()

    def _connect(self) -> None:
        self.set_list.itemChanged.connect(lambda _item: self.changed.emit())
        for box in (self.combined_box, self.preview_box):
            box.toggled.connect(lambda _is_on: self.changed.emit())
        for entry in (self.clearance_entry, self.folder_entry):
            entry.textChanged.connect(lambda _text: self.changed.emit())
        self.what_buttons[What.BARE].toggled.connect(self._on_bare_toggled)
        self.force_box.toggled.connect(lambda _is_on: self.forced_changed.emit())
        self.folder_button.clicked.connect(self._choose_folder)
        self.process_button.clicked.connect(lambda _is_on: self.process_requested.emit())

    def _on_bare_toggled(self, is_bare: bool) -> None:
        self.bare_part.setVisible(is_bare)
        self.changed.emit()

    def _choose_folder(self) -> None:
        if (folder := self._ask.folder(self, self.folder)) is not None:
            self.folder_entry.setText(str(folder))

    # --- what is chosen -------------------------------------------------------------------

    @property
    def folder(self) -> Path:
        """Where the files go."""
        return Path(self.folder_entry.text().strip() or ".").expanduser()

    @property
    def what(self) -> What:
        """Whether the chip is written, or bare channels."""
        return What.BARE if self.what_buttons[What.BARE].isChecked() else What.ORDER

    @property
    def is_forced(self) -> bool:
        """Whether the order is to be written in spite of error findings."""
        return self.force_box.isChecked()

    def show_errors(self, errors: int) -> None:
        """Offer to write in spite of so many error findings; each time the user must say so anew."""
        self.force_box.setChecked(False)
        self.force_box.setVisible(errors > 0)
        findings = "a finding blocks it" if errors == 1 else f"{errors} findings block it"
        self.force_box.setText(f"Write &all the same, though {findings}")
        self.force_box.setToolTip("The order sheet names every finding that was passed over.")

    def task(self) -> ExportTask:
        """Return what is chosen, checked.

        Raises
        ------
        CoreError
            If a number cannot be used or no set is ticked.
        """
        if self.what is What.ORDER:
            return ExportTask(project=self._project, what=What.ORDER)
        is_on = Qt.CheckState.Checked
        names = [each.name for i, each in enumerate(self._project.sets) if self.set_list.item(i).checkState() == is_on]
        if not names:
            raise ExportError("No set is ticked; tick at least one that no finding blocks.")
        task = ExportTask(project=self._project, what=What.BARE, names=tuple(names), bare=tuple(self._bare().items()))
        task.options()
        return task

    def _bare(self) -> dict[str, object]:
        return {
            "one_file_per_set": not self.combined_box.isChecked(),
            "has_preview": self.preview_box.isChecked(),
            _CLEARANCE.name: self.clearance_entry.text().strip(),
        }

    def _show_bare(self, options: MaskOptions) -> None:
        self.combined_box.setChecked(not options.one_file_per_set)
        self.preview_box.setChecked(options.has_preview)
        self.clearance_entry.setText(entry_text(options.clearance_um))

    # --- remembering ----------------------------------------------------------------------

    def to_remember(self) -> dict[str, object]:
        """Return the choices as plain values; the folder belongs to the chip and is not among them."""
        return {"what": str(self.what), **self._bare()}

    def take_remembered(self, choices: Mapping[str, object]) -> None:
        """Show remembered choices; those that no longer make sense are passed over together."""
        wanted = dict(choices)
        self.what_buttons[What.BARE].setChecked(wanted.pop("what", "") == What.BARE)
        with suppress(CoreError, TypeError):
            self._show_bare(MaskOptions().with_values(wanted))


def _note(text: str) -> QLabel:
    label = QLabel(text)
    label.setWordWrap(True)
    label.setFont(font("small"))
    set_role(label, "soft")
    return label
