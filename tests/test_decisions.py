"""Decisions about records: what each kind does to kinship, findings, counts and the view."""

from __future__ import annotations

import csv
import io
import json
import textwrap
from typing import TYPE_CHECKING

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from pairing.kinship.engine import kinship as compute_kinship
from pairing.pedigree.descent import build_pedigree
from pairing.policy.decision_tables import read_decision_tables
from pairing.policy.reading import read_policy
from pairing.policy.rules import Policy
from pairing.records.audit import Audit, audit_records
from pairing.records.readers import read_records
from pairing.records.rules import Decision, RecordRules
from pairing.records.written_view import view_of
from tests.test_commands import run

if TYPE_CHECKING:
    from pathlib import Path

    from pairing.records.findings import Finding

ROUTES = ("toml", "csv")
Entry = dict[str, object]


def as_toml(entries: list[Entry]) -> str:
    """Decisions as a policy has them."""
    lines = []
    for entry in entries:
        lines.append("[[records.decisions]]")
        lines += [f"{key} = {json.dumps(value)}" for key, value in entry.items()]
    return "\n".join(lines)


def as_table(entries: list[Entry]) -> str:
    """Decisions as a keeper's table has them, a column for each word used."""
    columns = list(dict.fromkeys(key for entry in entries for key in entry))
    out = io.StringIO()
    writer = csv.writer(out)
    writer.writerow(columns)
    for entry in entries:
        cells = [entry.get(column, "") for column in columns]
        writer.writerow(["|".join(cell) if isinstance(cell, list) else cell for cell in cells])
    return out.getvalue()


def written(folder: Path, route: str, entries: list[Entry]) -> tuple[str, str]:
    """Decisions written in one of two ways, and the option that names the file."""
    path = folder / f"decisions.{route}"
    path.write_text(as_toml(entries) if route == "toml" else as_table(entries), encoding="utf-8")
    return ("--policy" if route == "toml" else "--decisions"), str(path)


class Herd:
    """Records in a folder, audited and asked under decisions of either kind."""

    def __init__(self, folder: Path, route: str, text: str) -> None:
        self.folder = folder
        self.route = route
        self.path = folder / "herd.csv"
        self.path.write_text(textwrap.dedent(text).strip() + "\n", encoding="utf-8")

    def audit(self, *entries: Entry) -> Audit:
        """The audit under decisions, through the reader of policies or of tables."""
        records = read_records(self.path)
        if not entries:
            return audit_records(records)
        option, name = written(self.folder, self.route, list(entries))
        path = self.folder / name
        policy = (
            read_policy(path) if option == "--policy" else read_decision_tables([path], Policy())
        )
        return audit_records(records, policy.records)

    def program(self, command: str, *words: str, entries: list[Entry]):
        """A command of the installed program under decisions."""
        return run(command, self.path, *words, *written(self.folder, self.route, entries))


@pytest.fixture(params=ROUTES)
def herd(request, tmp_path):
    """Makes a herd whose decisions come from TOML, and one whose decisions come from CSV."""
    return lambda text: Herd(tmp_path, request.param, text)


def kinship_between(audit: Audit, one: str, other: str) -> float:
    """Kinship of two animals."""
    return compute_kinship(build_pedigree(audit)).between(one, other)


def of_kind(audit: Audit, kind: str) -> list[Finding]:
    """All findings of one kind."""
    return [each for each in audit.findings if each.kind == kind]


def view(audit: Audit) -> dict[str, dict[str, str]]:
    """Rows of the view by id."""
    header, rows = view_of(audit)
    return {row[0]: dict(zip(header, row, strict=True)) for row in rows}


def without_effect(audit: Audit) -> str:
    """The message of the one decision that changes nothing."""
    (finding,) = of_kind(audit, "decision-without-effect")
    assert finding.remedy == "Correct it in the policy, or take it out."
    assert finding.severity == "warning"
    return finding.message


