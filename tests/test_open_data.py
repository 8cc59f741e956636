"""Real pedigrees, read without a word of code: their quirks, and inbreeding as published.

The data are public research and registry files that lie beside the repository, never in
it; without them these tests are skipped.
"""

from __future__ import annotations

import csv
import datetime
import gzip
from collections import Counter
from functools import lru_cache
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
import pytest

from pairing.errors import RecordsError
from pairing.founders import founder_statistics
from pairing.kinship.engine import Kinship
from pairing.kinship.engine import kinship as compute_kinship
from pairing.pedigree.descent import build_pedigree
from pairing.population.completeness import equivalent_generations, known_ancestry
from pairing.records.audit import Audit, audit_records
from pairing.records.readers import read_records
from pairing.records.rules import Decision, RecordRules
from tests.test_commands import Result, run, together

if TYPE_CHECKING:
    from pairing.records.findings import Finding

DATA = Path(__file__).parents[2] / "shared" / "data"
COLUMNS = {
    "song-sparrow/Sparrows.csv": ("father=sire", "mother=dam"),
    "snow-vole/Pedigree.txt": ("ID_Individual=id",),
    "langhill-dairy/PedigreeRecoded.csv": (
        "animalRecoded=id",
        "sireRecoded=sire",
        "damRecoded=dam",
    ),
    "guppy-selection/pedigree.csv": ("animal~^([MF])=sex",),
    "shark-bay-dolphin/life_history.csv": (
        "Dolphin.ID=id",
        "Mother.ID=dam",
        "Father.ID=sire",
        "Birth.Date.Earliest/Birth.Date/Birth.Date.Latest=born",
    ),
}
"""What a keeper says of the columns, as on the command line."""
VOLES = "snow-vole/Pedigree.txt"
CAPTURES = "snow-vole/ForFluctuatingSelectionRaw.txt"
COLLIES = "border-collie/OFA_Border_Collie.csv"


def data_file(name: str) -> Path:
    """A file of the open data; skips the test when it is absent."""
    path = DATA / name
    if not path.exists():
        pytest.skip(f"open data {name} is absent")
    return path


@lru_cache(maxsize=2)
def audited(name: str) -> Audit:
    """The audit of a file of the open data."""
    return audit_records(read_records(data_file(name), column_map=COLUMNS.get(name, ())))


def kinship_in(name: str, method: str) -> Kinship:
    """Kinship of a file of the open data."""
    return compute_kinship(build_pedigree(audited(name)), method=method)


def by_id(kinship: Kinship) -> dict[str, float]:
    """Inbreeding of every animal by id."""
    return dict(zip(kinship.pedigree.ids, kinship.inbreeding.tolist(), strict=True))


def own_check(name: str) -> dict[str, float]:
    """Inbreeding by independent code that reproduces all published values of these data."""
    with gzip.open(data_file(name), "rt", encoding="utf-8", newline="") as file:
        return {row["id"]: float(row["F"]) for row in csv.DictReader(file)}


def largest_difference(found: dict[str, float], expected: dict[str, float]) -> float:
    """The largest difference over the animals of `expected`, all of which must be found."""
    return max(abs(found[each] - value) for each, value in expected.items())


def counted(audit: Audit) -> Counter[str]:
    """How many findings of each kind an audit has."""
    return Counter(finding.kind for finding in audit.findings)


def of_kind(audit: Audit, kind: str) -> list[Finding]:
    """All findings of one kind."""
    return [finding for finding in audit.findings if finding.kind == kind]


def call(command: str, name: str, *options: str) -> Result:
    """A command of the installed program on a file of the open data, its columns settled."""
    words = [word for entry in COLUMNS.get(name, ()) for word in ("--map", entry)]
    return run(command, data_file(name), *words, *options)


def inbreeding_told(result: Result) -> dict[str, float]:
    """Inbreeding by id from `pairing animals --format csv`."""
    assert result.status == 0, result.err
    header, *rows = result.table
    return {row[0]: float(row[header.index("inbreeding")]) for row in rows}


