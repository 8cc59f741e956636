"""The pedigree of docs/methods.md that is worked by hand: every number of it.

    founders  f1, f2, f3, f4   unrelated, non-inbred
    a = f1 x f2      b = f1 x f3      c = f1 x f2
    d = a x b        e = a x c        g = f4 x b
    h = d x e

The living are c, d, e, g and h. All values were worked out in exact fractions.
"""

from __future__ import annotations

from fractions import Fraction

import numpy as np
import pytest

from pairing.founders import founder_statistics
from pairing.kinship.paths import inbreeding_paths
from pairing.population.completeness import equivalent_generations, known_ancestry
from pairing.population.diversity import living_population
from tests.pedigrees import fractions, inbreeding, kinship_of, kinship_table

ROWS = """
    id,sire,dam,sex,status
    f1,,,male,dead
    f2,,,female,dead
    f3,,,female,dead
    f4,,,male,dead
    a,f1,f2,male,dead
    b,f1,f3,female,dead
    c,f1,f2,female,
    d,a,b,male,
    e,a,c,female,
    g,f4,b,female,
    h,d,e,female,
"""
LIVING = ["c", "d", "e", "g", "h"]
ALL = ["f1", "f2", "f3", "f4", "a", "b", "c", "d", "e", "g", "h"]
METHODS = ["tabular", "indirect"]


def parts(text: str) -> list[Fraction]:
    """Fractions written in a line."""
    return [Fraction(each) for each in text.split()]


@pytest.fixture(params=METHODS)
def kinship(request):
    return kinship_of(ROWS, method=request.param)


def row_of_gene_flow(kinship, animal):
    """Row of T: the share of an animal's genes that each ancestor gave."""
    flow, _variance, of_animal = kinship.gene_flow()
    unit = np.zeros(flow.n)
    unit[of_animal[kinship.pedigree.index[animal]]] = 1
    return flow.up(unit)[of_animal]


def test_inbreeding(kinship):
    """F is 1/8 for d, 1/4 for e and h, and 0 for all others."""
    expected = [Fraction(0)] * 7 + parts("1/8 1/4 0 1/4")
    assert inbreeding(kinship, *ALL) == expected


def test_kinship_of_the_living(kinship):
    """All kinships of the living are exactly as worked by hand."""
    expected = """
        1/2 3/16 3/8 1/16 9/32
        3/16 9/16 1/4 5/32 13/32
        3/8 1/4 5/8 1/16 7/16
        1/16 5/32 1/16 1/2 7/64
        9/32 13/32 7/16 7/64 5/8
    """
    rows = [parts(line) for line in expected.strip().splitlines()]
    assert fractions(kinship_table(kinship, LIVING)) == rows


def test_diversity_of_the_living(kinship):
    """The living have mean kinship 239/800, gene diversity 561/800 and 400/239 genomes."""
    population = living_population(kinship)
    assert [kinship.pedigree.ids[place] for place in population.living] == LIVING
    found = population.mean_kinship[population.living].tolist()
    expected = "9/32 5/16 7/20 57/320 119/320"
    assert found == pytest.approx([float(each) for each in parts(expected)], abs=1e-15)
    assert population.population_mean_kinship == pytest.approx(239 / 800, abs=1e-15)
    assert population.gene_diversity == pytest.approx(561 / 800, abs=1e-15)
    assert population.founder_genome_equivalents == pytest.approx(400 / 239, abs=1e-14)
    assert population.mean_inbreeding == pytest.approx((1 / 8 + 1 / 4 + 1 / 4) / 5, abs=1e-15)


def test_one_more_unrelated_animal():
    """An unrelated animal joining the living lowers mean kinship from 239/800 to 85/384."""
    population = living_population(kinship_of(ROWS + "    new,,,male,\n"))
    assert population.size == 6
    assert population.population_mean_kinship == pytest.approx(85 / 384, abs=1e-15)


