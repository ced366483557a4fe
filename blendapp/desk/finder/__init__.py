"""Finding records and commands by typing."""
