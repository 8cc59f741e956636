"""Kinship and inbreeding against values that others have published.

Animals of published pedigrees are coded, not named.
"""

from __future__ import annotations

from decimal import ROUND_HALF_UP, Decimal
from fractions import Fraction

import numpy as np
import pytest

from pairing.kinship.paths import inbreeding_paths
from tests.pedigrees import (
    fractions,
    inbreeding,
    kinship_of,
    kinship_table,
    with_header,
)

METHODS = ["tabular", "indirect"]


def matrix(text: str) -> list[list[Fraction]]:
    """A printed matrix, one row a line, as fractions."""
    return [[Fraction(entry) for entry in line.split()] for line in text.strip().splitlines()]


def rounded(value: Fraction, places: int = 3) -> Decimal:
    """A fraction rounded half up, as tables print it."""
    exact = Decimal(value.numerator) / Decimal(value.denominator)
    return exact.quantize(Decimal(1).scaleb(-places), ROUND_HALF_UP)


# --- Kinship of standard relationships ---------------------------------------
# Lange, Applied Probability, Table 5.1 (p. 82) for the first eight; the same values in
# Crow & Kimura 1970 ch. 3 and Falconer & Mackay 1996 ch. 5 (from memory).

RELATIONS = """
    id,sire,dam
    gf,,
    gm,,
    gf2,,
    gm2,,
    u1,,
    u2,,
    u3,,
    u4,,
    u5,,
    u6,,
    P,gf,gm
    U,gf,gm
    HU,gf,u1
    Q,gf2,gm2
    V,gf2,gm2
    X,P,Q
    XS,P,Q
    XH,P,u2
    C1,U,u3
    HC,HU,u3
    D1,U,V
    XC,X,u4
    C1C,C1,u5
    XCC,XC,u4
    C1CC,C1C,u6
"""


@pytest.mark.parametrize("method", METHODS)
@pytest.mark.parametrize(
    ("relation", "kinship", "first", "second"),
    [
        ("parent-offspring", "1/4", "P", "X"),
        ("full sibs", "1/4", "X", "XS"),
        ("half sibs", "1/8", "X", "XH"),
        ("grandparent-grandchild", "1/8", "gf", "X"),
        ("uncle-niece", "1/8", "U", "X"),
        ("half uncle-niece", "1/16", "HU", "X"),
        ("great-grandparent", "1/16", "gf", "XC"),
        ("great-uncle", "1/16", "U", "XC"),
        ("double first cousins", "1/8", "X", "D1"),
        ("first cousins", "1/16", "X", "C1"),
        ("half first cousins", "1/32", "X", "HC"),
        ("first cousins once removed", "1/32", "XC", "C1"),
        ("second cousins", "1/64", "XC", "C1C"),
        ("second cousins once removed", "1/128", "XCC", "C1C"),
        ("third cousins", "1/256", "XCC", "C1CC"),
        ("self, non-inbred", "1/2", "gf", "gf"),
    ],
)
def test_kinship_of_standard_relationships(method, relation, kinship, first, second):
    """Non-inbred relatives have the kinship that every textbook gives."""
    found = kinship_of(RELATIONS, method=method)
    assert Fraction(found.between(first, second)) == Fraction(kinship), relation
    assert Fraction(found.between(second, first)) == Fraction(kinship), relation


@pytest.mark.parametrize("method", METHODS)
def test_kinship_of_three_quarter_sibs(method):
    """Young of one sire and two full sisters have kinship 3/16 (own exact value)."""
    found = kinship_of(
        """
        id,sire,dam
        s,,
        g,,
        h,,
        d1,g,h
        d2,g,h
        x,s,d1
        y,s,d2
        """,
        method=method,
    )
    assert Fraction(found.between("x", "y")) == Fraction(3, 16)


