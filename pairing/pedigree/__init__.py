"""Checked descent: animals, their genotypes, and the flow of genes from parent to child."""
