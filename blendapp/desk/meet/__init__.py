"""What it must meet: the limits of the chosen formula as one list of rails."""
