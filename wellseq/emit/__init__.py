"""Floor 8: what leaves the house: findings in several forms, and the published folder."""
