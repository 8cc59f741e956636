"""The docs say what the program does: every name that exists is in them, and no other."""

from __future__ import annotations

import os
import re
import shlex
import sqlite3
import subprocess
import sys
from contextlib import closing
from pathlib import Path

import pytest
import typer
from typer.testing import CliRunner

import pairing
from pairing.cli.app import COMMANDS, app
from pairing.dates import iso
from pairing.kinship.engine import METHODS
from pairing.plan.check import RULES
from pairing.plan.matings import CRITERIA
from pairing.policy.keys import KEYS, LISTS
from pairing.records.conditions import CONDITION_WORDS
from pairing.records.date_columns import read_date_column
from pairing.records.events import EVENT_COLUMNS, EVENT_WORDS
from pairing.records.fields import (
    CASTRATE_WORDS,
    END_CAUSES,
    FIELDS,
    MISSING_PARENT,
    ORIGIN_WORDS,
    SEX_WORDS,
    STATUS_WORDS,
    YES_NO_WORDS,
)
from pairing.records.findings import KINDS
from pairing.records.readers import READERS
from pairing.records.rules import DECISIONS
from pairing.report.audit_content import FINDING_FIELDS
from pairing.report.explain_content import explain_answer
from pairing.report.export import WRITERS
from pairing.sources import SOURCES

ROOT = Path(__file__).parents[1]
DOCS = sorted((ROOT / "docs").glob("*.md"))
PAGES = [ROOT / "README.md", ROOT / "DEVELOPERS.md", *DOCS]
OPTION = re.compile(r"(?<![\w-])--[a-z][a-z-]*")
FENCE = re.compile(r"^```(\w*)\n(.*?)^```$", re.MULTILINE | re.DOTALL)

GLOSSARY = (
    "bound",
    "candidate",
    "contribution",
    "dam",
    "decision",
    "event",
    "fact",
    "finding",
    "founder",
    "gene diversity",
    "group",
    "holder",
    "inbreeding coefficient",
    "kinship",
    "litter",
    "look-alikes",
    "mean kinship",
    "objective",
    "pedigree",
    "policy",
    "pool",
    "possible parents",
    "relationship",
    "season",
    "sire",
    "studbook, herdbook",
    "view",
)


def read(page: str | Path) -> str:
    """The text of a page, by its path from the root."""
    return (ROOT / page).read_text(encoding="utf-8")


def section(text: str, heading: str) -> str:
    """What stands under a second-level heading."""
    found = re.search(rf"^## {re.escape(heading)}\n(.*?)(?=^## |\Z)", text, re.M | re.S)
    assert found, f'no section "{heading}"'
    return found.group(1)


def sections(text: str) -> dict[str, str]:
    """Every second-level heading with what stands under it."""
    parts = re.split(r"^## (.+)\n", text, flags=re.MULTILINE)
    return dict(zip(parts[1::2], parts[2::2], strict=True))


SHARED = "Options that all commands share"


def options_of(command: str) -> set[str]:
    """The long options a command takes, as typer has them."""
    group = typer.main.get_command(app)
    return {
        name
        for parameter in group.commands[command].params
        for name in (*parameter.opts, *parameter.secondary_opts)
        if name.startswith("--")
    } | {"--help"}


def shared_options() -> set[str]:
    """The long options that every command takes."""
    return set.intersection(*map(options_of, COMMANDS))


def options_listed(text: str) -> list[str]:
    """The long options that tables list in their first column."""
    return [name for row in table_rows(text) for name in OPTION.findall(row[0])]


def marked_block(text: str, mark: str) -> str:
    """The fenced block directly below a comment such as ``<!-- command: run -->``."""
    blocks = re.findall(rf"<!-- {re.escape(mark)} -->\n```\w*\n(.*?)\n```\n", text, re.S)
    assert len(blocks) == 1, f'{len(blocks)} blocks marked "{mark}"'
    return blocks[0]


