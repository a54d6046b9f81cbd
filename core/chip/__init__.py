"""From parameter sets to a chip: placed channels, ports, marks, lettering, and plates filled with copies.

What is wanted: ``plan``. What comes of it: ``scene``, put together in ``build`` from ``bodies`` (the channels),
``ports``, ``marks`` with ``lettering`` (``stamps``: which of them, ``furniture``: where) and the copies of ``plate``.
Places are found by ``packing``, ``fitting`` and ``adding``; ``chip_findings`` tells what is wrong.
"""
