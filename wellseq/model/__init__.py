"""Floor 2: Tree → Sequence, names and units settled; the trap; one file per step kind."""