def run_python(code: str) -> subprocess.CompletedProcess[str]:
    """Run code as a reader would, from the root of the repository."""
    return subprocess.run(
        [sys.executable, "-c", code],
        cwd=ROOT,
        env={**os.environ, "PYTHONUTF8": "1"},
        capture_output=True,
        text=True,
        encoding="utf-8",
        check=False,
    )


def run_program(words: list[str], folder: Path = ROOT) -> subprocess.CompletedProcess[str]:
    """Run ``pairing`` as a reader would, into a pipe of the usual width."""
    environment = {name: value for name, value in os.environ.items() if name != "COLUMNS"}
    return subprocess.run(
        [sys.executable, "-m", "pairing", *words],
        cwd=folder,
        env=environment,
        capture_output=True,
        text=True,
        encoding="utf-8",
        check=False,
    )


def table_rows(text: str) -> list[list[str]]:
    """Cells of every table row, a bar written as ``\\|`` kept."""
    return [
        [cell.strip() for cell in re.split(r"(?<!\\)\|", line)[1:-1]]
        for line in text.splitlines()
        if line.startswith("|")
    ]


def test_shared_options_are_listed_once():
    """The section on shared options lists each option that every command takes, and no other."""
    listed = options_listed(section(read("docs/commands.md"), SHARED))
    assert sorted(listed) == sorted(shared_options())


@pytest.mark.parametrize("command", COMMANDS)
def test_every_command_has_a_section_with_its_options(command: str):
    """Each option of a command is listed in its own section or in the shared one, and no other."""
    text = section(read("docs/commands.md"), f"pairing {command}")
    assert sorted(options_listed(text)) == sorted(options_of(command) - shared_options())
    assert set(OPTION.findall(text)) <= options_of(command)


def test_command_reference_lists_every_command():
    """The table at the head of the command reference has a line for each command, and no more."""
    named = re.findall(r"^\| \[`pairing (\w+)`\]", read("docs/commands.md"), re.M)
    assert named == list(COMMANDS)


def test_no_page_names_an_option_that_does_not_exist():
    """Options of pairing in any page are options of some command."""
    known = {option for command in COMMANDS for option in options_of(command)} | {"--version"}
    foreign = {"--check", "--runs"}
    for page in PAGES:
        named = set(OPTION.findall(read(page)))
        assert named <= known | foreign, page.name


@pytest.mark.parametrize(
    ("words", "mark"),
    [
        (["propose", "--policy", "P"], "pairing propose"),
        (["check", "--policy", "P", "--sire", "T219", "--dam", "T237"], "pairing check"),
        (["audit"], "pairing audit"),
        (["describe"], "pairing describe"),
        (["animals"], "pairing animals"),
        (["kinship"], "pairing kinship"),
    ],
)
def test_every_field_of_an_answer_is_documented(words: list[str], mark: str):
    """Each field name in a command's JSON answer stands in its section or the shared one."""
    import json

    sample = ROOT / "sample_pedigrees" / "tarn-crane"
    words = [str(sample.with_suffix(".toml")) if word == "P" else word for word in words]
    records = str(sample.with_suffix(".csv"))
    result = CliRunner().invoke(app, [words[0], records, *words[1:], "--format", "json", "--quiet"])
    page = read("docs/commands.md")
    text = section(page, mark) + section(page, "Fields that every JSON answer has")
    missing = sorted(
        name for name in _field_names(json.loads(result.stdout)) if f"`{name}`" not in text
    )
    assert missing == []


def _field_names(value: object) -> set[str]:
    if isinstance(value, dict):
        return set(value).union(*(_field_names(each) for each in value.values()))
    if isinstance(value, list):
        return set().union(*(_field_names(each) for each in value))
    return set()


