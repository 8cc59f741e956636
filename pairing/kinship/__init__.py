"""Kinship: the chance that two genes are copies of one ancestral gene, three exact ways.

The package answers to a call as its function `pairing.kinship.engine.kinship` does, so that
``pairing.kinship(pedigree)`` works although this package bears the same name.
"""

from __future__ import annotations

import sys
from types import ModuleType
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from pairing.kinship.engine import Kinship
    from pairing.pedigree.descent import Pedigree


class _CallablePackage(ModuleType):
    """This package, answering a call with the kinship of a pedigree."""

    def __call__(
        self, pedigree: Pedigree, *, method: str | None = None, unknown_parents: str = "unrelated"
    ) -> Kinship:
        from pairing.kinship.engine import kinship

        return kinship(pedigree, method=method, unknown_parents=unknown_parents)


sys.modules[__name__].__class__ = _CallablePackage
