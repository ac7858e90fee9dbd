"""Floor 7: interlock rules judged over all of time, on the shipped table."""
