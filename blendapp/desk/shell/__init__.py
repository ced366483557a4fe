"""What is painted first: the frame of the bench. Nothing here may import services or anything slow."""
