"""Panels of the window: each is small, bound to the document both ways, and does no arithmetic on designs."""
