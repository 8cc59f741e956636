"""The commands end to end, through the installed program, as a keeper types them."""

from __future__ import annotations

import csv
import functools
import io
import json
import math
import os
import random
import re
import shutil
import stat
import subprocess
import sys
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from fractions import Fraction
from pathlib import Path

import pytest

import pairing
from pairing.cli.app import COMMANDS

SAMPLES = Path(__file__).parent.parent / "sample_pedigrees"
CRANES, PIPEFISH, VOLES, SHEEP = (
    "tarn-crane",
    "lantern-bay-pipefish",
    "colony-k-voles",
    "fellmoor-sheep",
)
SMALL_SAMPLES = (CRANES, PIPEFISH, VOLES)
WITH_SHEEP = (*SMALL_SAMPLES, pytest.param(SHEEP, marks=pytest.mark.slow))
MATINGS = {
    CRANES: ("--sire", "T251", "--dam", "T285"),
    PIPEFISH: ("--sire", "P181", "--dam", "P150"),
    VOLES: ("--sire", "K1115", "--dam", "K1310"),
    SHEEP: ("--sire", "F22-00261", "--dam", "F19-00001"),
}
ANSWERING = ("propose", "check", "audit", "describe", "animals", "kinship")
ESCAPE = "\x1b"

QUESTIONS = {
    "propose": "who should breed with whom next season, and how many young?",
    "check": "may this mating go ahead, and where would its inbreeding come from?",
    "audit": "can these records be trusted?",
    "describe": "how is the population doing?",
    "animals": "how valuable is each animal to the gene pool?",
    "kinship": "how related is everybody?",
    "start": "a commented policy",
}


def _program() -> list[str]:
    beside = Path(sys.executable).with_name("pairing")
    return [str(beside)] if beside.exists() else [sys.executable, "-m", "pairing"]


PROGRAM = _program()
_LEFT_OUT = ("COLUMNS", "LINES", "NO_COLOR", "FORCE_COLOR", "PYTHONIOENCODING")
ENVIRONMENT = {key: value for key, value in os.environ.items() if key not in _LEFT_OUT}


@dataclass(frozen=True)
class Result:
    """What a call gave: exit status, standard output and standard error."""

    status: int
    out: str
    err: str

    @property
    def document(self) -> dict:
        """The JSON document on standard output; NaN and infinities are refused."""
        return json.loads(self.out, parse_constant=lambda word: pytest.fail(f"{word} in JSON"))

    @property
    def table(self) -> list[list[str]]:
        """The CSV table on standard output."""
        return list(csv.reader(io.StringIO(self.out)))


def run(*words: object, stdin: bytes = b"", cwd: Path | None = None, **environment: str) -> Result:
    """Call the installed program with these words."""
    done = subprocess.run(
        [*PROGRAM, *map(str, words)],
        input=stdin,
        capture_output=True,
        check=False,
        cwd=cwd,
        env=ENVIRONMENT | environment,
        timeout=300,
    )
    return Result(done.returncode, done.stdout.decode(), done.stderr.decode())


def together(calls: list[tuple[tuple[object, ...], dict]]) -> list[Result]:
    """Several calls at once, in order, to save time."""
    with ThreadPoolExecutor(os.cpu_count() or 1) as pool:
        return list(pool.map(lambda call: run(*call[0], **call[1]), calls))


def words_for(command: str, sample: str, *options: str) -> tuple[str, ...]:
    """The words that ask a command about a sample, with the sample's policy."""
    policy = () if command == "start" else ("--policy", str(SAMPLES / f"{sample}.toml"))
    mating = MATINGS[sample] if command == "check" and "--sire" not in options else ()
    return (command, str(SAMPLES / f"{sample}.csv"), *policy, *mating, *options)


@functools.cache
def asked(command: str, sample: str, *options: str) -> Result:
    """The result of a command on a sample; each call is made once in a test run."""
    return run(*words_for(command, sample, *options))


@functools.cache
def library(sample: str):
    """Audit, policy and population of a sample through the Python interface."""
    policy = pairing.read_policy(SAMPLES / f"{sample}.toml")
    audit = pairing.audit_records(pairing.read_records(SAMPLES / f"{sample}.csv"))
    pedigree = pairing.build_pedigree(audit, litter_shares_sire=policy.litter_shares_sire)
    population = pairing.living_population(
        pairing.kinship(pedigree), as_of=policy.as_of, rule=policy.living
    )
    return audit, policy, population


def records_file(folder: Path, text: str, name: str = "herd.csv") -> Path:
    """A file of records in a folder."""
    path = folder / name
    path.write_text(text, encoding="utf-8")
    return path


FAMILY = (
    "id,name,sex,sire,dam,born\n"
    "S,Åsa 🐑,m,,,2018\nD,,f,,,2018\nE,,f,,,2018\n"
    "A,,m,S,D,2020\nB,,f,S,D,2020\nC,,f,S,E,2020\n"
)
LOOP = "id,sire,dam,sex\nA,C,,m\nB,A,,m\nC,B,,m\nD,,,f\n"

# Fields of the machine-readable answers

ABOUT = {
    "version",
    "as_of",
    "seed",
    "replicates",
    "unknown_parents",
    "living_rule",
    "records_sha256",
    "policy_sha256",
}
ANIMAL = [
    "id",
    "name",
    "sex",
    "born",
    "living",
    "holder",
    "sire",
    "dam",
    "known_ancestry",
    "inbreeding",
    "mean_kinship",
    "kinship_value",
    "genome_uniqueness",
    "genome_uniqueness_se",
    "equivalent_generations",
    "offspring",
    "living_offspring",
    "may_breed",
    "may_breed_note",
]
DESCRIBE = [
    "animals",
    "living",
    "males",
    "females",
    "sex_unknown",
    "presumed_living",
    "founders",
    "founders_represented",
    "gene_diversity",
    "mean_kinship",
    "mean_inbreeding",
    "founder_equivalents",
    "ancestor_equivalents",
    "founder_genome_equivalents",
    "founder_alleles",
    "founder_alleles_kept",
    "gene_diversity_ceiling",
    "known_ancestry",
    "equivalent_generations",
    "generation_interval",
    "effective_size",
    "founder_table",
    "trend",
]
PAIR = [
    "rank",
    "sire",
    "dam",
    "young",
    "offspring_inbreeding",
    "mean_kinship_sire",
    "mean_kinship_dam",
    "known_ancestry_sire",
    "known_ancestry_dam",
    "gene_diversity_gain",
    "same_holder",
    "move_km",
    "reasons",
    "alternatives",
]
SUMMARY = {
    "young",
    "gene_diversity_now",
    "gene_diversity_after",
    "mean_offspring_inbreeding",
    "highest_offspring_inbreeding",
    "objective",
    "best_possible",
    "gap",
    "gap_gene_diversity",
    "proved_best",
    "compared_with",
}
MATING = [
    "sire",
    "dam",
    "offspring_inbreeding",
    "highest_over_possible_parents",
    "same_as",
    "verdict",
    "breaks",
    "known_ancestry_sire",
    "known_ancestry_dam",
    "population_mean_inbreeding",
    "paths",
    "other_paths",
    "by_founder",
    "gene_diversity_gain",
    "survival_against_unrelated",
    "conditions",
    "better_for_dam",
    "better_for_sire",
]
FINDING = ["kind", "severity", "id", "row", "column", "found", "message", "remedy", "holder"]
VERDICTS = {"within_limits", "breaks_limit", "cannot_be_judged", "no_limits_set"}


def about_of(document: dict, command: str, sample: str) -> None:
    """Check what heads every machine-readable answer."""
    assert set(document["about"]) == ABOUT
    assert list(document)[:2] == ["about", "notes"]
    assert all(isinstance(note, str) for note in document["notes"])
    assert document["about"]["version"] == pairing.__version__
    audit, policy, population = library(sample)
    assert document["about"]["records_sha256"] == audit.records.sha256
    assert document["about"]["policy_sha256"] == policy.sha256
    if command != "audit":
        assert document["about"]["as_of"] == "2026-11-30"
        assert document["about"]["unknown_parents"] == "unrelated"
        assert document["about"]["living_rule"] == population.rule


