"""From shapes to mask files: figures, writers, readers that do not share code with them, proof."""
