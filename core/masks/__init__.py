"""From shapes to mask files: figures, writers, readers that do not share code with them, proof.

The one way in is ``mask_set``. A scene becomes a ``drawing``; ``dxf`` and ``gdsii`` write it; ``read_dxf`` and
``read_gdsii`` take the files apart again, ``figure_rules`` and its neighbours say what they must obey, and ``proof``
compares them with the scene. ``sheet`` is the order sheet, ``package`` adds checksums and the archive, ``placing`` puts
all files in place or none.
"""