def without_row(found: Counter[str]) -> int:
    """How many parents have no row of their own, whether or not another may be meant."""
    return found["parent-without-row"] + found["parent-perhaps-another"]


def kinds(audit: Audit) -> set[str]:
    """The kinds of findings of an audit."""
    return {finding.kind for finding in audit.findings}


@pytest.mark.parametrize("method", ["tabular", "indirect"])
def test_inbreeding_of_every_song_sparrow(method):
    """F of each of the 6,095 sparrows of Mandarte Island equals the published one.

    Published in the data of Ponzi, Keller & Muff 2019, Methods in Ecology and Evolution.
    """
    path = data_file("song-sparrow/Sparrows.csv")
    with path.open(encoding="utf-8", newline="") as file:
        published = {row["id"]: float(row["f.corr"]) for row in csv.DictReader(file)}
    found = by_id(kinship_in("song-sparrow/Sparrows.csv", method))
    assert len(published) == 6095
    assert set(found) == set(published)
    assert largest_difference(found, published) < 1e-9


def test_population_figures_of_song_sparrows():
    """Depth, founders and mean kinship of the sparrows agree with an independent calculation."""
    kinship = kinship_in("song-sparrow/Sparrows.csv", "indirect")
    pedigree = kinship.pedigree
    young = np.flatnonzero((pedigree.sire >= 0) & (pedigree.dam >= 0))
    depth = equivalent_generations(pedigree)
    founders = founder_statistics(pedigree, young)
    weights = np.zeros(len(pedigree))
    weights[young] = 1 / len(young)
    assert len(young) == 5918
    assert kinship.inbreeding.mean() == pytest.approx(0.0521515550, abs=5e-11)
    assert depth.mean() == pytest.approx(5.3002, abs=5e-5)
    assert depth.max() == pytest.approx(12.2016, abs=5e-5)
    assert pedigree.generation.max() == 27
    assert len(founders.places) == 134
    assert founders.founders == 177
    assert founders.founder_equivalents == pytest.approx(45.597, abs=5e-4)
    assert weights @ kinship.mean_with(weights) == pytest.approx(0.034161, abs=5e-7)
    assert (known_ancestry(pedigree) == 1).all()


def test_inbreeding_of_snow_voles():
    """F of each of the 931 voles with a published one equals it; the dam's column comes first.

    Published in the capture records of the Churwalden voles, Bonnet & Postma.
    """
    captures = data_file("snow-vole/ForFluctuatingSelectionRaw.txt")
    with captures.open(encoding="utf-8", newline="") as file:
        published = {
            row["ID_Individual"]: float(row["Inbreeding"])
            for row in csv.DictReader(file, delimiter="\t")
            if row["Inbreeding"] not in ("", "NA")
        }
    found = by_id(kinship_in("snow-vole/Pedigree.txt", "indirect"))
    assert len(found) == 1202
    assert len(published) == 931
    assert largest_difference(found, published) < 1e-9


@pytest.mark.parametrize("method", ["tabular", "indirect"])
def test_inbreeding_of_a_mouse_intercross_line(method):
    """All 721 mice of the second cross have F = 1/4 exactly, and the line has two founders.

    By theory, for data of the LG/J x SM/J intercross line (Carbonetto); all others agree with
    an independent calculation.
    """
    kinship = kinship_in("mouse-intercross-line/ped.csv", method)
    pedigree = kinship.pedigree
    generation = dict(
        zip(
            audited("mouse-intercross-line/ped.csv").records.column("id"),
            audited("mouse-intercross-line/ped.csv").records.carried["generation"],
            strict=True,
        )
    )
    second_cross = [each for each in pedigree.ids if generation[each] == "F2"]
    places = pedigree.place(*second_cross)
    assert len(pedigree) == 6124
    assert len(second_cross) == 721
    assert (kinship.inbreeding[places] == 1 / 4).all()
    last = pedigree.place(*(each for each in pedigree.ids if generation[each] == "F34"))
    assert founder_statistics(pedigree, np.array(last)).founder_equivalents == pytest.approx(2)
    expected = own_check("mouse-intercross-line/own-check-F.csv.gz")
    assert largest_difference(by_id(kinship), expected) < 1e-9


