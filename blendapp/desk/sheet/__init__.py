"""The batch sheet: how it will look, and the ways to paper."""
