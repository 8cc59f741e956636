"""What `audit` says on its page, in its files, and when asked to explain a kind."""

from __future__ import annotations

import csv
import io
import json
import re
import tomllib
from dataclasses import replace
from typing import TYPE_CHECKING

import pytest
from python_calamine import CalamineWorkbook

from pairing.errors import OptionError
from pairing.policy.reading import policy_from_tables
from pairing.records.audit import Audit, audit_records
from pairing.records.events import with_events
from pairing.records.explanations import EXPLANATIONS, FACTS, RECORDS, Explanation
from pairing.records.findings import KINDS, SEVERITIES, Finding
from pairing.records.readers import read_records, read_table
from pairing.report.audit_content import FINDING_FIELDS, audit_answer
from pairing.report.explain_content import explain_answer
from pairing.report.export import csv_text, to_json, to_text, to_workbook

if TYPE_CHECKING:
    from collections.abc import Iterable
    from pathlib import Path

    from pairing.report.content import Answer

RULES_OF_AN_EXAMPLE = {
    "parent-too-young": {"parent_age": {"female": [2, 20]}},
    "parent-too-old": {"parent_age": {"female": [2, 20]}},
    "litter-too-large": {"records": {"largest_litter": 2}},
    "litters-too-close": {"records": {"gestation": "60 days"}},
    "decision-without-effect": {
        "records": {"decisions": [{"decision": "drop-link", "id": "B9", "parent": "sire"}]}
    },
}
"""What the policy must say for a kind to be looked for."""
RECORDS_BESIDE = {
    "facts-disagree": "id,sire,dam,born\nA1,,,2019",
    "fact-without-animal": "id,sire,dam\nA1,,",
    "event-unreadable": "id,sire,dam\nA1,,",
    "events-disagree": "id,sire,dam\nA1,,",
}
"""The records beside an example that is a second table."""


def audit_of(text: str) -> Audit:
    """The audit of records given as CSV."""
    return audit_records(read_records("-", stdin=text.encode()))


def clean_records(animals: int, names: bool = True) -> str:
    """CSV of so many animals with nothing doubtful about them."""
    rows = [f"A{number},{'Name' + str(number) if names else ''},," for number in range(animals)]
    return "\n".join(["id,name,sire,dam", *rows])


def findings(kind: str, number: int, holders: tuple[str | None, ...] = (None,)) -> list[Finding]:
    """So many findings of a kind, on rows counted backwards, the holders by turns."""
    return [
        Finding(
            kind,
            f"A{row - 2} is doubtful.",
            f"Mend A{row - 2}.",
            id=f"A{row - 2}",
            row=row,
            holder=holders[row % len(holders)],
        )
        for row in range(number + 1, 1, -1)
    ]


def audit_with(*found: Iterable[Finding], animals: int = 50, **more: object) -> Audit:
    """An audit of sound records with these findings."""
    every = tuple(finding for each in found for finding in each)
    return replace(audit_of(clean_records(animals)), findings=every, **more)


def page(answer: Answer, monkeypatch: pytest.MonkeyPatch, columns: int = 140) -> list[str]:
    """The lines that people read at this width."""
    monkeypatch.setenv("COLUMNS", str(columns))
    lines = to_text(answer).splitlines()
    assert all(len(line) <= columns for line in lines)
    return lines


def sheets_of(answer: Answer) -> dict[str, list[list[object]]]:
    """Every sheet of the answer's workbook."""
    workbook = CalamineWorkbook.from_filelike(io.BytesIO(to_workbook(answer)))
    return {name: workbook.get_sheet_by_name(name).to_python() for name in workbook.sheet_names}


MANY = (
    *findings("own-parent", 300),
    *findings("missing-id", 200),
    *findings("both-sexes", 900),
    *findings("unreadable-date", 800),
    *findings("parent-without-row", 4_000),
)


# The page