DUPLICATES = """
    id,sire,dam,sex,note
    S,,,m,
    T,,,m,
    D,,,f,
    E,S,D,m,
    C,S,D,f,first
    C,T,D,f,second
"""
FIRST: Entry = {"decision": "use-row", "id": "C", "row": 6}
SECOND: Entry = {"decision": "use-row", "id": "C", "row": 7}


# use-row


@pytest.mark.parametrize(("entry", "sire", "kinship"), [(FIRST, "S", 1 / 4), (SECOND, "T", 1 / 8)])
def test_use_row_believes_one_of_several_rows(herd, entry, sire, kinship):
    """The chosen row tells the parents and is the one of the view; the conflict is settled."""
    mine = herd(DUPLICATES)
    assert [each.severity for each in of_kind(mine.audit(), "duplicate-id")] == ["error"]
    audit = mine.audit(entry)
    assert of_kind(audit, "duplicate-id") == []
    assert audit.decisions_applied == 1
    assert kinship_between(audit, "C", "E") == kinship
    row = view(audit)["C"]
    assert row["sire"] == sire
    assert row["note"] == {6: "first", 7: "second"}[entry["row"]]
    assert row["line in the records"].split(", ")[0] == str(entry["row"])


def test_use_row_of_another_animal(herd):
    """A line that is no row of the animal is said, and the conflict stays."""
    audit = herd(DUPLICATES).audit({"decision": "use-row", "id": "C", "row": 5})
    assert without_effect(audit) == "decision 1 (use-row C) changes nothing: line 5 is no row of C."
    assert audit.stopping
    assert audit.decisions_applied == 0


# merge

TWO_IDS = """
    id,sire,dam,sex
    S,,,m
    D,,,f
    C,S,D,f
    C2,S,D,f
    X,,,m
    E,X,C,m
    G,X,C2,m
    H,X,c,m
"""


def test_merge_makes_several_ids_one_animal(herd):
    """Young of merged ids are full sibs; the rows stay, and so do both names."""
    mine = herd(TWO_IDS)
    assert kinship_between(mine.audit(), "E", "G") == 1 / 8 + 1 / 16
    audit = mine.audit({"decision": "merge", "id": "C", "also": ["C2", "c"]})
    assert audit.decisions_applied == 1
    assert len(audit.records) == 8
    assert len(audit.animals) == 7
    for other in ("G", "H"):
        assert kinship_between(audit, "E", other) == 1 / 4
    assert kinship_between(audit, "C2", "c") == kinship_between(audit, "C", "C") == 1 / 2
    assert view(audit)["C"]["other ids"] == "C2|c"
    assert [view(audit)[each]["dam"] for each in "EGH"] == ["C", "C", "C"]
    assert "C2" not in view(audit)
    (duplicate,) = of_kind(audit, "duplicate-id")
    assert (duplicate.severity, duplicate.row) == ("note", 5)


def test_merged_ids_answer_to_both_names_in_check(herd):
    """A mating asked about under either id is the same mating."""
    mine = herd(TWO_IDS)
    entry = {"decision": "merge", "id": "C", "also": ["C2", "c"]}
    for name in ("C", "C2", "c"):
        result = mine.program(
            "check", "--sire", "E", "--dam", name, "--format", "json", entries=[entry]
        )
        (mating,) = result.document["matings"]
        assert mating["offspring_inbreeding"] == 1 / 4
        assert mating["verdict"] == "breaks_limit"
        assert "Decisions about the records applied: 1." in result.err


def test_merge_of_rows_with_other_parents_waits_for_a_row(herd):
    """Merged rows that name other parents are an error until one of them is chosen."""
    mine = herd("id,sire,dam\nS,,\nT,,\nC,S,\nC2,T,\nE,S,\n")
    merge: Entry = {"decision": "merge", "id": "C", "also": ["C2"]}
    audit = mine.audit(merge)
    (conflict,) = audit.stopping
    assert conflict.message == 'C has rows on lines 4, 5 that differ: sire "S" or "T".'
    for row, kinship in ((4, 1 / 8), (5, 0)):
        settled = mine.audit(merge, {"decision": "use-row", "id": "C", "row": row})
        assert settled.decisions_applied == 2
        assert kinship_between(settled, "C2", "E") == kinship


