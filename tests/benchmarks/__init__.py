"""Timings as ratios against something bare in the same run. Importing the program first sets its threads."""

import blendapp  # noqa: F401
