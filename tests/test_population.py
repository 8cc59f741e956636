"""Who lives, on which day, who is a founder, and what the living hold."""

from __future__ import annotations

import datetime

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from pairing.dates import parse_date
from pairing.founders import founder_statistics
from pairing.kinship.engine import kinship as compute_kinship
from pairing.policy.rules import LivingRule
from pairing.population.completeness import equivalent_generations, known_ancestry
from pairing.population.diversity import living_population
from pairing.population.living import date_of_records, living_on, yearly_losses
from tests.pedigrees import (
    Row,
    as_text,
    audit_of,
    kinship_of,
    pedigree_of,
    small_pedigrees,
)

HEADER = "id,sire,dam,sex,born,died,left,status,last_seen"
DEFAULTS = dict.fromkeys(HEADER.split(","), "")


def animals(*rows: dict[str, str]) -> str:
    """CSV text of animals given by the fields that are not blank."""
    lines = [HEADER]
    for number, row in enumerate(rows):
        lines.append(",".join((DEFAULTS | {"id": f"a{number}"} | row).values()))
    return "\n".join(lines)


def living_ids(text: str, as_of: str | None = None, **rule) -> list[str]:
    """Ids of the living animals, in file order."""
    pedigree = pedigree_of(text)
    day = parse_date(as_of) if as_of else None
    found = living_on(pedigree, as_of=day, rule=LivingRule(**rule))
    return [pedigree.ids[place] for place in found.places]


def lives(as_of: str, **fields: str) -> bool:
    """Whether an animal with these fields lives on a day."""
    return living_ids(animals(fields), as_of) == ["a0"]


def warnings_of(text: str, as_of: str | None = None) -> list[str]:
    """Warnings about the living set."""
    day = parse_date(as_of) if as_of else None
    return list(living_on(pedigree_of(text), as_of=day).warnings)


# --- Living on a date --------------------------------------------------------


def test_stubs_never_live():
    """A parent without a row of its own is never among the living."""
    text = "id,sire,dam\nx,ghost,spirit\ny,ghost,\n"
    assert living_ids(text) == ["x", "y"]


@pytest.mark.parametrize("status", ["", "living", "alive", "Living"])
def test_blank_or_living_status_lives(status):
    """An animal whose status is blank or living lives."""
    assert lives("2020-01-01", status=status)


@pytest.mark.parametrize("status", ["dead", "gone", "lost", "sold", "exported", "released"])
def test_any_other_status_does_not_live(status):
    """An animal recorded as dead, gone or lost does not live, dated or not."""
    assert not lives("2020-01-01", status=status)
    assert not lives("2020-01-01", status=status, born="2019-01-01")


@pytest.mark.parametrize(
    ("born", "expected"),
    [
        ("2019-12-31", True),
        ("2020-01-01", True),
        ("2020-01-02", False),
        ("2020-02", False),
        ("2021", False),
        ("", True),
        ("[2021..2022]", False),
        ("2020-01-02?", False),
    ],
)
def test_an_animal_born_after_the_date_does_not_live(born, expected):
    """Born by the date, or at an unknown time, an animal lives; born after it, it does not."""
    assert lives("2020-01-01", born=born) is expected


@pytest.mark.parametrize("born", ["2020", "2020-06", "[2019..2021]"])
def test_an_animal_that_may_have_been_born_by_the_date_lives(born):
    """A birth of reduced precision that may lie before the date does not rule an animal out."""
    assert lives("2020-06-15", born=born)


@pytest.mark.parametrize("field", ["died", "left"])
@pytest.mark.parametrize(
    ("end", "expected"),
    [
        ("2020-06-14", False),
        ("2020-06-15", False),
        ("2020-06-16", True),
        ("2019", False),
        ("2020", True),
        ("2020-05", False),
        ("2020-06", True),
        ("[2018..2019]", False),
        ("[2018..2020]", True),
        ("../2019", False),
        ("2019/..", True),
        ("2019?", False),
    ],
)
def test_a_death_or_departure_counts_from_its_last_possible_day(field, end, expected):
    """An animal lives until it has certainly died or left by the date."""
    assert lives("2020-06-15", **{field: end}) is expected


