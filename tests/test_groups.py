"""Animals known only as groups: one row for a tank, a shoal or a litter counted and not told apart.

The expected values come from writing every member out as an animal and averaging over every way
in which the parents could have been drawn from the group.
"""

from __future__ import annotations

from itertools import permutations, product

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from pairing.population.diversity import living_population
from tests.pedigrees import audit_of, kinship_of

METHODS = ("tabular", "indirect")

TANK = """
    id,sire,dam,count
    a,,,
    b,,,
    c,,,
    d,a,b,
    T,d,b,{count}
    x,T,c,
    y,T,a,
    z,T,T,
    U,T,T,4
    w,U,x,
    """


def written_out(count: int, draws: dict[str, tuple[int, ...]], inner: int = 4) -> str:
    """The tank's pedigree with every member a row, for one way of drawing the parents."""
    rows = ["id,sire,dam", "a,,", "b,,", "c,,", "d,a,b"]
    rows += [f"T{each},d,b" for each in range(count)]
    rows.append(f"x,T{draws['x'][0]},c")
    rows.append(f"y,T{draws['y'][0]},a")
    rows.append(f"z,T{draws['z'][0]},T{draws['z'][1]}")
    for each in range(inner):
        sire, dam = draws[f"U{each}"]
        rows.append(f"U{each},T{sire},T{dam}")
    return "\n".join(rows)


def expected_table(count: int) -> dict[tuple[str, str], float]:
    """Kinship among x, y, z and a random member of the tank, averaged over all draws."""
    total: dict[tuple[str, str], float] = {}
    pairs = list(permutations(range(count), 2))
    draws = list(product(range(count), range(count), pairs))
    for sire_of_x, sire_of_y, parents_of_z in draws:
        fixed = {f"U{each}": pairs[0] for each in range(4)}
        text = written_out(
            count, {"x": (sire_of_x,), "y": (sire_of_y,), "z": parents_of_z, **fixed}
        )
        kin = kinship_of(text)
        members = [f"T{each}" for each in range(count)]
        names = {"x": ["x"], "y": ["y"], "z": ["z"], "T": members}
        for first, second in product(names, names):
            block = kin.block(kin.pedigree.place(*names[first]), kin.pedigree.place(*names[second]))
            total[first, second] = total.get((first, second), 0.0) + block.mean() / len(draws)
    return total


@pytest.mark.parametrize("method", METHODS)
@pytest.mark.parametrize("count", [2, 3])
def test_kinship_with_a_group_is_the_mean_over_its_members(method, count):
    """Young of unknown members have the kinships that averaging over all draws gives."""
    kin = kinship_of(TANK.format(count=count), method=method)
    for (first, second), value in expected_table(count).items():
        assert kin.between(first, second) == pytest.approx(value, abs=1e-14), (first, second)


@pytest.mark.parametrize("method", METHODS)
def test_young_of_two_members_of_a_group_are_no_selfed_young(method):
    """A tank that breeds within itself: F is the kinship of two different members, full sibs."""
    kin = kinship_of(
        """
        id,sire,dam,count
        a,,,
        b,,,
        T,a,b,20
        z,T,T,
        """,
        method=method,
    )
    assert kin.inbreeding[kin.pedigree.index["z"]] == pytest.approx(0.25, abs=1e-14)
    assert kin.inbreeding[kin.pedigree.index["T"]] == pytest.approx(0.0, abs=1e-14)
    # Two draws from 20 full sibs: 1/20 the same animal (1/2), else full sibs (1/4).
    assert kin.between("T", "T") == pytest.approx(0.25 * 19 / 20 + 0.5 / 20, abs=1e-14)


@pytest.mark.parametrize("method", METHODS)
def test_members_of_a_group_with_a_pool_of_sires_have_each_their_own(method):
    """Several possible sires of a group are a pool: two members share one with chance 1/2."""
    kin = kinship_of(
        """
        id,sire,dam,count
        s,,,
        t,,,
        d,,,
        T,s|t,d,10
        """,
        method=method,
    )
    # Full sibs 1/4 half the time, half sibs 1/8 the other half (by hand).
    apart = (0.25 + 0.125) / 2
    assert kin.between("T", "T") == pytest.approx(apart * 0.9 + 0.5 * 0.1, abs=1e-14)


@pytest.mark.parametrize("method", METHODS)
def test_tank_to_tank_equals_members_written_out(method):
    """A second tank bred from the first: self-kinship by hand from the rule of two draws."""
    kin = kinship_of(TANK.format(count=3), method=method)
    table = {name: kin.between(name, name) for name in ("T", "U")}
    inbred = kin.inbreeding[kin.pedigree.index["U"]]
    # Members of U have parents drawn from T with replacement between members.
    assert table["U"] == pytest.approx(table["T"] * 3 / 4 + (1 + inbred) / 2 / 4, abs=1e-14)


@st.composite
def grouped_programmes(draw):
    """Rows with counts, some parents being groups, some unknown."""
    size = draw(st.integers(3, 9))
    rows = []
    for number in range(size):
        known = [f"A{each}" for each in range(number)]
        sire, dam = (draw(st.sampled_from(["", *known])) for _side in range(2))
        count = draw(st.sampled_from([1, 1, 2, 5, 30]))
        rows.append((f"A{number}", sire, dam, count))
    return rows


