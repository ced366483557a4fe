"""The page of one ingredient's prices: a plot, every quote, the rule, and entries of the history."""