def test_paths_of_h(kinship):
    """Young of d and e are inbred through five loops, and the loop that meets a twice is none."""
    found = inbreeding_paths(kinship, sire="d", dam="e")
    assert {
        (path.ancestor, path.through_sire, path.through_dam, path.contribution)
        for path in found.paths
    } == {
        ("a", ("d", "a"), ("e", "a"), 1 / 8),
        ("f1", ("d", "a", "f1"), ("e", "c", "f1"), 1 / 32),
        ("f1", ("d", "b", "f1"), ("e", "a", "f1"), 1 / 32),
        ("f1", ("d", "b", "f1"), ("e", "c", "f1"), 1 / 32),
        ("f2", ("d", "a", "f2"), ("e", "c", "f2"), 1 / 32),
    }
    assert len(found.paths) == 5
    assert (("d", "a", "f1"), ("e", "a", "f1")) not in {
        (path.through_sire, path.through_dam) for path in found.paths
    }
    assert found.paths[0].ancestor == "a"
    assert found.inbreeding == 1 / 4
    assert found.other_paths == 0
    assert {path.ancestor_inbreeding for path in found.paths} == {0}


def test_gene_flow_into_h(kinship):
    """The row of T for h, its variance 13/32 and the sum of squares times D, 5/4."""
    flow, variance, of_animal = kinship.gene_flow()
    row = row_of_gene_flow(kinship, "h")
    place = kinship.pedigree.index
    shares = {each: Fraction(float(row[place[each]])) for each in ALL if row[place[each]]}
    assert shares == dict(
        zip(
            ["h", "d", "e", "f1", "a", "f2", "b", "c", "f3"],
            parts("1 1/2 1/2 1/2 1/2 3/8 1/4 1/4 1/8"),
            strict=True,
        )
    )
    sampled = variance[of_animal]
    founders = kinship.pedigree.place("f1", "f2", "f3", "f4")
    others = kinship.pedigree.place("a", "b", "c", "d", "e", "g")
    assert sampled[place["h"]] == 13 / 32
    assert sampled[founders].tolist() == [1] * 4
    assert sampled[others].tolist() == [1 / 2] * 6
    assert float(np.sum(row**2 * sampled)) == 5 / 4
    assert len(of_animal) == flow.n == 11


def test_indirect_product_over_the_living(kinship):
    """Passing one unit of each living animal up and down the pedigree gives q and 10 m_i."""
    flow, variance, of_animal = kinship.gene_flow()
    places = of_animal[kinship.pedigree.place(*ALL)]
    unit = np.zeros(flow.n)
    unit[of_animal[kinship.pedigree.place(*LIVING)]] = 1
    passed = flow.up(unit)
    expected = parts("9/4 13/8 5/8 1/2 3/2 5/4 7/4 3/2 3/2 1 1")
    assert fractions(passed[places]) == expected
    product = flow.down(variance * passed)
    mean_kinship = living_population(kinship).mean_kinship[kinship.pedigree.place(*ALL)]
    assert product[places] / 10 == pytest.approx(mean_kinship, abs=1e-15)
    # K x is half of A x.
    weights = np.zeros(11)
    weights[kinship.pedigree.place(*LIVING)] = 1
    assert fractions(kinship.mean_with(weights)) == fractions(product[of_animal] / 2)


def test_founder_contributions():
    """Founders give 9/20, 13/40, 1/8 and 1/10 of the living; founder equivalents are 800/267."""
    kinship = kinship_of(ROWS)
    pedigree = kinship.pedigree
    found = founder_statistics(pedigree, living_population(kinship).living)
    assert [pedigree.ids[place] for place in found.places] == ["f1", "f2", "f3", "f4"]
    assert found.contributions.tolist() == pytest.approx([9 / 20, 13 / 40, 1 / 8, 1 / 10])
    assert found.contributions.sum() == pytest.approx(1)
    assert found.founders == 4
    assert found.founder_equivalents == pytest.approx(800 / 267)


def test_where_the_inbreeding_of_h_arose(kinship):
    """Split by the ancestor whose sampling it is, F of h is f1 1/8 + f2 1/16 + a 1/16."""
    _flow, variance, of_animal = kinship.gene_flow()
    terms = (
        row_of_gene_flow(kinship, "d") * row_of_gene_flow(kinship, "e") * variance[of_animal] / 2
    )
    place = kinship.pedigree.index
    assert {each: terms[place[each]] for each in ALL if terms[place[each]]} == {
        "f1": 1 / 8,
        "f2": 1 / 16,
        "a": 1 / 16,
    }
    assert terms.sum() == 1 / 4