@pytest.mark.parametrize("table", KEYS)
def test_policy_page_has_every_key(table: str):
    """Each table of the policy has a section with every key, and whether it is acted on."""
    heading = f"`[[{table}]]`" if table in LISTS else f"`[{table}]`"
    rows = table_rows(section(read("docs/policy.md"), heading))
    documented = {row[0].strip("`"): row[-1] for row in rows if len(row) == 5 and "`" in row[0]}
    assert documented == {key: "yes" if each.used else "no" for key, each in KEYS[table].items()}


def test_policy_page_has_no_other_tables():
    """Sections of the policy page that name a table name one that exists."""
    named = re.findall(r"^## `\[+([\w.]+)\]+`", read("docs/policy.md"), re.M)
    assert named == list(KEYS)


def test_data_model_has_every_field_with_its_spellings():
    """The table of fields names each field once, in order, with every other spelling."""
    rows = table_rows(section(read("docs/data-model.md"), "Fields"))
    documented = {row[0].strip("`"): row[2] for row in rows if "`" in row[0]}
    assert list(documented) == list(FIELDS)
    for name, field in FIELDS.items():
        spellings = re.split(r", |; ", documented[name])
        assert set(field.spellings[1:]) <= set(spellings), name


def test_fields_of_a_finding_are_documented():
    """Each field of a finding, and of an explanation, stands in the section on the audit."""
    text = section(read("docs/commands.md"), "pairing audit")
    explained = explain_answer("loop", {}).fields
    missing = [name for name in (*FINDING_FIELDS, *explained) if f"`{name}`" not in text]
    assert missing == []


def test_decisions_about_records_are_documented():
    """The table of decisions names each with what it needs, and no other."""
    rows = table_rows(section(read("docs/policy.md"), "`[[records.decisions]]`"))
    documented = [row[0].strip('`"') for row in rows if row[0].startswith('`"')]
    assert documented == list(DECISIONS)
    recipe = table_rows(section(read("docs/how-to.md"), "Write down what was decided, and why"))
    assert {row[1].strip("`") for row in recipe[2:]} == set(DECISIONS)


def words_of(cell: str) -> set[str]:
    """Words that a cell of a table lists."""
    return set(re.split(r", |; ", cell))


def test_every_word_for_sex_is_documented():
    """The table of sexes has each word once, under its sex; the castrated are named below it."""
    text = section(read("docs/data-model.md"), "Sex")
    for sex, cell in (row for row in table_rows(text) if row[0] in set(SEX_WORDS.values())):
        plain = {word for word, meant in SEX_WORDS.items() if meant == sex} - CASTRATE_WORDS
        assert words_of(cell) - {"blank"} == plain, sex
    prose = text[text.rindex("|\n") :]
    assert all(re.search(rf"\b{word}\b", prose) for word in CASTRATE_WORDS)


def test_every_other_word_is_documented():
    """The table of words has each that is understood; variants may stand in brackets."""
    rows = table_rows(section(read("docs/data-model.md"), "Other words"))
    documented = {row[0].strip("`"): set(re.split(r"[,;()]\s*|\s\(also ", row[1])) for row in rows}
    known = {
        "status": set(STATUS_WORDS),
        "origin": {word.replace("-", " ") for word in ORIGIN_WORDS},
        "may_breed": set(YES_NO_WORDS),
        "end_cause": set(END_CAUSES),
    }
    for field, words in known.items():
        found = {word.removeprefix("also ").strip() for word in documented[field]} - {""}
        assert found == words, field


def test_every_word_for_an_event_is_documented():
    """The table of events has each word under what it means, and each column its spellings."""
    text = section(read("docs/data-model.md"), "Sources")
    rows = [row for row in table_rows(text) if len(row) == 3]
    events = {row[0]: words_of(row[1]) for row in rows if row[0] in set(EVENT_WORDS.values())}
    assert set(events) == set(EVENT_WORDS.values())
    for meant, words in events.items():
        assert words == {word for word, kind in EVENT_WORDS.items() if kind == meant}, meant
    columns = {row[0].strip("`"): words_of(row[2]) for row in rows if row[0].startswith("`")}
    for column, spellings in EVENT_COLUMNS.items():
        assert columns[column] - {""} == set(spellings) - {column}, column


