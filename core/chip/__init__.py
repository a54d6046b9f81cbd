"""From parameter sets to a chip: placed channels, ports, marks, lettering, and plates filled with copies."""
