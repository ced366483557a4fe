"""A price list before it is taken: what would become of each row."""
