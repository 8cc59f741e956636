"""Tables drawn cell by cell: read without a fault, judged the same however they are sorted."""

from __future__ import annotations

import tempfile
from collections import Counter
from pathlib import Path
from typing import TYPE_CHECKING

import pytest
from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st

from pairing.records.audit import Audit, audit_records
from pairing.records.fields import FIELDS
from pairing.records.readers import read_records
from pairing.records.rules import Decision, RecordRules
from tests.fuzz.damaged_cells import DATES, WORDS
from tests.fuzz.journey import STRICT, Tables, check_findings, travel, with_rows

if TYPE_CHECKING:
    from collections.abc import Sequence

    from pairing.records.findings import Finding

Grid = list[list[str]]

thoroughly = settings(
    max_examples=250,
    derandomize=True,
    suppress_health_check=[HealthCheck.too_slow, HealthCheck.data_too_large],
)

IDS = ("A1", "A2", "a2", "007", "7", "B 9", "Ü-4", "Жук", "獅子1", "1E+05", "T.3", "0")
PARENTS = (*IDS, "", "", "?", "wild", "unknown", "NA", "X9", "A1|A2", "A1:0.7|007:0.3", "A1|", "|")
ABOUT_SEVERAL = (
    "loop",
    "litter-dams-differ",
    "litter-dates-differ",
    "litter-too-large",
    "litters-too-close",
    "look-alike-id",
    "look-alike-holder",
    "mark-on-two-ids",
    "mark-used-again",
    "same-animal-twice",
    "test-unreadable",
)
"""Kinds about all animals that have something in common; one of them stands for the others."""
HOLDERS = ("", "North Quay", "north quay", "Nord-Kai", "北の港", "Gannet House")
_LETTERS = st.characters(exclude_characters="\x00", exclude_categories=["Cs"])
CELLS = {
    **dict.fromkeys(("sire", "dam", "genetic_dam"), st.sampled_from(PARENTS)),
    **dict.fromkeys(("clone_of", "reared_by"), st.sampled_from(("", "", "", *IDS))),
    **dict.fromkeys(
        ("born", "died", "entered", "left", "last_seen"),
        st.one_of(
            st.just(""),
            st.dates().map(str),
            st.sampled_from(DATES),
            st.dates().map(lambda day: f"{day.day:02}/{day.month:02}/{day.year}"),
        ),
    ),
    **dict.fromkeys(("sex", "status", "origin", "end_cause", "may_breed"), st.sampled_from(WORDS)),
    **dict.fromkeys(("holder", "born_at", "line"), st.sampled_from(HOLDERS)),
    **dict.fromkeys(
        ("litter", "group", "mark", "local_id"), st.sampled_from(("", "L1", "L2", "9"))
    ),
    "count": st.sampled_from(("", "1", "30", "12.15.3", "many", "-1", "٣")),
    "merit": st.sampled_from(("", "1.5", "-2", "1,5", "nan", "inf", "high")),
    "name": st.text(_LETTERS, max_size=6),
    "may_breed_note": st.text(_LETTERS, max_size=6),
}


@st.composite
def spelled(draw: st.DrawFn, field: str) -> str:
    """A heading for a field, in one of the spellings that are read as it."""
    words = draw(st.sampled_from(FIELDS[field].spellings))
    separated = words.replace("_", draw(st.sampled_from("_- .")))
    return draw(st.sampled_from((separated, separated.upper(), separated.title(), f" {words} ")))


@st.composite
def tables(draw: st.DrawFn, *, repeated: bool = True) -> Grid:
    """A header and rows of animals; `repeated` lets several rows have one id."""
    others = draw(st.lists(st.sampled_from(sorted(CELLS.keys() - {"sire", "dam"})), unique=True))
    fields = draw(st.permutations(["id", "sire", "dam", *others]))
    unique = None if repeated else (lambda name: name)
    ids = draw(st.lists(st.sampled_from(IDS), min_size=1, max_size=9, unique_by=unique))
    if repeated and draw(st.integers(0, 4)) == 0:
        ids.append("")
    rows = [[name if field == "id" else draw(CELLS[field]) for field in fields] for name in ids]
    header = [draw(spelled(field)) for field in fields]
    note = draw(st.sampled_from(("", "Notes", "breed", "twin of", "rust_test", "Gender")))
    if note:
        header.append(note)
        rows = [[*row, draw(st.sampled_from(("", "free", "carrier", "=1+1", "x")))] for row in rows]
    return [header, *rows]


def decisions(grid: Grid) -> st.SearchStrategy[tuple[Decision, ...]]:
    """Decisions at random, some about animals that are not there."""
    ids = st.sampled_from(("A1", "A2", "007", "gone", *(row[0] for row in grid[1:])))
    kinds = ("parent-without-row", "sex-against-role", "parent-younger", "duplicate-id", "loop")
    one = st.one_of(
        st.builds(Decision, st.just("use-row"), ids, row=st.integers(1, 12)),
        st.builds(Decision, st.just("merge"), ids, also=st.tuples(ids)),
        st.builds(Decision, st.just("drop-link"), ids, parent=st.sampled_from(("sire", "dam"))),
        st.builds(
            Decision,
            st.just("set"),
            ids,
            field=st.sampled_from(sorted(CELLS)),
            value=st.sampled_from(("", "A1", "2019", "male", "no", "X5|X6")),
        ),
        st.builds(Decision, st.just("accept"), ids, kind=st.sampled_from(kinds)),
    )
    return st.lists(one, max_size=4).map(tuple)


