"""The view that the tests of the drawing share."""

from __future__ import annotations

import pytest

from app.drawing.channel_view import ChannelView
from tests.app.drawing.samples import GOOD


@pytest.fixture
def view(qtbot):
    """Show a view of the default channel, 1000 by 600, that jumps instead of gliding."""
    made = ChannelView()
    qtbot.addWidget(made)
    made.set_animated(False)
    made.resize(1000, 600)
    made.show_shape(GOOD)
    made.show()
    qtbot.waitExposed(made)
    made.setFocus()
    return made
