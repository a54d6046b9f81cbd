"""From a parameter set to its shape: centre line, outline of lines and arcs, pieces."""