@pytest.mark.parametrize("sample", SMALL_SAMPLES)
@pytest.mark.parametrize("command", ANSWERING)
def test_every_command_answers_every_small_sample(command, sample):
    """Each command answers each sample for people with status 0."""
    result = asked(command, sample)
    assert result.status == 0
    assert result.out.strip()
    assert "Traceback" not in result.out


@pytest.mark.parametrize("command", ["audit", "describe", "animals", "check"])
def test_quick_commands_answer_the_herdbook(command):
    """The herdbook of twenty thousand sheep is answered by every quick command."""
    result = asked(command, SHEEP, "--format", "json")
    assert result.status == 0
    assert set(result.document["about"]) == ABOUT


@pytest.mark.slow
def test_kinship_of_the_herdbook_is_square():
    """Kinship among the living sheep has as many rows as columns."""
    document = asked("kinship", SHEEP, "--format", "json").document
    assert len(document["ids"]) == 2598
    assert all(len(row) == 2598 for row in document["kinship"])


@pytest.mark.parametrize("sample", SMALL_SAMPLES)
@pytest.mark.parametrize("command", ANSWERING)
def test_machine_readable_answers_say_what_they_rest_on(command, sample):
    """Every JSON answer is one document with `about` and `notes` before its own fields."""
    result = asked(command, sample, "--format", "json")
    assert result.status == 0
    about_of(result.document, command, sample)


@pytest.mark.parametrize("sample", SMALL_SAMPLES)
def test_animals_has_its_fields_and_agrees_with_the_library(sample):
    """`animals` gives one entry an animal with the promised fields, as the library does."""
    document = asked("animals", sample, "--format", "json").document
    assert set(document) == {"about", "notes", "animals"}
    assert all(list(entry) == ANIMAL for entry in document["animals"])
    audit, policy, population = library(sample)
    assert len(document["animals"]) == len(audit.records)
    frame = pairing.animal_table(population, policy).astype(object)
    expected = frame.where(frame.notna(), None).to_dict("records")
    assert document["animals"] == expected


@pytest.mark.parametrize("sample", SMALL_SAMPLES)
def test_animals_as_csv_says_the_same_as_json(sample):
    """Columns, blanks, booleans and unrounded numbers of the CSV are those of the JSON."""
    table = asked("animals", sample, "--format", "csv").table
    entries = asked("animals", sample, "--format", "json").document["animals"]
    assert table[0] == ANIMAL
    assert table[1:] == [[csv_cell(entry[column]) for column in ANIMAL] for entry in entries]
    assert {row[ANIMAL.index("living")] for row in table[1:]} == {"true", "false"}


def csv_cell(value: object) -> str:
    """A JSON value as the CSV writes it: blank, true or false, shortest round-trip number."""
    if value is None:
        return ""
    if isinstance(value, bool):
        return "true" if value else "false"
    return repr(value) if isinstance(value, float) else str(value)


@pytest.mark.parametrize("sample", SMALL_SAMPLES)
def test_describe_has_its_fields_and_agrees_with_the_library(sample):
    """`describe` gives the promised fields, nested ones included, with the library's numbers."""
    document = asked("describe", sample, "--format", "json").document
    assert set(document) == {"about", "notes", *DESCRIBE}
    assert set(document["generation_interval"]) == {
        "sire_son",
        "sire_daughter",
        "dam_son",
        "dam_daughter",
        "overall",
    }
    assert set(document["effective_size"]) >= {
        "sex_ratio",
        "family_size",
        "inbreeding_rate",
        "kinship_rate",
    }
    for founder in document["founder_table"]:
        assert set(founder) == {"id", "contribution", "retention"}
    for year in document["trend"]:
        assert set(year) == {"year", "living", "gene_diversity", "mean_inbreeding"}
    _audit, _policy, population = library(sample)
    assert document["living"] == population.size
    assert document["gene_diversity"] == population.gene_diversity
    assert document["mean_kinship"] == population.population_mean_kinship
    assert document["mean_inbreeding"] == population.mean_inbreeding
    assert document["living"] == sum(document[sex] for sex in ("males", "females", "sex_unknown"))
    assert document["founder_alleles"] == 2 * document["founders_represented"]
    assert len(document["founder_table"]) == document["founders_represented"]
    assert document["gene_diversity"] == pytest.approx(1 - document["mean_kinship"], abs=1e-15)
    missing = [key for key in DESCRIBE if document[key] is None]
    assert all(any(key in note for note in document["notes"]) for key in missing)


def test_describe_as_csv_is_one_row_of_single_figures():
    """The CSV of `describe` has one row with every field that is a single figure."""
    table = asked("describe", CRANES, "--format", "csv").table
    document = asked("describe", CRANES, "--format", "json").document
    single = [key for key in DESCRIBE if not isinstance(document[key], list | dict)]
    assert table == [single, [csv_cell(document[key]) for key in single]]


@pytest.mark.parametrize("sample", WITH_SHEEP)
def test_propose_has_its_fields(sample):
    """`propose` gives the promised fields at every level."""
    result = asked("propose", sample, "--format", "json")
    assert result.status == 0
    document = result.document
    assert set(document) == {
        "about",
        "notes",
        "programme",
        "pairs",
        "not_paired",
        "animals",
        "moves",
        "summary",
    }
    assert document["pairs"]
    for rank, pair in enumerate(document["pairs"], start=1):
        assert list(pair) == PAIR
        assert pair["rank"] == rank
        assert pair["reasons"]
        for other in pair["alternatives"]:
            assert set(other) == {"sire", "dam", "offspring_inbreeding", "cost"}
    for entry in document["not_paired"]:
        assert set(entry) == {"id", "sex", "reason"}
        assert entry["reason"]
    for entry in document["animals"]:
        assert set(entry) == {
            "id",
            "holder",
            "what_to_do",
            "partner",
            "move_from",
            "move_to",
            "reason",
        }
        assert entry["what_to_do"]
    for move in document["moves"]:
        assert set(move) == {"id", "from", "to", "km", "reason"}
    assert set(document["summary"]) == SUMMARY
    assert set(document["summary"]["compared_with"]) == {
        "random_mating",
        "lowest_mean_kinship_first",
        "least_inbreeding",
    }


@pytest.mark.parametrize("sample", WITH_SHEEP)
def test_propose_counts_add_up(sample):
    """Young add up, every living animal has one thing to do, and the bound lies below the plan."""
    document = asked("propose", sample, "--format", "json").document
    _audit, policy, population = library(sample)
    assert document["programme"] == policy.name
    young = sum(pair["young"] for pair in document["pairs"])
    assert young == document["summary"]["young"] == policy.limits.young
    living = [population.pedigree.ids[place] for place in population.living.tolist()]
    told = [entry["id"] for entry in document["animals"]]
    assert len(set(told)) == len(told)
    assert set(living) <= set(told)
    paired = {pair[role] for pair in document["pairs"] for role in ("sire", "dam")}
    unpaired = {entry["id"] for entry in document["not_paired"]}
    assert not paired & unpaired
    assert paired | unpaired == set(told)
    summary = document["summary"]
    assert summary["gap"] >= 0
    assert summary["gap"] == pytest.approx(
        summary["objective"] - summary["best_possible"], abs=1e-12
    )
    inbreeding = [pair["offspring_inbreeding"] for pair in document["pairs"]]
    assert summary["highest_offspring_inbreeding"] == max(inbreeding)
    assert summary["mean_offspring_inbreeding"] == pytest.approx(
        math.fsum(pair["offspring_inbreeding"] * pair["young"] for pair in document["pairs"])
        / young,
        abs=1e-12,
    )


