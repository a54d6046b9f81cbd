"""The verdict says what the engine says, with its bands, and never more.

Truth: the score of ``core`` itself; the panel must not round in the user's favour.
"""

from __future__ import annotations

import pytest

from app.panels.cautions import CAUTIONS, applying, cautions_page
from app.panels.verdict import VerdictPanel


@pytest.fixture
def panel(qtbot, document, settings):
    panel = VerdictPanel(document, settings)
    qtbot.addWidget(panel)
    panel.resize(300, 800)
    with qtbot.waitExposed(panel):
        panel.show()
    return panel


def test_all_figures_are_there(panel, document):
    score = document.assessment.score
    assert panel.diodicity_label.text() == f"Di {score.diodicity:.3f}"
    assert f"{score.rectification_band_percent:.0f} %" in panel.excess_label.text()
    assert float(panel.pressure_labels["forward"].text().split()[0]) == pytest.approx(
        score.forward_pressure_pa / 1000.0, rel=1e-3
    )
    assert f"{score.error_band_percent:.0f} %" in panel.pressure_labels["reverse"].text()
    assert panel.share_labels["reverse"].text() == f"{score.loop_share_reverse * 100:.1f} %"
    assert panel.reynolds_label.text().startswith("Re ")
    assert "1200 µL/min" in panel.condition_label.text()
    assert "Estimate" in panel.method_label.text()


def test_slow_flow_promises_nothing(panel, document, qtbot):
    with qtbot.waitSignal(document.estimate_changed):
        document.change_operating({"flow_ul_min": 1.0})
    assert panel.diodicity_label.text() == "Di 1.000"
    assert panel.notes_label.text(), "a note says that nothing is gained here"


def test_outside_its_range_is_said_in_words(panel, document, qtbot):
    with qtbot.waitSignal(document.estimate_changed):
        document.change_operating({"flow_ul_min": 100000.0})
    score = document.assessment.score
    assert not score.valid
    assert score.rectification_band_percent > 100.0
    assert panel.diodicity_label.text() == "Di unknown"
    assert "Outside its range" in panel.trust_label.text()
    assert "hint only" in panel.method_label.text()


def test_a_blocked_shape_has_no_score(panel, document, qtbot):
    with qtbot.waitSignal(document.channel_changed):
        document.select_set(2)
    assert "\N{EM DASH}" in panel.diodicity_label.text()
    assert "No score" in panel.trust_label.text()
    assert "findings that block it" in panel.method_label.text()
    with qtbot.waitSignal(document.channel_changed):
        document.select_set(0)
    assert "Di 1." in panel.diodicity_label.text()


def test_pressure_follows_the_unit(panel, document, settings):
    settings.set_unit("pressure", "psi")
    shown = float(panel.pressure_labels["forward"].text().split()[0])
    assert shown == pytest.approx(document.assessment.score.forward_pressure_pa / 6894.757, rel=1e-3)
    assert " psi " in panel.pressure_labels["forward"].text()


def test_cautions_come_where_they_apply(panel, document, qtbot):
    assert not panel.caution_label.isVisible()
    with qtbot.waitSignal(document.estimate_changed):
        document.change_operating({"fluid": "ethanol"})
    assert "Flammable" in panel.caution_label.text()
    with qtbot.waitSignal(document.estimate_changed):
        document.change_operating({"fluid": "water", "flow_ul_min": 30000.0})
    assert document.assessment.score.reverse_pressure_pa > 100_000.0
    assert "under pressure" in panel.caution_label.text()


def test_air_has_its_own_caution(document):
    document.change_operating({"fluid": "air"})
    assert [each.title for each in applying(document.operating, document.assessment)] == ["Compressed gas"]


def test_the_page_holds_every_caution_and_defers_to_local_rules():
    page = cautions_page()
    assert all(caution.title in page and caution.text in page for caution in CAUTIONS)
    assert "rules of your laboratory" in page
