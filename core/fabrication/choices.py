"""Words that a process chooses between; the value of each is what stands in files and on the screen."""

from __future__ import annotations

from enum import StrEnum


class Allowance(StrEnum):
    """Who allows for bias, undercut and kerf."""

    IN_DRAWING = "in the drawing"
    BY_SHOP = "by the shop"
    NOT_AT_ALL = "not at all"


class ToolRuns(StrEnum):
    """Where a milling tool runs."""

    IN_CHANNEL = "in the channel"
    OUTSIDE_CHANNEL = "outside the channel"


class Tone(StrEnum):
    """What the drawn shapes become."""

    CLEAR = "drawn shapes are CLEAR"
    DARK = "drawn shapes are DARK"
    CUT = "drawn lines are CUT"


class ReadingSide(StrEnum):
    """From which side the drawing reads correctly; files are never mirrored."""

    LAYER_DOWN = "right-reading, chrome or emulsion side DOWN"
    LAYER_UP = "right-reading, chrome or emulsion side UP"
    TOOL_SIDE = "as seen from the side where the tool enters"


class DxfVersion(StrEnum):
    """Version of the DXF files: R2000 is taken nearly everywhere, R12 by the oldest readers."""

    R2000 = "R2000"
    R12 = "R12"


class IslandMode(StrEnum):
    """How islands are left out in DXF files; GDSII files always hold pieces."""

    PIECES = "pieces"  # the channel is cut into butting pieces without holes
    LOOPS = "loops"  # outer loops and island loops on two layers, to be combined by NOT
    NESTED = "nested"  # plain loops within loops on one layer, inner ones first, for cutting


class CopyMode(StrEnum):
    """How repeated shapes stand in DXF files; GDSII files always refer to cells."""

    INSERTS = "inserts"  # drawn once as a block and inserted, shifted only
    FLAT = "flat"  # written out again and again