@pytest.mark.parametrize("sample", WITH_SHEEP)
def test_proposed_pairs_respect_the_policy(sample):
    """Every proposed pair breaks no limit by `check`, and no animal has too many litters."""
    document = asked("propose", sample, "--format", "json").document
    _audit, policy, _population = library(sample)
    pairs = {(pair["sire"], pair["dam"]): pair for pair in document["pairs"]}
    assert len(pairs) == len(document["pairs"])
    for role, most in (("sire", policy.litters_per_male), ("dam", 1)):
        used = [pair[role] for pair in document["pairs"]]
        assert all(used.count(each) <= most for each in set(used))
    chosen = list(pairs)[:12]
    options = [word for sire, _dam in chosen for word in ("--sire", sire)]
    options += [word for _sire, dam in chosen for word in ("--dam", dam)]
    matings = asked("check", sample, "--format", "json", *options).document["matings"]
    checked = {(each["sire"], each["dam"]): each for each in matings}
    for pair in chosen:
        mating = checked[pair]
        nothing_known = 0 in (mating["known_ancestry_sire"], mating["known_ancestry_dam"])
        assert mating["breaks"] == [], pair
        assert mating["verdict"] == ("cannot_be_judged" if nothing_known else "within_limits")
        fields = ["offspring_inbreeding", "known_ancestry_sire", "known_ancestry_dam"]
        if pairs[pair]["young"] == 1:
            fields.append("gene_diversity_gain")
        for field in fields:
            assert mating[field] == pytest.approx(pairs[pair][field], abs=1e-12), field


def test_standing_decisions_hold_in_the_plan():
    """Bonded cranes breed with each other only, the resting hen and the separated pair do not."""
    pairs = {
        (pair["sire"], pair["dam"])
        for pair in asked("propose", CRANES, "--format", "json").document["pairs"]
    }
    for sire, dam in (("T219", "T230"), ("T251", "T285"), ("T177", "T237")):
        assert all((s == sire) == (d == dam) for s, d in pairs)
    animals = {animal for pair in pairs for animal in pair}
    assert not animals & {"T180", "T221", "T279"}
    assert ("T330", "T312") not in pairs


@pytest.mark.parametrize("sample", SMALL_SAMPLES)
def test_propose_agrees_with_the_library(sample):
    """The pairs of the JSON and of the CSV are those of the Python interface."""
    document = asked("propose", sample, "--format", "json").document
    _audit, policy, population = library(sample)
    frame = pairing.pair_table(pairing.propose_plan(population, policy)).astype(object)
    assert frame.where(frame.notna(), None).to_dict("records") == document["pairs"]
    table = asked("propose", sample, "--format", "csv").table
    assert table[0] == PAIR
    plain = PAIR[:-2]
    assert [row[:-2] for row in table[1:]] == [
        [csv_cell(pair[column]) for column in plain] for pair in document["pairs"]
    ]


@pytest.mark.parametrize("sample", SMALL_SAMPLES)
def test_check_has_its_fields_and_agrees_with_the_library(sample):
    """`check` gives a list of matings, for a single one too, with the library's numbers."""
    document = asked("check", sample, "--format", "json").document
    assert set(document) == {"about", "notes", "matings"}
    [mating] = document["matings"]
    assert list(mating) == MATING
    assert mating["verdict"] in VERDICTS
    for path in mating["paths"]:
        assert set(path) == {
            "ancestor",
            "ancestor_inbreeding",
            "through_sire",
            "through_dam",
            "contribution",
        }
        assert path["through_sire"][0] == mating["sire"]
        assert path["through_dam"][0] == mating["dam"]
        assert path["through_sire"][-1] == path["through_dam"][-1] == path["ancestor"]
    for broken in mating["breaks"]:
        assert set(broken) == {"limit", "allowed", "found"}
    _audit, policy, population = library(sample)
    check = pairing.check_mating(population, sire=mating["sire"], dam=mating["dam"], policy=policy)
    assert mating["offspring_inbreeding"] == check.offspring_inbreeding
    assert mating["same_as"] == check.same_as
    assert mating["verdict"] == check.verdict
    assert mating["gene_diversity_gain"] == check.gene_diversity_gain
    assert mating["population_mean_inbreeding"] == population.mean_inbreeding


def test_check_as_csv_is_one_row_a_mating_without_lists():
    """The CSV of `check` has every field that is a single figure, one row a mating."""
    options = ("--sire", "T251", "--dam", "T285", "--dam", "T230")
    table = asked("check", CRANES, "--format", "csv", *options).table
    matings = asked("check", CRANES, "--format", "json", *options).document["matings"]
    assert len(table) == 3
    assert set(table[0]) == {key for key in MATING if not isinstance(matings[0][key], list)} - {
        "survival_against_unrelated"
    }
    assert table[1:] == [[csv_cell(each[column]) for column in table[0]] for each in matings]


@pytest.mark.parametrize("sample", SMALL_SAMPLES)
def test_kinship_agrees_with_the_library(sample):
    """Square, long and JSON kinship are one table, that of the Python interface."""
    document = asked("kinship", sample, "--format", "json").document
    assert set(document) == {"about", "notes", "ids", "kinship"}
    _audit, _policy, population = library(sample)
    frame = pairing.kinship_table(population)
    assert document["ids"] == list(frame.index)
    assert document["kinship"] == frame.to_numpy().tolist()
    table = asked("kinship", sample, "--format", "csv").table
    assert table[0] == ["", *document["ids"]]
    assert table[1:] == [
        [name, *map(csv_cell, row)]
        for name, row in zip(document["ids"], document["kinship"], strict=True)
    ]


def test_long_kinship_has_three_columns():
    """--long gives first, second, kinship with the numbers of the square."""
    table = asked("kinship", CRANES, "--long", "--format", "csv").table
    document = asked("kinship", CRANES, "--format", "json").document
    place = {each: number for number, each in enumerate(document["ids"])}
    assert table[0] == ["first", "second", "kinship"]
    pairs = {frozenset((first, second)) for first, second, _kinship in table[1:]}
    assert len(pairs) == len(place) * (len(place) + 1) // 2
    for first, second, kinship in table[1:]:
        assert float(kinship) == document["kinship"][place[first]][place[second]]


def test_kinship_among_named_animals(tmp_path):
    """--among takes candidates, all, or a file with one id a line, in the file's order."""
    chosen = tmp_path / "chosen.txt"
    chosen.write_text("T285\nT251\n\nT001\n", encoding="utf-8")
    among = asked("kinship", CRANES, "--format", "json", "--among", str(chosen)).document
    assert among["ids"] == ["T285", "T251", "T001"]
    everybody = asked("kinship", CRANES, "--format", "json", "--among", "all").document
    assert len(everybody["ids"]) == 364
    candidates = asked("kinship", CRANES, "--format", "json", "--among", "candidates").document
    entries = asked("animals", CRANES, "--format", "json").document["animals"]
    assert set(candidates["ids"]) == {each["id"] for each in entries if each["may_breed"]}


@pytest.mark.parametrize("sample", [CRANES, PIPEFISH, VOLES, SHEEP])
def test_samples_hold_no_faults(sample):
    """`audit` finds nothing in the samples, which hold no faults on purpose."""
    document = asked("audit", sample, "--format", "json").document
    assert set(document) == {
        "about",
        "notes",
        "rows",
        "animals",
        "decisions_applied",
        "findings",
    }
    assert document["findings"] == []
    audit, _policy, _population = library(sample)
    assert document["rows"] == document["animals"] == len(audit.records)