@pytest.mark.parametrize(("as_of", "expected"), [("2020-12-30", True), ("2020-12-31", False)])
def test_a_death_known_to_the_year_counts_from_its_last_day(as_of, expected):
    """A death in 2020 counts on 31 December and not a day before."""
    assert lives(as_of, died="2020") is expected


def test_the_earlier_of_death_and_departure_counts():
    """An animal that left lives no longer here, although its later death is recorded too."""
    assert not lives("2020-06-15", left="2020-01-01", died="2021-01-01")
    assert not lives("2020-06-15", left="2021-01-01", died="2020-01-01")


def test_no_death_is_presumed():
    """An animal of any age, not seen for a century, lives as long as nothing else is recorded."""
    assert lives("2020-01-01", born="1900-01-01", last_seen="1901-01-01")


def test_deaths_are_presumed_when_the_policy_says_so():
    """An animal certainly older than the policy's age counts as dead, one of unknown age not."""
    text = animals({"born": "2000-01-01"}, {"born": "2005-01-02"}, {"born": "2010"}, {"born": ""})
    assert living_ids(text, "2020-01-01") == ["a0", "a1", "a2", "a3"]
    assert living_ids(text, "2020-01-01", presumed_dead_after=15) == ["a1", "a2", "a3"]
    assert living_ids(text, "2020-01-01", presumed_dead_after=9.5) == ["a2", "a3"]
    assert living_ids(text, "2020-01-01", presumed_dead_after=9) == ["a3"]


def test_living_are_in_file_order():
    """The living are listed as the file lists them."""
    text = "id,sire,dam\nz,,\nb,a,z\na,,\n"
    assert living_ids(text) == ["z", "b", "a"]


def test_rule_says_who_belongs_to_the_set():
    """The rule in words names the date and whatever the policy adds."""
    pedigree = pedigree_of(animals({"born": "2019-05-01"}))
    day = parse_date("2020-02-29")
    assert "2020-02-29" in living_on(pedigree, as_of=day).rule
    rule = LivingRule(presumed_dead_after=15)
    assert "presumed dead after 15 years" in living_on(pedigree, as_of=day, rule=rule).rule
    rule = LivingRule(members="born_since", value=2015)
    assert "born since 2015" in living_on(pedigree, as_of=day, rule=rule).rule
    rule = LivingRule(members="bred_within_years", value=3)
    assert "bred within 3 years" in living_on(pedigree, as_of=day, rule=rule).rule


def test_members_born_since():
    """With born_since only living animals born in that year or later make up the population."""
    text = animals(
        {"born": "2014-12-31"},
        {"born": "2015-01-01"},
        {"born": "2016"},
        {"born": ""},
        {"born": "2016-01-01", "died": "2017-01-01"},
    )
    found = living_ids(text, "2020-01-01", members="born_since", value=2015)
    assert found == ["a1", "a2"]


def test_members_that_bred():
    """With bred_within_years only living parents of young born within so many years belong."""
    text = animals(
        {"id": "old_sire"},
        {"id": "old_dam"},
        {"id": "sire"},
        {"id": "dam"},
        {"id": "dead_dam", "died": "2019-06-01"},
        {"id": "future_sire"},
        {"id": "may_be_sire"},
        {"id": "x", "sire": "old_sire", "dam": "old_dam", "born": "2010-05-01"},
        {"id": "y", "sire": "sire", "dam": "dam", "born": "2018-05-01"},
        {"id": "z", "sire": "sire|may_be_sire", "dam": "dead_dam", "born": "2019-05-01"},
        {"id": "w", "sire": "future_sire", "dam": "old_dam", "born": "2021-05-01"},
        {"id": "undated", "sire": "old_sire", "dam": "old_dam"},
    )
    found = living_ids(text, "2020-01-01", members="bred_within_years", value=3)
    assert found == ["sire", "dam", "may_be_sire"]
    assert living_ids(text, "2020-01-01", members="bred_within_years", value=12) == [
        "old_sire",
        "old_dam",
        "sire",
        "dam",
        "may_be_sire",
    ]


# --- The date ----------------------------------------------------------------


