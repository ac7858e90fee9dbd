"""Floor 12: the language server: what an editor asks of the same engine that checks files."""
