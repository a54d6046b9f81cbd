"""Starting values of the shipped processes, each number with where it comes from.

A row is ``field: (value, source)``. ``NO_SOURCE`` marks common practice that nobody vouches for.
"""

from __future__ import annotations

from core.fabrication.process import ProcessKind

NO_SOURCE = "common practice, no source"
_MEMORY = "rule of the trade from memory, unconfirmed"
_GEOMETRY = "follows from the geometry"

Rows = dict[str, tuple[float, str]]

_SPIN = "spin-coated SU-8 is 0.5-200 um thick (from memory); thicker films are cast by volume, Lin et al. 2002"
_RELIEF = "silicone relief neither sags nor leans at height/width 0.2-2, Delamarche et al. 1997 (from memory)"
_SPAN = "unsupported span over height: 10 careful, 20 absolute; " + _MEMORY
_PLASMA = "plasma-bonded silicone bursts at about 200-500 kPa (from memory); the lower end"
_CURE = "a university foundry's rule for thick layers; Lee and Lee 2008 give about 1.06 % at 65 degC, 1.52 % at 80 degC"
_WEBS = "published rule of laser cutters: webs at least 1 mm or the sheet's thickness"
_APART = "published rule of laser cutters: cuts at least 0.5 mm apart"
_TOOL = "milling tools of 0.1-0.5 mm are common; " + _MEMORY

EVERYWHERE: Rows = {
    "bias_um": (0.0, "no value known beforehand: measure the test bars; " + NO_SOURCE),
    "undercut_ratio": (0.0, "nothing is etched sideways; " + _GEOMETRY),
    "kerf_um": (0.0, "no beam or blade; " + _GEOMETRY),
    "tool_diameter_um": (0.0, "no tool runs along the walls; " + _GEOMETRY),
    "shrink_percent": (0.0, "not cast from a mould; " + _GEOMETRY),
    "wall_lean_deg": (0.0, "upright within a degree or two; " + NO_SOURCE),
    "safety_factor": (2.0, "at least 2 below the weakest bond; " + NO_SOURCE),
    "grid_nm": (1, "the usual database unit of mask files, 1 nm; ask for the writer's own address unit"),
    "chord_tolerance_um": (0.02, "10-100 nm, a tenth of the tolerance of the critical dimension; " + _MEMORY),
}
_SOFT: Rows = {
    "max_depth_to_width": (2.0, _RELIEF),
    "max_width_to_depth": (10.0, _SPAN),
    "collapse_width_to_depth": (20.0, _SPAN),
    "shrink_percent": (1.5, _CURE),
    "bond_limit_kpa": (200.0, _PLASMA),
    "min_wall_um": (200.0, NO_SOURCE),
}
_STIFF: Rows = {
    "max_width_to_depth": (50.0, "stiff lids sag only in the heat of bonding; " + NO_SOURCE),
    "collapse_width_to_depth": (200.0, "stiff lids sag only in the heat of bonding; " + NO_SOURCE),
}
_LASER: Rows = {
    "max_depth_to_width": (1.0, "holes of at least 0.5-1.5 and webs of at least 1 times the thickness, published rule"),
    "wall_lean_deg": (2.0, "cut edges lean by 1-3 deg on each side (from memory)"),
}

