"""Flow solves from the window: a child process does the work, the window shows what it says."""