def test_audit_findings_as_json_and_csv(tmp_path):
    """Findings have the promised fields, the same in JSON and CSV and in the library."""
    path = records_file(tmp_path, LOOP + "E,Z,,boy\n,A,,\n")
    result, table = together(
        [
            (("audit", path, "--format", "json"), {}),
            (("audit", path, "--format", "csv"), {}),
        ]
    )
    assert result.status == table.status == 1
    findings = result.document["findings"]
    assert all(list(finding) == FINDING for finding in findings)
    assert {finding["severity"] for finding in findings} == {"error", "warning", "note"}
    audit = pairing.audit_records(pairing.read_records(path))
    assert [finding["message"] for finding in findings] == [
        finding.message for finding in audit.findings
    ]
    assert table.table[0] == FINDING
    assert sorted(table.table[1:]) == sorted(
        [csv_cell(each[key]) for key in FINDING] for each in findings
    )


def _floats(value: object) -> list[float]:
    if isinstance(value, dict):
        return [each for item in value.values() for each in _floats(item)]
    if isinstance(value, list):
        return [each for item in value for each in _floats(item)]
    return [value] if isinstance(value, float) else []


@pytest.mark.parametrize("command", [each for each in ANSWERING if each != "audit"])
def test_numbers_are_finite_and_unrounded(command):
    """Numbers in JSON are finite and written as the shortest text that reads back the same."""
    options = ("--sire", "T251", "--dam", "T230") if command == "check" else ()
    result = asked(command, CRANES, "--format", "json", *options)
    numbers = _floats(result.document)
    assert all(math.isfinite(number) for number in numbers)
    assert any(len(repr(number)) > 10 for number in numbers)
    written = re.findall(r"-?\d+\.\d+(?:e-?\d+)?", re.sub(r'"(?:[^"\\]|\\.)*"', '""', result.out))
    assert written
    assert all(repr(float(text)) == text for text in written)


# The same call gives the same answer


@pytest.mark.parametrize("output_format", ["table", "json"])
def test_the_same_call_gives_the_same_bytes(output_format):
    """No answer depends on hash seeds, the clock or the run."""
    calls = [words_for(command, CRANES, "--format", output_format) for command in ANSWERING]
    first = together([(call, {"PYTHONHASHSEED": "1"}) for call in calls])
    second = together([(call, {"PYTHONHASHSEED": "77", "TZ": "Pacific/Apia"}) for call in calls])
    for call, one, other in zip(calls, first, second, strict=True):
        assert one == other, call


def test_a_large_plan_is_the_same_every_time():
    """A plan with ties among many voles comes out the same bytes again."""
    call = words_for("propose", VOLES, "--format", "json")
    one, other = together([(call, {"PYTHONHASHSEED": seed}) for seed in ("1", "2")])
    assert one == other


@pytest.mark.parametrize("sample", SMALL_SAMPLES)
def test_shuffled_rows_give_the_same_pairs(sample, tmp_path):
    """The order of the rows changes neither pairs nor young nor ranks."""
    header, *rows = (SAMPLES / f"{sample}.csv").read_text(encoding="utf-8").splitlines()
    orders = [rows[::-1], random.Random(20261130).sample(rows, len(rows))]
    paths = [
        records_file(tmp_path, "\n".join([header, *order]) + "\n", f"order{number}.csv")
        for number, order in enumerate(orders)
    ]
    policy = SAMPLES / f"{sample}.toml"
    results = together(
        [(("propose", path, "--policy", policy, "--format", "json"), {}) for path in paths]
    )
    expected = asked("propose", sample, "--format", "json").document
    fields = ("rank", "sire", "dam", "young")
    for result in results:
        assert [[pair[key] for key in fields] for pair in result.document["pairs"]] == [
            [pair[key] for key in fields] for pair in expected["pairs"]
        ]
        assert result.document["summary"]["objective"] == pytest.approx(
            expected["summary"]["objective"], abs=1e-12
        )


# --out


def test_out_takes_its_format_from_the_ending(tmp_path):
    """--out FILE.json and FILE.csv hold what --format says on standard output, .txt the table."""
    for ending, output_format in (("json", "json"), ("csv", "csv"), ("txt", "table")):
        out = tmp_path / f"answer.{ending}"
        result = run(*words_for("describe", CRANES, "--out", str(out)))
        assert (result.status, result.out) == (0, "")
        assert f"Written: {out}" in result.err
        expected = asked("describe", CRANES, "--format", output_format).out
        assert out.read_text(encoding="utf-8") == expected
    assert sorted(each.name for each in tmp_path.iterdir()) == [
        "answer.csv",
        "answer.json",
        "answer.txt",
    ]


def test_out_writes_no_text_into_a_workbook(tmp_path):
    """--out FILE.xlsx gives a workbook, or is refused; never text under that ending."""
    out = tmp_path / "answer.xlsx"
    result = run(*words_for("animals", CRANES, "--out", str(out)))
    assert result.status in (0, 2)
    assert out.read_bytes().startswith(b"PK") if result.status == 0 else not out.exists()


def test_out_replaces_an_older_file_and_format_wins_over_the_ending(tmp_path):
    """--format decides when both are given, and the older file is replaced whole."""
    out = tmp_path / "answer.csv"
    out.write_text("old " * 10_000, encoding="utf-8")
    result = run(*words_for("describe", CRANES, "--format", "json", "--out", str(out)))
    assert result.status == 0
    assert set(json.loads(out.read_text(encoding="utf-8"))["about"]) == ABOUT


def test_out_is_left_as_it_was_when_there_is_no_answer(tmp_path):
    """A call that fails leaves an older file and its folder untouched."""
    out = tmp_path / "plan.json"
    out.write_text("old", encoding="utf-8")
    result = run(*words_for("propose", CRANES, "--young", "500", "--out", str(out)))
    assert (result.status, result.out) == (1, "")
    assert out.read_text(encoding="utf-8") == "old"
    assert [each.name for each in tmp_path.iterdir()] == ["plan.json"]


@pytest.mark.parametrize("spelling", ["same", "policy", "dots", "symlink", "hardlink"])
def test_out_refuses_an_input_of_the_call(spelling, tmp_path):
    """However an input is spelled, --out does not write over it."""
    path = records_file(tmp_path, FAMILY)
    policy = tmp_path / "rules.toml"
    policy.write_text('[programme]\nname = "Herd"\n', encoding="utf-8")
    out = {
        "same": path,
        "policy": policy,
        "dots": tmp_path / ".." / tmp_path.name / "herd.csv",
        "symlink": tmp_path / "link.csv",
        "hardlink": tmp_path / "hard.csv",
    }[spelling]
    if spelling == "symlink":
        out.symlink_to(path)
    if spelling == "hardlink":
        out.hardlink_to(path)
    before = {each.name for each in tmp_path.iterdir()}
    result = run("describe", path, "--policy", policy, "--out", out, "--quiet")
    assert (result.status, result.out) == (2, "")
    assert result.err == (
        f"{out} is an input of this call and would be written over.\n"
        "Give --out another name; records are never changed.\n"
    )
    assert path.read_text(encoding="utf-8") == FAMILY
    assert policy.read_text(encoding="utf-8") == '[programme]\nname = "Herd"\n'
    assert {each.name for each in tmp_path.iterdir()} == before


def test_out_refuses_the_list_of_animals(tmp_path):
    """The file of --among is an input of the call too."""
    chosen = records_file(tmp_path, "T285\nT251\n", "chosen.csv")
    result = run(*words_for("kinship", CRANES, "--among", str(chosen), "--out", str(chosen)))
    assert result.status == 2
    assert chosen.read_text(encoding="utf-8") == "T285\nT251\n"


