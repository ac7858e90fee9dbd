"""Floor 8: the second reader, which shares no code with whatever wrote a published folder."""
