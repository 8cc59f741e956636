"""The plan: who should breed with whom next season, the best set under every limit, and why."""
