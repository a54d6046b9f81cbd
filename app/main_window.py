"""The window: connects the parts to the document and the actions to what they do."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QSize
from PySide6.QtWidgets import QLabel, QMainWindow

from app.actions import fill_menus, keys_page, made_actions
from app.arrangement import Arrangement
from app.beside_desk import BesideDesk
from app.curves_desk import CurvesDesk
from app.document import Document
from app.drawing.beside import Walls
from app.files import ProjectFiles
from app.findings_desk import FindingsDesk
from app.look import Look, Scheme
from app.menus import RecentMenu, add_choice_menus
from app.panels.cautions import cautions_page
from app.panels.chip_desk import ChipDesk
from app.panels.chip_places import PLACING
from app.panels.export import ExportDialog
from app.panels.fold_notes_desk import FoldNotesDesk
from app.panels.pages import ABOUT_PAGE, PageDialog, details_dialog, notes_dialog
from app.shown_values import ShownUnits, number_text, screen_words
from app.solving.desk import SolveDesk
from core.errors import CoreError
from core.units import unit_symbol

if TYPE_CHECKING:
    from collections.abc import Callable

    from PySide6.QtGui import QAction, QCloseEvent, QDragEnterEvent, QDropEvent

    from app.assessment import Assessment
    from app.panels.ask import Ask
    from app.settings import Settings
    from core.geometry.shape import ChannelShape
    from core.project import RecoveryStore

_MESSAGE_MS = 6000


class MainWindow(QMainWindow):
    """Everything the user works with.

    Parameters
    ----------
    settings : Settings
        Remembered choices.
    look : Look
        Colours of the application.
    recovery : RecoveryStore
        Keeps unsaved work.
    ask : Ask
        Puts questions to the user; tests hand in their own.
    """

    def __init__(self, *, settings: Settings, look: Look, recovery: RecoveryStore, ask: Ask) -> None:
        super().__init__()
        self.settings, self.look, self.ask = settings, look, ask
        self.document = Document(parent=self)
        self.files = ProjectFiles(self.document, settings=settings, recovery=recovery, ask=ask, window=self)
        self.actions_by_name = made_actions(self, self._handlers())
        set_buttons = tuple(self.actions_by_name[name] for name in ("add_set", "copy_set", "compare"))
        place_buttons = tuple(action for name, action in self.actions_by_name.items() if name in PLACING)
        self.parts = Arrangement(
            self.document, settings=settings, palette=look.palette, set_buttons=set_buttons, place_buttons=place_buttons
        )
        self.setCentralWidget(self.parts)
        self.place_label = QLabel()
        self.statusBar().setSizeGripEnabled(False)
        self.statusBar().addPermanentWidget(self.place_label)
        self._build_menus()
        self._connect_document()
        self._connect_parts()
        self.setAcceptDrops(True)
        self.resize(first_size(self.screen().availableGeometry().size()))
        if (geometry := settings.arrangement("window")) is not None:
            self.restoreGeometry(geometry)
        self._show_all()
        self._add_desks()
        self.solving = SolveDesk(self.document, parts=self.parts, settings=settings, ask=ask, window=self)

    # --- building -------------------------------------------------------------------------

    def _build_menus(self) -> None:
        menus = fill_menus(self, self.actions_by_name)
        recent = RecentMenu(self.settings, self.files.open_path, menus["&Chip"])
        menus["&Chip"].insertMenu(self.actions_by_name["save"], recent)
        add_choice_menus(menus["&View"], self.settings)

    def _add_desks(self) -> None:
        document, parts, switches = self.document, self.parts, self.actions_by_name
        self.curves = CurvesDesk(
            document, parts=parts, is_comparing=switches["compare"].isChecked, refuse=self._show_refusal, parent=self
        )
        self.findings = FindingsDesk(
            document,
            panel=parts.verdict.findings,
            drawing=parts.drawing,
            settings=self.settings,
            refuse=self._show_refusal,
            parent=self,
        )
        self.chip = ChipDesk(
            document,
            parts=parts,
            settings=self.settings,
            findings=self.findings,
            refuse=self._show_refusal,
            parent=self,
        )
        self.fold_notes = FoldNotesDesk(document, parts=parts, parent=self)
        switches["show_made"].setChecked(True)
        walls = {Walls.DRAWN: switches["show_drawn"], Walls.MADE: switches["show_made"]}
        self.beside = BesideDesk(document, drawing=parts.drawing, switches=walls, parent=self)

    def _handlers(self) -> dict[str, Callable[[], object]]:
        document, files = self.document, self.files
        return {
            "new": files.new,
            "open": files.open,
            "save": files.save,
            "save_as": files.save_as,
            "details": lambda: details_dialog(self, document).open(),
            "export": self.export,
            "quit": self.close,
            "solve": lambda: self.solving.solve_here(),
            "solve_curve": lambda: self.solving.solve_curve(),
            "stop_solve": lambda: self.solving.cancel(),
            "save_picture": lambda: self.solving.save_picture(),
            "save_numbers": lambda: self.solving.save_numbers(),
            "undo": document.undo_stack.undo,
            "redo": document.undo_stack.redo,
            "add_set": lambda: self._try(document.add_set),
            "copy_set": lambda: self._try(document.copy_set),
            "rename_set": lambda: self.parts.sets.begin_rename(),
            "note_set": lambda: notes_dialog(self, document).open(),
            "remove_set": lambda: self._try(lambda: document.remove_set(document.index)),
            "move_earlier": lambda: self._move_set(-1),
            "move_later": lambda: self._move_set(1),
            "previous_set": lambda: document.select_set(document.index - 1),
            "next_set": lambda: document.select_set(document.index + 1),
            "compare": self._show_comparison,
            **{name: lambda place=place: place(self.chip) for name, place in PLACING.items()},
            "fit": lambda: self.parts.view.fit(),
            "zoom_in": lambda: self.parts.view.zoom_in(),
            "zoom_out": lambda: self.parts.view.zoom_out(),
            "next_finding": lambda: self.parts.verdict.findings.step(1),
            "previous_finding": lambda: self.parts.verdict.findings.step(-1),
            "use_cure": lambda: self.parts.verdict.findings.use_cure(),
            "show_drawn": lambda: None,  # the switches themselves are followed
            "show_made": lambda: None,
            "show_channel": lambda: self.parts.show_page(self.parts.sliders),
            "show_process": lambda: self.parts.show_page(self.parts.process),
            "show_chip": lambda: self.parts.show_page(self.parts.chip),
            "next_part": lambda: self.parts.go_to_part(1),
            "previous_part": lambda: self.parts.go_to_part(-1),
            "keys": lambda: PageDialog(self, "Keys", keys_page()).open(),
            "cautions": lambda: PageDialog(self, "Cautions", cautions_page()).open(),
            "about": lambda: PageDialog(self, "About Sideloop", ABOUT_PAGE).open(),
        }

    def _connect_document(self) -> None:
        document = self.document
        document.project_changed.connect(self._show_title)
        document.path_changed.connect(self._show_title)
        document.modified_changed.connect(self._show_title)
        document.channel_changed.connect(self._show_shape)
        document.estimate_changed.connect(self._show_assessment)
        document.undo_stack.changed.connect(self._show_steps)
        self._show_steps()

    def _show_steps(self) -> None:
        stack = self.document.undo_stack
        for name, text in (("undo", stack.undo_text), ("redo", stack.redo_text)):
            self.actions_by_name[name].setEnabled(bool(text))
            _show_step(self.actions_by_name[name], name, text)

    def _connect_parts(self) -> None:
        parts = self.parts
        parts.sliders.field_attended.connect(parts.drawing.highlight_field)
        parts.drawing.pointer_moved.connect(self._on_drawing_pointer_moved)
        parts.drawing.pointer_left.connect(self.place_label.clear)
        parts.chip_view.pointer_moved.connect(self._show_place)
        parts.chip_view.pointer_left.connect(self.place_label.clear)
        parts.verdict.findings.field_requested.connect(parts.reveal_field)
        parts.comparison.set_requested.connect(self.document.select_set)
        parts.sets.model.name_refused.connect(self._show_refusal)
        self.settings.units_changed.connect(self._show_units)
        self.settings.scheme_changed.connect(lambda scheme: self.look.set_scheme(Scheme(scheme)))
        self.look.palette_changed.connect(parts.use_palette)

    # --- showing --------------------------------------------------------------------------

    def _show_all(self) -> None:
        self._show_title()
        self._show_units()
        self._show_shape(self.document.shape)
        self._show_assessment(self.document.assessment)

    def _show_title(self) -> None:
        path = self.document.path
        file = f" \N{EN DASH} {path.name}" if path else ""
        self.setWindowTitle(f"{self.document.project.name}{file}[*] \N{EN DASH} Sideloop")
        self.setWindowModified(self.document.is_modified)

    def _show_shape(self, shape: ChannelShape) -> None:
        last_good = self.document.last_good_shape
        self.parts.drawing.show_shape(shape, last_good=last_good, keeps_findings=shape.is_usable)

    def _show_assessment(self, assessment: Assessment) -> None:
        self.parts.drawing.show_shares(None if assessment.score is None else assessment.score.shares_of)

    def _show_units(self) -> None:
        units = ShownUnits.of(self.settings)
        self.parts.drawing.set_length_unit(units.length)
        self.parts.curves.set_units(flow=units.flow, pressure=units.pressure)

    def _show_comparison(self) -> None:
        self.parts.show_comparison(self.actions_by_name["compare"].isChecked())
        self.curves.show_compared()

    def _show_refusal(self, error: CoreError) -> None:
        self.statusBar().showMessage(f"\N{BLACK DIAMOND} {screen_words(str(error))}", _MESSAGE_MS)

    def _on_drawing_pointer_moved(self, x_um: float, y_um: float) -> None:
        value = self.solving.text_at(x_um, y_um)
        self._show_place(x_um, y_um, f"{value}   " if value else "")

    def _show_place(self, x_um: float, y_um: float, before: str = "") -> None:
        units = ShownUnits.of(self.settings)
        x, y = (number_text(units.shown(value, "um")) for value in (x_um, y_um))
        self.place_label.setText(f"{before}x {x}   y {y} {unit_symbol(units.length)}")

    # --- doing ----------------------------------------------------------------------------

    def _try(self, change: Callable[[], object]) -> None:
        try:
            change()
        except CoreError as error:
            self._show_refusal(error)

    def _move_set(self, step: int) -> None:
        place = self.document.index + step
        if 0 <= place < len(self.document.project.sets):
            self.document.move_set(self.document.index, place)

    def export(self) -> ExportDialog:
        """Open the dialog that writes the masks."""
        dialog = ExportDialog(self, document=self.document, settings=self.settings, ask=self.ask)
        dialog.process_requested.connect(lambda: self.parts.reveal_field("formats"))
        dialog.open()
        return dialog

    def dragEnterEvent(self, event: QDragEnterEvent) -> None:
        """Welcome files."""
        if any(url.isLocalFile() for url in event.mimeData().urls()):
            event.acceptProposedAction()

    def dropEvent(self, event: QDropEvent) -> None:
        """Open the first file that was dropped."""
        path = next((Path(url.toLocalFile()) for url in event.mimeData().urls() if url.isLocalFile()), None)
        if path is not None:
            event.acceptProposedAction()
            self.files.open_path(path)

    def closeEvent(self, event: QCloseEvent) -> None:
        """Ask about unsaved changes, then remember the arrangement."""
        if not self.files.may_leave():
            event.ignore()
            return
        self.solving.end_now()
        self.chip.end_now()
        self.fold_notes.end_now()
        self.files.forget_copy()
        self.parts.remember()
        self.settings.set_arrangement("window", self.saveGeometry())
        event.accept()


def _show_step(action: QAction, name: str, text: str) -> None:
    word = name.capitalize()
    action.setText(f"&{word}: {text}" if text else f"&{word}")


def first_size(room: QSize) -> QSize:
    """Return the size of a window that was never arranged: roomy, but never larger than the screen."""
    return QSize(1440, 900).boundedTo(room)
