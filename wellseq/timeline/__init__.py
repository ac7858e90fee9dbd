"""Floor 4: Sequence → Timeline (pieces per output in exact time) → Shipped (codes and ticks)."""