@pytest.mark.parametrize("method", METHODS)
def test_kinship_matrix_of_brother_sister_mating(method):
    """All 36 kinships of a brother-sister mating are as printed.

    Source: Lange, Applied Probability, Figure 5.1 and matrix on p. 83.
    """
    found = kinship_of(
        """
        id,sire,dam
        1,,
        2,,
        3,1,2
        4,1,2
        5,3,4
        6,3,4
        """,
        method=method,
    )
    assert fractions(kinship_table(found, ["1", "2", "3", "4", "5", "6"])) == matrix("""
        1/2 0 1/4 1/4 1/4 1/4
        0 1/2 1/4 1/4 1/4 1/4
        1/4 1/4 1/2 1/4 3/8 3/8
        1/4 1/4 1/4 1/2 3/8 3/8
        1/4 1/4 3/8 3/8 5/8 3/8
        1/4 1/4 3/8 3/8 3/8 5/8
    """)


def test_kinship_with_a_descendant_is_not_the_mean_of_kinships_with_parents():
    """Kinship of 3 with its young 5 is not the mean of 5's kinships with 3's parents.

    The trap is stated in Lange, Applied Probability, p. 83.
    """
    found = kinship_of(with_header(["1,,", "2,,", "3,1,2", "4,1,2", "5,3,4"]))
    mean = (found.between("1", "5") + found.between("2", "5")) / 2
    assert found.between("3", "5") == 3 / 8
    assert mean == 1 / 4


# --- Inbreeding under regular systems of mating ------------------------------
# S. Wright 1921, Systems of mating II, Genetics 6:124-143; Falconer & Mackay 1996, Table 5.1;
# Crow & Kimura 1970, ch. 3. The table is from memory; the half-sib and first-cousin
# recurrences were seen. Row t = 1 is the first inbred generation.


def selfing(generations: int) -> tuple[list[str], list[str]]:
    """Rows of repeated selfing, and the inbred animals, one a generation."""
    rows = ["s0,,", *(f"s{t},s{t - 1},s{t - 1}" for t in range(1, generations + 1))]
    return rows, [f"s{t}" for t in range(1, generations + 1)]


def full_sibs(generations: int) -> tuple[list[str], list[str]]:
    """Brother-sister mating."""
    rows = ["m0,,", "w0,,"]
    for t in range(1, generations + 2):
        rows += [f"m{t},m{t - 1},w{t - 1}", f"w{t},m{t - 1},w{t - 1}"]
    return rows, [f"m{t}" for t in range(2, generations + 2)]


def younger_parent(generations: int) -> tuple[list[str], list[str]]:
    """Parent with offspring, always the younger parent; the columns alternate."""
    rows = ["p0,,", "p1,,"]
    for t in range(2, generations + 3):
        older, younger = f"p{t - 2}", f"p{t - 1}"
        rows.append(f"p{t},{older},{younger}" if t % 2 else f"p{t},{younger},{older}")
    return rows, [f"p{t}" for t in range(3, generations + 3)]


def half_sibs(generations: int) -> tuple[list[str], list[str]]:
    """One male a generation with females that are half sisters of him and of each other."""
    females = generations + 2
    rows = ["m0,,", *(f"f0_{k},," for k in range(females))]
    for t in range(1, generations + 2):
        rows.append(f"m{t},m{t - 1},f{t - 1}_0")
        rows += [f"f{t}_{k},m{t - 1},f{t - 1}_{k + 1}" for k in range(females - t)]
    return rows, [f"m{t}" for t in range(2, generations + 2)]


def backcross(generations: int) -> tuple[list[str], list[str]]:
    """Repeated mating to one non-inbred animal."""
    rows = ["a,,", "x0,,", *(f"x{t},a,x{t - 1}" for t in range(1, generations + 2))]
    return rows, [f"x{t}" for t in range(2, generations + 2)]


def double_first_cousins(generations: int) -> tuple[list[str], list[str]]:
    """Two pairs a generation; each son mates the other pair's daughter."""
    return circular_pairs(2, generations, first_inbred=3)


