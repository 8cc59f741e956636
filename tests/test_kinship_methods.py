"""The ways to compute kinship agree with each other and with plain second opinions.

The second opinions below were written from the definitions, not from the code: a recursion
in fractions over certain parents, averaged over every choice of uncertain ones, and a count
of paths in a graph.
"""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction
from itertools import combinations, product

import networkx as nx
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from pairing.errors import KinshipError, RecordsError, UnknownAnimalError
from pairing.kinship.engine import kinship as compute_kinship
from pairing.kinship.paths import inbreeding_paths
from pairing.pedigree.genotypes import genotypes_of
from tests.pedigrees import (
    Row,
    as_text,
    inbreeding,
    kinship_of,
    kinship_table,
    pedigree_of,
    small_pedigrees,
    sure,
    with_header,
)

METHODS = ["tabular", "indirect"]
CLOSE = 1e-12

anything = small_pedigrees(possible=True, clones=True, selfing=True)
certain = small_pedigrees(selfing=True)
ordinary = small_pedigrees()

Table = dict[tuple[str, str], Fraction]


# --- Second opinions ---------------------------------------------------------


def kinship_by_recursion(parents: dict[str, tuple[str, str]]) -> Table:
    """Kinship of certain parents: each animal's row from the rows of its parents.

    `parents` has an animal after its parents; a parent that is no key is an unrelated
    founder, a blank one unknown.
    """
    order = list(parents)
    order = [p for pair in parents.values() for p in pair if p and p not in parents] + order
    order = list(dict.fromkeys(order))
    table: Table = {}
    for place, animal in enumerate(order):
        known = [parent for parent in parents.get(animal, ()) if parent]
        for earlier in order[:place]:
            value = sum((table[parent, earlier] for parent in known), Fraction(0)) / 2
            table[animal, earlier] = table[earlier, animal] = value
        between = table[known[0], known[1]] if len(known) == 2 else Fraction(0)
        table[animal, animal] = (1 + between) / 2
    return table


def original_of(rows: list[Row]) -> dict[str, str]:
    """Every animal to the animal whose genotype it has."""
    original: dict[str, str] = {}
    for row in rows:
        original[row.id] = original.get(row.clone_of, row.clone_of) or row.id
    return original


def choices_of(rows: list[Row]) -> list[tuple[list[tuple[str, str]], list]]:
    """Each uncertain parent: whose it is (animal, role), and who it may be with chances.

    Animals of one litter of one dam with the same possible sires have one of them in common;
    the part of the chances that is not given falls to a parent not in the records.
    """
    choices: dict[tuple, tuple[list, list]] = {}
    for row in rows:
        for role in ("sire", "dam"):
            side = getattr(row, role)
            if not side or side[0][1] == 1 or row.clone_of:
                continue
            shared = role == "sire" and row.litter
            dam = frozenset(each for each, _chance in row.dam) or row.born
            key = ("litter", row.litter, dam, side) if shared else (row.id, role)
            rest = 1 - sum(chance for _parent, chance in side)
            nobody = f"nobody {key[:2]}"
            outcomes = [*side, *([(nobody, rest)] if rest else [])]
            choices.setdefault(key, ([], outcomes))[0].append((row.id, role))
    return list(choices.values())


def kinship_by_enumeration(rows: list[Row]) -> Table:
    """Kinship as its mean over every choice of the uncertain parents."""
    original = original_of(rows)
    choices = choices_of(rows)
    mean: Table = {}
    for outcome in product(*(outcomes for _whose, outcomes in choices)):
        weight = Fraction(1)
        chosen: dict[tuple[str, str], str] = {}
        for (whose, _outcomes), (parent, chance) in zip(choices, outcome, strict=True):
            weight *= chance
            chosen.update(dict.fromkeys(whose, parent))
        parents: dict[str, tuple[str, str]] = {}
        for row in rows:
            if not row.clone_of:
                pair = [
                    chosen.get((row.id, role)) or next((p for p, _c in getattr(row, role)), "")
                    for role in ("sire", "dam")
                ]
                parents[row.id] = tuple(original.get(each, each) for each in pair)
        table = kinship_by_recursion(parents)
        for first, second in product(original, original):
            value = weight * table[original[first], original[second]]
            mean[first, second] = mean.get((first, second), Fraction(0)) + value
    return mean


