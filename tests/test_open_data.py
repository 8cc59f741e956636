"""Inbreeding in real pedigrees, against values published with them.

The data are public research and registry files that lie beside the repository, never in
it; without them these tests are skipped.
"""

from __future__ import annotations

import csv
import gzip
from functools import lru_cache
from pathlib import Path

import numpy as np
import pytest

from pairing.founders import founder_statistics
from pairing.kinship.engine import Kinship
from pairing.kinship.engine import kinship as compute_kinship
from pairing.pedigree.descent import build_pedigree
from pairing.population.completeness import equivalent_generations, known_ancestry
from pairing.records.audit import Audit, audit_records
from pairing.records.readers import read_records

DATA = Path(__file__).parents[2] / "shared" / "data"
COLUMNS = {
    "song-sparrow/Sparrows.csv": ("father=sire", "mother=dam"),
    "snow-vole/Pedigree.txt": ("ID_Individual=id",),
    "langhill-dairy/PedigreeRecoded.csv": (
        "animalRecoded=id",
        "sireRecoded=sire",
        "damRecoded=dam",
    ),
}


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
