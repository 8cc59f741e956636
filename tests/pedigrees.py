"""Small pedigrees for tests: read from CSV text as a file is, or drawn by hypothesis."""

from __future__ import annotations

import textwrap
from dataclasses import dataclass, replace
from fractions import Fraction

import numpy as np
from hypothesis import strategies as st

from pairing.kinship.engine import Kinship
from pairing.kinship.engine import kinship as compute_kinship
from pairing.pedigree.descent import Pedigree, build_pedigree
from pairing.records.audit import Audit, audit_records
from pairing.records.readers import read_records

Side = tuple[tuple[str, Fraction], ...]
"""Possible parents with their chances; empty when unknown."""


def audit_of(text: str, column_map: tuple[str, ...] = ()) -> Audit:
    """The audit of records given as CSV text, which may be indented."""
    content = textwrap.dedent(text).strip().encode()
    return audit_records(read_records("-", column_map=column_map, stdin=content))


def pedigree_of(text: str, *, litter_shares_sire: bool = True) -> Pedigree:
    """The pedigree of records given as CSV text."""
    return build_pedigree(audit_of(text), litter_shares_sire=litter_shares_sire)


def kinship_of(text: str, *, method: str | None = None, litter_shares_sire: bool = True) -> Kinship:
    """Kinship of records given as CSV text."""
    pedigree = pedigree_of(text, litter_shares_sire=litter_shares_sire)
    return compute_kinship(pedigree, method=method)


def with_header(rows: list[str]) -> str:
    """CSV text of rows ``id,sire,dam``."""
    return "\n".join(["id,sire,dam", *rows])


def kinship_table(kinship: Kinship, ids: list[str] | None = None) -> np.ndarray:
    """Kinship of all pairs of `ids`, by default of every animal in the pedigree's order."""
    places = range(len(kinship.pedigree)) if ids is None else kinship.pedigree.place(*ids)
    return kinship.block(list(places), list(places))


def fractions(values: np.ndarray) -> list:
    """An array with every float as the fraction it is, exactly."""
    return [fractions(each) if np.ndim(each) else Fraction(float(each)) for each in values]


def inbreeding(kinship: Kinship, *ids: str) -> list[Fraction]:
    """Inbreeding coefficients of animals, each as the fraction its float is."""
    return [Fraction(float(kinship.inbreeding[place])) for place in kinship.pedigree.place(*ids)]


@dataclass(frozen=True)
class Row:
    """One animal of a drawn pedigree."""

    id: str
    sire: Side = ()
    dam: Side = ()
    litter: str = ""
    clone_of: str = ""
    born: str = ""

    def cells(self) -> list[str]:
        """The row as it stands in a file."""
        return [self.id, cell(self.sire), cell(self.dam), self.litter, self.clone_of, self.born]


HEADER = "id,sire,dam,litter,clone_of,born"


def cell(side: Side) -> str:
    """Possible parents as the cell of a file."""
    if len(side) == 1 and side[0][1] == 1:
        return side[0][0]
    if all(chance == Fraction(1, len(side)) for _parent, chance in side):
        return "|".join(parent for parent, _chance in side)
    return "|".join(f"{parent}:{float(chance)}" for parent, chance in side)


def as_text(rows: list[Row]) -> str:
    """A drawn pedigree as CSV text."""
    return "\n".join([HEADER, *(",".join(row.cells()) for row in rows)])


def sure(parent: str) -> Side:
    """One certain parent, or none when `parent` is blank."""
    return ((parent, Fraction(1)),) if parent else ()


# Chances of two possible parents; the last pair leaves a quarter to an unknown parent.
_CHANCES = [
    (Fraction(1, 2), Fraction(1, 2)),
    (Fraction(7, 10), Fraction(3, 10)),
    (Fraction(1, 4), Fraction(3, 4)),
    (Fraction(1, 2), Fraction(1, 4)),
]
_MOST_UNCERTAIN = 4


@st.composite
def small_pedigrees(
    draw: st.DrawFn,
    *,
    most: int = 9,
    missing: bool = True,
    possible: bool = False,
    clones: bool = False,
    selfing: bool = False,
    dates: bool = False,
) -> list[Row]:
    """Rows of a small pedigree, every animal after its parents.

    Parameters
    ----------
    missing
        Single blank parents and parents without a row of their own.
    possible
        Parents that are one of several, some shared by a litter.
    clones
        Copies of earlier animals.
    selfing
        One animal as both parents.
    """
    founders = draw(st.integers(1, 4))
    rows = [Row(f"a{number}") for number in range(founders)]
    uncertain = 0
    for number in range(founders, draw(st.integers(founders, most))):
        ids = [row.id for row in rows]
        row = Row(f"a{number}")
        if clones and draw(st.integers(0, 4)) == 0:
            rows.append(replace(row, clone_of=draw(st.sampled_from(ids))))
            continue
        absent = ["", "absent1", "absent2"] if missing else []
        sire = draw(st.sampled_from([*ids, *absent]))
        mates = [each for each in ids if selfing or each != sire]
        if not missing and not mates:
            rows.append(row)
            continue
        dam = draw(st.sampled_from([*mates, *absent]))
        if dam == sire and not selfing:
            dam = ""
        sides = {"sire": sure(sire), "dam": sure(dam)}
        litter = ""
        for role in ("sire", "dam") if possible and len(ids) > 1 else ():
            if uncertain < _MOST_UNCERTAIN and draw(st.booleans()):
                uncertain += 1
                sides[role] = draw(_possible_parents(ids[:4]))
        # That a litter shares the unknown rest of a list is tested on its own.
        if len(sides["sire"]) > 1 and sum(chance for _p, chance in sides["sire"]) == 1:
            litter = draw(st.sampled_from(["", "first", "second"]))
        born_before = [each for each in rows if each.litter]
        if born_before and draw(st.booleans()):
            mate = draw(st.sampled_from(born_before))
            sides["sire"], litter = mate.sire, mate.litter
        rows.append(Row(row.id, sides["sire"], sides["dam"], litter))
    if dates:
        rows = [replace(row, born=draw(st.sampled_from(BIRTHS))) for row in rows]
    return rows


BIRTHS = ["", "2001", "2002-05", "2003-05-31", "2004?", "[2001..2005]"]


@st.composite
def _possible_parents(draw: st.DrawFn, ids: list[str]) -> Side:
    first, second = ids[0], draw(st.sampled_from(ids[1:]))
    if len(ids) > 2 and draw(st.integers(0, 3)) == 0:
        return tuple((each, Fraction(1, 3)) for each in ids[:3])
    return tuple(zip((first, second), draw(st.sampled_from(_CHANCES)), strict=True))