def paths_by_graph(
    rows: list[Row], inbreeding: dict[str, Fraction], sire: str, dam: str
) -> dict[tuple, Fraction]:
    """Every valid pair of chains from two animals up to a common ancestor, with its part of F.

    One chain goes up from each; they share the ancestor and no other animal. Wright 1922.
    """
    graph = nx.DiGraph()
    graph.add_nodes_from([sire, dam])
    for row in rows:
        graph.add_edges_from((row.id, p) for side in (row.sire, row.dam) for p, _c in side)
    found = {}
    for ancestor in graph:
        up = [
            [[start]] if start == ancestor else list(nx.all_simple_paths(graph, start, ancestor))
            for start in (sire, dam)
        ]
        for first, second in product(*up):
            if set(first) & set(second) == {ancestor}:
                steps = len(first) + len(second) - 2
                part = Fraction(1, 2) ** (steps + 1) * (1 + inbreeding.get(ancestor, 0))
                found[tuple(first), tuple(second)] = part
    return found


def table_of(kinship, rows: list[Row]) -> np.ndarray:
    """Kinship of the rows' animals in the order of the rows."""
    return kinship_table(kinship, [row.id for row in rows])


def as_array(table: Table, rows: list[Row]) -> np.ndarray:
    """A table by ids as an array in the order of the rows."""
    return np.array([[float(table[a.id, b.id]) for b in rows] for a in rows])


# --- Agreement ---------------------------------------------------------------


@pytest.mark.parametrize("method", METHODS)
@given(rows=certain)
def test_kinship_equals_the_plain_recursion(method, rows):
    """With certain parents every kinship equals a plain recursion in fractions, exactly."""
    parents = {
        row.id: tuple(next((p for p, _c in side), "") for side in (row.sire, row.dam))
        for row in rows
    }
    expected = kinship_by_recursion(parents)
    found = kinship_of(as_text(rows), method=method)
    for first, second in product(found.pedigree.ids, repeat=2):
        assert Fraction(found.between(first, second)) == expected[first, second]


@pytest.mark.parametrize("method", METHODS)
@given(rows=anything)
def test_kinship_equals_its_mean_over_all_possible_parents(method, rows):
    """With uncertain parents, litters and clones kinship is its mean over all choices."""
    found = kinship_of(as_text(rows), method=method)
    expected = as_array(kinship_by_enumeration(rows), rows)
    assert table_of(found, rows) == pytest.approx(expected, abs=CLOSE)


@given(rows=anything)
def test_methods_agree(rows):
    """The table and the indirect method give the same kinships, inbreeding and variances."""
    pedigree = pedigree_of(as_text(rows))
    table, indirect = (compute_kinship(pedigree, method=method) for method in METHODS)
    assert (table.method, indirect.method) == ("tabular", "indirect")
    assert kinship_table(indirect) == pytest.approx(kinship_table(table), abs=CLOSE)
    assert indirect.inbreeding == pytest.approx(table.inbreeding, abs=CLOSE)
    assert indirect.gene_flow()[1] == pytest.approx(table.gene_flow()[1], abs=CLOSE)


@given(rows=anything)
def test_kinship_is_the_product_of_its_factors(rows):
    """Kinship is T D T' / 2, with T the flow of genes and D the sampling variances."""
    kinship = kinship_of(as_text(rows))
    flow, variance, of_animal = kinship.gene_flow()
    transmitted = flow.down(np.eye(flow.n))
    product_ = (transmitted @ np.diag(variance) @ transmitted.T / 2)[np.ix_(of_animal, of_animal)]
    assert product_ == pytest.approx(kinship_table(kinship), abs=CLOSE)
    assert flow.up(np.eye(flow.n)) == pytest.approx(transmitted.T, abs=CLOSE)


@given(rows=ordinary, data=st.data())
def test_paths_are_those_of_a_graph_search(rows, data):
    """The listed loops are exactly the valid pairs of chains found by searching a graph."""
    kinship = kinship_of(as_text(rows))
    ids = kinship.pedigree.ids
    if len(ids) < 2:
        return
    sire, dam = data.draw(st.permutations(ids))[:2]
    coefficient = dict(zip(ids, inbreeding(kinship, *ids), strict=True))
    expected = paths_by_graph(rows, coefficient, sire, dam)
    found = inbreeding_paths(kinship, sire=sire, dam=dam, most=10**6)
    listed = {(p.through_sire, p.through_dam): Fraction(p.contribution) for p in found.paths}
    assert listed == expected
    assert len(found.paths) == len(listed)
    assert found.other_paths == 0
    for path in found.paths:
        assert path.ancestor == path.through_sire[-1] == path.through_dam[-1]
        assert path.ancestor_inbreeding == kinship.inbreeding[kinship.pedigree.index[path.ancestor]]


