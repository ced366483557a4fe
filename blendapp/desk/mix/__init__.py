"""What to mix: the answer, or why there is none."""
