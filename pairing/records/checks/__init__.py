"""Checks of records: each finds one group of doubts, over all animals at once."""