def test_date_is_the_last_day_of_the_latest_year_in_the_records():
    """Without a date given, the last day of the latest year in the records is used."""
    for field in ("born", "died", "left", "last_seen"):
        pedigree = pedigree_of(animals({"born": "1987-03-02"}, {field: "1991-01-05"}))
        found = living_on(pedigree).as_of
        assert found == date_of_records(pedigree) == datetime.date(1991, 12, 31).toordinal(), field


@pytest.mark.parametrize(
    ("born", "year"), [("1991", 1991), ("1991-02", 1991), ("[1989..1991]", 1991), ("1991?", 1991)]
)
def test_date_counts_dates_of_reduced_precision(born, year):
    """A date of reduced precision counts with the latest year it may mean."""
    pedigree = pedigree_of(animals({"born": "1980-01-01"}, {"born": born}))
    assert date_of_records(pedigree) == datetime.date(year, 12, 31).toordinal()


def test_date_is_not_taken_from_an_open_end():
    """An interval without an end says nothing about the latest year."""
    pedigree = pedigree_of(animals({"born": "1980-01-01"}, {"died": "1985/.."}))
    assert date_of_records(pedigree) == datetime.date(1980, 12, 31).toordinal()


def test_given_date_wins():
    """A date that is given is used, whatever the records hold."""
    pedigree = pedigree_of(animals({"born": "1987-03-02"}, {"died": "1995-01-05"}))
    found = living_on(pedigree, as_of=parse_date("1990-06-30"))
    assert found.as_of == datetime.date(1990, 6, 30).toordinal()
    assert len(found.places) == 2


def test_given_date_of_reduced_precision_means_its_last_day():
    """A year given as the date means its last day."""
    pedigree = pedigree_of(animals({"died": "1990-12-31"}))
    found = living_on(pedigree, as_of=parse_date("1990"))
    assert found.as_of == datetime.date(1990, 12, 31).toordinal()
    assert len(found.places) == 0


def test_records_without_dates_have_no_date():
    """Without any date all animals with a living status live, and a warning says so."""
    text = animals({}, {"status": "dead"}, {"status": "living"})
    pedigree = pedigree_of(text)
    found = living_on(pedigree)
    assert date_of_records(pedigree) is None
    assert found.as_of is None
    assert living_ids(text) == ["a0", "a2"]
    assert len(found.warnings) == 1
    assert "no dates" in found.warnings[0]


# --- Warnings ----------------------------------------------------------------


def test_old_records_are_warned_about():
    """A newest event more than a year before the date is named in a warning."""
    text = animals({"born": "2015-05-01"}, {"last_seen": "2018-06-30"})
    (warning,) = warnings_of(text, "2019-07-02")
    assert "2018-06-30" in warning
    assert "more than a year" in warning
    assert warnings_of(text, "2019-06-30") == []
    assert warnings_of(text) == []


def test_events_after_the_date_do_not_make_records_fresh():
    """Only events by the date count as news of it."""
    text = animals({"born": "2015-05-01"}, {"born": "2019-01-01"})
    (warning,) = warnings_of(text, "2017-01-01")
    assert "2015-05-01" in warning


def test_animals_older_than_any_recorded_age_at_death_are_warned_about():
    """Living animals older than any recorded age at death are named; younger ones are not."""
    text = animals(
        {"born": "2000-01-01", "died": "2008-01-01"},
        {"born": "2001-01-01", "died": "2006-01-01"},
        {"id": "elder", "born": "2005-01-01"},
        {"id": "younger", "born": "2013-01-01"},
        {"id": "ageless"},
        {"born": "2019-06-01"},
    )
    (warning,) = warnings_of(text, "2020-01-01")
    assert "elder" in warning
    assert "8.0 years" in warning
    assert "younger" not in warning
    assert "ageless" not in warning


def test_without_recorded_ages_at_death_no_age_is_warned_about():
    """Where no age at death is recorded, no animal is too old."""
    text = animals({"born": "1950-01-01"}, {"born": "2019-06-01"}, {"died": "2019-07-01"})
    assert warnings_of(text, "2020-01-01") == []