def test_depth_of_the_records():
    """All ancestry is known; h has 3 equivalent complete generations and g 3/2."""
    pedigree = kinship_of(ROWS).pedigree
    assert known_ancestry(pedigree).tolist() == [1] * 11
    depth = equivalent_generations(pedigree)[pedigree.place(*ALL)]
    assert depth.tolist() == [0, 0, 0, 0, 1, 1, 1, 2, 2, 1.5, 3]


# --- Parents that are one of several --------------------------------------------------------


LITTER = """
    id,sire,dam,litter
    p,,,
    q,,,
    w,,,
    x,p|q,w,{0}
    y,p|q,w,{1}
"""


@pytest.mark.parametrize("method", METHODS)
def test_litter_mates_share_their_unknown_sire(method):
    """Litter-mates by one of two possible sires are full sibs: kinship 1/4, not 3/16."""
    mates = kinship_of(LITTER.format("l1", "l1"), method=method)
    assert mates.between("x", "y") == 1 / 4
    assert mates.between("x", "p") == mates.between("x", "q") == 1 / 8


@pytest.mark.parametrize("method", METHODS)
@pytest.mark.parametrize(("first", "second"), [("", ""), ("l1", "l2")])
def test_young_of_different_litters_draw_their_sires_independently(method, first, second):
    """Young of different litters by one of two possible sires have kinship 3/16."""
    found = kinship_of(LITTER.format(first, second), method=method)
    assert found.between("x", "y") == 3 / 16


@pytest.mark.parametrize("method", METHODS)
def test_litter_mates_draw_independently_when_the_keeper_says_so(method):
    """Without a shared sire litter-mates by one of two possible sires have kinship 3/16."""
    found = kinship_of(LITTER.format("l1", "l1"), method=method, litter_shares_sire=False)
    assert found.between("x", "y") == 3 / 16


@pytest.mark.parametrize("method", METHODS)
@pytest.mark.parametrize("sires", ["p:0.5|q:0.25", "p|unknown", "p|q|?"])
def test_litter_mates_are_full_sibs_also_when_their_sire_may_be_none_of_those_named(method, sires):
    """Litter-mates that surely share a sire have kinship 1/4 even if it may be an unknown one."""
    text = LITTER.replace("p|q", sires).format("l1", "l1")
    found = kinship_of(text, method=method)
    assert found.between("x", "y") == pytest.approx(1 / 4, abs=1e-15)


@pytest.mark.parametrize("method", METHODS)
def test_mean_kinship_with_an_uncertain_sire_is_the_mean_over_sires(method):
    """With o = p or q x w and z = p x w the mean kinship of o and z is 11/32."""
    found = kinship_of(
        """
        id,sire,dam,status
        p,,,dead
        q,,,dead
        w,,,dead
        o,p|q,w,
        z,p,w,
        """,
        method=method,
    )
    population = living_population(found)
    assert population.size == 2
    assert population.population_mean_kinship == 11 / 32


@pytest.mark.parametrize("method", METHODS)
def test_average_relationship_with_uncertain_sires(method):
    """The average relationships of a two-generation example are as worked out exactly.

    Definition: Henderson 1988, J. Anim. Sci. 66:1614-1621, from memory; own exact values.
    """
    found = kinship_of(
        """
        id,sire,dam
        s1,,
        s2,,
        d,,
        x,s1|s2,d
        y,s1:0.6|s2:0.4,x
        """,
        method=method,
    )
    expected = """
        1 0 0 1/4 17/40
        0 1 0 1/4 13/40
        0 0 1 1/2 1/4
        1/4 1/4 1/2 1 5/8
        17/40 13/40 1/4 5/8 9/8
    """
    rows = [[float(each) for each in parts(line)] for line in expected.strip().splitlines()]
    relationship = 2 * kinship_table(found, ["s1", "s2", "d", "x", "y"])
    assert relationship == pytest.approx(np.array(rows), abs=1e-15)
    assert found.inbreeding[found.pedigree.index["y"]] == pytest.approx(1 / 8, abs=1e-15)