def test_out_refuses_a_folder_and_a_missing_folder(tmp_path):
    """--out naming a folder, or a file in a folder that is not there, is refused with why."""
    result = run(*words_for("describe", CRANES, "--out", str(tmp_path), "--quiet"))
    assert result.status == 2
    assert result.err == f"{tmp_path} is a folder.\nGive --out the name of a file in it.\n"
    missing = tmp_path / "nowhere" / "x.csv"
    result = run(*words_for("describe", CRANES, "--out", str(missing), "--quiet"))
    assert result.status == 2
    assert result.err.startswith(f"{missing} cannot be written (")


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="needs named pipes")
def test_out_never_replaces_what_is_no_file(tmp_path):
    """A named pipe (as a device, /dev/null too) given as --out is not replaced by a file."""
    pipe = tmp_path / "pipe"
    os.mkfifo(pipe)
    reader = os.open(pipe, os.O_RDWR | os.O_NONBLOCK)
    try:
        result = run(*words_for("describe", CRANES, "--out", str(pipe)))
        assert result.status in (0, 2)
        assert stat.S_ISFIFO(pipe.stat().st_mode)
    finally:
        os.close(reader)


# What is typed first


@pytest.mark.parametrize(
    "name", ["RECORDS.csv", "tarn-crane.csv", "my herd.csv", "herd & co (2).csv", "it's.csv"]
)
def test_the_three_lines_work_as_they_are(name, tmp_path):
    """`pairing` alone, or with only a file, prints three lines that work when pasted."""
    shutil.copy(SAMPLES / "tarn-crane.csv", tmp_path / name)
    result = run(cwd=tmp_path) if name == "RECORDS.csv" else run(name, cwd=tmp_path)
    assert (result.status, result.err) == (0, "")
    lines = result.out.splitlines()
    assert [line.split()[:2] for line in lines] == [
        ["pairing", "audit"],
        ["pairing", "start"],
        ["pairing", "propose"],
    ]
    path = os.pathsep.join([str(Path(PROGRAM[0]).parent), ENVIRONMENT.get("PATH", "")])
    for line in lines:
        done = subprocess.run(
            ["sh", "-c", line],
            cwd=tmp_path,
            env=ENVIRONMENT | {"PATH": path},
            capture_output=True,
            check=False,
        )
        assert done.returncode == 0, (line, done.stderr.decode())


def test_a_file_that_is_not_there_is_not_called_a_command(tmp_path):
    """A mistyped file name given alone is told as a missing file."""
    result = run("tarn-crnae.csv", cwd=SAMPLES)
    assert (result.status, result.out) == (2, "")
    assert "tarn-crane.csv" in result.err


def test_version():
    """--version prints name and version."""
    result = run("--version")
    assert (result.status, result.out, result.err) == (0, f"pairing {pairing.__version__}\n", "")


def test_module_and_program_are_one():
    """`python -m pairing` does what `pairing` does."""
    done = subprocess.run(
        [sys.executable, "-m", "pairing", "--version"], capture_output=True, check=True
    )
    assert done.stdout.decode() == f"pairing {pairing.__version__}\n"


def test_help_lists_every_command_with_its_question():
    """`pairing --help` shows each command beside the question it answers."""
    result = run("--help")
    assert (result.status, result.err) == (0, "")
    for command in COMMANDS:
        assert re.search(rf"^\s+{command}\s+\S", result.out, re.MULTILINE)


@pytest.mark.parametrize("command", COMMANDS)
def test_help_of_a_command_starts_with_its_question(command):
    """--help of a command shows the question it answers and its options, without colour."""
    result = run(command, "--help")
    assert (result.status, result.err) == (0, "")
    assert QUESTIONS[command] in " ".join(result.out.lower().split())
    assert "RECORDS" in result.out
    for option in ("--map", "--out", "--quiet"):
        assert option in result.out
    assert ESCAPE not in result.out
    assert max(map(len, result.out.splitlines())) <= 80


@pytest.mark.parametrize(
    ("words", "hint"),
    [
        (("propos",), 'Did you mean "propose"?'),
        (("adit", "x.csv"), 'Did you mean "audit"?'),
        (("zzz",), "Known: propose, check, audit, describe, animals, kinship, start."),
        (("propose", "x.csv", "--polcy", "y"), "--policy"),
        (("--verson",), "--version"),
        (("describe", "x.csv", "--format", "jsn"), 'Did you mean "json"?'),
        (("describe", "x.csv", "--format", "pdf"), "Use table, csv, json or xlsx."),
        (("propose", "x.csv", "--by", "holer"), 'Did you mean "holder"?'),
        (("propose",), "RECORDS"),
        (("check", "x.csv", "--sire", "A"), "--dam"),
        (("describe", "x.csv", "y.csv"), "y.csv"),
    ],
)
def test_calls_that_cannot_be_used_are_told_with_the_nearest_word(words, hint, tmp_path):
    """Unknown commands, options and formats end with status 2 and the word probably meant."""
    records_file(tmp_path, FAMILY, "x.csv")
    result = run(*words, cwd=tmp_path)
    assert (result.status, result.out) == (2, "")
    assert hint in result.err
    assert "Traceback" not in result.err


# Answers that are "no"


def test_a_plan_that_cannot_be_is_told_with_the_limits_that_clash():
    """Limits that cannot all hold end with status 1, no answer, and the smallest clash."""
    result = asked("propose", CRANES, "--young", "500", "--quiet")
    assert (result.status, result.out) == (1, "")
    assert result.err.splitlines() == [
        "No plan meets the limits.",
        "These cannot all hold:",
        "  - 500 young are wanted, with 24 males and 25 females that may breed",
        "  - a male has 1 litter at most",
        "Change one of them in the policy or on the command line and try again.",
    ]


def test_parent_with_offspring_breaks_a_limit():
    """A parent with its offspring breaks a limit without any policy, and ends with status 1."""
    path = SAMPLES / "tarn-crane.csv"
    result = run("check", path, "--sire", "T177", "--dam", "T251", "--format", "json")
    assert result.status == 1
    [mating] = result.document["matings"]
    assert mating["verdict"] == "breaks_limit"
    assert [each["limit"] for each in mating["breaks"]] == ["closest_matings"]
    assert mating["breaks"][0]["found"] == "parent and offspring"


def test_full_sibs_break_a_limit_unless_allowed(tmp_path):
    """Full sibs break a limit, and keep it when the policy allows closest matings."""
    path = records_file(tmp_path, FAMILY)
    policy = tmp_path / "rules.toml"
    policy.write_text("[mating]\nallow_closest = true\n", encoding="utf-8")
    barred, allowed = together(
        [
            (("check", path, "--sire", "A", "--dam", "B", "--format", "json"), {}),
            (
                (
                    "check",
                    path,
                    "--sire",
                    "A",
                    "--dam",
                    "B",
                    "--format",
                    "json",
                    "--policy",
                    policy,
                ),
                {},
            ),
        ]
    )
    assert (barred.status, allowed.status) == (1, 0)
    assert barred.document["matings"][0]["breaks"][0]["found"] == "full sibs"
    assert allowed.document["matings"][0]["verdict"] == "no_limits_set"


def test_a_mating_is_judged_by_the_limit_of_the_call():
    """--offspring-inbreeding, as number or percentage, wins over the policy; meeting it is fine."""
    options = ("--sire", "T177", "--dam", "T237", "--format", "json")
    statuses = [
        asked("check", CRANES, *options, "--offspring-inbreeding", limit).status
        for limit in ("0.0625", "6.25%", "0.0624", "6%")
    ]
    assert statuses == [0, 0, 1, 1]


@pytest.mark.parametrize(
    ("sample", "options"),
    [
        (CRANES, ("--sire", "T251", "--sire", "T219", "--dam", "T230", "--dam", "T267")),
        (CRANES, ("--sire", "T177", "--dam", "T237", "--dam", "T309", "--dam", "T312")),
        (VOLES, ("--sire", "K1000", "--sire", "K1401", "--dam", "K1003", "--dam", "K1402")),
        (SHEEP, ("--sire", "F22-00261", "--dam", "F19-00001")),
    ],
)
def test_contributions_add_up_to_the_inbreeding_exactly(sample, options):
    """Listed loops and `other_paths` sum to the inbreeding without any rounding error."""
    matings = asked("check", sample, "--format", "json", *options).document["matings"]
    assert len(matings) == options.count("--sire") * options.count("--dam")
    for mating in matings:
        listed = sum((Fraction(path["contribution"]) for path in mating["paths"]), Fraction(0))
        total = listed + Fraction(mating["other_paths"])
        assert total == Fraction(mating["offspring_inbreeding"])
        assert mating["other_paths"] >= 0


