"""The benchmarks are scripts: they find each other by their folder, here as from the command line."""

import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent))