@pytest.mark.parametrize(
    ("found", "first"),
    [
        ((), "These records can be used: nothing doubtful was found."),
        (
            findings("parent-without-row", 2),
            "These records can be used; there is nothing to decide, only notes.",
        ),
        (
            findings("both-sexes", 1),
            "These records can be used; read the doubts below first.",
        ),
        (
            findings("loop", 1),
            "These records cannot be used yet: 1 fault leaves kinship undefined.",
        ),
        (
            findings("loop", 3),
            "These records cannot be used yet: 3 faults leave kinship undefined.",
        ),
    ],
)
def test_the_answer_comes_first(found, first, monkeypatch: pytest.MonkeyPatch):
    """The first line tells whether the records can be trusted."""
    assert page(audit_answer(audit_with(found), {}), monkeypatch)[0] == first


@pytest.mark.parametrize(("columns", "most"), [(80, 100), (140, 70)])
def test_thousands_of_findings_are_a_page(columns, most, monkeypatch: pytest.MonkeyPatch):
    """However many findings there are, people get about a page, and are told of the rest."""
    lines = page(audit_answer(audit_with(MANY), {}), monkeypatch, columns)
    assert len(lines) <= most
    text = " ".join(" ".join(lines).split())
    assert "of 6,200 findings are shown. --out findings.xlsx (or .csv) writes all" in text
    assert len(page(audit_answer(audit_with(MANY * 3), {}), monkeypatch, columns)) == len(lines)


def test_every_kind_is_a_line_of_the_summary_gravest_first(monkeypatch: pytest.MonkeyPatch):
    """The summary counts every finding, by kind and severity, those that stop at its head."""
    mild = [replace(each, milder="note") for each in findings("own-parent", 2)]
    answer = audit_answer(audit_with(MANY, mild), {})
    (table,) = answer.sections[0].tables
    assert [row[:3] for row in table.rows] == [
        ("error, stops", "300", "own-parent"),
        ("error", "200", "missing-id"),
        ("warning", "900", "both-sexes"),
        ("warning", "800", "unreadable-date"),
        ("note", "4,000", "parent-without-row"),
        ("note", "2", "own-parent"),
    ]
    assert all(row[3] == EXPLANATIONS[row[2]].to_do for row in table.rows)
    titles = [section.title for section in answer.sections[1:5]]
    assert titles == [
        "own-parent: 300 errors, the first 20",
        "missing-id: 200 errors, the first 4",
        "both-sexes: 900 warnings, the first 3",
        "unreadable-date: 800 warnings, the first 3",
    ]
    assert sum("parent-without-row" in line for line in page(answer, monkeypatch)) == 1


def test_forty_findings_are_all_shown(monkeypatch: pytest.MonkeyPatch):
    """Forty faults are a page with every one of them, and forty-one are not."""
    forty = (findings("own-parent", 10), findings("both-sexes", 25), findings("asked-about", 5))
    lines = page(audit_answer(audit_with(*forty), {}), monkeypatch)
    assert sum("is doubtful." in line for line in lines) == 40
    assert len(lines) <= 70
    assert "The rest" not in lines
    more = page(audit_answer(audit_with(*forty, findings("loop", 1)), {}), monkeypatch)
    assert sum("is doubtful." in line for line in more) < 40
    assert "The rest" in more


def test_every_kind_at_once_still_fits(monkeypatch: pytest.MonkeyPatch):
    """Many kinds with many findings each leave room for the summary of all."""
    every = [findings(kind, 100) for kind in KINDS]
    lines = page(audit_answer(audit_with(*every), {}), monkeypatch)
    assert len(lines) <= 75 + len(KINDS)
    assert all(any(kind in line for line in lines) for kind in KINDS)


def test_notes_alone_show_a_few(monkeypatch: pytest.MonkeyPatch):
    """Where there are only notes, a few of each kind are shown."""
    lines = page(audit_answer(audit_with(findings("parent-without-row", 500)), {}), monkeypatch)
    assert sum("is doubtful." in line for line in lines) == 3


def test_rows_names_and_remedies_stand_on_the_page(monkeypatch: pytest.MonkeyPatch):
    """A finding is shown with its line, the animal's name behind its id, and what to do."""
    text = "id,name,sire,dam\nA1,Alda,,\nB1,Brin,B1,A1\nB2,,B2,A1\n"
    lines = page(audit_answer(audit_of(text), {}), monkeypatch)
    assert (
        "  line 3 B1 Brin is recorded as its own sire. Correct the sire of B1, or leave it blank "
        "if it is not known." in lines
    )
    assert any(line.startswith("  line 4 B2 is recorded as its own sire.") for line in lines)