VALUES: dict[ProcessKind, Rows] = {
    ProcessKind.CAST_FILM: EVERYWHERE | _SOFT | {
        "min_width_um": (50.0, "a film supplier's smallest line at 10 000 dpi is 40-48 um; 2400 dpi is poor below 50"),
        "min_gap_um": (50.0, "as the smallest width"),
        "min_drawn_um": (48.0, "a film supplier's smallest line at 10 000 dpi, 40-48 um"),
        "min_radius_um": (8.0, "corners of film round by 1-3 dots, three dots of 2.54 um at 10 000 dpi"),
        "min_depth_um": (5.0, NO_SOURCE),
        "max_depth_um": (200.0, _SPIN),
    },
    ProcessKind.CAST_CHROME: EVERYWHERE | _SOFT | {
        "min_width_um": (10.0, "resist of 5-10 times its width in height is comfortable (from memory); " + NO_SOURCE),
        "min_gap_um": (10.0, "as the smallest width"),
        "min_drawn_um": (5.0, "chrome by laser writer reaches 1-6 um, published by mask makers"),
        "min_radius_um": (2.0, NO_SOURCE),
        "min_depth_um": (3.0, "advice for SU-8, 2025: layers between 3 and 500 um"),
        "max_depth_um": (200.0, _SPIN),
    },
    ProcessKind.WET_GLASS: EVERYWHERE | _STIFF | {
        "min_width_um": (20.0, NO_SOURCE),
        "min_gap_um": (50.0, "enough glass between two etched channels to bond to; " + NO_SOURCE),
        "min_wall_um": (200.0, NO_SOURCE),
        "min_drawn_um": (5.0, "chrome by laser writer reaches 1-6 um, published by mask makers"),
        "min_radius_um": (2.0, NO_SOURCE),
        "min_depth_um": (2.0, NO_SOURCE),
        "max_depth_um": (150.0, "over 600 um in fused silica is published, with special resist; " + NO_SOURCE),
        "max_depth_to_width": (0.5, "etched as far sideways as down, no channel is less than twice as wide as deep"),
        "undercut_ratio": (1.0, "isotropic: as far sideways as down (from memory)"),
        "bond_limit_kpa": (500.0, "fused glass; " + NO_SOURCE),
    },
    ProcessKind.DRY_SILICON: EVERYWHERE | _STIFF | {
        "min_width_um": (5.0, NO_SOURCE),
        "min_gap_um": (5.0, NO_SOURCE),
        "min_wall_um": (100.0, NO_SOURCE),
        "min_drawn_um": (4.0, "chrome by laser writer reaches 1-6 um, published by mask makers"),
        "min_radius_um": (1.0, NO_SOURCE),
        "min_depth_um": (5.0, NO_SOURCE),
        "max_depth_um": (400.0, "less than a wafer's thickness; " + NO_SOURCE),
        "max_depth_to_width": (20.0, NO_SOURCE),
        "bias_um": (0.3, "a little sideways under the mask; " + NO_SOURCE),
        "bond_limit_kpa": (500.0, "glass bonded to silicon; " + NO_SOURCE),
    },
    ProcessKind.LASER_ACRYLIC: EVERYWHERE | _STIFF | _LASER | {
        "min_width_um": (700.0, "cuts 0.5 mm apart and a kerf of 0.2 mm; " + _GEOMETRY),
        "min_gap_um": (1000.0, _WEBS),
        "min_wall_um": (1000.0, _WEBS),
        "min_drawn_um": (500.0, _APART),
        "min_radius_um": (100.0, "half the kerf; " + NO_SOURCE),
        "min_depth_um": (500.0, "thinnest sheet in common stock; " + NO_SOURCE),
        "max_depth_um": (3000.0, "kerf and taper are known for sheets of 2-3 mm"),
        "kerf_um": (200.0, "carbon dioxide laser, 3 mm acrylic: about 0.2 mm, published range 0.08-0.45 mm"),
        "bond_limit_kpa": (200.0, "solvent or heat: hundreds of kPa if well done (from memory); the lower end"),
    },
    ProcessKind.LASER_FILM: EVERYWHERE | _STIFF | _LASER | {
        "min_width_um": (250.0, NO_SOURCE),
        "min_gap_um": (300.0, NO_SOURCE),
        "min_wall_um": (1000.0, _WEBS),
        "min_drawn_um": (150.0, NO_SOURCE),
        "min_radius_um": (40.0, "half the kerf; " + NO_SOURCE),
        "min_depth_um": (25.0, NO_SOURCE),
        "max_depth_um": (500.0, NO_SOURCE),
        "kerf_um": (80.0, "lower end of the published range 0.08-0.45 mm"),
        "bond_limit_kpa": (60.0, "layers joined by adhesive; " + NO_SOURCE),
    },
    ProcessKind.MILLED_CHANNEL: EVERYWHERE | _STIFF | {
        "min_width_um": (200.0, "the tool's diameter; " + _GEOMETRY),
        "min_gap_um": (200.0, NO_SOURCE),
        "min_wall_um": (500.0, NO_SOURCE),
        "min_drawn_um": (200.0, "the tool's diameter; " + _GEOMETRY),
        "min_radius_um": (5.0, "tolerance of below 5 um is possible when milling acrylic"),
        "min_depth_um": (20.0, NO_SOURCE),
        "max_depth_um": (1000.0, "5 tool diameters, with reach-relieved tools up to 10 (from memory)"),
        "max_depth_to_width": (3.0, "depth of cut over tool diameter 2-3 (from memory)"),
        "tool_diameter_um": (200.0, _TOOL),
        "bond_limit_kpa": (200.0, "solvent or heat: hundreds of kPa if well done (from memory); the lower end"),
    },
    ProcessKind.MILLED_MOULD: EVERYWHERE | _SOFT | {
        "min_width_um": (100.0, "thinnest ridge that stands the tool; " + NO_SOURCE),
        "min_gap_um": (200.0, "the tool's diameter; " + _GEOMETRY),
        "min_drawn_um": (100.0, NO_SOURCE),
        "min_radius_um": (5.0, "tolerance of below 5 um is possible when milling acrylic"),
        "min_depth_um": (20.0, NO_SOURCE),
        "max_depth_um": (600.0, "3 tool diameters (from memory)"),
        "tool_diameter_um": (200.0, _TOOL),
    },
    ProcessKind.KNIFE_FILM: EVERYWHERE | _STIFF | {
        "min_width_um": (250.0, "everyday craft cutters 200-300 um; 6-18 um published, Bartholomeusz et al. 2005"),
        "min_gap_um": (300.0, "everyday craft cutters 200-300 um (from memory)"),
        "min_wall_um": (1000.0, NO_SOURCE),
        "min_drawn_um": (250.0, "everyday craft cutters 200-300 um (from memory)"),
        "min_radius_um": (100.0, "a dragged blade swings round; " + NO_SOURCE),
        "min_depth_um": (25.0, "thinnest film in the published trials, Bartholomeusz et al. 2005 (from memory)"),
        "max_depth_um": (300.0, NO_SOURCE),
        "max_depth_to_width": (1.0, NO_SOURCE),
        "bond_limit_kpa": (30.0, "held by adhesion alone about 30 kPa (from memory)"),
    },
}  # fmt: skip