@given(rows=ordinary)
def test_sum_over_paths_is_kinship_for_every_pair(rows):
    """Summed over the valid pairs of chains, Wright's terms give the kinship of every pair."""
    kinship = kinship_of(as_text(rows), method="indirect")
    ids = kinship.pedigree.ids
    coefficient = dict(zip(ids, inbreeding(kinship, *ids), strict=True))
    for first, second in combinations(ids, 2):
        total = sum(paths_by_graph(rows, coefficient, first, second).values(), Fraction(0))
        assert total == Fraction(kinship.between(first, second))


@given(rows=certain, most=st.integers(1, 4), data=st.data())
def test_listed_and_other_paths_add_up_exactly(rows, most, data):
    """However few loops are listed, they and the rest add up to F exactly, largest first."""
    kinship = kinship_of(as_text(rows))
    ids = kinship.pedigree.ids
    sire, dam = data.draw(st.sampled_from(ids)), data.draw(st.sampled_from(ids))
    found = inbreeding_paths(kinship, sire=sire, dam=dam, most=most)
    contributions = [path.contribution for path in found.paths]
    assert len(contributions) <= most
    assert sum(map(Fraction, contributions)) + Fraction(found.other_paths) == Fraction(
        kinship.between(sire, dam)
    )
    assert found.inbreeding == kinship.between(sire, dam)
    assert contributions == sorted(contributions, reverse=True)
    everything = inbreeding_paths(kinship, sire=sire, dam=dam, most=10**6)
    assert contributions == [path.contribution for path in everything.paths[:most]]


@given(rows=anything, most=st.integers(1, 4), data=st.data())
def test_paths_add_up_with_uncertain_parents_and_clones(rows, most, data):
    """With uncertain parents and clones the loops and the rest still add up to F."""
    kinship = kinship_of(as_text(rows))
    ids = kinship.pedigree.ids
    sire, dam = data.draw(st.sampled_from(ids)), data.draw(st.sampled_from(ids))
    found = inbreeding_paths(kinship, sire=sire, dam=dam, most=most)
    total = sum(path.contribution for path in found.paths) + found.other_paths
    assert total == pytest.approx(found.inbreeding, abs=CLOSE)
    assert found.inbreeding == pytest.approx(kinship.between(sire, dam), abs=CLOSE)
    assert found.other_paths >= 0
    for path in found.paths:
        assert path.contribution > 0
        assert (path.through_sire[0], path.through_dam[0]) == (sire, dam)


def test_no_path_listed_leaves_all_inbreeding_to_the_others():
    """When no loop is to be listed, the sum of the others is all of F."""
    kinship = kinship_of(with_header(["f,,", "m,,", "a,f,m", "b,f,m"]))
    found = inbreeding_paths(kinship, sire="a", dam="b", most=0)
    assert found.paths == ()
    assert found.other_paths == found.inbreeding == 1 / 4


@given(rows=small_pedigrees(possible=True, clones=True, selfing=True), data=st.data())
def test_young_have_the_kinship_of_their_parents_as_inbreeding(rows, data):
    """An animal's F is the kinship of its parents before it was born."""
    ids = [row.id for row in rows]
    sire, dam = data.draw(st.sampled_from(ids)), data.draw(st.sampled_from(ids))
    before = kinship_of(as_text(rows))
    after = kinship_of(as_text([*rows, Row("young", sure(sire), sure(dam))]))
    found = after.inbreeding[after.pedigree.index["young"]]
    assert found == pytest.approx(before.between(sire, dam), abs=CLOSE)


# --- Properties --------------------------------------------------------------


@pytest.mark.parametrize("method", METHODS)
@given(rows=anything)
def test_kinship_is_symmetric_and_bounded(method, rows):
    """Kinship is symmetric, positive semidefinite and within its bounds."""
    kinship = kinship_of(as_text(rows), method=method)
    table = kinship_table(kinship)
    own = np.diagonal(table)
    assert table == pytest.approx(table.T, abs=CLOSE)
    assert np.linalg.eigvalsh((table + table.T) / 2).min() >= -CLOSE
    assert (own >= 1 / 2 - CLOSE).all()
    assert (own <= 1 + CLOSE).all()
    assert (table >= 0).all()
    assert (table <= np.sqrt(np.outer(own, own)) + CLOSE).all()
    assert kinship.inbreeding == pytest.approx(2 * own - 1, abs=CLOSE)
    assert (kinship.inbreeding >= 0).all()
    assert (kinship.inbreeding <= 1).all()


