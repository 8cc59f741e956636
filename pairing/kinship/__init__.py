"""Kinship: the chance that two genes are copies of one ancestral gene, three exact ways."""
