"""Floor 7: readings of what can be wrong, one file per bad thing, and their verdicts."""