def test_every_word_about_a_condition_is_documented():
    """The table on heritable conditions has each word under what it means."""
    rows = table_rows(section(read("docs/data-model.md"), "Heritable conditions"))
    documented = {
        (row[0].strip("`").removeprefix("NAME_"), row[1]): words_of(row[2])
        for row in rows
        if row[0].startswith("`")
    }
    assert documented == {
        (part, result): {word for word, meant in words.items() if meant == result}
        for part, words in CONDITION_WORDS.items()
        for result in dict.fromkeys(words.values())
        if result is not None
    }


def test_words_for_an_unknown_parent_are_documented():
    """The table of parents' cells has each word for a parent that is not known."""
    rows = table_rows(section(read("docs/data-model.md"), "Parents"))
    named = {word.casefold() for row in rows for word in re.findall(r"`([^`|]+)`", row[0])}
    assert MISSING_PARENT - {""} <= named


def date_cells() -> list[tuple[str, str]]:
    """Examples in the tables of dates, each with what is said of it."""
    text = section(read("docs/data-model.md"), "Dates")
    return [
        (cell, row[1])
        for row in table_rows(text)
        for cell in re.findall(r"`([^`]+)`", row[0])
        if len(row) == 2
    ]


@pytest.mark.parametrize(("cell", "said"), date_cells())
def test_forms_of_dates_are_read_as_documented(cell: str, said: str):
    """Each form of a date that the data model shows is understood in the manner it says."""
    beside = ("2018-03-05", "2018-03-06", cell)
    reading = read_date_column(beside, field="born")
    date, problem = reading.dates[2], reading.problems.get(2)
    if said == "not known":
        assert (date, problem) == (None, None)
        return
    assert date is not None
    if problem:
        assert f"`{problem[0]}`" in read("docs/data-model.md")
        assert problem[0] in said or "the other cells" in said
    if said.startswith("a day"):
        assert date.exact
    for year in re.findall(r"(?:end|beginning) of (\d{4})", said):
        assert year in (iso(date.latest)[:4], iso(date.earliest)[:4])


def test_forms_of_dates_that_are_not_read_are_named():
    """The cells that the data model says are not read are unreadable, with a hint."""
    line = re.search(r"^Not read, .*: (.*)\.$", read("docs/data-model.md"), re.MULTILINE)
    assert line
    cells = re.findall(r"`([^`]+)`", line[1])
    assert len(cells) >= 4
    problems = read_date_column(cells, field="born").problems
    assert [problems[place][0] for place in range(len(cells))] == ["unreadable-date"] * len(cells)
    assert all("(" in problems[place][1] for place in range(len(cells)))


def test_data_model_has_every_kind_of_finding():
    """The table of findings names each kind with its severity and whether it stops."""
    rows = table_rows(section(read("docs/data-model.md"), "Findings"))
    documented = {row[0].strip("`"): (row[1], row[2]) for row in rows if "`" in row[0]}
    assert documented == {
        name: (kind.severity, "yes" if kind.stops else "no") for name, kind in KINDS.items()
    }


def test_methods_lists_every_source_and_uses_it():
    """Each source is in the list at the end and is referred to above it."""
    text = read("docs/methods.md")
    above, listed = text.split("\n## Sources\n")
    for key, source in SOURCES.items():
        assert f"| `{key}` | {source} |" in listed, key
        assert f"`{key}`" in above, key
    assert set(re.findall(r"`([A-Z]+(?:_[A-Z]+)*_\d{4})`", text)) == set(SOURCES)


