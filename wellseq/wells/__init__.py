"""Floor 5: Timeline, Shipped → each cloud's well followed through time, with certificates."""
