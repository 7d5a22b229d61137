"""What a stack does to light: one file a quantity."""
