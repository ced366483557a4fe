"""Lists after they were taken: what was applied, and what is remembered of each source."""
