"""A child that speaks like the real one but solves nothing: ``python quick_job.py MANNER``."""

from __future__ import annotations

import json
import os
import signal
import sys
import time
from pathlib import Path

import numpy as np


def tell(kind, **content):
    sys.stdout.write(json.dumps({"kind": kind, **content}) + "\n")
    sys.stdout.flush()


def point(flow, quality, gain):
    return {
        "flow_ul_min": flow, "reynolds": flow / 12.0, "forward_pressure_pa": flow, "reverse_pressure_pa": flow * gain,
        "loop_share_forward": 0.25, "loop_share_reverse": 0.55, "error_band_percent": 1.5, "diodicity_band": 0.02,
        "reached_reynolds": flow / 12.0, "valid": True, "quality": quality, "notes": ["made up"],
    }  # fmt: skip


def fields(folder, quality):
    """Write a square of two triangles whose speed at mid-depth is 1.5 m/s in x."""
    if not folder:
        return ""
    path = Path(folder) / f"{quality}.npz"
    square = np.array([[0.0, -100.0], [200.0, -100.0], [200.0, 100.0], [0.0, 100.0]])
    arrays = {
        "points_um": square,
        "triangles": np.array([[0, 1, 2], [0, 2, 3]]),
        "in_plane_m_s": np.stack((np.ones((1, 4)), np.zeros((1, 4)))),
        "vertical_m_s": np.zeros((0, 4)),
        "pressure_modes_pa": np.array([[2000.0, 0.0, 0.0, 2000.0]]),
    }
    named = {f"{way}_{name}": values for way in ("forward", "reverse") for name, values in arrays.items()}
    np.savez(path, **named)
    return str(path)


def main(manner):
    request = json.loads(sys.stdin.readline())
    print("a library says hello")
    tell("progress", step=100, total=1000, text="coarse answer: meshing")
    if manner == "refuse":
        return tell("failed", text="stages is 99: would need 9 GB; use fewer stages")
    for quality, gain in (("coarse", 1.1), ("normal", 1.2)):
        points = [point(flow, quality, gain) for flow in request["flows_ul_min"]]
        tell("answer", quality=quality, points=points, fields=fields(request["folder"], quality))
        if manner == "crash":
            os.kill(os.getpid(), signal.SIGKILL)
        if manner == "mute":
            return None
        if manner == "polite":
            sys.stdin.readline()
            return tell("stopped")
        if manner == "deaf":
            time.sleep(60)
    return tell("done")


if __name__ == "__main__":
    main(sys.argv[1])
