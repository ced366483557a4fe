"""The mill itself: its name and money, its scales and mixers, and its nutrients."""
