"""``python -m linewright`` is the command ``linewright``."""

from __future__ import annotations

import sys

from linewright.cli.main import main

if __name__ == "__main__":
    sys.exit(main())
