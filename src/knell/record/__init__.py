"""Floor 4: what made each file, and how to make it again."""
