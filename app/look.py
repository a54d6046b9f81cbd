"""The look of the program: named colours for light and dark, spacing, fonts, style sheet.

Every widget and every painter takes its colours from a ``Palette`` and nowhere else. A ``Look``
chooses the palette (as the system says, or forced), dresses the application with it and tells
those who paint for themselves::

    look = Look(application)
    look.palette_changed.connect(channel_view.use_palette)   # sent at every change
    channel_view.use_palette(look.palette)                   # and once at the start
    look.set_scheme(Scheme.DARK)

To colour a label by meaning, give it a role: ``set_role(label, "soft")`` (see ``ROLES``). Colour
never stands alone: whatever is coloured also differs by shape, dash or word.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from functools import lru_cache

from PySide6.QtCore import QObject, Qt, Signal
from PySide6.QtGui import QColor, QFont, QPalette
from PySide6.QtWidgets import QApplication, QStyleFactory, QWidget

from app.style_sheet import SHEET


class Scheme(StrEnum):
    """Which palette to use."""

    SYSTEM = "system"
    LIGHT = "light"
    DARK = "dark"


@dataclass(frozen=True, slots=True, kw_only=True)
class Palette:
    """All colours, by meaning, as ``#rrggbb``.

    Attributes
    ----------
    name : str
        ``light`` or ``dark``.
    ground, panel, field : str
        Window background, raised panels, places to type in.
    solid : str
        Chip material: background of the drawing.
    grid : str
        Ruled lines behind a drawing or a curve.
    fluid, fluid_edge : str
        Inside and wall of the channel.
    pale, pale_edge : str
        Inside and wall of a shape that is no longer valid.
    ink, ink_soft : str
        Text and lines; secondary text.
    rule : str
        Borders and separators; no text.
    accent, on_accent : str
        What is being handled now, and text upon it.
    selection, on_selection : str
        Chosen rows, and text upon them.
    forward, reverse : str
        The easy and the hard direction.
    warning, error, good : str
        Signs of findings; text of verdicts.
    on_sign : str
        Text upon a warning, error or good sign.
    """

    name: str
    ground: str
    panel: str
    field: str
    solid: str
    grid: str
    fluid: str
    fluid_edge: str
    pale: str
    pale_edge: str
    ink: str
    ink_soft: str
    rule: str
    accent: str
    on_accent: str
    selection: str
    on_selection: str
    forward: str
    reverse: str
    warning: str
    error: str
    good: str
    on_sign: str

    @property
    def is_dark(self) -> bool:
        """True for the palette meant for dark surroundings."""
        return self.name == "dark"


# Limestone and petrol, with a violet for the hand: the bench, the liquid, the user.
LIGHT = Palette(
    name="light",
    ground="#ebe7de", panel="#f6f3ed", field="#fffdf9", solid="#e3ddd0", grid="#d6cfc0",
    fluid="#93c8c6", fluid_edge="#17484d", pale="#d9d3c6", pale_edge="#8f897b",
    ink="#1e272b", ink_soft="#555d5e", rule="#c6bfb0",
    accent="#4f3d9c", on_accent="#ffffff", selection="#ddd6f3", on_selection="#1e272b",
    forward="#00616b", reverse="#9c3f06",
    warning="#735400", error="#ad0f38", good="#2f6020", on_sign="#ffffff",
)  # fmt: skip

DARK = Palette(
    name="dark",
    ground="#191c1f", panel="#22262a", field="#15181a", solid="#2b2c2b", grid="#3a3b39",
    fluid="#2c7277", fluid_edge="#9adbd6", pale="#3a3b39", pale_edge="#85837b",
    ink="#ece8df", ink_soft="#b0afa7", rule="#454a4d",
    accent="#b9abf7", on_accent="#1b1532", selection="#433a70", on_selection="#f4f1fc",
    forward="#67d3ca", reverse="#f2a670",
    warning="#e6c250", error="#ff8d9c", good="#98cf82", on_sign="#17191b",
)  # fmt: skip

# Which text colours are used on which grounds; each pair must be readable.
READABLE_PAIRS: tuple[tuple[str, str], ...] = (
    *((text, ground) for text in ("ink", "ink_soft", "accent", "forward", "reverse", "warning", "error", "good")
      for ground in ("ground", "panel", "field", "solid")),
    ("ink", "fluid"), ("ink", "pale"), ("on_accent", "accent"), ("on_selection", "selection"),
    ("on_sign", "warning"), ("on_sign", "error"), ("on_sign", "good"),
)  # fmt: skip

# Roles a label or button can be given, and the colour of its text.
ROLES: dict[str, str] = {
    "soft": "ink_soft", "accent": "accent", "forward": "forward", "reverse": "reverse",
    "warning": "warning", "error": "error", "good": "good",
}  # fmt: skip


@dataclass(frozen=True, slots=True, kw_only=True)
class Spacing:
    """Distances in device-independent pixels.

    Attributes
    ----------
    hair, small, medium, large : int
        Inside a group, between its parts, between groups, around panels.
    corner : int
        Rounding of panels and buttons.
    row : int
        Least height of anything to be pressed.
    """

    hair: int = 3
    small: int = 6
    medium: int = 12
    large: int = 18
    corner: int = 4
    row: int = 26


SPACING = Spacing()

# size of each kind of text against the system's own
_FONT_SIZES = {"body": 1.0, "small": 0.92, "heading": 1.0, "value": 1.3, "verdict": 2.2}


def font(role: str = "body") -> QFont:
    """Return the font for a kind of text.

    Parameters
    ----------
    role : str
        ``body``, ``small``, ``heading`` (bold), ``value`` or ``verdict`` (large figures).

    Returns
    -------
    QFont
        The system's font in the right size, with figures of equal width.
    """
    return QFont(_made_font(role, QApplication.font().key()))


@lru_cache(maxsize=32)
def _made_font(role: str, system_font: str) -> QFont:
    chosen = QFont()
    chosen.fromString(system_font)
    chosen.setPointSizeF(max(7.0, chosen.pointSizeF() * _FONT_SIZES[role]))
    chosen.setWeight(QFont.Weight.DemiBold if role in ("heading", "verdict") else QFont.Weight.Normal)
    chosen.setFeature(QFont.Tag("tnum"), 1)
    return chosen


def set_role(widget: QWidget, role: str) -> None:
    """Give a widget the colour of a meaning.

    Parameters
    ----------
    widget : QWidget
        A label, usually.
    role : str
        Key of ``ROLES``, or empty for plain text.
    """
    widget.setProperty("role", role)
    widget.style().unpolish(widget)
    widget.style().polish(widget)


class Look(QObject):
    """Keeps the whole application in one palette, following the system unless told otherwise.

    Parameters
    ----------
    application : QApplication
        The application to dress.
    scheme : Scheme
        Where to start.
    """

    palette_changed = Signal(object)  # Palette

    def __init__(self, application: QApplication, *, scheme: Scheme = Scheme.SYSTEM) -> None:
        super().__init__(application)
        self._application = application
        self._scheme = scheme
        self._palette: Palette | None = None
        application.setStyle(QStyleFactory.create("Fusion"))
        application.styleHints().colorSchemeChanged.connect(self._on_system_scheme_changed)
        self.set_scheme(scheme)

    @property
    def scheme(self) -> Scheme:
        """What the user asked for."""
        return self._scheme

    @property
    def palette(self) -> Palette:
        """The colours in use."""
        assert self._palette is not None
        return self._palette

    def set_scheme(self, scheme: Scheme) -> None:
        """Follow the system, or force light or dark."""
        self._scheme = scheme
        wanted = {Scheme.SYSTEM: Qt.ColorScheme.Unknown, Scheme.LIGHT: Qt.ColorScheme.Light,
                  Scheme.DARK: Qt.ColorScheme.Dark}[scheme]  # fmt: skip
        self._application.styleHints().setColorScheme(wanted)  # title bars and file dialogs follow
        self._apply()

    def _on_system_scheme_changed(self) -> None:
        if self._scheme is Scheme.SYSTEM:
            self._apply()

    def _apply(self) -> None:
        is_dark = self._scheme is Scheme.DARK or (
            self._scheme is Scheme.SYSTEM and self._application.styleHints().colorScheme() == Qt.ColorScheme.Dark
        )
        chosen = DARK if is_dark else LIGHT
        if chosen is self._palette:
            return
        self._palette = chosen
        self._application.setPalette(qt_palette(chosen))
        self._application.setStyleSheet(style_sheet(chosen))
        self.palette_changed.emit(chosen)


def qt_palette(palette: Palette) -> QPalette:
    """Return the toolkit's own set of colours made from ours."""
    role = QPalette.ColorRole
    made = QPalette()
    for target, name in (
        (role.Window, palette.ground), (role.WindowText, palette.ink), (role.Base, palette.field),
        (role.AlternateBase, palette.panel), (role.Text, palette.ink), (role.Button, palette.panel),
        (role.ButtonText, palette.ink), (role.BrightText, palette.error), (role.ToolTipBase, palette.ink),
        (role.ToolTipText, palette.panel), (role.Highlight, palette.selection),
        (role.HighlightedText, palette.on_selection), (role.Link, palette.accent), (role.LinkVisited, palette.accent),
        (role.PlaceholderText, palette.ink_soft), (role.Accent, palette.accent), (role.Mid, palette.rule),
        (role.Midlight, palette.panel), (role.Dark, palette.rule), (role.Light, palette.field),
        (role.Shadow, palette.rule),
    ):  # fmt: skip
        made.setColor(target, QColor(name))
    for target in (role.WindowText, role.Text, role.ButtonText):
        made.setColor(QPalette.ColorGroup.Disabled, target, QColor(palette.pale_edge))
    return made


def style_sheet(palette: Palette) -> str:
    """Return the style sheet of the whole application."""
    names = {name: getattr(palette, name) for name in Palette.__slots__}
    sizes = {name: f"{getattr(SPACING, name)}px" for name in Spacing.__slots__}
    roles = "\n".join(f'*[role="{role}"] {{ color: {getattr(palette, name)}; }}' for role, name in ROLES.items())
    return SHEET.substitute(names, **sizes) + roles
