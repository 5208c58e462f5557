"""Lets the tests of this folder import its solver and its experiments."""

import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent))
