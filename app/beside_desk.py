"""The walls beside the wanted ones: which of them the drawing shows, as the switches of the window say."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QObject

from app.drawing.beside import Walls
from core.geometry.shape import build_shape

if TYPE_CHECKING:
    from collections.abc import Mapping

    from PySide6.QtGui import QAction

    from app.document import Document
    from app.drawing.channel_view import ChannelView


class BesideDesk(QObject):
    """Shows the walls on the mask and those that come out, where they differ from the wanted ones.

    Parameters
    ----------
    document : Document
        What is wanted, and how it is made.
    drawing : ChannelView
        Where they are shown.
    switches : mapping
        The action that shows or hides each kind of walls.
    parent : QObject
        As for any object.
    """

    def __init__(
        self, document: Document, *, drawing: ChannelView, switches: Mapping[Walls, QAction], parent: QObject
    ) -> None:
        super().__init__(parent)
        self._document, self._drawing, self._switches = document, drawing, switches
        for switch in switches.values():
            switch.toggled.connect(self.refresh)
        document.channel_changed.connect(self.refresh)
        document.estimate_changed.connect(self.refresh)  # comes with every other process
        self.refresh()

    def refresh(self) -> None:
        """Show what the switches ask for."""
        making = self._document.making
        channels = {Walls.DRAWN: making.drawn, Walls.MADE: making.made}
        self._drawing.show_beside(
            {
                walls: build_shape(channels[walls])
                for walls, switch in self._switches.items()
                if switch.isChecked() and channels[walls] != making.wanted
            }
        )