def test_a_name_is_never_put_behind_a_part_of_another_word(monkeypatch: pytest.MonkeyPatch):
    """The name follows the whole id only, not digits of a line or of another id."""
    found = Finding("both-sexes", "sire of B12 (line 12): 1 is it.", "Mend.", id="1", row=2)
    audit = replace(audit_of("id,name,sire,dam\n1,Alda,,\n"), findings=(found,))
    lines = page(audit_answer(audit, {}), monkeypatch)
    assert "  line 2 sire of B12 (line 12): 1 Alda is it." in lines


def test_a_finding_of_a_column_has_no_line(monkeypatch: pytest.MonkeyPatch):
    """Doubts about whole columns are shown without an empty place for the line."""
    lines = page(audit_answer(audit_of("id,sire,dam,breed\nA1,,,hill\n"), {}), monkeypatch)
    assert any(line.startswith('  "breed" might be line') for line in lines)


def test_a_long_loop_is_shortened_on_the_page_and_whole_in_the_file(
    monkeypatch: pytest.MonkeyPatch,
):
    """A loop of thousands does not fill the page; CSV and JSON name every animal of it."""
    message = " is a parent of ".join(f"A{number}" for number in range(3_000))
    answer = audit_answer(audit_with([Finding("loop", message, "Mend.", id="A0", row=2)]), {})
    assert len(page(answer, monkeypatch)) < 25
    assert message in csv_text(answer)
    assert json.loads(to_json(answer))["findings"][0]["message"] == message


def test_whom_to_ask_needs_more_than_one_holder(monkeypatch: pytest.MonkeyPatch):
    """Several holders are listed with what each has to mend, the gravest first."""
    one = audit_answer(audit_with(findings("loop", 4, ("North Quay",))), {})
    assert "Whom to ask" not in [section.title for section in one.sections]
    found = (
        *findings("both-sexes", 6, ("North Quay", "South Mole")),
        *findings("missing-id", 1, ("South Mole",)),
        *findings("asked-about", 2),
    )
    answer = audit_answer(audit_with(found), {})
    (section,) = (each for each in answer.sections if each.title == "Whom to ask")
    assert section.tables[0].rows == (
        ("South Mole", "1", "3", "0"),
        ("North Quay", "0", "3", "0"),
        ("(holder not recorded)", "0", "0", "2"),
    )
    many = tuple(f"tank {number}" for number in range(31))
    crowd = audit_answer(audit_with(findings("both-sexes", 62, many)), {})
    (section,) = (each for each in crowd.sections if each.title == "Whom to ask")
    assert len(section.tables[0].rows) == 10
    assert section.sentences == ("21 more holders with fewer are in the file of --out.",)


def test_decisions_applied_and_what_they_accepted_are_said(monkeypatch: pytest.MonkeyPatch):
    """People and programs are told how many decisions were applied, and what they settled."""
    accepted = (Finding("parent-younger", "A3 is young.", "Mend.", id="A3", row=5),)
    answer = audit_answer(audit_with(decisions_applied=2, accepted=accepted), {})
    lines = page(answer, monkeypatch)
    assert lines[1] == "2 decisions of the policy were applied."
    assert lines[lines.index("Accepted by decision") + 1] == (
        "  line 5 parent-younger: A3 Name3 is young."
    )
    assert any("No row was changed; 2 decisions of the policy were" in line for line in lines)
    assert json.loads(to_json(answer))["decisions_applied"] == 2


# The files


