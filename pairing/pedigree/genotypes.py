"""The pedigree as genotypes: animals, and stand-ins for parents that are one of several.

A parent known only as "one of these" becomes a genotype of its own, which copies each
possible parent with its chance. Kinship of the stand-in V with any j is the weighted mean of
its parents' kinships, and its self-kinship the weighted mean of *their* self-kinships, an
unknown rest counting 1/2: it is not an ordinary animal (HENDERSON_1988). Litter-mates that
surely share the unknown parent share the stand-in, which makes them full sibs. A clone
copies one animal with chance 1.

A row that stands for a group of n animals, not told apart, is one genotype: a member drawn at
random. Two draws meet the same member with chance 1/n, so that its self-kinship is
theta (1 - 1/n) + (1 + F) / (2 n), theta being the kinship of two different members and F the
inbreeding of each. A group's possible parents are a pool that each member's parent is drawn
from on its own: the stand-in's self-kinship is then the mean kinship within the pool.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np

from pairing.records.animals import UNKNOWN

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    import numpy.typing as npt

    from pairing.pedigree.descent import Pedigree, PossibleParents

    FloatArray = npt.NDArray[np.float64]
    IndexArray = npt.NDArray[np.int32]

Copied = tuple[tuple[int, float], ...]


@dataclass(frozen=True, slots=True)
class Genotypes:
    """N genotypes, parents and copied ones before those that need them.

    Attributes
    ----------
    sire, dam
        Shape (N,), -1 where unknown; both -1 for a stand-in.
    copies
        Stand-in or clone to the genotypes it copies, with chances.
    level
        Genotypes of one level need only lower ones, shape (N,), ascending.
    of_animal
        Genotype of each animal, shape (n,).
    animal_of
        Animal of each genotype, -1 for a stand-in, shape (N,).
    members
        Genotype of a group to the number of its members, at least 2.
    pools
        Stand-ins that are drawn anew for each member of a group.
    """

    sire: IndexArray
    dam: IndexArray
    copies: Mapping[int, Copied]
    level: IndexArray
    of_animal: IndexArray
    animal_of: IndexArray
    members: Mapping[int, int] = field(default_factory=dict)
    pools: frozenset[int] = frozenset()

    def __len__(self) -> int:
        return len(self.sire)

    def own_kinship(self, place: int, own: Sequence[float] | FloatArray) -> float:
        """Self-kinship of a stand-in or clone, from the self-kinships `own` of its sources.

        Where the chances leave a rest, the source may be an unknown animal, whose
        self-kinship is 1/2.
        """
        parts = self.copies[place]
        known = sum(chance * float(own[source]) for source, chance in parts)
        return known + (1.0 - sum(chance for _source, chance in parts)) / 2

    def selfed_groups(self) -> list[int]:
        """Genotypes whose parents are two members of one group."""
        if not self.members:
            return []
        same = np.flatnonzero((self.sire == self.dam) & (self.sire >= 0))
        return [each for each in same.tolist() if int(self.sire[each]) in self.members]

    def levels(self) -> list[slice]:
        """Runs of genotypes of one level, lowest first."""
        edges = np.flatnonzero(np.diff(self.level, prepend=-1, append=-2))
        return [slice(a, b) for a, b in pairwise(edges.tolist())]


def genotypes_of(pedigree: Pedigree) -> Genotypes:
    """Expand a pedigree into genotypes."""
    if not (pedigree.possible_sires or pedigree.possible_dams or pedigree.same_genotype_as):
        own = np.arange(len(pedigree), dtype=np.int32)
        members = {place: count for place, count in pedigree.counts.items() if count > 1}
        return Genotypes(pedigree.sire, pedigree.dam, {}, pedigree.generation, own, own, members)
    return _expanded(pedigree)


def _stand_ins(pedigree: Pedigree) -> list[tuple[PossibleParents, dict[str, list[int]]]]:
    """One stand-in for each uncertain side, or for each litter that shares one."""
    shared: dict[tuple[PossibleParents, str], dict[str, list[int]]] = {}
    for role, possible in (("sire", pedigree.possible_sires), ("dam", pedigree.possible_dams)):
        for place, parents in sorted(possible.items()):
            own = parents.shared_by or f" {role} of {place}"
            entry = shared.setdefault((parents, own), {"sire": [], "dam": []})
            entry[role].append(place)
    return [(parents, children) for (parents, _own), children in shared.items()]


def _expanded(pedigree: Pedigree) -> Genotypes:
    n = len(pedigree)
    stand_ins = _stand_ins(pedigree)
    total = n + len(stand_ins)
    sire = np.concatenate([pedigree.sire, np.full(len(stand_ins), UNKNOWN, dtype=np.int32)])
    dam = np.concatenate([pedigree.dam, np.full(len(stand_ins), UNKNOWN, dtype=np.int32)])
    copies: dict[int, Copied] = {}
    for extra, (parents, children) in enumerate(stand_ins, start=n):
        copies[extra] = parents.parents
        sire[children["sire"]] = extra
        dam[children["dam"]] = extra
    for clone, original in pedigree.same_genotype_as.items():
        copies[clone] = ((original, 1.0),)
        sire[clone] = dam[clone] = UNKNOWN
    level = _levels(sire, dam, copies)
    order = np.lexsort((np.arange(total), level))
    rank = np.empty(total, dtype=np.int32)
    rank[order] = np.arange(total, dtype=np.int32)

    def renumbered(parent: IndexArray) -> IndexArray:
        return np.where(parent < 0, UNKNOWN, rank[parent]).astype(np.int32)[order]

    # Members of a group that copies one animal are all alike, whatever their number.
    groups = {
        place
        for place, count in pedigree.counts.items()
        if count > 1 and place not in pedigree.same_genotype_as
    }
    pools = {
        int(rank[extra])
        for extra, (parents, children) in enumerate(stand_ins, start=n)
        if not parents.shared_by and groups.intersection(children["sire"] + children["dam"])
    }
    animal = np.where(np.arange(total) < n, np.arange(total), UNKNOWN).astype(np.int32)
    return Genotypes(
        sire=renumbered(sire),
        dam=renumbered(dam),
        copies={
            int(rank[each]): tuple((int(rank[source]), chance) for source, chance in parts)
            for each, parts in copies.items()
        },
        level=level[order],
        of_animal=rank[:n],
        animal_of=animal[order],
        members={int(rank[place]): pedigree.counts[place] for place in groups},
        pools=frozenset(pools),
    )


def _levels(sire: IndexArray, dam: IndexArray, copies: Mapping[int, Copied]) -> IndexArray:
    """Smallest levels that rise along every arrow, found by raising until nothing changes."""
    level = np.zeros(len(sire), dtype=np.int32)
    targets = np.array(
        [each for each, parts in copies.items() for _source, _chance in parts], dtype=np.int64
    )
    sources = np.array(
        [source for parts in copies.values() for source, _chance in parts], dtype=np.int64
    )
    while True:
        above = np.maximum(
            np.where(sire >= 0, level[sire] + 1, 0), np.where(dam >= 0, level[dam] + 1, 0)
        ).astype(np.int32)
        np.maximum.at(above, targets, level[sources] + 1)
        if np.array_equal(above, level):
            return level
        level = above