def test_contributions_add_up_with_possible_parents():
    """With sires that are only likely, the loops sum to the mean inbreeding."""
    options = ("--sire", "P181", "--sire", "P126", "--dam", "P150", "--dam", "P188")
    matings = asked("check", PIPEFISH, "--format", "json", *options).document["matings"]
    for mating in matings:
        total = math.fsum(path["contribution"] for path in mating["paths"])
        assert total + mating["other_paths"] == pytest.approx(
            mating["offspring_inbreeding"], abs=1e-15
        )


def test_several_dams_are_each_checked_in_order():
    """Each --sire is checked with each --dam, and one broken limit makes the status 1."""
    options = ("--sire", "T219", "--dam", "T230", "--dam", "T267", "--dam", "T285")
    result = asked("check", CRANES, "--format", "json", *options)
    assert result.status == 1
    assert [
        (each["sire"], each["dam"], each["verdict"]) for each in result.document["matings"]
    ] == [
        ("T219", "T230", "within_limits"),
        ("T219", "T267", "breaks_limit"),
        ("T219", "T285", "breaks_limit"),
    ]


def test_a_mating_with_nothing_known_of_a_parent_cannot_be_judged():
    """An inbreeding of 0 that follows from unknown ancestry alone is not called within limits."""
    result = asked("check", CRANES, "--format", "json", "--sire", "T251", "--dam", "T285")
    assert result.status == 0
    [mating] = result.document["matings"]
    assert mating["known_ancestry_dam"] == 0
    assert mating["verdict"] == "cannot_be_judged"


def test_unknown_animals_of_a_mating_are_both_named():
    """A mating of animals that are not in the records names both and ends with status 2."""
    result = asked("check", CRANES, "--quiet", "--sire", "T2511", "--dam", "zzz")
    assert (result.status, result.out) == (2, "")
    assert "T2511 and zzz are not in the records." in result.err
    assert 'Did you mean "T251"?' in result.err


def test_a_loop_is_an_answer_of_audit_and_stops_the_others(tmp_path):
    """`audit` ends with status 1 on a loop; every other command with 2, naming the rows."""
    path = records_file(tmp_path, LOOP)
    calls = {
        command: (command, path, *(("--sire", "A", "--dam", "D") if command == "check" else ()))
        for command in COMMANDS
    }
    results = dict(zip(calls, together([(call, {}) for call in calls.values()]), strict=True))
    audit = results.pop("audit")
    assert audit.status == 1
    assert "A is a parent of B is a parent of C is a parent of A" in " ".join(audit.out.split())
    for command, result in results.items():
        assert (result.status, result.out) == (2, ""), command
        lines = result.err.splitlines()
        assert "herd.csv: 1 fault leaves kinship undefined." in lines
        assert (
            "herd.csv, line 2: A is a parent of B is a parent of C is a parent of A: an animal "
            "cannot be its own ancestor. One of these parents is wrong; correct it or leave it "
            "blank."
        ) in lines


def test_other_faults_do_not_change_the_status(tmp_path):
    """Doubts that leave kinship defined are told on standard error and the answer is given."""
    path = records_file(tmp_path, "id,sire,dam,sex\nA,,,f\nB,A,,boy\n,,A,\nC,,B,m\n")
    audit, describe = together([(("audit", path), {}), (("describe", path), {})])
    assert (audit.status, describe.status) == (0, 0)
    assert "doubts about the records" in describe.err


# Streams


def test_standard_input_is_read_as_a_file_is():
    """`-` reads CSV from standard input and answers as for the file."""
    content = (SAMPLES / "tarn-crane.csv").read_bytes()
    policy = SAMPLES / "tarn-crane.toml"
    calls: list[tuple[tuple[object, ...], dict]] = []
    for command in ANSWERING:
        mating = MATINGS[CRANES] if command == "check" else ()
        call = (command, "-", "--policy", policy, "--format", "json", *mating)
        calls.append((call, {"stdin": content}))
    for command, result in zip(ANSWERING, together(calls), strict=True):
        assert result.status == 0
        assert result.out == asked(command, CRANES, "--format", "json").out


@pytest.mark.parametrize("command", [*ANSWERING, "start"])
def test_standard_output_has_nothing_but_the_answer(command):
    """How the records were read is told on standard error, and not at all with --quiet."""
    options = () if command == "start" else ("--format", "json")
    loud, quiet = asked(command, CRANES, *options), asked(command, CRANES, *options, "--quiet")
    assert loud.out == quiet.out
    assert "tarn-crane.csv: comma-separated text, UTF-8; columns id" in loud.err
    assert quiet.err == ""
    if options:
        assert loud.document


@pytest.mark.parametrize("environment", [{}, {"NO_COLOR": "1"}, {"TERM": "xterm-256color"}])
def test_a_pipe_gets_no_escape_codes(environment):
    """Output that is piped carries no colour, with and without NO_COLOR."""
    calls = [(words_for(command, CRANES), environment) for command in ANSWERING]
    for result in together(calls):
        assert ESCAPE not in result.out
        assert ESCAPE not in result.err


def test_a_file_gets_no_escape_codes_even_where_colour_is_forced(tmp_path):
    """An environment that forces colour on terminals puts no codes into files or JSON."""
    out = tmp_path / "answer.txt"
    result = run(*words_for("describe", CRANES, "--out", str(out)), FORCE_COLOR="1")
    assert result.status == 0
    assert ESCAPE not in out.read_text(encoding="utf-8")


def test_control_characters_of_the_records_do_not_reach_the_screen(tmp_path):
    """Escape codes and bells within cells are not passed on to a terminal or text file."""
    text = "id,name,sire,dam,sex\nA,\x1b[31mred\x1b[0m,,,m\n\x1b[2JB,b\x07,,,f\n"
    path = records_file(tmp_path, text)
    for command in ("animals", "propose", "kinship"):
        result = run(command, path)
        assert not {ESCAPE, "\x07"} & set(result.out + result.err), command


def _on_terminal(*words: str, **environment: str) -> str:
    """What a call shows on a terminal of 100 columns."""
    import pty

    parent, child = pty.openpty()
    process = subprocess.Popen(
        [*PROGRAM, *words],
        stdin=child,
        stdout=child,
        stderr=child,
        env=ENVIRONMENT | {"TERM": "xterm-256color", "COLUMNS": "100"} | environment,
    )
    os.close(child)
    shown = b""
    try:
        while chunk := os.read(parent, 65536):
            shown += chunk
    except OSError:
        pass
    os.close(parent)
    assert process.wait(timeout=60) == 0
    return shown.decode()


@pytest.mark.skipif(sys.platform == "win32", reason="needs a pseudo-terminal")
def test_no_color_is_honoured_on_a_terminal():
    """A terminal gets colour, and with NO_COLOR none."""
    words = words_for("describe", CRANES, "--quiet")
    colour = re.compile(r"\x1b\[[0-9;]*(?<![0-9])(?:3[0-8]|4[0-8]|9[0-7])(?:;[0-9]+)*m")
    assert colour.search(_on_terminal(*words))
    assert not colour.search(_on_terminal(*words, NO_COLOR="1"))


WIDE = (
    "id,name,sex,sire,dam,born,holder\n"
    + "".join(
        f"Animal-of-the-long-name-{n},{'Very long call name ' * 3}{n},{'mf'[n % 2]},"
        f"{f'Animal-of-the-long-name-{n - 2}' if n > 3 else ''},"
        f"{f'Animal-of-the-long-name-{n - 1}' if n > 3 and n % 2 == 0 else ''},"
        f"{2000 + n},The Royal Society for Very Long Holder Names {n}\n"
        for n in range(12)
    )
    + "Animal-of-the-long-name-1,x,boy,nobody-of-this-name,,soon,\n"
)


