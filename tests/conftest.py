"""For every test: the program is imported before numpy, since it sets how many threads numpy uses."""

import blendapp  # noqa: F401