def test_json_has_findings_gravest_first_and_csv_by_holder_then_row():
    """JSON keeps the audit's order; CSV is sorted by whom to ask, then by row."""
    found = (
        *findings("own-parent", 3, ("South Mole", None)),
        *findings("both-sexes", 3, ("north quay", "South Mole")),
        Finding("asked-about", "A column?", "Say.", column="breed"),
    )
    answer = audit_answer(audit_with(found), {"version": "1"})
    document = json.loads(to_json(answer))
    assert list(document) == ["about", "notes", "rows", "animals", "decisions_applied", "findings"]
    assert [list(each) for each in document["findings"]] == [list(FINDING_FIELDS)] * 7
    assert [each["row"] for each in document["findings"]] == [4, 3, 2, 4, 3, 2, None]
    header, *rows = csv.reader(io.StringIO(csv_text(answer)))
    assert header[:8] == ["kind", "severity", "id", "row", "column", "found", "message", "remedy"]
    assert header[8:] == ["holder"]
    assert [(row[8], row[3], row[0]) for row in rows] == [
        ("north quay", "2", "both-sexes"),
        ("north quay", "4", "both-sexes"),
        ("South Mole", "2", "own-parent"),
        ("South Mole", "3", "both-sexes"),
        ("South Mole", "4", "own-parent"),
        ("", "", "asked-about"),
        ("", "3", "own-parent"),
    ]


def test_workbook_has_a_summary_all_findings_and_a_sheet_a_holder():
    """The workbook counts by kind and holder first, and every sheet's rows are all there."""
    holders = ("Zoo Süd: [A/B]", "summary", None)
    found = (*findings("both-sexes", 7, holders), *findings("loop", 2, holders))
    sheets = sheets_of(audit_answer(audit_with(found, decisions_applied=1), {}))
    assert list(sheets) == ["Summary", "All findings", "summary (2)", "Zoo Süd- -A-B-", "About"]
    everything = sheets["All findings"]
    assert everything[0] == list(FINDING_FIELDS)
    assert len(everything) == 10
    place = FINDING_FIELDS.index("holder")
    for name, holder in (("summary (2)", "summary"), ("Zoo Süd- -A-B-", "Zoo Süd: [A/B]")):
        assert sheets[name][1:] == [row for row in everything if row[place] == holder]
    summary = sheets["Summary"]
    assert [row[:3] for row in summary if row[0] in {"both-sexes", "loop"}] == [
        ["loop", "error, stops", 2.0],
        ["both-sexes", "warning", 7.0],
    ]
    counted = {row[0]: row[1:5] for row in summary if row[0] in {*holders, "(holder not recorded)"}}
    assert sum(row[3] for row in counted.values()) == 9
    assert [row[0] for row in summary if str(row[0]).startswith("Decisions")] == [
        "Decisions of the policy applied: 1."
    ]
    assert any(str(row[0]).startswith("Each holder's sheet") for row in summary)


def test_very_many_holders_do_not_make_very_many_sheets():
    """Beyond a hundred holders, those with the fewest findings are in the common sheet only."""
    holders = tuple(f"cage {number:03}" for number in range(130))
    sheets = sheets_of(audit_answer(audit_with(findings("both-sexes", 260, holders)), {}))
    assert len(sheets) == 103
    assert len(sheets["All findings"]) == 261
    assert any(
        "30 holders with the fewest findings have no sheet" in str(row[0])
        for row in sheets["Summary"]
    )


def test_clean_records_make_a_workbook_too():
    """Without findings the workbook says so and has its header."""
    sheets = sheets_of(audit_answer(audit_with(), {"version": "1"}))
    assert list(sheets) == ["Summary", "All findings", "About"]
    assert sheets["All findings"] == [list(FINDING_FIELDS)]
    assert sheets["Summary"][0][0] == "These records can be used: nothing doubtful was found."


# The explanations


def audit_of_example(kind: str, folder: Path, decisions: str = "") -> Audit:
    """The audit of an explanation's example, with what it needs beside it and decisions as TOML."""
    told = EXPLANATIONS[kind]
    rules = policy_from_tables(RULES_OF_AN_EXAMPLE.get(kind, {})).records
    more = policy_from_tables(tomllib.loads(decisions)).records.decisions
    rules = replace(rules, decisions=(*rules.decisions, *more))
    if told.example_of == RECORDS:
        return audit_records(read_records("-", stdin=told.example.encode()), rules)
    beside = RECORDS_BESIDE[kind].encode()
    second = folder / ("facts.csv" if told.example_of == FACTS else "events.csv")
    second.write_text(told.example, encoding="utf-8")
    if told.example_of == FACTS:
        return audit_records(read_records("-", stdin=beside, facts=second), rules)
    return audit_records(with_events(read_records("-", stdin=beside), read_table(second)), rules)