@pytest.mark.parametrize("method", METHODS)
@given(rows=certain)
def test_kinship_of_certain_parents_is_exactly_symmetric(method, rows):
    """Where every value is a multiple of a power of one half, symmetry holds to the last bit."""
    table = kinship_table(kinship_of(as_text(rows), method=method))
    assert np.array_equal(table, table.T)


@given(rows=anything, data=st.data())
def test_another_animal_changes_no_kinship(rows, data):
    """Adding an animal leaves every kinship of the others as it was."""
    ids = [row.id for row in rows]
    added = Row(
        "added",
        sure(data.draw(st.sampled_from(["", *ids]))),
        sure(data.draw(st.sampled_from(["", "new", *ids]))),
    )
    for method in METHODS:
        before = table_of(kinship_of(as_text(rows), method=method), rows)
        after = table_of(kinship_of(as_text([*rows, added]), method=method), rows)
        assert after == pytest.approx(before, abs=CLOSE)


@given(rows=anything, data=st.data())
def test_order_of_rows_changes_nothing(rows, data):
    """Shuffled rows give the same pedigree and the same kinships to the last bit."""
    shuffled = data.draw(st.permutations(rows))
    first, second = pedigree_of(as_text(rows)), pedigree_of(as_text(shuffled))
    assert first.ids == second.ids
    for method in METHODS:
        before = compute_kinship(first, method=method)
        after = compute_kinship(second, method=method)
        assert np.array_equal(kinship_table(before), kinship_table(after))
        assert np.array_equal(before.inbreeding, after.inbreeding)


NAMES = ["7", "007", "B-12", "a b", "Ä1", "b12", "x.y", "10", "9", "Z/3", "nine'"]


@given(rows=anything, data=st.data())
def test_new_names_change_nothing(rows, data):
    """Animals under other ids have the same kinships."""
    names = dict(zip((row.id for row in rows), data.draw(st.permutations(NAMES)), strict=False))

    def renamed(side):
        return tuple((names.get(parent, parent), chance) for parent, chance in side)

    other = [
        replace(
            row,
            id=names[row.id],
            sire=renamed(row.sire),
            dam=renamed(row.dam),
            clone_of=names.get(row.clone_of, ""),
        )
        for row in rows
    ]
    for method in METHODS:
        before = table_of(kinship_of(as_text(rows), method=method), rows)
        after = table_of(kinship_of(as_text(other), method=method), other)
        assert after == pytest.approx(before, abs=CLOSE)


@given(rows=anything)
def test_sires_and_dams_may_change_places(rows):
    """Swapping all sires with all dams changes no kinship (litters share a sire, so none here)."""
    rows = [replace(row, litter="") for row in rows]
    swapped = [replace(row, sire=row.dam, dam=row.sire) for row in rows]
    for method in METHODS:
        before = table_of(kinship_of(as_text(rows), method=method), rows)
        after = table_of(kinship_of(as_text(swapped), method=method), rows)
        assert after == pytest.approx(before, abs=CLOSE)


@given(rows=small_pedigrees(clones=True, selfing=True, dates=True))
def test_dates_play_no_part_in_kinship(rows):
    """Dropping all dates, also impossible ones, leaves kinships identical.

    Only between several possible parents do dates decide, so there are none here.
    """
    undated = [replace(row, born="") for row in rows]
    for method in METHODS:
        before = kinship_table(kinship_of(as_text(rows), method=method))
        after = kinship_table(kinship_of(as_text(undated), method=method))
        assert np.array_equal(before, after)


@given(rows=anything, data=st.data())
def test_clone_changes_no_kinship_with_others(rows, data):
    """A clone has its original's kinship with every animal, and a copy of it changes nothing."""
    copied = data.draw(st.sampled_from([row.id for row in rows]))
    for method in METHODS:
        before = kinship_of(as_text(rows), method=method)
        after = kinship_of(as_text([*rows, Row("copy", clone_of=copied)]), method=method)
        assert table_of(after, rows) == pytest.approx(table_of(before, rows), abs=CLOSE)
        for row in rows:
            expected = before.between(copied, row.id)
            assert after.between("copy", row.id) == pytest.approx(expected, abs=CLOSE)