def test_row_of_a_merged_id_may_be_chosen_under_that_id(herd):
    """A decision about an id that was merged is one about the animal it is kept under."""
    mine = herd("id,sire,dam\nS,,\nT,,\nC,S,\nC2,T,\n")
    audit = mine.audit(
        {"decision": "merge", "id": "C", "also": ["C2"]},
        {"decision": "use-row", "id": "C2", "row": 5},
    )
    assert not audit.stopping
    assert view(audit)["C"]["sire"] == "T"


def test_chain_of_merges(herd):
    """An id merged into one that is itself merged is the last of them, in any order."""
    mine = herd("id,sire,dam\nA,,\nX,,\nE,A,X\nF,B,X\nG,C,X\nH,C2,X\n")
    chain: list[Entry] = [
        {"decision": "merge", "id": "B", "also": ["C"]},
        {"decision": "merge", "id": "A", "also": ["B"]},
        {"decision": "merge", "id": "C", "also": ["C2"]},
    ]
    for entries in (chain, chain[::-1]):
        audit = mine.audit(*entries)
        assert audit.decisions_applied == 3
        for other in "FGH":
            assert kinship_between(audit, "E", other) == 1 / 4
        assert view(audit)["A"]["other ids"] == "B|C|C2"
        places = build_pedigree(audit).place("A", "B", "C", "C2")
        assert len(set(places)) == 1


def test_merging_in_a_circle_is_refused(herd):
    """Two ids merged into each other are a fault of the decisions, named with status 2."""
    mine = herd("id,sire,dam\nA,,\nB,,\n")
    entries: list[Entry] = [
        {"decision": "merge", "id": "A", "also": ["B"]},
        {"decision": "merge", "id": "B", "also": ["A"]},
    ]
    result = mine.program("audit", entries=entries)
    assert result.status == 2
    assert "merging goes round in a circle" in result.err


def test_merge_of_an_id_that_nobody_has(herd):
    """An id that neither a row nor a parent has cannot be merged."""
    audit = herd(TWO_IDS).audit({"decision": "merge", "id": "C", "also": ["C3", "C2"]})
    assert without_effect(audit) == (
        "decision 1 (merge C) changes nothing: no row or parent is called C3."
    )


def test_merge_into_an_id_that_no_row_has(herd):
    """Rows may be kept under an id that is new: the animal then goes by it."""
    audit = herd(TWO_IDS).audit({"decision": "merge", "id": "Z", "also": ["C", "C2"]})
    assert audit.decisions_applied == 1
    assert kinship_between(audit, "E", "G") == 1 / 4
    assert (view(audit)["Z"]["sire"], view(audit)["E"]["dam"]) == ("S", "Z")


# drop-link


def test_drop_link_leaves_a_parent_out(herd):
    """A dropped sire is unknown in the view, and the row still names it."""
    mine = herd(TWO_IDS)
    assert kinship_between(mine.audit(), "E", "G") == 1 / 8 + 1 / 16
    audit = mine.audit({"decision": "drop-link", "id": "G", "parent": "sire"})
    assert kinship_between(audit, "E", "G") == 1 / 16
    assert view(audit)["G"]["sire"] == ""
    assert audit.records.fields["sire"][6] == "X"
    assert audit.decisions_applied == 1


def test_drop_link_settles_a_loop(herd):
    """One link of a loop dropped leaves a pedigree; the wrong one leaves the loop."""
    mine = herd("id,sire,dam\nA,C,\nB,A,\nC,B,\nD,C,\n")
    assert [each.kind for each in mine.audit().stopping] == ["loop"]
    audit = mine.audit({"decision": "drop-link", "id": "A", "parent": "sire"})
    assert not audit.stopping
    assert kinship_between(audit, "A", "D") == 1 / 16
    for name in "BC":
        assert not mine.audit({"decision": "drop-link", "id": name, "parent": "sire"}).stopping
    other = mine.audit({"decision": "drop-link", "id": "D", "parent": "sire"})
    assert [each.kind for each in other.stopping] == ["loop"]
    assert other.decisions_applied == 1