def test_a_death_without_an_end_does_not_hide_old_animals():
    """A death known only to lie after some day is no record of a great age."""
    text = animals(
        {"born": "2000-01-01", "died": "2008-01-01"},
        {"born": "2000-01-01", "died": "2003/.."},
        {"id": "elder", "born": "2005-01-01"},
        {"born": "2019-06-01"},
    )
    assert any("elder" in warning for warning in warnings_of(text, "2020-01-01"))


# --- Founders ----------------------------------------------------------------


@pytest.mark.parametrize("origin", ["wild", "foundation", "imported", "Wild-caught", "founder"])
def test_declared_founders(origin):
    """An animal of wild, foundation or imported origin is a declared founder."""
    pedigree = pedigree_of(f"id,sire,dam,origin\nx,,,{origin}\n")
    assert pedigree.founder.tolist() == [True]
    assert pedigree.presumed.tolist() == [False]
    assert known_ancestry(pedigree).tolist() == [1]


@pytest.mark.parametrize("origin", ["captive", "unknown", "?"])
def test_animals_of_captive_or_unknown_origin_have_unknown_ancestry(origin):
    """An animal of captive or unknown origin with blank parents is no founder."""
    pedigree = pedigree_of(f"id,sire,dam,origin\nx,,,{origin}\ny,,,wild\n")
    places = pedigree.place("x", "y")
    assert pedigree.founder[places].tolist() == [False, True]
    assert known_ancestry(pedigree)[places].tolist() == [0, 1]


def test_a_blank_origin_beside_others_is_no_founder():
    """Where there is a column for origin, an animal with origin and parents blank is no founder."""
    pedigree = pedigree_of("id,sire,dam,origin\nx,,,\ny,,,wild\n")
    assert pedigree.founder[pedigree.place("x", "y")].tolist() == [False, True]
    assert not pedigree.presumed.any()


def test_presumed_founders():
    """Without a column for origin an animal with both parents blank is a presumed founder."""
    pedigree = pedigree_of("id,sire,dam\nx,,\ny,,0\nz,?,unknown\nw,x,\nv,ghost,\n")
    places = pedigree.place("x", "y", "z", "w", "v", "ghost")
    assert pedigree.founder[places].tolist() == [True, True, True, False, False, False]
    assert pedigree.presumed[places].tolist() == [True, True, True, False, False, False]


def test_unknown_ancestry_of_stubs_and_blank_parents():
    """A parent without a row and a single blank parent are unknown ancestry."""
    pedigree = pedigree_of("id,sire,dam\nx,,\nw,x,\nv,ghost,x\n")
    places = pedigree.place("x", "w", "v", "ghost")
    assert known_ancestry(pedigree)[places].tolist() == [1, 0.5, 0.5, 0]


def test_parents_written_as_wild_declare_a_founder():
    """Parents given as "wild" say the origin: a declared founder, neither presumed nor doubtful."""
    text = """
        id,sire,dam,born
        a,,,2000-01-01
        b,,,2000-01-01
        x,a,b,2003-01-01
        y,wild,wild,2010-01-01
        z,,,2011-01-01
    """
    pedigree = pedigree_of(text)
    places = pedigree.place("y", "z")
    assert pedigree.founder[places].tolist() == [True, True]
    assert pedigree.presumed[places].tolist() == [False, True]
    doubtful = [each.id for each in audit_of(text).findings if each.kind == "doubtful-founder"]
    assert doubtful == ["z"]


def test_parents_written_as_wild_declare_a_founder_beside_an_origin_column():
    """With origin left blank, parents given as "wild" still make a declared founder."""
    pedigree = pedigree_of("id,sire,dam,origin\nx,wild,wild,\ny,wild,,\n")
    assert pedigree.founder.tolist() == [True, True]
    assert pedigree.presumed.tolist() == [False, False]


def test_late_presumed_founders_are_doubtful():
    """Presumed founders born after the first birth in the programme are listed, others not."""
    text = """
        id,sire,dam,born
        a,,,2000-01-01
        b,,,
        x,a,b,2003-01-01
        y,,,2003-01-01
        z,,,2003-01-02
    """
    audit = audit_of(text)
    doubtful = [each.id for each in audit.findings if each.kind == "doubtful-founder"]
    assert doubtful == ["z"]


# --- How far the records reach -----------------------------------------------

