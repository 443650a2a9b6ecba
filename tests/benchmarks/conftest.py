"""The benchmarks of the design room share its recipes and its slow twin."""

import sys
from pathlib import Path

sys.path.append(str(Path(__file__).parents[1] / "design"))
