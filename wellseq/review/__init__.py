"""Floor 11: what a reviewer needs: many files at once, earlier findings, comparisons, layout."""
