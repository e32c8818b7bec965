"""What all tests share."""

from __future__ import annotations

import sys
from pathlib import Path

# Helpers stand beside the tests that use them and are imported by their plain names.
for folder in ("solve", "boards"):
    sys.path.insert(0, str(Path(__file__).parent / folder))
