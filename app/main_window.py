"""The window: connects the parts to the document and the actions to what they do."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QSize
from PySide6.QtWidgets import QLabel, QMainWindow

from app.actions import fill_menus, keys_page, made_actions
from app.arrangement import Arrangement
from app.document import Document
from app.failures import FailureHook, start_log
from app.files import ProjectFiles
from app.look import Look, Scheme
from app.menus import RecentMenu, add_choice_menus
from app.panels.ask import Ask
from app.panels.cautions import cautions_page
from app.panels.export import ExportDialog
from app.panels.pages import ABOUT_PAGE, PageDialog, details_dialog, notes_dialog
from app.settings import Settings, made_application, user_folder
from app.shown_values import ShownUnits, number_text, screen_words
from app.solving.desk import SolveDesk
from app.throttle import Throttle
from core.errors import CoreError
from core.project import RecoveryStore
from core.units import unit_symbol

if TYPE_CHECKING:
    from collections.abc import Callable

    from PySide6.QtGui import QAction, QCloseEvent, QDragEnterEvent, QDropEvent

    from app.assessment import Assessment
    from core.geometry.shape import ChannelShape

_MESSAGE_MS = 6000

# Painting the curves takes longer than all the rest, so that they may lag behind the drawing by this.
_CURVES_MS = 50


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
        self.parts = Arrangement(self.document, settings=settings, palette=look.palette, set_buttons=set_buttons)
        self.setCentralWidget(self.parts)
        self.place_label = QLabel()
        self.statusBar().setSizeGripEnabled(False)
        self.statusBar().addPermanentWidget(self.place_label)
        self._curves_throttle = Throttle(self._show_curves, interval_ms=_CURVES_MS, parent=self)
        self._flow_gesture: int | None = None
        self._build_menus()
        self._connect_document()
        self._connect_parts()
        self.setAcceptDrops(True)
        self.resize(first_size(self.screen().availableGeometry().size()))
        if (geometry := settings.arrangement("window")) is not None:
            self.restoreGeometry(geometry)
        self._show_all()
        self.solving = SolveDesk(self.document, parts=self.parts, settings=settings, ask=ask, window=self)

    # --- building -------------------------------------------------------------------------

    def _build_menus(self) -> None:
        menus = fill_menus(self, self.actions_by_name)
        recent = RecentMenu(self.settings, self.files.open_path, menus["&Chip"])
        menus["&Chip"].insertMenu(self.actions_by_name["save"], recent)
        add_choice_menus(menus["&View"], self.settings)

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
            "fit": lambda: self.parts.drawing.fit(),
            "zoom_in": lambda: self.parts.drawing.zoom_in(),
            "zoom_out": lambda: self.parts.drawing.zoom_out(),
            "next_finding": lambda: self.parts.verdict.findings.step(1),
            "previous_finding": lambda: self.parts.verdict.findings.step(-1),
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
        parts, findings = self.parts, self.parts.verdict.findings
        parts.sliders.field_attended.connect(parts.drawing.highlight_field)
        parts.drawing.pointer_moved.connect(self._on_drawing_pointer_moved)
        parts.drawing.pointer_left.connect(self.place_label.clear)
        parts.drawing.finding_selected.connect(findings.point_at)
        findings.finding_chosen.connect(parts.drawing.show_finding)
        findings.field_requested.connect(parts.sliders.reveal)
        parts.comparison.set_requested.connect(self.document.select_set)
        parts.sets.model.name_refused.connect(self._show_refusal)
        parts.curves.operating_flow_dragged.connect(self._on_curves_flow_dragged)
        parts.curves.operating_flow_set.connect(self._on_curves_flow_set)
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
        self.parts.drawing.show_shape(shape, last_good=self.document.last_good_shape)

    def _show_assessment(self, assessment: Assessment) -> None:
        score = assessment.score
        self.parts.show_curves(score is not None)
        if score is None:
            self.parts.drawing.show_shares(None, None)
        else:
            self.parts.drawing.show_shares(score.loop_share_forward, score.loop_share_reverse)
            self._curves_throttle.call()

    def _show_curves(self) -> None:
        assessment = self.document.assessment
        if assessment.estimate is not None:
            self.parts.curves.show_estimate(assessment.estimate, flow_ul_min=assessment.flow_ul_min)
            self._show_compared_curves()

    def _show_compared_curves(self) -> None:
        named = []
        if self.actions_by_name["compare"].isChecked():
            for index, each in enumerate(self.document.project.sets):
                beside = self.document.assessment_beside(index).estimate
                if index != self.document.index and beside is not None:
                    named.append((each.name, beside))
        self.parts.curves.show_comparison(named)

    def _show_units(self) -> None:
        units = ShownUnits.of(self.settings)
        self.parts.drawing.set_length_unit(units.length)
        self.parts.curves.set_units(flow=units.flow, pressure=units.pressure)

    def _show_comparison(self) -> None:
        self.parts.show_comparison(self.actions_by_name["compare"].isChecked())
        self._show_compared_curves()

    def _show_refusal(self, error: CoreError) -> None:
        self.statusBar().showMessage(f"\N{BLACK DIAMOND} {screen_words(str(error))}", _MESSAGE_MS)

    def _on_drawing_pointer_moved(self, x_um: float, y_um: float) -> None:
        units = ShownUnits.of(self.settings)
        x, y = (number_text(units.shown(value, "um")) for value in (x_um, y_um))
        value = self.solving.text_at(x_um, y_um)
        self.place_label.setText(f"{value + '   ' if value else ''}x {x}   y {y} {unit_symbol(units.length)}")

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

    def _on_curves_flow_dragged(self, flow_ul_min: float) -> None:
        if self._flow_gesture is None:
            self._flow_gesture = self.document.new_gesture()
            self.document.hold_curve(True)
        gesture = self._flow_gesture
        self._try(lambda: self.document.change_operating({"flow_ul_min": flow_ul_min}, gesture=gesture))

    def _on_curves_flow_set(self, flow_ul_min: float) -> None:
        self._on_curves_flow_dragged(flow_ul_min)
        self._flow_gesture = None
        self.document.hold_curve(False)

    def export(self) -> ExportDialog:
        """Open the dialog that writes the masks."""
        dialog = ExportDialog(self, document=self.document, settings=self.settings, ask=self.ask)
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


def run_window(path: Path | None) -> int:
    """Open the window and stay until it is closed.

    Parameters
    ----------
    path : Path or None
        A project to open; None for a new chip.

    Returns
    -------
    int
        Exit status of the window.
    """
    program = made_application()
    folder = user_folder()
    start_log(folder / "sideloop.log")
    settings = Settings(folder / "settings.ini")
    look = Look(program, scheme=Scheme(settings.scheme))
    window = MainWindow(settings=settings, look=look, recovery=RecoveryStore(folder / "recovery"), ask=Ask())
    FailureHook(
        keep_work=window.files.keep_copy,
        tell=lambda title, text: window.ask.tell(window, title, text),
        log_path=folder / "sideloop.log",
    ).install()
    window.show()
    if path is not None:
        window.files.open_path(path)
    window.files.offer_recovery()
    return program.exec()