@pytest.mark.parametrize("width", [80, 140])
def test_no_line_is_wider_than_the_screen(width, tmp_path):
    """At 80 columns and at 140 no line of any answer is wider, in any sample."""
    wide = records_file(tmp_path, WIDE)
    calls: list[tuple[object, ...]] = [
        words_for(command, sample, "--quiet")
        for sample in (SMALL_SAMPLES if width == 80 else (CRANES,))
        for command in ANSWERING
    ]
    calls += [
        words_for("check", CRANES, "--sire", "T251", "--dam", "T230", "--dam", "T285"),
        words_for("propose", CRANES, "--by", "animal"),
        words_for("propose", CRANES, "--by", "holder"),
        ("audit", wide),
        ("animals", wide),
        ("describe", wide),
    ]
    too_wide = []
    for call, result in zip(
        calls, together([(call, {"COLUMNS": str(width)}) for call in calls]), strict=True
    ):
        assert result.status in (0, 1), call
        assert result.out
        too_wide += [(call[:2], line) for line in result.out.splitlines() if len(line) > width]
    assert too_wide == []


@pytest.mark.parametrize(
    "environment",
    [
        {"LC_ALL": "C", "LANG": "C"},
        {"PYTHONIOENCODING": "ascii"},
        {"PYTHONIOENCODING": "latin-1", "LC_ALL": "C"},
        {"LC_ALL": "C", "PYTHONCOERCECLOCALE": "0", "PYTHONUTF8": "0"},
    ],
)
def test_output_is_utf_8_whatever_the_locale(environment, tmp_path):
    """Names with any letters come out as UTF-8 in every format, whatever the locale says."""
    path = records_file(tmp_path, FAMILY)
    results = together(
        [
            (("animals", path, "--format", output_format), environment)
            for output_format in ("table", "csv", "json")
        ]
    )
    for result in results:
        assert result.status == 0
        assert "Åsa" in result.out
        assert "🐑" in result.out


def test_names_in_wide_letters_are_kept_whole(tmp_path):
    """A short name in letters two columns wide is not broken while there is room."""
    path = records_file(tmp_path, FAMILY.replace("Åsa 🐑", "はな こ"))
    assert "S はな こ" in run("animals", path).out


@pytest.mark.skipif(not Path("/dev/full").is_char_device(), reason="needs /dev/full")
def test_a_full_disk_is_told_without_a_traceback():
    """Standard output that cannot be written ends with a message and a status that is not 0."""
    with Path("/dev/full").open("wb") as full:
        done = subprocess.run(
            [*PROGRAM, *words_for("animals", VOLES, "--format", "csv", "--quiet")],
            stdout=full,
            stderr=subprocess.PIPE,
            check=False,
            env=ENVIRONMENT,
        )
    message = done.stderr.decode()
    assert done.returncode == 2
    assert message.strip()
    assert "Traceback" not in message


@pytest.mark.skipif(sys.platform == "win32", reason="needs POSIX pipes")
def test_a_reader_that_stops_early_is_no_fault():
    """Piping a long answer into `head` prints no traceback."""
    reader, writer = os.pipe()
    os.close(reader)
    done = subprocess.run(
        [*PROGRAM, *words_for("animals", VOLES, "--format", "csv", "--quiet")],
        stdout=writer,
        stderr=subprocess.PIPE,
        check=False,
        env=ENVIRONMENT,
    )
    os.close(writer)
    assert "Traceback" not in done.stderr.decode()
    assert "Exception ignored" not in done.stderr.decode()


# Whatever is typed, no traceback


@dataclass(frozen=True)
class Nasty:
    """A call that should fail well: records, policy and options, and the status expected.

    `status` is that of `propose`; other commands may manage with less.
    """

    records: bytes | None
    status: int | None = None
    policy: bytes | None = None
    options: tuple[str, ...] = ()
    name: str = "herd.csv"


_PLAIN = FAMILY.encode()
NASTY = {
    "empty": Nasty(b"", 2),
    "header only": Nasty(b"id,sire,dam\n", 2),
    "NUL bytes": Nasty(b"id,sire,dam\nA,\0,\n", 2),
    "random bytes": Nasty(random.Random(1).randbytes(5000), 2),
    "broken workbook": Nasty(b"PK\x03\x04" + random.Random(2).randbytes(500), 2),
    "old workbook": Nasty(b"\xd0\xcf\x11\xe0" + random.Random(3).randbytes(500), 2),
    "folder": Nasty(None, 2),
    "missing file": Nasty(_PLAIN, 2, name="nowhere.csv"),
    "missing column": Nasty(b"id,sire\nA,\n", 2),
    "duplicate header": Nasty(b"id,id,sire,dam\nA,B,,\n", 2),
    "blank header": Nasty(b",,,\nA,B,,\n", 2),
    "loop": Nasty(LOOP.encode(), 2),
    "ids with blanks": Nasty(b"id,sire,dam,sex\n A  1 ,,,m\nB 2,,,f\nC 3,A 1,B 2,f\n", 0),
    "huge cell": Nasty(b"id,sire,dam,x\nA,,," + b"x" * 1_500_000 + b"\n", 2),
    "only comments": Nasty(b"# one\n# two\n", 2),
    "ragged rows": Nasty(b"id,sire,dam\nA\nB,A,,x,y\n,,\nC\n", 2),
    "emoji ids": Nasty("id,sire,dam,sex\n🐑,,,♂\n🐐,,,♀\nA,🐑,🐐,m\n".encode(), 0),
    "ids equal to tokens": Nasty(
        b"id,sire,dam,sex\n0,,,m\n?,,,f\nNA,0,?,f\nwild,,,m\nunknown,wild,NA,f\n"
    ),
    "sire is dam": Nasty(b"id,sire,dam,sex\nA,,,h\nB,A,A,m\nC,,,f\n"),
    "very long ids": Nasty(
        b"id,sire,dam,sex\n" + b"A" * 5000 + b",,,m\n" + b"B" * 5000 + b",,,f\n", 0
    ),
    "control characters": Nasty(b"id,sire,dam,sex\n\x1b[31mA,,,m\nB\x07,,,f\n"),
    "markup ids": Nasty(b"id,sire,dam,sex\n[red]A[/],,,m\n[/],,,f\n{B},{x!r},,m\n"),
    "rows without an id": Nasty(b"id,sire,dam\n,A,B\n"),
    "one animal": Nasty(b"id,sire,dam\nA,,\n", 1),
    "nobody living": Nasty(b"id,sire,dam,sex,status\nA,,,m,dead\nB,,,f,dead\n", 1),
    "dates out of range": Nasty(
        b"id,sire,dam,sex,born,died\nA,,,m,0001-01-01,9999-12-31\nB,,,f,9999,\nC,,,f,../0001,\n"
        b"D,,,m,0000,0000-00-00\n"
    ),
    "clones of each other": Nasty(b"id,sire,dam,sex,clone_of\nA,,,f,B\nB,,,f,A\nC,,,m,C\n"),
    "policy with wrong types": Nasty(
        _PLAIN,
        2,
        policy=b'limits = 3\npairs = "x"\nanimals = [1]\n[breeding_age]\nmale = "x"\n'
        b"[programme]\nname = 7\nas_of = 2026\nseason_start = 07:32:00\n[weights]\nmerit = nan\n"
        b"[[lines]]\nname = 1\nmay_cross = 3\n",
    ),
    "policy not TOML": Nasty(_PLAIN, 2, policy=b"offspring inbreeding: 0.1\n"),
    "policy not text": Nasty(_PLAIN, 2, policy=bytes(range(256))),
    "policy a folder": Nasty(_PLAIN, 2, options=("--policy", ".")),
    "policy missing": Nasty(_PLAIN, 2, options=("--policy", "nowhere.toml")),
    "policy with an unknown key": Nasty(_PLAIN, 2, policy=b"[limits]\nyuong = 3\n"),
    "decisions on unknown animals": Nasty(
        _PLAIN,
        2,
        policy=b'[[pairs]]\nsire = "Q"\ndam = "R"\ndecision = "never"\n'
        b'[[animals]]\nid = "X"\ndecision = "rest"\n[[gametes]]\nid = "Y"\ndoses = 1\n',
    ),
    "must-breed of a dead animal": Nasty(
        b"id,sire,dam,sex,status\nA,,,m,dead\nB,,,f,\nC,,,m,\n",
        policy=b'[[animals]]\nid = "A"\ndecision = "must-breed"\n'
        b'[[gametes]]\nid = "B"\ndoses = 0\n',
    ),
    "as-of nonsense": Nasty(_PLAIN, 2, options=("--as-of", "next Tuesday")),
    "as-of before everything": Nasty(_PLAIN, options=("--as-of", "1700")),
    "as-of the last year": Nasty(_PLAIN, options=("--as-of", "9999-12-31")),
    "negative young": Nasty(_PLAIN, 2, options=("--young", "-3")),
    "no young": Nasty(_PLAIN, options=("--young", "0")),
    "offspring-inbreeding 7": Nasty(_PLAIN, 2, options=("--offspring-inbreeding", "7")),
    "offspring-inbreeding nan": Nasty(_PLAIN, 2, options=("--offspring-inbreeding", "nan")),
    "huge young": Nasty(_PLAIN, 2, options=("--young", "1" + "0" * 30)),
    "blank map": Nasty(_PLAIN, 2, options=("--map", "")),
    "map without a column": Nasty(_PLAIN, 2, options=("--map", "=id")),
    "huge seed": Nasty(_PLAIN, options=("--seed", "-" + "9" * 30)),
}