def test_selfing_file_of_the_mouse_line():
    """The file that makes inbred founders by selfing is read with a warning; F = 127/128."""
    audit = audited("mouse-intercross-line/inbred.ped.csv")
    assert {"sire-is-dam", "both-sexes"} <= kinds(audit)
    assert not audit.stopping
    for finding in audit.findings:
        assert finding.severity != "error"
    kinship = kinship_in("mouse-intercross-line/inbred.ped.csv", "indirect")
    assert by_id(kinship)["-9999"] == by_id(kinship)["-9998"] == 1 - 1 / 2**7
    assert kinship.between("-9999", "-9998") == 0


def test_mouse_line_from_inbred_founders():
    """Put before the line, the selfing file gives F = 0.498046875 to the 721 of the second cross.

    By theory; all others agree with an independent calculation.
    """
    lines = []
    for name in ("inbred.ped.csv", "ped.csv"):
        text = data_file(f"mouse-intercross-line/{name}").read_text(encoding="utf-8")
        rows = [line for line in text.splitlines() if line and not line.startswith("#")]
        lines += (
            rows
            if not lines
            else [line for line in rows[1:] if line.split(",")[0] not in ("-9999", "-9998")]
        )
    content = "\n".join(lines).encode()
    kinship = compute_kinship(build_pedigree(audit_records(read_records("-", stdin=content))))
    found = by_id(kinship)
    second_cross = [row[0] for row in csv.reader(lines) if row[1] == "F2"]
    assert kinship.method == "indirect"
    assert len(second_cross) == 721
    assert {found[each] for each in second_cross} == {0.498046875}
    expected = own_check("mouse-intercross-line/own-check-F-inbred-founders.csv.gz")
    assert largest_difference(found, expected) < 1e-9


def test_inbreeding_of_dairy_cattle():
    """F of all Langhill cattle agrees with an independent calculation, rows in any order."""
    kinship = kinship_in("langhill-dairy/PedigreeRecoded.csv", "indirect")
    expected = own_check("langhill-dairy/own-check-F.csv.gz")
    absent = [animal for animal in kinship.pedigree.animals if animal is None]
    assert len(expected) == 10_883
    assert len(absent) == 120
    assert kinship.pedigree.generation.max() == 27
    assert largest_difference(by_id(kinship), expected) < 1e-9


@pytest.mark.slow
def test_inbreeding_of_great_tits():
    """F of all 99,239 great tits of Wytham Woods agrees with an independent calculation."""
    kinship = kinship_in("wytham-great-tit/GTIT_pedigree_full.csv", "indirect")
    expected = own_check("wytham-great-tit/own-check-F.csv.gz")
    assert len(expected) == len(kinship.pedigree) == 99_239
    assert largest_difference(by_id(kinship), expected) < 1e-9
    young = np.flatnonzero((kinship.pedigree.sire >= 0) | (kinship.pedigree.dam >= 0))
    weights = np.zeros(99_239)
    weights[young] = 1 / len(young)
    assert len(young) == 88_633
    assert weights @ kinship.mean_with(weights) == pytest.approx(0.000212, abs=5e-7)
    assert equivalent_generations(kinship.pedigree).mean() == pytest.approx(1.6591, abs=5e-5)


# Voles: facts of the animals in a second table with many rows an animal


def captured() -> Audit:
    """The voles with the facts of their captures."""
    return audit_records(
        read_records(
            data_file(VOLES),
            column_map=("ID_Individual=id", "Cohort=born", "Date=last_seen"),
            facts=data_file(CAPTURES),
        )
    )