def test_rules_of_a_check_are_documented_by_number():
    """The limits a mating can break stand in the command reference with their numbers."""
    rows = table_rows(section(read("docs/commands.md"), "pairing check"))
    documented = {row[1].strip("`"): int(row[0]) for row in rows if row[0].isdecimal()}
    assert documented == RULES


@pytest.mark.parametrize("word", GLOSSARY)
def test_glossary_explains_the_core_words(word: str):
    """The words a keeper meets first are explained."""
    assert re.search(rf"^\*\*{word}\*\*[:,]", read("docs/glossary.md"), re.M)


def test_every_public_name_imports_and_is_documented():
    """What pairing offers can be imported, and the Python page lists it."""
    text = read("docs/python.md")
    for name in pairing.__all__:
        assert getattr(pairing, name) is not None
        assert re.search(rf"`{name}[`(]", text), name


def test_developers_page_names_every_table_to_register_in():
    """The tables by which the program is extended are named in the contributor's guide."""
    text = read("DEVELOPERS.md")
    tables = {
        "READERS": READERS,
        "METHODS": METHODS,
        "CRITERIA": CRITERIA,
        "WRITERS": WRITERS,
        "KEYS": KEYS,
        "KINDS": KINDS,
        "FIELDS": FIELDS,
        "COMMANDS": COMMANDS,
        "SOURCES": SOURCES,
    }
    for name, table in tables.items():
        assert table
        assert f"`{name}`" in text


def test_every_code_path_in_the_developers_page_exists():
    """Files of the package that the contributor's guide names are there."""
    text = read("DEVELOPERS.md")
    for path in re.findall(r"`((?:pairing|tests)/[\w/]+\.py)`", text):
        assert (ROOT / path).is_file(), path


@pytest.mark.parametrize("page", PAGES, ids=lambda page: page.name)
def test_relative_links_lead_somewhere(page: Path):
    """Each link to a file of the repository, and to a heading in it, has a target."""
    prose = FENCE.sub("", read(page))
    for target in re.findall(r"\]\((?!https?:|mailto:)([^)\s]+)\)", prose):
        path, _, anchor = target.partition("#")
        there = (page.parent / path).resolve() if path else page
        assert there.exists(), target
        if anchor:
            assert anchor in _anchors(there.read_text(encoding="utf-8")), target


def _anchors(text: str) -> set[str]:
    headings = re.findall(r"^#+ (.+)$", FENCE.sub("", text), re.M)
    return {re.sub(r"[^\w\- ]", "", each.lower()).replace(" ", "-") for each in headings}


@pytest.mark.parametrize("page", PAGES, ids=lambda page: page.name)
def test_pages_hold_no_machine_paths(page: Path):
    """No page names a folder of somebody's machine."""
    assert not re.search(r"(?<![\w.])/(work|tmp|home|Users|root)/|[A-Z]:\\", read(page))


@pytest.mark.parametrize("name", ["run", "tests"])
def test_readme_has_its_two_commands_in_one_line_each(name: str):
    """The commands that continuous integration takes out of the README are one line each."""
    command = marked_block(read("README.md"), f"command: {name}")
    assert "\n" not in command
    assert command.startswith("python3 -m venv .venv && .venv/bin/pip install --quiet ")


def test_readme_run_command_proves_its_plan_as_printed():
    """The README's command gives the three sentences that the README shows first."""
    text = read("README.md")
    command = marked_block(text, "command: run")
    words = shlex.split(command.rpartition("&&")[2])
    assert words[0] == ".venv/bin/pairing"
    result = run_program(words[1:])
    assert result.returncode == 0, result.stderr
    shown = marked_block(text, "result: run").splitlines()
    assert result.stdout.splitlines()[:3] == shown[:3]
    assert "Proved best" in result.stdout


def test_readme_python_example_runs():
    """The README's Python example runs from the root of the repository and prints every pair."""
    result = run_python(marked_block(read("README.md"), "example: python"))
    assert result.returncode == 0, result.stderr
    assert result.stdout.count(" x ") == 12
    assert "proved best" in result.stdout