TAKING = {
    "--policy": ("propose", "check", "audit", "describe"),
    "--as-of": ("propose", "check", "animals", "start"),
    "--young": ("propose", "describe"),
    "--offspring-inbreeding": ("propose", "check"),
    "--map": ("propose", "audit", "start"),
    "--seed": ("propose", "kinship"),
}
"""Some commands that an option is tried with."""


@pytest.mark.parametrize("case", NASTY)
def test_no_input_gives_a_traceback(case, tmp_path):
    """Whatever the input, each command ends with status 0, 1 or 2, and says why it failed."""
    nasty = NASTY[case]
    path = tmp_path / nasty.name
    if nasty.records is None:
        path.mkdir()
    elif nasty.name == "herd.csv":
        path.write_bytes(nasty.records)
    options = nasty.options
    if nasty.policy is not None:
        (tmp_path / "rules.toml").write_bytes(nasty.policy)
        options = (*options, "--policy", "rules.toml")
    commands = TAKING[options[-2]] if options else tuple(COMMANDS)
    calls: list[tuple[tuple[object, ...], dict]] = []
    for command in commands:
        mating = ("--sire", "A", "--dam", "B") if command == "check" else ()
        calls.append(((command, nasty.name, *mating, *options), {"cwd": tmp_path}))
    results = dict(zip(commands, together(calls), strict=True))
    for command, result in results.items():
        assert "Traceback" not in result.err + result.out, (command, result.err[-600:])
        assert result.status in (0, 1, 2), command
        if result.status == 2 or (result.status == 1 and not result.out):
            assert result.err.strip(), command
            assert result.out == "", command
        if result.status == 0:
            assert result.out, command
    if nasty.status is not None:
        assert results["propose"].status == nasty.status, results["propose"].err


@pytest.mark.skipif(sys.platform != "linux", reason="needs file names of any bytes")
def test_a_file_name_that_is_no_text_gives_no_traceback(tmp_path):
    """A file whose name is not UTF-8 is read, and answers about it are written."""
    name = os.fsdecode(b"herd\xff.csv")
    (tmp_path / name).write_text(FAMILY, encoding="utf-8")
    results = together(
        [
            (("describe", name), {"cwd": tmp_path}),
            (("describe", name, "--out", "answer.txt"), {"cwd": tmp_path}),
            (("start", name, "--out", "rules.toml"), {"cwd": tmp_path}),
        ]
    )
    for result in results:
        assert "Traceback" not in result.err
        assert result.status == 0


def test_every_problem_of_a_policy_is_named_at_once(tmp_path):
    """All unknown keys and unusable values of a policy come in one message, with near names."""
    path = records_file(tmp_path, FAMILY)
    policy = tmp_path / "rules.toml"
    policy.write_text(
        '[programe]\nname = "x"\n[limits]\nyuong = 3\nyoung_per_litter = 0\n'
        'offspring_inbreeding = 7\n[mating]\nsystem = "rotation"\n',
        encoding="utf-8",
    )
    result = run("propose", path, "--policy", policy)
    assert (result.status, result.out) == (2, "")
    for part in (
        "rules.toml: the policy cannot be used as it is.",
        '"programe" is not known. Did you mean "programme"?',
        '[limits]: "yuong" is not known. Did you mean "young"?',
        "[limits] young_per_litter: found 0, expected a whole number from 1 to 1000000.",
        "[limits] offspring_inbreeding: found 7, expected a share from 0 to 1 such as 0.0625, or "
        '"6.25%".',
        '[mating] system: found "rotation"',
    ):
        assert part in result.err


# start


@pytest.mark.parametrize("sample", WITH_SHEEP)
def test_start_writes_a_policy_that_propose_accepts(sample, tmp_path):
    """The policy that `start` writes is read by `propose`, which makes a plan with it."""
    rules = tmp_path / "rules.toml"
    records = SAMPLES / f"{sample}.csv"
    started = run("start", records, "--out", rules)
    assert (started.status, started.out) == (0, "")
    assert f"pairing propose {records} --policy {rules}" in started.err
    assert run("start", records, "--quiet").out == rules.read_text(encoding="utf-8")
    result = run("propose", records, "--policy", rules, "--format", "json", "--quiet")
    assert result.status == 0, result.err
    assert result.err == ""
    assert result.document["pairs"]
    assert result.document["about"]["policy_sha256"]


def test_start_names_every_choice_in_comments():
    """The policy to start from explains itself beside every value."""
    text = asked("start", CRANES).out
    assert text.startswith("# Rules of the programme, written from tarn-crane.csv.")
    for table in ("programme", "records", "breeding_age", "mating", "limits", "weights"):
        assert f"[{table}]" in text


def test_start_survives_names_that_need_quoting(tmp_path):
    """Holders and ids with quotation marks and backslashes give a policy that reads."""
    out = io.StringIO()
    writer = csv.writer(out)
    writer.writerow(("id", "sire", "dam", "sex", "holder", "line", "we\\ird_test"))
    for number, name in enumerate(('a "quoted" one', "back\\slash", "two\nlines", "# hash")):
        for sex in "mf":
            writer.writerow((f'{sex}"{number}\\', "", "", sex, name, name, "free"))
    path = records_file(tmp_path, out.getvalue())
    rules = tmp_path / "rules.toml"
    assert run("start", path, "--out", rules).status == 0
    result = run("propose", path, "--policy", rules, "--format", "json")
    assert result.status == 0, result.err


def test_start_keeps_rules_that_were_edited(tmp_path):
    """Rules that stand where `start` writes are kept beside the new ones, however often."""
    rules = tmp_path / "rules.toml"
    for number in ("", "1"):
        rules.write_text("# edited by hand\n", encoding="utf-8")
        assert run("start", str(SAMPLES / "tarn-crane.csv"), "--out", str(rules)).status == 0
        kept = tmp_path / f"rules.toml.before{number}"
        assert kept.read_text(encoding="utf-8") == "# edited by hand\n"