def test_snow_voles_with_the_facts_of_their_captures():
    """Sex, cohort and last capture of 1,126 voles come from 3,847 rows of another table.

    Counts by an independent reading of both tables, see their SOURCE.md.
    """
    audit = captured()
    sexes = Counter(audit.animals.sex(place) for place in range(len(audit.animals)))
    assert sexes == {"male": 571, "female": 555, "unknown": 76}
    born = [audit.animals.born(place) for place in range(len(audit.animals))]
    years = [date.year for date in born if date is not None]
    assert (len(years), min(years), max(years)) == (1126, 2004, 2016)
    latest: dict[str, datetime.date] = {}
    with data_file(CAPTURES).open(encoding="utf-8", newline="") as file:
        for row in csv.DictReader(file, delimiter="\t"):
            day, month, year = map(int, row["Date"].split("/"))
            seen = datetime.date(year, month, day)
            latest[row["ID_Individual"]] = max(seen, latest.get(row["ID_Individual"], seen))
    assert len(latest) == 1126
    for place, name in enumerate(audit.records.column("id")):
        date = audit.animals.date("last_seen", place)
        told = None if date is None else datetime.date.fromordinal(date.latest)
        assert told == latest.get(name)
    assert "last_seen day-first" in audit.reading
    assert not {"facts-disagree", "fact-without-animal", "parent-younger"} & kinds(audit)


def test_published_inbreeding_is_carried_along_from_the_second_table():
    """F as published stands beside each of the 931 voles and equals ours to 1e-9."""
    audit = captured()
    published = {
        name: float(cell)
        for name, cell in zip(
            audit.records.column("id"), audit.records.carried["Inbreeding"], strict=True
        )
        if cell not in ("", "NA")
    }
    found = by_id(compute_kinship(build_pedigree(audit)))
    assert len(published) == 931
    assert sum(published.values()) / 931 == pytest.approx(0.0090162869, abs=5e-11)
    assert largest_difference(found, published) < 1e-9


def test_voles_through_the_program():
    """One call with --facts gives the F of every vole that has a published one."""
    options = ("--facts", str(data_file(CAPTURES)), "--map", "Cohort=born")
    told = inbreeding_told(call("animals", VOLES, *options, "--format", "csv"))
    audit = captured()
    found = by_id(compute_kinship(build_pedigree(audit)))
    assert largest_difference(told, found) == 0
    summary = call("audit", VOLES, *options)
    assert summary.status == 0
    assert "facts from ForFluctuatingSelectionRaw.txt" in summary.err
    assert "Cohort = born" in summary.err


# Mice: comments, negative ids, selfing


def test_selfing_is_no_doubt_where_the_policy_allows_it():
    """Selfing is reported fourteen times, as notes once the policy says `selfing = true`."""
    name = "mouse-intercross-line/inbred.ped.csv"
    strict, lenient = (
        audit_records(read_records(data_file(name)), RecordRules(selfing=selfing))
        for selfing in (False, True)
    )
    assert [each.severity for each in of_kind(strict, "sire-is-dam")] == ["warning"] * 14
    assert [each.severity for each in of_kind(lenient, "sire-is-dam")] == ["note"] * 14
    found = [by_id(compute_kinship(build_pedigree(each))) for each in (strict, lenient)]
    assert found[0] == found[1]
    assert found[0]["-9999"] == 0.9921875


def test_mouse_line_through_the_program(tmp_path):
    """Comments and negative ids need no option; a policy makes selfing legal."""
    policy = tmp_path / "selfing.toml"
    policy.write_text("[records]\nselfing = true\n")
    told = inbreeding_told(call("animals", "mouse-intercross-line/ped.csv", "--format", "csv"))
    expected = own_check("mouse-intercross-line/own-check-F.csv.gz")
    assert largest_difference(told, expected) < 1e-9
    assert {"-9999", "-9998", "-9997", "-9996"} <= set(told)
    inbred = "mouse-intercross-line/inbred.ped.csv"
    severities = [
        Counter(each["severity"] for each in result.document["findings"] if each["kind"] == kind)
        for result in (
            call("audit", inbred, "--format", "json"),
            call("audit", inbred, "--policy", str(policy), "--format", "json"),
        )
        for kind in ("sire-is-dam",)
    ]
    assert severities == [{"warning": 14}, {"note": 14}]


