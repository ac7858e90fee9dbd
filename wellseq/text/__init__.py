"""Floor 1: source text → Tree, with every mistake of the file and its place."""