# Equivalent complete generations: Maignel, Boichard & Verrier 1996, Interbull Bull. 14:49-54,
# from memory; own exact values on the six animals of Mrode 2014, Table 2.1, and one more.


def test_equivalent_generations_of_six_animals():
    """Animals 3 to 6 have 1, 1/2, 7/4 and 15/8 equivalent complete generations."""
    pedigree = pedigree_of("id,sire,dam\n1,,\n2,,\n3,1,2\n4,1,\n5,4,3\n6,5,2\n")
    found = equivalent_generations(pedigree)[pedigree.place("1", "2", "3", "4", "5", "6")]
    assert found.tolist() == [0, 0, 1, 1 / 2, 7 / 4, 15 / 8]


def test_equivalent_generations_where_parents_are_missing():
    """Ancestors count half for each generation back; a missing parent counts nothing."""
    pedigree = pedigree_of("id,sire,dam\nss,,\nsd,,\nds,,\ns,ss,sd\nd,ds,\nx,s,d\ny,s,\nz,,\n")
    found = equivalent_generations(pedigree)[pedigree.place("x", "y", "z")]
    assert found.tolist() == [7 / 4, 1, 0]
    assert known_ancestry(pedigree)[pedigree.place("d", "x", "y")].tolist() == [0.5, 0.75, 0.5]


@given(rows=small_pedigrees(possible=True, clones=True))
def test_depth_and_known_share_follow_their_recursions(rows):
    """Depth is the mean of the parents' depths plus one, the known share the mean of theirs."""
    pedigree = pedigree_of(as_text(rows))
    depth, share = equivalent_generations(pedigree), known_ancestry(pedigree)
    for row in rows:
        place = pedigree.index[row.id]
        if row.clone_of:
            original = pedigree.index[row.clone_of]
            assert depth[place] == pytest.approx(depth[original])
        elif row.sire or row.dam:
            parents = [
                (pedigree.index[parent], float(chance) / 2)
                for side in (row.sire, row.dam)
                for parent, chance in side
            ]
            expected = sum(chance * (1 + depth[parent]) for parent, chance in parents)
            assert depth[place] == pytest.approx(expected)
            expected = sum(chance * share[parent] for parent, chance in parents)
            assert share[place] == pytest.approx(expected)
        else:
            assert (depth[place], share[place]) == (0, 1)


@given(rows=small_pedigrees(possible=True, clones=True))
def test_known_share_is_a_share(rows):
    """The known share of ancestry lies between 0 and 1, and a clone has its original's."""
    pedigree = pedigree_of(as_text(rows))
    share = known_ancestry(pedigree)
    assert (share >= 0).all()
    assert (share <= 1 + 1e-12).all()
    for clone, original in pedigree.same_genotype_as.items():
        assert share[clone] == pytest.approx(share[original])


# --- Gene diversity ----------------------------------------------------------


@given(rows=small_pedigrees(possible=True, clones=True), data=st.data())
def test_gene_diversity_identities(rows, data):
    """Gene diversity is 1 - mean kinship = 1 - 1 / (2 fg), and mean kinships average to theirs."""
    dead = data.draw(st.sets(st.sampled_from([row.id for row in rows]), max_size=len(rows) - 1))
    lines = as_text(rows).splitlines()
    text = "\n".join(
        [lines[0] + ",status"]
        + [
            line + (",dead" if row.id in dead else ",")
            for row, line in zip(rows, lines[1:], strict=True)
        ]
    )
    pedigree = pedigree_of(text)
    for method in ("tabular", "indirect"):
        kinship = compute_kinship(pedigree, method=method)
        population = living_population(kinship)
        living = population.living
        among = kinship.block(living, living)
        mean = population.population_mean_kinship
        assert {pedigree.ids[place] for place in living} == {r.id for r in rows} - dead
        assert mean == pytest.approx(among.mean(), abs=1e-12)
        assert population.mean_kinship[living].mean() == pytest.approx(mean, abs=1e-12)
        assert population.mean_kinship[living] == pytest.approx(among.mean(axis=1), abs=1e-12)
        assert population.gene_diversity == pytest.approx(1 - mean, abs=1e-12)
        assert 1 - 1 / (2 * population.founder_genome_equivalents) == pytest.approx(
            population.gene_diversity, abs=1e-12
        )
        assert mean >= 1 / (2 * population.size) - 1e-12
        assert population.mean_inbreeding == pytest.approx(
            2 * np.diagonal(among).mean() - 1, abs=1e-12
        )


