"""The palettes are readable and the application follows them."""

from __future__ import annotations

from dataclasses import fields, replace

import pytest
from PySide6.QtGui import QColor, QPalette
from PySide6.QtWidgets import QLabel

from app.look import DARK, LIGHT, READABLE_PAIRS, ROLES, Look, Palette, Scheme, font, set_role, style_sheet

BOTH = pytest.mark.parametrize("palette", [LIGHT, DARK], ids=lambda palette: palette.name)


def relative_luminance(colour: str) -> float:
    """WCAG 2.1, definition of relative luminance (sRGB)."""
    channels = (int(colour[i : i + 2], 16) / 255.0 for i in (1, 3, 5))
    red, green, blue = (c / 12.92 if c <= 0.03928 else ((c + 0.055) / 1.055) ** 2.4 for c in channels)
    return 0.2126 * red + 0.7152 * green + 0.0722 * blue


def contrast(one: str, other: str) -> float:
    """WCAG 2.1, contrast ratio, 1 to 21."""
    high, low = sorted((relative_luminance(one), relative_luminance(other)), reverse=True)
    return (high + 0.05) / (low + 0.05)


def test_contrast_formula_knows_its_ends():
    """Truth: WCAG 2.1 gives 21:1 for black on white; #767676 on white is its best known 4.54:1 grey."""
    assert contrast("#000000", "#ffffff") == pytest.approx(21.0)
    assert contrast("#767676", "#ffffff") == pytest.approx(4.54, abs=0.005)


@BOTH
@pytest.mark.parametrize("pair", READABLE_PAIRS, ids=" on ".join)
def test_text_is_readable(palette, pair):
    """Truth: WCAG 2.1 success criterion 1.4.3, 4.5:1 for text of normal size."""
    text, ground = (getattr(palette, name) for name in pair)
    assert contrast(text, ground) >= 4.5


@BOTH
@pytest.mark.parametrize("pair", [("fluid_edge", "solid"), ("fluid_edge", "fluid"), ("pale_edge", "pale")])
def test_lines_can_be_told_from_what_they_bound(palette, pair):
    """Truth: WCAG 2.1 success criterion 1.4.11, 3:1 for graphics; half of that for the deliberately pale one."""
    line, ground = (getattr(palette, name) for name in pair)
    assert contrast(line, ground) >= (2.0 if "pale" in pair else 3.0)


@BOTH
def test_every_colour_is_a_colour(palette):
    """Truth: the tool kit's own reading of the colour."""
    for field in fields(Palette):
        if field.name != "name":
            assert QColor(getattr(palette, field.name)).isValid(), field.name


@BOTH
def test_sheet_has_no_gaps(palette):
    """Truth: every $name of the template is replaced, or Template.substitute raises."""
    sheet = style_sheet(palette)
    assert "$" not in sheet
    assert palette.accent in sheet
    assert style_sheet(replace(palette, accent="#123456")).count("#123456") == sheet.count(palette.accent)


@pytest.fixture
def look(qapp):
    """Dress the application, and take the look off again."""
    style, palette, sheet = qapp.style().objectName(), QPalette(qapp.palette()), qapp.styleSheet()
    made = Look(qapp, scheme=Scheme.LIGHT)
    yield made
    made.set_scheme(Scheme.SYSTEM)
    qapp.styleHints().colorSchemeChanged.disconnect(made._on_system_scheme_changed)
    qapp.setStyleSheet(sheet)
    qapp.setPalette(palette)
    qapp.setStyle(style)
    made.deleteLater()


def test_scheme_can_be_forced_both_ways(look, qapp, qtbot):
    """Truth: the application's window colour is the palette's ground."""
    assert look.palette is LIGHT
    with qtbot.waitSignal(look.palette_changed) as sent:
        look.set_scheme(Scheme.DARK)
    assert sent.args == [DARK]
    assert look.palette.is_dark
    assert qapp.palette().color(QPalette.ColorRole.Window).name() == DARK.ground
    look.set_scheme(Scheme.LIGHT)
    assert qapp.palette().color(QPalette.ColorRole.Window).name() == LIGHT.ground


def test_same_scheme_again_says_nothing(look, qtbot):
    """Truth: a signal at each change, none without one."""
    with qtbot.assertNotEmitted(look.palette_changed):
        look.set_scheme(Scheme.LIGHT)


@pytest.mark.parametrize("role", ROLES)
def test_a_role_colours_a_label(look, qtbot, role):
    """Truth: the colour the label paints its text with."""
    label = QLabel("word")
    qtbot.addWidget(label)
    set_role(label, role)
    label.ensurePolished()
    assert label.palette().color(QPalette.ColorRole.WindowText).name() == getattr(LIGHT, ROLES[role])


def test_figures_of_verdicts_are_larger_than_text(qapp):
    """Truth: the order of importance on the screen."""
    sizes = [font(role).pointSizeF() for role in ("small", "body", "value", "verdict")]
    assert sizes == sorted(sizes)
    assert len(set(sizes)) == 4