# --- Clones and identical twins --------------------------------------------------------------

TWINS = """
    id,sire,dam,clone_of,status
    f1,,,,dead
    f2,,,,dead
    f3,,,,dead
    t1,f1,f2,,
    t2,f1,f2,{0},
    x,t1,f3,,
    y,t2,f3,,
"""


@pytest.mark.parametrize("method", METHODS)
def test_identical_twins_are_one_genotype(method):
    """Identical twins have each other's self-kinship and the same kinship with all others."""
    found = kinship_of(TWINS.format("t1"), method=method)
    assert found.between("t1", "t2") == found.between("t1", "t1") == 1 / 2
    assert found.between("t2", "t2") == 1 / 2
    for other in ("f1", "f2", "f3", "x", "y"):
        assert found.between("t1", other) == found.between("t2", other)
    assert np.linalg.matrix_rank(kinship_table(found)) == 6


@pytest.mark.parametrize("method", METHODS)
def test_young_of_identical_twins_and_one_mate_are_full_sibs(method):
    """Young of identical twins by one mate have kinship 1/4; of ordinary twins, 3/16."""
    assert kinship_of(TWINS.format("t1"), method=method).between("x", "y") == 1 / 4
    assert kinship_of(TWINS.format(""), method=method).between("x", "y") == 3 / 16


@pytest.mark.parametrize("method", METHODS)
def test_mating_of_clones_is_selfing(method):
    """Young of an animal and its clone have F = 1/2, and the path leads over the clone."""
    found = kinship_of(
        """
        id,sire,dam,clone_of
        o,,,
        k,,,o
        x,o,k,
        """,
        method=method,
    )
    assert inbreeding(found, "x") == [Fraction(1, 2)]
    loops = inbreeding_paths(found, sire="o", dam="k")
    assert [(path.ancestor, path.contribution) for path in loops.paths] == [("o", 1 / 2)]
    assert loops.paths[0].through_sire == ("o",)
    assert loops.paths[0].through_dam == ("k", "o")


@pytest.mark.parametrize("method", METHODS)
def test_clone_of_a_clone_is_the_same_genotype(method):
    """A clone's clone, with rows in any order, has the first animal's kinships."""
    found = kinship_of(
        """
        id,sire,dam,clone_of
        k2,,,k1
        k1,,,o
        o,f1,f2,
        f1,,,
        f2,,,
        """,
        method=method,
    )
    assert found.between("k2", "o") == 1 / 2
    assert found.between("k2", "f1") == found.between("o", "f1") == 1 / 4
    assert found.between("k2", "k1") == 1 / 2


def test_twin_pair_raises_mean_kinship_more_than_full_sibs():
    """A living set with identical twins has a higher mean kinship than with full sibs."""
    twins = living_population(kinship_of(TWINS.format("t1")))
    sibs = living_population(kinship_of(TWINS.format("")))
    assert twins.size == sibs.size == 4
    assert twins.population_mean_kinship > sibs.population_mean_kinship


def test_clone_adds_no_founder_and_no_ancestry():
    """A clone of a founder passes on that founder's genes: shares still add up to 1."""
    found = kinship_of(
        """
        id,sire,dam,clone_of
        f1,,,
        f2,,,
        k,,,f1
        x,k,f2,
        """
    )
    pedigree = found.pedigree
    assert known_ancestry(pedigree).tolist() == [1] * 4
    founders = founder_statistics(pedigree, np.array(pedigree.place("x")))
    assert founders.contributions.sum() == 1
    assert [pedigree.ids[place] for place in founders.places] == ["f1", "f2"]
    assert founders.founder_equivalents == 2


def test_clone_without_parents_has_the_ancestry_of_its_original():
    """A clone whose parents are left blank is known as far back as the animal it copies."""
    pedigree = kinship_of(
        """
        id,sire,dam,clone_of
        f1,,,
        o,f1,,
        k,,,o
        """
    ).pedigree
    places = pedigree.place("o", "k")
    assert known_ancestry(pedigree)[places].tolist() == [0.5, 0.5]
    assert equivalent_generations(pedigree)[places].tolist() == [0.5, 0.5]