@given(rows=small_pedigrees(missing=False))
def test_founder_contributions_are_the_whole_of_known_ancestry(rows):
    """With all ancestry known, founders' shares add up to 1 and fg <= fe <= founders."""
    kinship = kinship_of(as_text(rows))
    population = living_population(kinship)
    founders = population.founders
    assert founders.contributions.sum() == pytest.approx(1)
    assert founders.founder_equivalents <= len(founders.places) + 1e-9
    assert population.founder_genome_equivalents <= founders.founder_equivalents + 1e-9
    assert len(founders.places) <= founders.founders == int(kinship.pedigree.founder.sum())


@given(rows=small_pedigrees(possible=True))
def test_founder_contributions_are_the_mean_known_share(rows):
    """Founders' shares add up to the mean known share of ancestry of the living."""
    population = living_population(kinship_of(as_text(rows)))
    known = population.known_ancestry[population.living].mean()
    assert population.founders.contributions.sum() == pytest.approx(known)


@given(rows=small_pedigrees(clones=True))
def test_founder_contributions_with_clones_are_a_whole(rows):
    """Clones of founders and of their young do not make founders' shares exceed 1."""
    population = living_population(kinship_of(as_text(rows)))
    assert population.founders.contributions.sum() <= 1 + 1e-12


@given(rows=small_pedigrees())
def test_an_unrelated_animal_lowers_mean_kinship_as_the_formula_says(rows):
    """One more unrelated animal makes mean kinship (N^2 m + 1/2) / (N + 1)^2."""
    before = living_population(kinship_of(as_text(rows)))
    after = living_population(kinship_of(as_text([*rows, Row("stranger")])))
    n, mean = before.size, before.population_mean_kinship
    assert after.population_mean_kinship == pytest.approx((n**2 * mean + 1 / 2) / (n + 1) ** 2)


def test_unrelated_animals_are_as_many_founder_genomes():
    """N unrelated non-inbred animals have mean kinship 1 / (2N) and N founder genomes."""
    population = living_population(kinship_of("id,sire,dam\na,,\nb,,\nc,,\nd,,\n"))
    assert population.population_mean_kinship == 1 / 8
    assert population.founder_genome_equivalents == 4
    assert population.founders.founder_equivalents == 4
    assert population.mean_inbreeding == 0


def test_mean_kinship_of_dead_animals_is_with_the_living():
    """A dead animal too has a mean kinship with the living set."""
    kinship = kinship_of("id,sire,dam,status\ns,,,dead\nd,,,\nx,s,d,\ny,s,d,\n")
    population = living_population(kinship)
    place = kinship.pedigree.index["s"]
    assert population.size == 3
    assert population.mean_kinship[place] == pytest.approx((0 + 1 / 4 + 1 / 4) / 3)


def test_one_animal_alone():
    """A single living animal has mean kinship (1 + F) / 2."""
    text = "id,sire,dam,status\na,,,dead\nb,,,dead\nc,a,b,dead\nd,a,b,dead\nx,c,d,\n"
    population = living_population(kinship_of(text))
    assert population.size == 1
    assert population.population_mean_kinship == 5 / 8


def test_nobody_living():
    """With no animal living every figure is undefined, never 0 or 1."""
    kinship = kinship_of("id,sire,dam,status\na,,,dead\nb,a,,gone\n")
    population = living_population(kinship)
    assert population.size == 0
    assert population.population_mean_kinship is None
    assert population.gene_diversity is None
    assert population.founder_genome_equivalents is None
    assert population.mean_inbreeding is None
    assert population.founders.founder_equivalents is None
    assert population.founders.places.tolist() == []
    assert population.founders.founders == 1
    assert population.count_of_sex("male") == 0


