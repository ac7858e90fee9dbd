"""Floor 5: Timeline, Shipped → each cloud's well followed through all of time, with certificates."""
