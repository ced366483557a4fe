"""What holds for every test.

The program is imported before numpy, since it sets how many threads numpy uses. Property tests take as long as they
need and try the same examples on every run; HYPOTHESIS_PROFILE=search tries new ones, after a change of what they test.
"""

from __future__ import annotations

import os
import sys

from hypothesis import HealthCheck, settings

import blendapp  # noqa: F401

settings.register_profile("steady", deadline=None, derandomize=True, suppress_health_check=[HealthCheck.too_slow])
settings.register_profile("search", deadline=None, suppress_health_check=[HealthCheck.too_slow])
settings.load_profile(os.environ.get("HYPOTHESIS_PROFILE", "steady"))

# Where there is no screen the windows of the tests are drawn without one.
if not (os.environ.get("DISPLAY") or os.environ.get("WAYLAND_DISPLAY")) and sys.platform == "linux":
    os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