@given(rows=anything, data=st.data())
def test_blocks_are_parts_of_the_table(rows, data):
    """Any rows and columns, repeated or none, give that part of the whole table."""
    pedigree = pedigree_of(as_text(rows))
    places = st.lists(st.integers(0, len(pedigree) - 1), max_size=12)
    first, second = data.draw(places), data.draw(places)
    whole = kinship_table(compute_kinship(pedigree, method="tabular"))
    expected = whole[np.ix_(np.array(first, dtype=int), np.array(second, dtype=int))]
    for method in METHODS:
        block = compute_kinship(pedigree, method=method).block(first, second)
        assert block.shape == (len(first), len(second))
        assert block == pytest.approx(expected, abs=CLOSE)


@given(rows=anything, data=st.data())
def test_mean_kinship_is_linear_in_the_weights(rows, data):
    """Weighted kinship is the table times the weights, and linear in them."""
    pedigree = pedigree_of(as_text(rows))
    weights = st.lists(
        st.floats(-4, 4, allow_nan=False), min_size=len(pedigree), max_size=len(pedigree)
    ).map(np.array)
    x, y, factor = data.draw(weights), data.draw(weights), data.draw(st.floats(-4, 4))
    for method in METHODS:
        kinship = compute_kinship(pedigree, method=method)
        of_x, of_y = kinship.mean_with(x), kinship.mean_with(y)
        assert of_x == pytest.approx(kinship_table(kinship) @ x, abs=1e-10)
        assert kinship.mean_with(factor * x + y) == pytest.approx(factor * of_x + of_y, abs=1e-10)
        assert float(y @ of_x) == pytest.approx(float(x @ of_y), abs=1e-9)


@given(rows=anything)
def test_parents_come_before_young(rows):
    """In the pedigree and among genotypes everything stands after what it comes from."""
    pedigree = pedigree_of(as_text(rows))
    for place in range(len(pedigree)):
        assert all(parent < place for parent in pedigree.parents_of(place))
        assert pedigree.same_genotype_as.get(place, -1) < place
    genotypes = genotypes_of(pedigree)
    assert (np.diff(genotypes.level) >= 0).all()
    for place in range(len(genotypes)):
        above = {int(genotypes.sire[place]), int(genotypes.dam[place])} - {-1}
        above |= {source for source, _chance in genotypes.copies.get(place, ())}
        assert all(genotypes.level[each] < genotypes.level[place] for each in above)


# --- Large and deep ----------------------------------------------------------


def test_ten_thousand_generations_do_not_break_anything():
    """A line of 10,000 generations is built, and its inbreeding found to be zero."""
    rows = ["a0,,", *(f"a{t},a{t - 1}," for t in range(1, 10_001))]
    kinship = kinship_of(with_header(rows))
    assert kinship.method == "indirect"
    assert kinship.pedigree.generation[-1] == 10_000
    assert not kinship.inbreeding.any()
    assert kinship.between("a9999", "a10000") == 1 / 4
    assert kinship.between("a0", "a10") == 1 / 2**11


def test_deep_line_with_a_mate_each_generation():
    """A line of 3,000 generations with a new mate in each has no inbreeding."""
    rows = ["a0,,"]
    for t in range(1, 3_001):
        rows += [f"f{t},,", f"a{t},a{t - 1},f{t}"]
    kinship = kinship_of(with_header(rows))
    assert kinship.method == "indirect"
    assert not kinship.inbreeding.any()


@pytest.mark.parametrize("method", METHODS)
def test_long_selfing_chain_becomes_fully_inbred(method):
    """In 400 generations of selfing F never falls, never exceeds 1 and reaches it."""
    rows = ["a0,,", *(f"a{t},a{t - 1},a{t - 1}" for t in range(1, 401))]
    found = kinship_of(with_header(rows), method=method).inbreeding
    assert (np.diff(found) >= 0).all()
    assert found[:50].tolist() == [1 - 0.5**t for t in range(50)]
    assert found[-1] == 1


# --- Facts of the trade: common practice, no source --------------------------