def circular_pairs(
    pairs: int, generations: int, *, first_inbred: int = 3
) -> tuple[list[str], list[str]]:
    """Pairs in a ring of cages; each leaves a son and a daughter, sons move one cage on."""
    rows = [f"{sex}0_{cage},," for cage in range(pairs) for sex in "mw"]
    for t in range(1, generations + first_inbred):
        rows += [
            f"{sex}{t}_{cage},m{t - 1}_{(cage - (t > 1)) % pairs},w{t - 1}_{cage}"
            for cage in range(pairs)
            for sex in "mw"
        ]
    return rows, [f"m{t}_0" for t in range(first_inbred, generations + first_inbred)]


def first_cousins(generations: int) -> tuple[list[str], list[str]]:
    """Circular mating of three pairs, which follows the first-cousin recurrence."""
    return circular_pairs(3, generations)


SYSTEMS = {
    selfing: "1/2 3/4 7/8 15/16 31/32 63/64 127/128 255/256 511/512 1023/1024",
    full_sibs: "1/4 3/8 1/2 19/32 43/64 47/64 201/256 423/512 55/64 1815/2048",
    younger_parent: "1/4 3/8 1/2 19/32 43/64 47/64 201/256 423/512 55/64 1815/2048",
    half_sibs: "1/8 7/32 39/128 195/512 919/2048 4171/8192 18447/32768 80067/131072 "
    "342631/524288 1450171/2097152",
    backcross: "1/4 3/8 7/16 15/32 31/64 63/128 127/256 255/512 511/1024 1023/2048",
    double_first_cousins: "1/8 3/16 1/4 5/16 47/128 107/256 119/256 65/128 1121/2048 2391/4096",
    first_cousins: "1/16 7/64 39/256 199/1024 959/4096 4455/16384 20175/65536 89655/262144 "
    "392671/1048576 1700167/4194304",
}
PRINTED = {
    selfing: ".500 .750 .875 .938 .969 .984 .992 .996 .998 .999",
    full_sibs: ".250 .375 .500 .594 .672 .734 .785 .826 .859 .886 .908 .926 .940 .951 .961 .968 "
    ".974 .979 .983 .986",
    half_sibs: ".125 .219 .305 .381 .449 .509 .563 .611 .654 .691 .725 .755 .782 .806 .827 .846 "
    ".863 .878 .891 .903",
    backcross: ".250 .375 .438 .469 .484 .492 .496 .498 .499 .500",
    double_first_cousins: ".125 .188 .250 .313 .367 .418 .465 .508 .547 .584 .617 .648 .676 "
    ".702 .726 .748",
    first_cousins: ".063 .109 .152 .194 .234 .272 .308 .342 .374 .405 .435 .463 .489 .514 .538 "
    ".561",
}


@pytest.mark.parametrize("method", METHODS)
@pytest.mark.parametrize("system", SYSTEMS, ids=lambda system: system.__name__)
def test_inbreeding_under_regular_systems_of_mating(system, method):
    """Ten generations of a regular system give exactly the published series (from memory)."""
    rows, inbred = system(10)
    expected = [Fraction(each) for each in SYSTEMS[system].split()]
    assert inbreeding(kinship_of(with_header(rows), method=method), *inbred) == expected


@pytest.mark.parametrize("system", PRINTED, ids=lambda system: system.__name__)
def test_inbreeding_under_regular_systems_rounds_to_the_printed_table(system):
    """The series agree with the three printed decimals as far as the table goes (from memory)."""
    expected = [Decimal(each) for each in PRINTED[system].split()]
    rows, inbred = system(len(expected))
    found = inbreeding(kinship_of(with_header(rows)), *inbred)
    assert [rounded(each) for each in found] == expected


def test_inbreeding_before_the_first_inbred_generation_is_zero():
    """Every animal of a regular system before its first inbred generation has F = 0."""
    for system in SYSTEMS:
        rows, inbred = system(3)
        found = kinship_of(with_header(rows))
        depth = found.pedigree.generation[found.pedigree.index[inbred[0]]]
        earlier = found.inbreeding[found.pedigree.generation < depth]
        assert len(earlier) > 0
        assert not earlier.any(), system.__name__


