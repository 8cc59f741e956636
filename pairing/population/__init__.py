"""The living population: who it is, and what gene diversity it holds."""