@pytest.mark.parametrize("number", [0, 1])
def test_examples_of_the_python_page_run(number: int):
    """Both examples of the Python page run from the root of the repository."""
    blocks = [code for language, code in FENCE.findall(read("docs/python.md"))]
    assert len(blocks) == 2
    result = run_python(blocks[number])
    assert result.returncode == 0, result.stderr
    assert result.stdout


FILE_OR_STEP = re.compile(
    r"^<!-- file: (?P<file>\S+) -->\n```\w*\n(?P<content>.*?)^```$"
    r"|^```console\n\$ pairing (?P<command>[^\n]*)\n(?P<shown>.*?)^```$",
    re.MULTILINE | re.DOTALL,
)


def _steps(page: str) -> list[tuple[str, list[str], dict[str, str]]]:
    """Commands that a page shows, the lines printed, and the files shown before them."""
    files: dict[str, str] = {}
    steps = []
    text = read(page)
    for found in FILE_OR_STEP.finditer(text):
        if found["file"]:
            files[found["file"]] = found["content"]
        else:
            steps.append((found["command"], found["shown"].splitlines(), dict(files)))
    assert len(steps) == text.count("```console\n")
    return steps


def _folder_with(files: dict[str, str], folder: Path) -> None:
    for name, content in files.items():
        (folder / name).write_text(content, encoding="utf-8")
    with closing(sqlite3.connect(folder / "herd.db")) as database:
        database.execute("CREATE TABLE animals (id TEXT PRIMARY KEY, sire TEXT, dam TEXT, born)")
        rows = [("A1", None, None, 2015), ("A2", None, None, 2015), ("B1", "A1", "A2", 2019)]
        database.executemany("INSERT INTO animals VALUES (?, ?, ?, ?)", rows)
        database.execute("CREATE TABLE weights (id TEXT, grams REAL)")
        database.commit()


@pytest.mark.parametrize(
    ("command", "shown", "files"), [*_steps("docs/tutorial.md"), *_steps("docs/how-to.md")]
)
def test_pages_show_what_is_printed(
    command: str, shown: list[str], files: dict[str, str], tmp_path: Path
):
    """Each line that tutorial and recipes show is printed by its command, in that order."""
    _folder_with(files, tmp_path)
    words = [
        str(ROOT / word) if word.startswith("sample_pedigrees") else word
        for word in shlex.split(command)
    ]
    result = run_program(words, tmp_path)
    assert "Traceback" not in result.stderr
    printed = iter((result.stdout + result.stderr).splitlines())
    for line in shown:
        if line != "...":
            assert line in printed, f"{line}\n--\n{result.stdout}{result.stderr}"


def test_policies_in_the_docs_can_be_read():
    """Each piece of policy that the docs show is a policy that the program accepts."""
    import tomllib

    from pairing.policy.reading import policy_from_tables

    pieces = [
        code for page in DOCS for language, code in FENCE.findall(read(page)) if language == "toml"
    ]
    assert pieces
    for piece in pieces:
        policy_from_tables(tomllib.loads(piece))


def test_change_notes_have_this_version():
    """The change notes have a section for the version of the program."""
    assert any(pairing.__version__ in heading for heading in sections(read("docs/changes.md")))


def test_hooks_and_continuous_integration_are_there():
    """The continuous integration can be started, and takes its commands from the README."""
    run = ROOT / ".ci" / "run"
    text = run.read_text(encoding="utf-8")
    assert "set -euo pipefail" in text
    assert "<!-- command: " in text
    if os.name == "posix":
        assert os.access(run, os.X_OK)
    hooks = (ROOT / ".pre-commit-config.yaml").read_text(encoding="utf-8")
    for entry in ("ruff check", "ruff format --check", "mypy", "lint-imports"):
        assert f"entry: {entry}\n" in hooks
        assert entry in text