# Guppies: sex inside the id


def test_guppies_with_their_sex_inside_the_id():
    """`--map 'animal~^([MF])=sex'` tells the sex of all 3,949; no parent is of the wrong one."""
    audit = audited("guppy-selection/pedigree.csv")
    sexes = Counter(audit.animals.sex(place) for place in range(len(audit.animals)))
    assert sexes == {"male": 3230, "female": 719}
    assert not {"both-sexes", "sex-against-role", "parent-without-row", "loop"} & kinds(audit)
    kinship = kinship_in("guppy-selection/pedigree.csv", "indirect")
    inbreeding = kinship.inbreeding
    assert len(inbreeding) == 3949
    assert inbreeding.mean() == pytest.approx(0.003514, abs=5e-7)
    assert inbreeding.max() == 0.25
    assert (inbreeding > 0).sum() == 206
    assert (inbreeding >= 0.25).sum() == 11
    assert audit.records.carried["notes"] != ("",) * 3949


def test_guppy_ids_in_another_case_are_said_to_look_alike():
    """Ids that differ in case only are two animals and a warning, until a decision merges them."""
    text = data_file("guppy-selection/pedigree.csv").read_text(encoding="utf-8")
    lines = text.splitlines()
    row = next(line for line in lines[1:] if line.split(",")[1].startswith("M1-"))
    sire = row.split(",")[1]
    spoilt = "\n".join([*lines, row.replace(row.split(",")[0], "M9-1").replace(sire, sire.lower())])
    records = read_records("-", stdin=spoilt.encode())
    before = audit_records(records)
    alike = [
        each for each in before.findings if sire in each.message and sire.lower() in each.message
    ]
    assert [each.severity for each in alike] == ["warning"]
    merge = Decision("merge", sire, also=(sire.lower(),))
    after = audit_records(records, RecordRules(decisions=(merge,)))
    assert after.decisions_applied == 1
    assert after.animals[len(after.animals) - 1].sire == ((sire, 1.0),)


def test_guppies_through_the_program():
    """The call that the how-to shows tells the sexes in the answer."""
    result = call("describe", "guppy-selection/pedigree.csv", "--format", "json")
    assert result.status == 0
    assert result.document["animals"] == 3949
    assert "animal~^([MF]) = sex" in result.err


# Dolphins: dates with bounds


def test_dolphins_with_bounds_of_their_births():
    """Birth lies between the bounds; where one is blank the estimate stands in for it."""
    name = "shark-bay-dolphin/life_history.csv"
    audit = audited(name)
    with data_file(name).open(encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))
    bounded = 0
    for place, row in enumerate(rows):
        date = audit.animals.born(place)
        first = row["Birth.Date.Earliest"] or row["Birth.Date"]
        last = row["Birth.Date.Latest"] or row["Birth.Date"]
        assert audit.animals.names[place] == row["Dolphin.ID"]
        if not first:
            assert date is None
            continue
        assert date is not None
        days = (datetime.date.fromisoformat(each).toordinal() for each in (first, last))
        assert (date.earliest, date.latest) == tuple(days)
        bounded += not date.exact
    assert len(rows) == 1965
    assert bounded > 1000
    assert audit.records.carried["Birth.Date"][0] == "2003-11-01"