def test_recycled_females_are_more_inbred_than_the_half_sib_series():
    """With only three females recycled F is higher from t = 3: 41/128, not 39/128.

    Negative control of the half-sib column; own exact value.
    """
    rows = ["m0,,", "f0_0,,", "f0_1,,", "f0_2,,"]
    for t in range(1, 5):
        rows.append(f"m{t},m{t - 1},f{t - 1}_0")
        rows += [f"f{t}_{k},m{t - 1},f{t - 1}_{(k + 1) % 3}" for k in range(3)]
    found = inbreeding(kinship_of(with_header(rows)), "m2", "m3", "m4")
    assert found == [Fraction(1, 8), Fraction(7, 32), Fraction(41, 128)]


def test_full_sib_heterozygosity_follows_the_fibonacci_numbers():
    """Under full-sib mating 1 - F_t = Fibonacci(t + 3) / 2^(t + 1).

    Wright's series of heterozygosity, 1921, from memory.
    """
    fibonacci = [1, 1]
    while len(fibonacci) < 23:
        fibonacci.append(fibonacci[-1] + fibonacci[-2])
    rows, inbred = full_sibs(20)
    found = inbreeding(kinship_of(with_header(rows)), *inbred)
    assert [1 - each for each in found] == [
        Fraction(fibonacci[t + 2], 2 ** (t + 1)) for t in range(1, 21)
    ]


def test_twenty_generations_of_brother_sister_mating_make_an_inbred_strain():
    """After 20 generations F is 0.9863, and each of them loses 19.1 % of heterozygosity.

    Standard of the International Committee on mouse nomenclature, as quoted by
    barnardhealth.us; the exact value is recomputed.
    """
    rows, inbred = full_sibs(20)
    *_, before, last = inbreeding(kinship_of(with_header(rows)), *inbred)
    assert last == Fraction(2068495, 2097152)
    assert rounded(last, 4) == Decimal("0.9863")
    assert float(1 - (1 - last) / (1 - before)) == pytest.approx(0.190983, abs=1e-6)


@pytest.mark.parametrize("method", METHODS)
def test_backcross_to_an_inbred_line_is_as_fast_as_selfing(method):
    """Backcrossing to a fully inbred animal gives F_t = 1 - (1/2)^t (Wright 1921, from memory)."""
    rows, line = selfing(60)
    rows += ["x0,,", *(f"x{t},{line[-1]},x{t - 1}" for t in range(1, 12))]
    found = kinship_of(with_header(rows), method=method)
    places = found.pedigree.place(*(f"x{t}" for t in range(1, 12)))
    expected = [1 - 0.5**t for t in range(11)]
    assert found.inbreeding[places].tolist() == pytest.approx(expected, abs=1e-12)


def test_circular_mating_of_four_pairs():
    """Four pairs in a ring give 1/16, 3/32, 1/8, 5/32, 95/512, ... (own exact values)."""
    rows, inbred = circular_pairs(4, 9)
    series = inbreeding(kinship_of(with_header(rows)), *inbred)
    expected = "1/16 3/32 1/8 5/32 95/512 219/1024 247/1024 137/512"
    start = series.index(Fraction(1, 16))
    assert series[start : start + 8] == [Fraction(each) for each in expected.split()]


# --- Small published pedigrees with relationship matrices --------------------

