"""What tests of panels share: a document, fresh settings, colours."""

from __future__ import annotations

from pathlib import Path

import pytest

from core.parameters import ChannelParameters
from core.project import ChipProject, ParameterSet


def pytest_collection_modifyitems(items):
    """Let pass what the screenless platform says about windows with a least size; it has no windows."""
    for item in items:
        if item.path.is_relative_to(Path(__file__).parent):
            item.add_marker(pytest.mark.qt_log_ignore("propagateSizeHints"))


@pytest.fixture
def document(qapp):
    from app.document import Document

    return Document(
        ChipProject(
            name="Bench chip",
            sets=(
                ParameterSet(name="Alpha", channel=ChannelParameters(stages=1)),
                ParameterSet(name="Beta", channel=ChannelParameters(stages=2, loop_radius_um=400)),
                ParameterSet(name="Blocked", channel=ChannelParameters(loop_radius_um=20)),
            ),
        )
    )


@pytest.fixture
def settings(qapp, tmp_path):
    from app.settings import Settings

    return Settings(tmp_path / "settings.ini")
