"""Least-cost feed formulas, prices and batch sheets for a feed mill."""

import os

# The matrices of formulas are small: threads of the linear algebra library only wait for each other on them (measured
# on two busy cores: 300 x 80 took six times as long). It reads this when numpy is first imported.
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