def test_figures_of_dolphins():
    """Sexes, parents and inbreeding of the dolphins agree with an independent calculation."""
    audit = audited("shark-bay-dolphin/life_history.csv")
    sexes = Counter(audit.animals.sex(place) for place in range(len(audit.animals)))
    assert sexes == {"unknown": 820, "female": 605, "male": 540}
    assert not audit.stopping
    assert len(of_kind(audit, "death-before-birth")) == 2
    kinship = kinship_in("shark-bay-dolphin/life_history.csv", "indirect")
    inbreeding, pedigree = kinship.inbreeding, kinship.pedigree
    assert ((pedigree.sire >= 0) & (pedigree.dam >= 0)).sum() == 168
    assert ((pedigree.sire < 0) & (pedigree.dam >= 0)).sum() == 950
    assert inbreeding.mean() == pytest.approx(0.000127, abs=5e-7)
    assert inbreeding.max() == 0.125
    assert (inbreeding > 0).sum() == 2


def test_dolphins_through_the_program():
    """Without a word about the columns the program says which it lacks; with it, it answers."""
    name = "shark-bay-dolphin/life_history.csv"
    bare = run("audit", data_file(name))
    assert bare.status == 2
    assert 'No column for id, sire and dam among "Dolphin.ID", "Sex"' in bare.err
    assert call("describe", name, "--as-of", "2024-12-31", "--format", "json").status == 0
    wrong = run("audit", data_file(name), "--map", "Birth.Date.Earliest/Birth.Date.Lates=born")
    assert wrong.status == 2
    assert 'there is no column "Birth.Date.Lates". Did you mean "Birth.Date.Latest"?' in wrong.err


# Border Collies: the messiest registry


def quirks() -> dict[str, int]:
    """Faults of the registry counted on the raw rows, in no way that the package counts."""
    with data_file(COLLIES).open(encoding="utf-8", newline="") as file:
        rows = [{key: cell.strip() for key, cell in row.items()} for row in csv.DictReader(file)]
    first: dict[str, dict[str, str]] = {}
    alike = Counter[bool]()
    for row in rows:
        earlier = first.setdefault(row["Registration"], row)
        if earlier is not row:
            alike[all(row[role] == earlier[role] for role in ("Sire", "Dam"))] += 1
    own = [
        row
        for row in rows
        if row["Registration"] and row["Registration"] in (row["Sire"], row["Dam"])
    ]
    twice = [
        row for row in rows if row["Sire"] and row["Sire"] == row["Dam"] != row["Registration"]
    ]
    used = list(first.values())
    named = {row[role] for row in used for role in ("Sire", "Dam")} - {""}
    return {
        "rows": len(rows),
        "blank": sum(row["Registration"] == "" for row in rows),
        "identical": alike[True],
        "conflicting": alike[False],
        "own parents": len(own),
        "sire is dam": len(twice),
        "female sires": len(
            {r["Sire"] for r in rows if first.get(r["Sire"], {"Sex": ""})["Sex"] == "F"} - {""}
        ),
        "male dams": len(
            {r["Dam"] for r in rows if first.get(r["Dam"], {"Sex": ""})["Sex"] == "M"} - {""}
        ),
        "without row": len(named - set(first)),
    }


def collie_decisions(audit: Audit) -> tuple[Decision, ...]:
    """The decisions that SOURCE.md documents, made from the findings alone.

    The first row of an id wins, an animal is not its own parent, and where sire and dam are
    one both are dropped.
    """
    decisions = []
    for each in audit.findings:
        role = (each.column or "").lower()
        name = str(each.id)
        if each.kind == "duplicate-id" and each.severity == "error":
            first = audit.animals.line(audit.animals.names.find(name))
            decisions.append(Decision("use-row", name, row=first, why="first record wins"))
        elif each.kind == "own-parent":
            decisions.append(Decision("drop-link", name, parent=role, why="not its own parent"))
        elif each.kind == "sire-is-dam":
            decisions += [Decision("drop-link", name, parent=each) for each in ("sire", "dam")]
    return tuple(decisions)


def test_quirks_of_border_collies_counted_by_hand():
    """The raw rows have the faults that SOURCE.md names, each as often as it says."""
    assert quirks() == {
        "rows": 17_589,
        "blank": 65,
        "identical": 56,
        "conflicting": 10,
        "own parents": 11,
        "sire is dam": 7,
        "female sires": 10,
        "male dams": 5,
        "without row": 11_986,
    }


