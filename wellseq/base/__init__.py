"""Floor 0: words everybody shares: quantities, places, findings, names."""
