"""``python -m springpoise`` is the ``springpoise`` command."""

from __future__ import annotations

import sys

from springpoise.cli import main

if __name__ == "__main__":
    sys.exit(main())
