"""Floor 10: the command line."""