def test_drop_link_settles_an_own_parent(herd):
    """The link from an animal to itself dropped, its other parent counts."""
    mine = herd("id,sire,dam\nD,,\nA,A,D\nB,,D\n")
    before = mine.program(
        "describe", entries=[{"decision": "drop-link", "id": "B", "parent": "dam"}]
    )
    assert before.status == 2
    assert "A is recorded as its own sire." in before.err
    entry: Entry = {"decision": "drop-link", "id": "A", "parent": "sire"}
    assert mine.program("describe", entries=[entry]).status == 0
    audit = mine.audit(entry)
    assert of_kind(audit, "own-parent") == []
    assert kinship_between(audit, "A", "B") == 1 / 8


def test_drop_link_of_the_dam_drops_the_donor_too(herd):
    """Where a donor is recorded beside the dam neither counts once the link is dropped."""
    mine = herd("id,sire,dam,genetic_dam\nD,,,\nG,,,\nA,,D,G\nB,,G,\n")
    assert kinship_between(mine.audit(), "A", "B") == 1 / 8
    audit = mine.audit({"decision": "drop-link", "id": "A", "parent": "dam"})
    assert kinship_between(audit, "A", "B") == 0
    assert (view(audit)["A"]["dam"], view(audit)["A"]["genetic_dam"]) == ("", "")


def test_drop_link_that_is_not_there(herd):
    """A parent that is not recorded cannot be dropped."""
    audit = herd(TWO_IDS).audit({"decision": "drop-link", "id": "S", "parent": "dam"})
    assert without_effect(audit) == (
        "decision 1 (drop-link S) changes nothing: no dam is recorded."
    )


# set


def test_set_reads_another_value(herd):
    """A set sex is used everywhere, and settles the finding about the one recorded."""
    mine = herd("id,sire,dam,sex\nS,,,f\nC,S,,m\n")
    assert [each.kind for each in mine.audit().findings if each.severity == "warning"] == [
        "sex-against-role"
    ]
    audit = mine.audit({"decision": "set", "id": "S", "field": "sex", "value": "male"})
    assert of_kind(audit, "sex-against-role") == []
    assert audit.animals[0].sex == "male"
    assert view(audit)["S"]["sex"] == "male"
    assert audit.records.fields["sex"] == ("f", "m")


def test_set_changes_a_parent(herd):
    """A parent that is set counts for kinship, also one that has no row."""
    mine = herd(TWO_IDS)
    audit = mine.audit(
        {"decision": "set", "id": "E", "field": "sire", "value": "S"},
        {"decision": "set", "id": "G", "field": "sire", "value": "Nobody"},
    )
    assert audit.decisions_applied == 2
    assert kinship_between(audit, "S", "E") == (1 / 2 + 1 / 4) / 2
    assert kinship_between(audit, "Nobody", "G") == 1 / 4
    assert [view(audit)[each]["sire"] for each in "EG"] == ["S", "Nobody"]


def test_set_clears_a_cell(herd):
    """Set without a value reads a cell as blank."""
    mine = herd("id,sire,dam,sex,died\nS,,,m,2019\n")
    audit = mine.audit({"decision": "set", "id": "S", "field": "died", "value": ""})
    assert audit.animals[0].dates == {}
    assert view(audit)["S"]["died"] == ""
    assert audit.decisions_applied == 1


def test_set_gives_a_field_that_the_table_lacks(herd):
    """A field without a column can be set for one animal; the view has the column."""
    audit = herd("id,sire,dam\nA,,\nB,,\n").audit(
        {"decision": "set", "id": "B", "field": "born", "value": "31 May 2019"}
    )
    assert {name: row["born"] for name, row in view(audit).items()} == {"A": "", "B": "2019-05-31"}


def test_set_to_what_is_recorded(herd):
    """A value that the record has already changes nothing."""
    audit = herd(TWO_IDS).audit({"decision": "set", "id": "S", "field": "sex", "value": "m"})
    assert without_effect(audit) == ('decision 1 (set S) changes nothing: sex reads "m" already.')


