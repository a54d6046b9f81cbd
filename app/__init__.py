"""What the user meets: the command line and the window. No arithmetic in here; ``core`` does it."""
