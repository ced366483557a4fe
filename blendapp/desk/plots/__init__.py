"""Plots. What they need is slow to import, so a page imports them when it is first opened."""