# accept

OLD = "id,sire,dam,born,died\nA,,,2010-05-31,2009-01-01\nB,,,2010,2009\n"


def test_accept_takes_a_finding_away(herd):
    """A finding accepted as right is no doubt any more; that of another animal stays."""
    mine = herd(OLD)
    assert [each.id for each in of_kind(mine.audit(), "death-before-birth")] == ["A", "B"]
    audit = mine.audit({"decision": "accept", "id": "A", "kind": "death-before-birth"})
    assert [each.id for each in of_kind(audit, "death-before-birth")] == ["B"]
    assert [each.id for each in audit.accepted] == ["A"]
    assert audit.decisions_applied == 1
    assert view(audit)["A"]["died"] == "2009-01-01"


def test_accept_of_what_is_no_finding(herd):
    """Accepting what nobody doubts is said."""
    audit = herd(OLD).audit({"decision": "accept", "id": "B", "kind": "parent-younger"})
    assert without_effect(audit) == (
        "decision 1 (accept parent-younger of B) changes nothing: there is no such finding."
    )
    assert audit.decisions_applied == 0


def test_what_stops_cannot_be_accepted(herd):
    """A loop leaves kinship undefined, so accepting it is a fault of the decisions."""
    mine = herd("id,sire,dam\nA,B,\nB,A,\n")
    entry: Entry = {"decision": "accept", "id": "A", "kind": "loop"}
    result = mine.program("audit", entries=[entry])
    assert result.status == 2
    assert "cannot be accepted" in result.err
    assert "drop-link, set or use-row" in result.err


# All kinds


@pytest.mark.parametrize(
    "entry",
    [
        {"decision": "use-row", "id": "Z", "row": 2},
        {"decision": "drop-link", "id": "Z", "parent": "sire"},
        {"decision": "set", "id": "Z", "field": "sex", "value": "male"},
    ],
)
def test_decision_about_an_id_without_a_row(herd, entry):
    """An id that no row has is said, whatever is decided about it."""
    message = without_effect(herd(TWO_IDS).audit(entry))
    assert message == (
        f'decision 1 ({entry["decision"]} Z) changes nothing: there is no row with the id "Z".'
    )


MESSY = """
    id,sire,dam,sex,born,note
    S,,,m,2001,
    T,,,m,2002,
    D,,,m,2001,
    C,S,D,f,2003,first
    C,T,D,f,2003,second
    L,M,,m,,
    M,L,,m,,
    O,O,D,m,2005,
    E,S,C,m,1999,
    e,S,C,m,1999,
"""
ALL: list[Entry] = [
    {"decision": "use-row", "id": "C", "row": 6, "who": "K. Finch", "when": "2020-05-01"},
    {"decision": "drop-link", "id": "L", "parent": "sire", "why": "the book of 2004"},
    {"decision": "drop-link", "id": "O", "parent": "sire"},
    {"decision": "set", "id": "D", "field": "sex", "value": "female"},
    {"decision": "merge", "id": "E", "also": ["e"]},
    {"decision": "accept", "id": "E", "kind": "parent-younger"},
]