def as_text(rows):
    """Rows as CSV text; a single animal mated with itself is left to selfing."""
    return "\n".join(["id,sire,dam,count", *(",".join(map(str, row)) for row in rows)])


@settings(max_examples=150, deadline=None)
@given(grouped_programmes())
def test_methods_agree_on_groups(rows):
    """The table and the products give one answer, and kinship stays positive semidefinite."""
    text = as_text(rows)
    table, products = (kinship_of(text, method=method) for method in METHODS)
    places = list(range(len(table.pedigree)))
    square = table.block(places, places)
    np.testing.assert_allclose(products.block(places, places), square, atol=1e-12)
    np.testing.assert_allclose(products.inbreeding, table.inbreeding, atol=1e-12)
    assert np.linalg.eigvalsh(square).min() > -1e-12
    assert (table.inbreeding > -1e-12).all()
    assert (table.inbreeding < 1 + 1e-12).all()


@settings(max_examples=60, deadline=None)
@given(grouped_programmes(), st.integers(0, 8))
def test_group_of_one_is_an_animal(rows, number):
    """A count of 1 and no count say the same."""
    rows = [(name, sire, dam, 1) for name, sire, dam, _count in rows]
    plain = kinship_of("\n".join(["id,sire,dam", *(",".join(row[:3]) for row in rows)]))
    counted = kinship_of(as_text(rows))
    places = list(range(len(plain.pedigree)))
    assert (plain.block(places, places) == counted.block(places, places)).all()


def test_population_counts_every_member():
    """Means over the living weigh a tank by its number, as if its members were written out."""
    grouped = living_population(
        kinship_of(
            """
            id,sire,dam,sex,count
            a,,,m,
            b,,,f,
            T,a,b,,2.3.1
            n,,,m,
            """
        )
    )
    apart = living_population(
        kinship_of(
            "\n".join(
                ["id,sire,dam,sex", "a,,,m", "b,,,f", "n,,,m"]
                + [f"T{each},a,b,{sex}" for each, sex in enumerate("mmfffu")]
            )
        )
    )
    assert grouped.size == apart.size == 9
    for sex in ("male", "female", "unknown"):
        assert grouped.count_of_sex(sex) == apart.count_of_sex(sex)
    assert grouped.population_mean_kinship == pytest.approx(
        apart.population_mean_kinship, abs=1e-14
    )
    assert grouped.mean_inbreeding == apart.mean_inbreeding == 0.0
    assert grouped.founders.founder_equivalents == pytest.approx(
        apart.founders.founder_equivalents, abs=1e-12
    )


def test_group_of_founders_counts_as_many_founders():
    """Thirty wild-caught fish in one row are thirty founders with equal parts."""
    population = living_population(
        kinship_of(
            """
            id,sire,dam,origin,count
            W,,,wild,30
            y,W,W,captive,
            """
        )
    )
    assert population.founders.founders == 30
    assert population.founders.founder_equivalents == pytest.approx(30.0)


def test_empty_group_does_not_live():
    """A tank that holds nothing any more is in the pedigree and not among the living."""
    population = living_population(
        kinship_of(
            """
            id,sire,dam,count
            T,,,0
            y,T,,
            """
        )
    )
    assert population.size == 1


def test_litter_row_counts_its_living_young():
    """A row with the numbers of a litter stands for those weaned, else born and not dead."""
    pedigree = kinship_of(
        """
        id,sire,dam,young born,young dead,young weaned,count
        s,,,,,,
        d,,,,,,
        L1,s,d,8,2,,
        L2,s,d,6,1,4,
        L3,s,d,6,,,3
        L4,s,d,2,3,,
        """
    ).pedigree
    counts = {each: pedigree.counts.get(pedigree.index[each], 1) for each in pedigree.ids}
    assert counts == {"s": 1, "d": 1, "L1": 6, "L2": 4, "L3": 3, "L4": 0}


def test_clone_of_a_group_is_told_and_keeps_its_own_parents():
    """Which of a group's members a clone copies is not known, so it copies none."""
    text = "id,sire,dam,clone_of,count\nG,,,,30\ns,,,,\nd,,,,\nc,s,d,G,\n"
    kin = kinship_of(text)
    assert kin.between("c", "s") == 0.25
    assert kin.between("c", "G") == 0.0
    [finding] = [each for each in audit_of(text).findings if each.kind == "clone-differs"]
    assert finding.message == (
        "c is a clone of G (line 2), which stands for 30 animals: whose copy it is, is not known."
    )


@pytest.mark.parametrize("method", METHODS)
def test_group_of_clones_is_one_genotype(method):
    """Members that all copy one animal are as alike as the animal is to itself."""
    text = "id,sire,dam,clone_of,count\na,,,,\nb,,,,\nm,a,b,,\nG,,,m,9\n"
    kin = kinship_of(text, method=method)
    assert kin.between("G", "G") == kin.between("G", "m") == 0.5
    assert kin.inbreeding[kin.pedigree.index["G"]] == 0.0
