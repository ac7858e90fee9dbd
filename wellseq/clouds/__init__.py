"""Floor 6: wells and effects → forecast of each cloud, with an interval and a reason."""