def test_living_are_counted_by_sex():
    """Each living animal counts once, under the sex recorded for it."""
    kinship = kinship_of(
        "id,sire,dam,sex,status\na,,,m,\nb,,,f,\nc,,,F,\nd,,,,\ne,,,h,\nf,,,m,dead\n"
    )
    population = living_population(kinship)
    counts = [
        population.count_of_sex(sex) for sex in ("male", "female", "unknown", "hermaphrodite")
    ]
    assert counts == [1, 2, 1, 1]
    assert sum(counts) == population.size


def test_founders_without_living_descendants_are_not_represented():
    """A dead founder without living descendants gives nothing; a living one counts itself."""
    pedigree = pedigree_of(
        "id,sire,dam,status\na,,,dead\nb,,,dead\nc,,,dead\nd,,,\nx,a,b,\ny,a,c,dead\n"
    )
    living = np.array(pedigree.place("d", "x"))
    found = founder_statistics(pedigree, living)
    assert [pedigree.ids[place] for place in found.places] == ["a", "b", "d"]
    assert found.contributions.tolist() == [1 / 4, 1 / 4, 1 / 2]
    assert found.founders == 4
    assert found.founder_equivalents == pytest.approx(1 / (1 / 16 + 1 / 16 + 1 / 4))


def test_founder_equivalents_are_scaled_to_the_known_part():
    """Unknown ancestry is left out of founder equivalents, and the shares show how much it is."""
    pedigree = pedigree_of("id,sire,dam\na,,\nb,,\nx,a,ghost\ny,b,ghost\n")
    found = founder_statistics(pedigree, np.array(pedigree.place("x", "y")))
    assert found.contributions.tolist() == [1 / 4, 1 / 4]
    assert found.founder_equivalents == 2


# --- Yearly losses -----------------------------------------------------------


LOSSES = "id,sire,dam,born,died,left,end_cause"


def losses(*rows: str, as_of: str = "2019-12-31") -> float | None:
    """Yearly losses by a date, of animals given as rows ``born,died,left,end_cause``."""
    text = "\n".join([LOSSES, *(f"a{number},,,{row}" for number, row in enumerate(rows))])
    return yearly_losses(pedigree_of(text), parse_date(as_of).latest)


BIRTHS = [f"{year}-05-01,,," for year in range(2010, 2020)]


def test_yearly_losses_are_the_mean_of_five_years():
    """Deaths and departures of the last five years with records are averaged."""
    rows = ["2010,2014-12-31,,"] * 7 + ["2010,2015-01-01,,", "2010,,2018-02-03,", "2010,2019,,"]
    assert losses(*BIRTHS, *rows) == 3 / 5


def test_yearly_losses_leave_out_planned_ends():
    """Animals culled, slaughtered or used are no losses; natural and unknown causes are."""
    rows = ["2010,2018-01-01,,culled", "2010,2018-01-01,,slaughtered", "2010,2018-01-01,,used"]
    counted = ["2010,2018-01-01,,natural", "2010,2018-01-01,,", "2010,2018-01-01,,euthanised-ill"]
    assert losses(*BIRTHS, *rows, *counted) == 3 / 5


def test_yearly_losses_count_years_with_records_only():
    """Years in which nothing was recorded are skipped, not counted as years without losses."""
    births = [f"{year}-05-01,,," for year in (2000, 2001, 2005, 2010, 2019)]
    assert losses(*births, "1999,2001-06-01,,", "1999,2010-06-01,,") == 2 / 5
    assert losses("2018-01-01,2019-01-01,,", "2018-01-01,2019-02-01,,") == 2 / 2


def test_yearly_losses_end_with_the_date():
    """Losses in years after the date are not counted."""
    rows = ["2010,2016-03-01,,", "2010,2018-03-01,,", "2010,2019-03-01,,"]
    assert losses(*BIRTHS, *rows, as_of="2016-12-31") == 1 / 5


def test_an_animal_is_lost_once():
    """An animal that left and later died is lost in the year it left."""
    assert losses(*BIRTHS, "2010,2019-03-01,2013-01-01,") == 0
    assert losses(*BIRTHS, "2010,2019-03-01,2018-01-01,") == 1 / 5


def test_yearly_losses_need_records_of_them():
    """Where no loss or no date is recorded, yearly losses are unknown."""
    assert losses(*BIRTHS) is None
    assert yearly_losses(pedigree_of("id,sire,dam\na,,\n"), None) is None
