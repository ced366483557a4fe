"""The rail: the one drawing of the program. geometry places, paint draws, grip moves, item is a rail as a widget."""