def test_all_kinds_through_the_program(herd):
    """Every output counts the decisions; the view and all else are as decided."""
    mine = herd(MESSY)
    source = mine.path.read_bytes()
    out = mine.folder / "view.csv"
    result = mine.program("audit", "--view", str(out), "--format", "json", entries=ALL)
    assert result.status == 0, result.err
    assert result.document["decisions_applied"] == 6
    assert result.document["rows"] == 10
    assert result.document["animals"] == 8
    assert [each for each in result.document["findings"] if each["severity"] != "note"] == []
    assert "Decisions about the records applied: 6." in result.err
    rows = {row["id"]: row for row in csv.DictReader(out.read_text().splitlines())}
    assert {name: (row["sire"], row["dam"]) for name, row in rows.items()} == {
        "S": ("", ""),
        "T": ("", ""),
        "D": ("", ""),
        "C": ("T", "D"),
        "L": ("", ""),
        "M": ("L", ""),
        "O": ("", "D"),
        "E": ("S", "C"),
    }
    assert rows["D"]["sex"] == "female"
    assert (rows["C"]["note"], rows["C"]["line in the records"]) == ("second", "6, 5")
    assert rows["E"]["other ids"] == "e"
    assert mine.path.read_bytes() == source
    answer = mine.program("animals", "--format", "json", entries=ALL)
    assert answer.status == 0
    assert "Decisions about the records applied: 6." in answer.err
    again = compute_kinship(build_pedigree(audit_records(read_records(out))))
    found = {each["id"]: each["inbreeding"] for each in answer.document["animals"]}
    ids = list(found)
    assert [found[each] for each in ids] == again.inbreeding[again.pedigree.place(*ids)].tolist()


def test_policy_and_table_together(tmp_path):
    """Decisions of the policy and of several tables add up."""
    mine = Herd(tmp_path, "csv", MESSY)
    (tmp_path / "policy.toml").write_text(as_toml(ALL[:2]))
    (tmp_path / "one.csv").write_text(as_table(ALL[2:4]))
    (tmp_path / "two.csv").write_text(as_table(ALL[4:]))
    result = run(
        "audit",
        mine.path,
        *("--policy", tmp_path / "policy.toml", "--decisions", tmp_path / "one.csv"),
        *("--decisions", tmp_path / "two.csv", "--format", "json"),
    )
    assert result.document["decisions_applied"] == 6


IDS = st.sampled_from(["S", "T", "D", "C", "L", "M", "O", "E", "e", "Z"])
DECISIONS = st.one_of(
    st.builds(Decision, st.just("use-row"), IDS, row=st.integers(1, 12)),
    st.builds(Decision, st.just("drop-link"), IDS, parent=st.sampled_from(["sire", "dam"])),
    st.builds(
        Decision,
        st.just("set"),
        IDS,
        field=st.sampled_from(["sex", "sire", "dam", "born", "origin", "clone_of"]),
        value=st.sampled_from(["", "m", "S", "2003", "wild", "S|T"]),
    ),
    st.builds(Decision, st.just("merge"), IDS, also=st.tuples(IDS)),
    st.builds(
        Decision,
        st.just("accept"),
        IDS,
        kind=st.sampled_from(["parent-younger", "sex-against-role", "parent-without-row"]),
    ),
)


@settings(max_examples=200)
@given(st.lists(DECISIONS, max_size=5))
def test_decisions_never_change_the_rows(decisions):
    """Whatever is decided, the rows are as read, and each decision is counted once."""
    content = textwrap.dedent(MESSY).strip().encode()
    records = read_records("-", stdin=content)
    audit = audit_records(records, RecordRules(decisions=tuple(decisions)))
    untouched = read_records("-", stdin=content)
    assert audit.records is records
    assert records.fields == untouched.fields
    assert records.carried == untouched.carried
    assert list(records.lines) == list(untouched.lines)
    idle = of_kind(audit, "decision-without-effect")
    assert audit.decisions_applied + len(idle) == len(decisions)
    _header, rows = view_of(audit)
    rows = list(rows)
    assert len(rows) == len(audit.animals)
    assert len({row[0] for row in rows}) == len(rows)
    if not audit.stopping:
        build_pedigree(audit)


def test_remarks_of_merged_rows_are_all_in_the_view():
    """What a keeper noted beside either id is kept in the view, with both lines."""
    text = "id,sire,dam,remark\nA,,,\nB,,,tame\nC,,,\n"
    rules = RecordRules(decisions=(Decision("merge", "A", also=("B",)),))
    audit = audit_records(read_records("-", stdin=text.encode()), rules)
    header, rows = view_of(audit)
    told = [dict(zip(header, row, strict=True)) for row in rows]
    assert [(each["id"], each["remark"], each["line in the records"]) for each in told] == [
        ("A", "tame", "2, 3"),
        ("C", "", "4"),
    ]