def test_every_kind_is_explained_and_no_other():
    """Each kind of finding has an explanation, and nothing is explained that is never found."""
    assert set(EXPLANATIONS) == set(KINDS)


@pytest.mark.parametrize("kind", EXPLANATIONS)
def test_explanations_are_whole_sentences(kind: str):
    """Texts for people end as sentences, and what to do is short enough for a table."""
    told = EXPLANATIONS[kind]
    for text in (told.why, told.treated, told.settle):
        assert re.fullmatch(r"[A-Z0-9].*[.]", text)
    assert told.message.endswith(".")
    assert 0 < len(told.to_do) <= 50
    assert not told.to_do.endswith(".")
    header, *rows = told.example.splitlines()
    assert "id" in header.split(",")
    assert rows


@pytest.mark.parametrize("kind", KINDS)
def test_examples_are_found_as_they_are_told(kind: str, tmp_path: Path):
    """The audit says of an example's rows what the explanation says, or that and more."""
    told = EXPLANATIONS[kind]
    said = [each.message for each in audit_of_example(kind, tmp_path).findings if each.kind == kind]
    assert any(each.startswith(told.message.removesuffix(".")) for each in said), said


@pytest.mark.parametrize("kind", [each for each in KINDS if EXPLANATIONS[each].decision])
def test_decisions_of_explanations_can_be_put_in_a_policy(kind: str):
    """The decision that an explanation offers is read by the policy as it stands."""
    answer = explain_answer(kind, {})
    tables = tomllib.loads(answer.fields["decision"])
    (decision,) = policy_from_tables(tables).records.decisions
    assert decision.id in EXPLANATIONS[kind].example or EXPLANATIONS[kind].example_of != RECORDS
    assert decision.kind in ("", kind)


@pytest.mark.parametrize("kind", [each for each in KINDS if EXPLANATIONS[each].decision])
def test_decisions_of_explanations_settle_their_examples(kind: str, tmp_path: Path):
    """With the decision in the policy the example's finding is gone or accepted, and it counts."""
    decision = explain_answer(kind, {}).fields["decision"]
    before = audit_of_example(kind, tmp_path)
    after = audit_of_example(kind, tmp_path, decision)
    assert after.decisions_applied == 1
    left = [each for each in after.findings if each.kind == kind]
    assert len(left) < len([each for each in before.findings if each.kind == kind])


@pytest.mark.parametrize("kind", KINDS)
def test_a_kind_is_explained_on_demand(kind: str, monkeypatch: pytest.MonkeyPatch):
    """--explain says meaning, reason, treatment, an example and how to settle it."""
    answer = explain_answer(kind, {"version": "1"})
    text = " ".join(" ".join(page(answer, monkeypatch, 80)).split())
    told = EXPLANATIONS[kind]
    assert text.startswith(f"{kind}: ")
    for part in (KINDS[kind].meaning, told.why, told.treated, told.settle, told.message):
        assert " ".join(part.split()) in text
    assert ("[[records.decisions]]" in text) == bool(told.decision)
    document = json.loads(to_json(answer))
    assert document["kind"] == kind
    assert document["severity"] in SEVERITIES
    assert csv_text(answer).startswith("kind,severity,stops,meaning,")


@pytest.mark.parametrize("word", ["Own Parent", "own_parent", " OWN-PARENT "])
def test_a_kind_may_be_written_with_blanks_and_capitals(word: str):
    """The spelling of a kind is taken generously."""
    assert explain_answer(word, {}).fields["kind"] == "own-parent"


def test_an_unknown_kind_offers_the_nearest():
    """A misspelled kind is an error with the one probably meant; else all are listed."""
    with pytest.raises(OptionError, match=r'no kind of finding "own-parnet"\.\n.*"own-parent"'):
        explain_answer("own-parnet", {})
    with pytest.raises(OptionError, match=r"Known: .*both-sexes.*own-parent"):
        explain_answer("zzzz", {})


def test_explanations_are_frozen():
    """An explanation cannot be changed in passing."""
    told: Explanation = EXPLANATIONS["loop"]
    with pytest.raises(AttributeError):
        told.why = ""  # type: ignore[misc]
