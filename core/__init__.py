"""Engine of Sideloop: shape, estimate, flow, findings, masks and project files.

Nothing in here knows a screen or Qt; see DEVELOPERS.md for the layers.
"""