SIX = with_header(["1,,", "2,,", "3,1,2", "4,1,", "5,4,3", "6,5,2"])
SIX_RELATIONSHIP = matrix("""
    1 0 1/2 1/2 1/2 1/4
    0 1 1/2 0 1/4 5/8
    1/2 1/2 1 1/4 5/8 9/16
    1/2 0 1/4 1 5/8 5/16
    1/2 1/4 5/8 5/8 9/8 11/16
    1/4 5/8 9/16 5/16 11/16 9/8
""")
SIX_INVERSE = matrix("""
    11/6 1/2 -1 -2/3 0 0
    1/2 61/30 -1 0 8/15 -16/15
    -1 -1 5/2 1/2 -1 0
    -2/3 0 1/2 11/6 -1 0
    0 8/15 -1 -1 38/15 -16/15
    0 -16/15 0 0 -16/15 32/15
""")
SIX_IDS = ["1", "2", "3", "4", "5", "6"]


def relationship(text: str, ids: list[str], method: str | None = None) -> np.ndarray:
    """The additive relationship matrix, twice kinship."""
    return 2 * kinship_table(kinship_of(text, method=method), ids)


@pytest.mark.parametrize("method", METHODS)
def test_relationship_of_six_animals(method):
    """A and F of the six animals are as in the book.

    Source: Mrode, Linear Models for the Prediction of Animal Breeding Values, 3rd ed. 2014,
    Table 2.1 and sections 2.2-2.4 (pp. 23-27); F5 = F6 = 0.125 in Appendix B (pp. 307-310).
    The matrix A itself is from memory.
    """
    assert fractions(relationship(SIX, SIX_IDS, method)) == SIX_RELATIONSHIP
    found = kinship_of(SIX, method=method)
    assert inbreeding(found, *SIX_IDS) == [0, 0, 0, 0, Fraction(1, 8), Fraction(1, 8)]


@pytest.mark.parametrize("method", METHODS)
def test_factors_of_the_relationship_of_six_animals(method):
    """The flow of genes T and the variances D are as printed, and T D T' is A.

    Source: Mrode 2014, section 2.3: D = diag(1, 1, 0.5, 0.75, 0.5, 0.469); row 6 of T is
    0.25, 0.625, 0.25, 0.25, 0.5, 1.
    """
    found = kinship_of(SIX, method=method)
    flow, variance, of_animal = found.gene_flow()
    places = of_animal[found.pedigree.place(*SIX_IDS)]
    transmitted = flow.down(np.eye(flow.n))[np.ix_(places, places)]
    sampled = variance[places]
    assert transmitted[5].tolist() == [0.25, 0.625, 0.25, 0.25, 0.5, 1]
    assert [fractions(sampled)] == matrix("1 1 1/2 3/4 1/2 15/32")
    product = transmitted @ np.diag(sampled) @ transmitted.T
    assert fractions(product) == SIX_RELATIONSHIP


def test_partial_sums_of_the_relationship_of_animal_five_with_itself():
    """The squares of row 5 of T times D add up in the printed steps 0.5, 0.6875, ..., 1.125.

    Source: Mrode 2014, Appendix B (pp. 307-310), walking from the youngest ancestor up.
    """
    found = kinship_of(SIX)
    flow, variance, of_animal = found.gene_flow()
    unit = np.zeros(flow.n)
    unit[of_animal[found.pedigree.index["5"]]] = 1
    passed = flow.up(unit)
    places = of_animal[found.pedigree.place("5", "4", "3", "2", "1")]
    sums = np.cumsum(passed[places] ** 2 * variance[places])
    assert sums.tolist() == [0.5, 0.6875, 0.8125, 0.875, 1.125]


@pytest.mark.parametrize("method", METHODS)
def test_sums_of_relationships_of_six_animals(method):
    """A times a vector of ones is 11/4, 19/8, 55/16, 43/16, 61/16, 57/16 (own exact values)."""
    found = kinship_of(SIX, method=method)
    sums = 2 * found.mean_with(np.ones(6))
    expected = "11/4 19/8 55/16 43/16 61/16 57/16"
    places = found.pedigree.place(*SIX_IDS)
    assert fractions(sums[places]) == [Fraction(each) for each in expected.split()]
    assert float(sums.mean() / 6) == pytest.approx(149 / 288, abs=1e-15)