def test_every_quirk_of_border_collies_is_found():
    """Each fault of the registry is a finding, as often as it occurs.

    Of the 66 repeated ids 64 are blank: a row without an id is reported as that. With the two
    rows of one id in conflict, their four parents count only once a decision chooses one row.
    """
    audit = audited(COLLIES)
    found = counted(audit)
    assert len(audit.records) == 17_589
    assert len(audit.animals) == 17_522
    assert found["missing-id"] == 65
    assert [each.severity for each in of_kind(audit, "duplicate-id")] == ["error", "note"]
    assert found["own-parent"] == 11
    assert found["sire-is-dam"] == 7
    animals = audit.animals
    sires, dams = animals.roles
    own = {each.id for each in of_kind(audit, "own-parent")}
    told = own | {
        each.found if each.kind == "sex-against-role" else each.id
        for kind in ("both-sexes", "sex-against-role")
        for each in of_kind(audit, kind)
    }
    told |= {each.id for each in of_kind(audit, "sex-against-role")}
    for role, flags, wrong, count in (("sire", sires, "female", 10), ("dam", dams, "male", 5)):
        parents = getattr(animals, role)
        flags = flags.copy()
        itself = np.flatnonzero(parents == np.arange(len(animals)))
        flags[itself] = True
        names = {
            animals.names[place]
            for place in np.flatnonzero(flags[: len(animals)]).tolist()
            if animals.sex(place) == wrong
        }
        assert len(names) == count
        assert names <= told
    assert without_row(found) == 11_984
    assert not {"unreadable-date", "ambiguous-date", "two-digit-year"} & kinds(audit)


def test_border_collies_after_the_documented_decisions():
    """Once decided as documented, F of all dogs is that of an independent calculation."""
    records = audited(COLLIES).records
    decisions = collie_decisions(audited(COLLIES))
    chosen = tuple(each for each in decisions if each.decision == "use-row")
    assert Counter(each.decision for each in decisions) == {"drop-link": 25, "use-row": 1}
    one_row = audit_records(records, RecordRules(decisions=chosen))
    assert (
        sum(
            each.kind in ("parent-without-row", "parent-perhaps-another")
            for each in one_row.findings
        )
        == 11_986
    )
    audit = audit_records(records, RecordRules(decisions=decisions))
    assert audit.decisions_applied == 26
    assert not audit.stopping
    found = counted(audit)
    assert without_row(found) == 11_982
    assert found["both-sexes"] == 10
    assert audit.animals.dates["born"].known.all()
    kinship = compute_kinship(build_pedigree(audit))
    pedigree = kinship.pedigree
    listed = np.array([animal is not None for animal in pedigree.animals])
    assert listed.sum() == 17_522
    assert kinship.inbreeding[listed].mean() == pytest.approx(0.002873, abs=5e-7)
    assert (kinship.inbreeding > 0).sum() == 1043
    assert (kinship.inbreeding >= 0.25).sum() == 34
    assert kinship.inbreeding.max() == 0.296875
    assert pedigree.generation.max() == 11
    depth = equivalent_generations(pedigree)[listed]
    assert depth.mean() == pytest.approx(1.4539, abs=5e-5)
    assert depth.max() == 5.9375
    assert records is audit.records


