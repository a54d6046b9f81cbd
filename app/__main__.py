"""``python -m app``: open the window, or answer on the command line."""

from __future__ import annotations

import sys

from app.command_line import main

if __name__ == "__main__":
    sys.exit(main())