def test_inverse_relationship_of_six_animals():
    """The inverse of A is as printed, not the one that ignores the parents' inbreeding.

    Source: Mrode 2014, section 2.4 (pp. 24-27), first steps seen; the inverse without
    inbreeding by the rules of section 2.4.1.
    """
    inverse = np.linalg.inv(relationship(SIX, SIX_IDS))
    assert inverse == pytest.approx(np.array(SIX_INVERSE, dtype=float), abs=1e-12)
    ignoring_inbreeding = matrix("""
        11/6 1/2 -1 -2/3 0 0
        1/2 2 -1 0 1/2 -1
        -1 -1 5/2 1/2 -1 0
        -2/3 0 1/2 11/6 -1 0
        0 1/2 -1 -1 5/2 -1
        0 -1 0 0 -1 2
    """)
    differing = np.abs(inverse - np.array(ignoring_inbreeding, dtype=float)) > 1e-12
    assert differing.any()
    assert inverse[5, 5] == pytest.approx(32 / 15)


EIGHT = with_header(["1,,", "2,,", "3,,", "4,1,2", "5,3,", "6,1,5", "7,3,4", "8,1,7"])
EIGHT_INVERSE = matrix("""
    5/2 1/2 0 -1 1/2 -1 1/2 -1
    1/2 3/2 0 -1 0 0 0 0
    0 0 11/6 1/2 -2/3 0 -1 0
    -1 -1 1/2 5/2 0 0 -1 0
    1/2 0 -2/3 0 11/6 -1 0 0
    -1 0 0 0 -1 2 0 0
    1/2 0 -1 -1 0 0 5/2 -1
    -1 0 0 0 0 0 -1 2
""")


@pytest.mark.parametrize("method", METHODS)
def test_inverse_relationship_of_eight_animals(method):
    """The inverse of A is as printed, and the eighth animal has F = 1/8.

    Source: Mrode 2014, section 4.2 (p. 64); which parent is the sire does not matter.
    """
    ids = [str(number) for number in range(1, 9)]
    inverse = np.linalg.inv(relationship(EIGHT, ids, method))
    assert inverse == pytest.approx(np.array(EIGHT_INVERSE, dtype=float), abs=1e-12)
    assert inbreeding(kinship_of(EIGHT, method=method), *ids) == [0] * 7 + [Fraction(1, 8)]


@pytest.mark.parametrize("method", METHODS)
def test_relationship_of_a_web_of_half_sibs(method):
    """A and F of the seven animals are as printed.

    Source: Royal Veterinary and Agricultural University, Copenhagen, Genetics in animal
    breeding, section 4.4. It prints F7 = 0.218, which is truncated from 7/32.
    """
    text = with_header(["1,,", "2,1,", "3,1,", "4,1,", "5,2,3", "6,4,3", "7,5,6"])
    ids = [str(number) for number in range(1, 8)]
    assert fractions(relationship(text, ids, method)) == matrix("""
        1 1/2 1/2 1/2 1/2 1/2 1/2
        1/2 1 1/4 1/4 5/8 1/4 7/16
        1/2 1/4 1 1/4 5/8 5/8 5/8
        1/2 1/4 1/4 1 1/4 5/8 7/16
        1/2 5/8 5/8 1/4 9/8 7/16 25/32
        1/2 1/4 5/8 5/8 7/16 9/8 25/32
        1/2 7/16 5/8 7/16 25/32 25/32 39/32
    """)
    found = inbreeding(kinship_of(text, method=method), *ids)
    assert found == [0, 0, 0, 0, Fraction(1, 8), Fraction(1, 8), Fraction(7, 32)]
    assert float(found[-1]) == pytest.approx(0.218, abs=0.001)