def audit_of(grid: Grid, rules: RecordRules | None = None) -> Audit:
    """The audit of a table, read as text in quotation marks."""
    content = with_rows(Tables(b""), grid).records
    return audit_records(read_records("-", stdin=content), rules)


@thoroughly
@given(st.data())
def test_any_table_is_read_and_judged(data: st.DataObject) -> None:
    """A table of any cells is read whole, whatever is decided about it, and keeps its view."""
    grid = data.draw(tables())
    strict = data.draw(st.booleans())
    with tempfile.TemporaryDirectory() as folder:
        call = with_rows(Tables(b"", strict=strict), grid)
        came = travel(call, Path(folder), thorough=True, answers=data.draw(st.booleans()))
    assert came in ("computed", "stopped")
    rules = RecordRules(decisions=data.draw(decisions(grid)))
    audit = audit_of(grid, rules)
    check_findings(audit)
    assert 0 <= audit.decisions_applied <= len(rules.decisions)


@thoroughly
@given(tables())
def test_an_audit_says_the_same_each_time(grid: Grid) -> None:
    """Two audits of one table have the same findings in the same order."""
    first, second = audit_of(grid, STRICT.records), audit_of(grid, STRICT.records)
    assert first.findings == second.findings
    assert list(first.animals) == list(second.animals)


@thoroughly
@given(st.data())
def test_findings_do_not_depend_on_the_order_of_rows(data: st.DataObject) -> None:
    """However the rows are sorted, the same is found about the same animals."""
    grid = data.draw(tables(repeated=False))
    shuffled = [grid[0], *data.draw(st.permutations(grid[1:]))]
    assert _said(audit_of(grid, STRICT.records)) == _said(audit_of(shuffled, STRICT.records))


@thoroughly
@given(st.data())
def test_accepting_a_finding_takes_it_away_and_no_other(data: st.DataObject) -> None:
    """What a decision accepts is kept apart; every other finding stays as it was."""
    grid = data.draw(tables())
    audit = audit_of(grid)
    about_animals = [each for each in audit.findings if each.id is not None and not each.stops]
    assume(about_animals)
    chosen = data.draw(st.sampled_from(about_animals))
    accept = Decision("accept", str(chosen.id), kind=chosen.kind)
    after = audit_of(grid, RecordRules(decisions=(accept,)))
    same = [(each.kind, each.id) == (chosen.kind, chosen.id) for each in audit.findings]
    taken = [each for each, is_same in zip(audit.findings, same, strict=True) if is_same]
    left = [each for each, is_same in zip(audit.findings, same, strict=True) if not is_same]
    stopping = [each for each in taken if each.stops]
    assert Counter(after.accepted) == Counter(each for each in taken if not each.stops)
    assert Counter(after.findings) == Counter([*left, *stopping]) or stopping
    assert after.decisions_applied == 1


@thoroughly
@given(st.data())
def test_dropping_a_link_stops_nothing(data: st.DataObject) -> None:
    """Without the link from an animal to a parent no more is found that stops the rest."""
    grid = data.draw(tables(repeated=False))
    audit = audit_of(grid)
    linked = [
        (animal.id, role)
        for animal in audit.animals
        for role in ("sire", "dam")
        if getattr(animal, role)
    ]
    assume(linked)
    name, role = data.draw(st.sampled_from(linked))
    dropped = Decision("drop-link", name, parent=role)
    after = audit_of(grid, RecordRules(decisions=(dropped,)))
    assert after.decisions_applied == 1
    assert len(after.stopping) <= len(audit.stopping)
    own_parents = [each for each in audit.stopping if each.kind == "own-parent"]
    if any(each.id == name and f"own {role}" in each.message for each in own_parents):
        assert len(after.stopping) < len(audit.stopping)


def _said(audit: Audit) -> Counter[tuple[object, ...]]:
    """What was found of whom; not where, nor the sentence: they tell of the first example."""
    return Counter((each.kind, each.severity, *_whom(each)) for each in audit.findings)


def _whom(finding: Finding) -> tuple[object, object]:
    """The animal and what was found; nobody where it is one of several that the rows order."""
    if finding.kind in ABOUT_SEVERAL:
        return None, None
    return finding.id, finding.found


def test_words_of_the_line_are_left_out_of_account() -> None:
    """The comparison of findings forgets lines and nothing else."""
    grid = [["id", "sire", "dam"], ["A1", "A1", ""], ["A2", "A2", ""]]
    said: Sequence[str] = [str(each) for each in _said(audit_of(grid))]
    assert any("own-parent" in each and "A1" in each for each in said)
    assert _said(audit_of(grid)) == _said(audit_of([grid[0], grid[2], grid[1]]))
    assert _said(audit_of(grid)) != _said(audit_of(grid[:2]))


pytestmark = pytest.mark.slow