@pytest.mark.slow
def test_border_collies_through_the_program(tmp_path):
    """A table of decisions lets the registry be used; before, the faults are named."""
    table = tmp_path / "decisions.csv"
    with table.open("w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file)
        writer.writerow(["decision", "id", "row", "parent", "why"])
        for each in collie_decisions(audited(COLLIES)):
            writer.writerow([each.decision, each.id, each.row or "", each.parent, each.why])
    view = tmp_path / "view.csv"
    path = data_file(COLLIES)
    before, after, told = together(
        [
            (("animals", path), {}),
            (("audit", path, "--decisions", table, "--view", view, "--format", "json"), {}),
            (("animals", path, "--decisions", table, "--format", "csv"), {}),
        ]
    )
    assert before.status == 2
    assert before.err.count("is recorded as its own") == 11
    assert after.status == 0
    assert after.document["decisions_applied"] == 26
    found = inbreeding_told(told)
    assert sum(value > 0 for value in found.values()) == 1043
    assert max(found.values()) == 0.296875
    again = by_id(compute_kinship(build_pedigree(audit_records(read_records(view)))))
    assert {name: again[name] for name in found} == found


def test_dog_registered_twice_can_be_merged():
    """A dog under two registrations in one id is one animal with either once merged."""
    records = audited(COLLIES).records
    double = [name for name in records.column("id") if "/" in name]
    parents = {*records.column("sire"), *records.column("dam")} - set(records.column("id"))
    both = [(name, part) for name in double for part in name.split("/") if part in parents]
    assert both
    decisions = collie_decisions(audited(COLLIES)) + tuple(
        Decision("merge", name, also=(part,)) for name, part in both[:3]
    )
    audit = audit_records(records, RecordRules(decisions=decisions))
    pedigree = build_pedigree(audit)
    for name, part in both[:3]:
        assert pedigree.place(part) == pedigree.place(name)
    assert len(pedigree) == 17_522 + 11_982 - len(both[:3])


# The rest


def test_dairy_cattle_through_the_program():
    """NULL is no animal; 120 parents without a row are counted."""
    result = call("audit", "langhill-dairy/PedigreeRecoded.csv", "--format", "json")
    assert result.status == 0
    found = Counter(each["kind"] for each in result.document["findings"])
    assert found["parent-without-row"] == 120
    assert "NULL" not in {each["found"] for each in result.document["findings"]}
    told = inbreeding_told(call("animals", "langhill-dairy/PedigreeRecoded.csv", "--format", "csv"))
    assert largest_difference(told, own_check("langhill-dairy/own-check-F.csv.gz")) < 1e-9


def test_table_without_a_sire_is_refused_with_what_it_lacks():
    """Mole-rat pups have a dam's number and no sire: the missing column is named, status 2."""
    name = "mole-rat/Survival_Dataset.csv"
    with pytest.raises(RecordsError, match=r"the columns cannot be told apart") as caught:
        read_records(data_file(name))
    assert 'No column for sire among "LitterRef", "AnimalID", "Colony"' in str(caught.value)
    result = run("describe", data_file(name))
    assert (result.status, result.out) == (2, "")
    assert "Traceback" not in result.err
    assert "--map" in result.err


def test_sparrows_through_the_program():
    """Of three parentages in one table --map chooses; F is the published one of each bird."""
    path = data_file("song-sparrow/Sparrows.csv")
    with path.open(encoding="utf-8", newline="") as file:
        published = {row["id"]: float(row["f.corr"]) for row in csv.DictReader(file)}
    told = inbreeding_told(
        run("animals", path, "--map", "father=sire", "--map", "mother=dam", "--format", "csv")
    )
    assert largest_difference(told, published) < 1e-9
    social = run(
        "describe",
        path,
        *("--map", "social.father=sire", "--map", "social.mother=dam", "--map", "father="),
        *("--map", "mother=", "--format", "json"),
    )
    assert social.status == 0
    assert social.document["mean_inbreeding"] is not None


@pytest.mark.slow
def test_great_tits_through_the_program():
    """Rings of letters and of digits, the dam's column first: no option is needed."""
    name = "wytham-great-tit/GTIT_pedigree_full.csv"
    audit = call("audit", name, "--format", "json")
    assert audit.status == 0
    assert audit.document["animals"] == 99_239
    told = inbreeding_told(call("animals", name, "--format", "csv"))
    assert largest_difference(told, own_check("wytham-great-tit/own-check-F.csv.gz")) < 1e-9