@pytest.mark.parametrize("method", METHODS)
def test_relationship_of_one_full_sib_mating(method):
    """A, its inverse and F of the eight animals are as printed.

    Source: Royal Veterinary and Agricultural University, Copenhagen, Genetics in animal
    breeding, section 7.5.
    """
    text = with_header(["1,,", "2,,", "3,,", "4,,", "5,1,2", "6,1,2", "7,3,4", "8,5,6"])
    ids = [str(number) for number in range(1, 9)]
    found = relationship(text, ids, method)
    assert fractions(found) == matrix("""
        1 0 0 0 1/2 1/2 0 1/2
        0 1 0 0 1/2 1/2 0 1/2
        0 0 1 0 0 0 1/2 0
        0 0 0 1 0 0 1/2 0
        1/2 1/2 0 0 1 1/2 0 3/4
        1/2 1/2 0 0 1/2 1 0 3/4
        0 0 1/2 1/2 0 0 1 0
        1/2 1/2 0 0 3/4 3/4 0 5/4
    """)
    inverse = matrix("""
        2 1 0 0 -1 -1 0 0
        1 2 0 0 -1 -1 0 0
        0 0 3/2 1/2 0 0 -1 0
        0 0 1/2 3/2 0 0 -1 0
        -1 -1 0 0 5/2 1/2 0 -1
        -1 -1 0 0 1/2 5/2 0 -1
        0 0 -1 -1 0 0 2 0
        0 0 0 0 -1 -1 0 2
    """)
    assert np.linalg.inv(found) == pytest.approx(np.array(inverse, dtype=float), abs=1e-12)
    assert inbreeding(kinship_of(text, method=method), "8") == [Fraction(1, 4)]


# --- A real pedigree ---------------------------------------------------------
# Shorthorn cattle, S. Wright 1922, Coefficients of inbreeding and relationship, Am. Nat.
# 56:330-338, from memory. a to i are the near pedigree of the bull i: g is his sire and
# also his dam's sire, f the dam of g and of h.

SHORTHORNS = with_header(
    ["a,,", "b,,", "c,,", "d,c,b", "e,a,d", "f,a,b", "g,e,f", "h,g,f", "i,g,h"]
)


@pytest.mark.parametrize("method", METHODS)
def test_inbreeding_of_two_shorthorn_bulls(method):
    """The near pedigree gives 3/16 and 15/32, just below the published 0.192 and 0.471.

    Wright 1922, from memory: the published values include remoter links.
    """
    found = kinship_of(SHORTHORNS, method=method)
    sire, dam, bull = inbreeding(found, "g", "h", "i")
    assert (sire, dam, bull) == (Fraction(3, 16), Fraction(11, 32), Fraction(15, 32))
    assert Fraction(found.between("g", "f")) == Fraction(11, 32)
    assert 0 < 0.192 - sire < 0.005
    assert 0 < 0.471 - bull < 0.003
    # Whatever the links above the sire: F of the bull is 3/8 + F of the sire / 2.
    assert bull == Fraction(3, 8) + sire / 2
    assert pytest.approx(0.471) == 3 / 8 + 0.192 / 2


def test_paths_of_two_shorthorn_bulls():
    """The loops are those one counts by hand on the near pedigree, after Wright 1922."""
    found = kinship_of(SHORTHORNS)
    loops = inbreeding_paths(found, sire="e", dam="f")
    assert {(path.through_sire, path.through_dam): path.contribution for path in loops.paths} == {
        (("e", "a"), ("f", "a")): 1 / 8,
        (("e", "d", "b"), ("f", "b")): 1 / 16,
    }
    loops = inbreeding_paths(found, sire="g", dam="h")
    assert {(path.through_sire, path.through_dam): path.contribution for path in loops.paths} == {
        (("g",), ("h", "g")): (1 / 4) * (1 + 3 / 16),
        (("g", "f"), ("h", "f")): 1 / 8,
        (("g", "e", "a"), ("h", "f", "a")): 1 / 32,
        (("g", "e", "d", "b"), ("h", "f", "b")): 1 / 64,
    }
    assert loops.other_paths == 0
    assert loops.inbreeding == 15 / 32
