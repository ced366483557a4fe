"""What we have: the ingredients as a table for work on data."""
