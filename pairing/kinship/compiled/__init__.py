"""Kinship of large pedigrees in compiled loops over arrays; `large` stands in front.

Compiled code is kept until the module of its function changes, and holds what it calls from
other modules: after a change in one module here, remove what was kept of the others.
"""
