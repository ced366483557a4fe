from __future__ import annotations

import sys
from pathlib import Path

# page_cases.py and page_reading.py stand beside the tests.
sys.path.insert(0, str(Path(__file__).parent))