@pytest.mark.parametrize("method", METHODS)
def test_sire_back_to_daughter_and_granddaughter(method):
    """Young of a sire and his daughter have F 0.25; by her daughter from him 0.375, in two loops.

    Common practice, no source.
    """
    kinship = kinship_of(with_header(["s,,", "u,,", "d,s,u", "g,s,d"]), method=method)
    daughter = inbreeding_paths(kinship, sire="s", dam="d")
    assert daughter.inbreeding == 0.25
    assert [(p.through_sire, p.through_dam, p.contribution) for p in daughter.paths] == [
        (("s",), ("d", "s"), 0.25)
    ]
    granddaughter = inbreeding_paths(kinship, sire="s", dam="g")
    assert granddaughter.inbreeding == 0.375
    assert [(p.through_sire, p.through_dam, p.contribution) for p in granddaughter.paths] == [
        (("s",), ("g", "s"), 0.25),
        (("s",), ("g", "d", "s"), 0.125),
    ]


def diversity_after(size: int, generations: int, generator: np.random.Generator) -> float:
    """Gene diversity after random mating in a closed population, half of it males."""
    rows = [f"0_{each},," for each in range(size)]
    for t in range(1, generations + 1):
        sires = generator.integers(0, size // 2, size)
        dams = generator.integers(size // 2, size, size)
        rows += [
            f"{t}_{each},{t - 1}_{sire},{t - 1}_{dam}"
            for each, (sire, dam) in enumerate(zip(sires, dams, strict=True))
        ]
    kinship = kinship_of(with_header(rows))
    last = [f"{generations}_{each}" for each in range(size)]
    return 1 - float(kinship_table(kinship, last).mean())


def test_smaller_closed_population_loses_diversity_faster():
    """Under random mating 8 animals lose more diversity in six generations than 24.

    Common practice, no source.
    """
    generator = np.random.default_rng(20260107)
    small, large = (
        float(np.mean([diversity_after(size, 6, generator) for _replicate in range(20)]))
        for size in (8, 24)
    )
    assert small < large - 0.1
    # Drift over seven rounds of sampling 2N genes, the founders' included.
    assert small == pytest.approx((1 - 1 / 16) ** 7, abs=0.06)
    assert large == pytest.approx((1 - 1 / 48) ** 7, abs=0.03)


# --- Questions that cannot be answered ---------------------------------------


def test_unknown_animals_are_all_named():
    """Asking for animals that are not there names each of them and offers a near spelling."""
    kinship = kinship_of(with_header(["otter1,,", "otter2,,"]))
    with pytest.raises(UnknownAnimalError, match=r"oter1.*heron.*not in the records"):
        kinship.between("oter1", "heron")
    with pytest.raises(UnknownAnimalError, match="otter1"):
        inbreeding_paths(kinship, sire="oter1", dam="otter2")


def test_unknown_method_is_refused_with_the_known_ones():
    """A method that does not exist is refused, and the known ones are named."""
    pedigree = pedigree_of(with_header(["a,,"]))
    with pytest.raises(KinshipError, match=r"guesswork(.|\n)*tabular(.|\n)*indirect"):
        compute_kinship(pedigree, method="guesswork")


def test_unknown_treatment_of_unknown_parents_is_refused():
    """A treatment of unknown parents that does not exist is refused by its name."""
    pedigree = pedigree_of(with_header(["a,,"]))
    with pytest.raises(KinshipError, match=r"guessed(.|\n)*unrelated"):
        compute_kinship(pedigree, unknown_parents="guessed")


def test_loops_through_clones_are_refused():
    """An animal that descends from its own copy is named, never dropped."""
    with pytest.raises(RecordsError, match=r"k.*o|o.*k"):
        pedigree_of("id,sire,dam,clone_of\no,f,,\nk,,,o\nf,k,,\n")


def test_twins_that_copy_each_other_are_one_genotype():
    """Twins that name each other share one genotype: kinship of the two is self-kinship."""
    kinship = kinship_of("id,sire,dam,clone_of\ns,,,\nd,,,\nk,,,o\no,s,d,k\n")
    assert kinship.between("k", "o") == kinship.between("o", "o") == 0.5
    assert kinship.between("k", "s") == 0.25


def test_ids_in_any_script_can_be_sorted():
    """An id with a digit of another script that is no decimal digit does not break the order."""
    pedigree = pedigree_of(with_header(["፩,,", "b,፩,"]))
    assert pedigree.ids == ("፩", "b")


@settings(max_examples=20)
@given(rows=anything)
def test_kinship_and_inbreeding_cannot_be_changed(rows):
    """The inbreeding of a kinship and the arrays of a pedigree are read-only."""
    kinship = kinship_of(as_text(rows))
    for values in (kinship.inbreeding, kinship.pedigree.sire, kinship.pedigree.founder):
        with pytest.raises(ValueError, match="read-only"):
            values[0] = 0
