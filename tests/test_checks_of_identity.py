"""Who is who: look-alike ids, holders and marks, spoilt ids, and animals entered twice."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import pyarrow
import pytest
from hypothesis import given
from hypothesis import strategies as st

from pairing.records.checks.holders import look_alike_holders, with_holders
from pairing.records.checks.identity import look_alike_ids, same_animals_twice
from pairing.records.checks.marks import marks_on_several_ids
from pairing.records.checks.spreadsheets import spreadsheet_damage
from pairing.records.columns import ArrowText
from pairing.records.findings import Finding
from pairing.records.ids.look_alikes import (
    essence,
    groups_alike,
    number_breaks,
    surely_unlike,
    words_only,
)
from pairing.records.readers import read_records
from pairing.records.rules import Decision, RecordRules
from pairing.records.view import read_animals

if TYPE_CHECKING:
    from collections.abc import Callable

    from pairing.records.animals import Animals

DATA = Path(__file__).parents[2] / "shared" / "data"
CHECKS = (
    look_alike_ids,
    same_animals_twice,
    marks_on_several_ids,
    spreadsheet_damage,
    look_alike_holders,
)


@pytest.fixture(params=["by rows", "by columns"])
def reading(request, monkeypatch):
    """Small tables as rows of cells, and in the layout that large ones have."""
    if request.param == "by columns":
        monkeypatch.setattr("pairing.records.files.delimited.LARGE", 0)
    return request.param


def animals_of(text: str, rules: RecordRules | None = None) -> Animals:
    """The view of records given as CSV text."""
    return read_animals(read_records("-", stdin=text.encode()), rules)[0]


def found(
    check: Callable[[Animals, RecordRules], list[Finding]],
    text: str,
    rules: RecordRules | None = None,
) -> list[Finding]:
    """What a check finds in records given as CSV text."""
    return check(animals_of(text, rules), rules or RecordRules())


def messages(check, text: str) -> list[str]:
    """The sentences of a check."""
    return [each.message for each in found(check, text)]


def ids(*names: str) -> str:
    """Records of unrelated animals with these ids."""
    return "\n".join(["id,sire,dam", *(f"{name},," for name in names)])


# Look-alike ids


@pytest.mark.parametrize(
    ("first", "second", "manner"),
    [
        ("B07", "b07", "capitals"),
        ("007", "7", "leading zeros"),
        ("A-007", "a-7", "leading zeros"),
        ("19-007", "19-7", "leading zeros"),
        ("BO4", "B04", "letters that look like digits"),
        ("Al2", "A12", "letters that look like digits"),
        ("AI2", "A12", "letters that look like digits"),
        ("B 12", "B12", "signs or blanks"),
        ("B-12", "b.12", "signs or blanks"),
        ("985 112 4", "9851124", "signs or blanks"),
        ("ВК12", "BK12", "letters of another alphabet or accents"),
        ("ΑΚ12", "AK12", "letters of another alphabet or accents"),
        ("Mör2", "Mor2", "letters of another alphabet or accents"),
    ],
)
def test_look_alike_ids_are_named_with_their_difference(reading, first, second, manner):
    """Two ids of one essence are a finding that names both rows and says how they differ."""
    (finding,) = found(look_alike_ids, ids(first, "Z9", second))
    assert finding == Finding(
        "look-alike-id",
        f'"{second}" (line 4) is spelled almost as "{first}" (line 2); they differ in {manner}.',
        "If they are one animal, use one spelling throughout or merge them by a decision; "
        "until then they count as two.",
        id=second,
        row=4,
        column="id",
        found=second,
    )


def test_three_look_alikes_are_one_finding(reading):
    """A group of look-alikes is said once, all of them by name."""
    assert messages(look_alike_ids, ids("A01", "a01", "A1")) == [
        '"a01" (line 3) and "A1" (line 4) are spelled almost as "A01" (line 2); they differ in '
        "leading zeros."
    ]


@pytest.mark.parametrize(
    "text",
    [
        ids("1-11", "11-1", "1-1-1"),
        ids("A1", "A10", "A100", "B1"),
        ids("?!", "--", "!?"),
        "id,sire,dam,sex\nB7,,,m\nb7,,,f",
        "id,sire,dam\nB7,,\nb7,,\nC1,B7,b7",
        "id,sire,dam,born\nB7,,,2001\nb7,,,2004",
        "id,sire,dam\nB7,,\nb7,B7,",
        "id,sire,dam\nB7,,\nC,B7,\nb7,C,",
        "id,sire,dam\nB7,,\nC,X|B7,\nb7,C,",
        "id,sire,dam\nS1,,\nS2,,\nB7,S1,\nb7,S2,",
    ],
)
def test_ids_that_are_surely_two_animals_are_no_finding(reading, text):
    """Nothing is said of ids whose sex, birth, parents or kinship forbid to merge them."""
    assert found(look_alike_ids, text) == []


@pytest.mark.parametrize(
    "text",
    [
        "id,sire,dam,sex\nB7,,,m\nb7,,,",
        "id,sire,dam,sex\nB7,,,m\nb7,,,h",
        "id,sire,dam,born\nB7,,,2001\nb7,,,2001-05-03",
        "id,sire,dam,born\nB7,,,2001\nb7,,,",
        "id,sire,dam\nS1,,\ns1,,\nB7,S1,\nb7,s1,",
        "id,sire,dam\nS1,,\nB7,S1,\nb7,,S1",
    ],
)
def test_ids_that_may_be_one_animal_are_a_finding(reading, text):
    """An unknown sex, date or parent contradicts nothing."""
    assert any(each.id == "b7" for each in found(look_alike_ids, text))


def test_a_merged_id_is_no_look_alike():
    """The decision to merge settles the finding."""
    rules = RecordRules(decisions=(Decision("merge", "B7", also=("b7",)),))
    assert found(look_alike_ids, ids("B7", "b7"), rules) == []


def test_a_way_of_naming_is_said_once(reading):
    """Hundreds of pairs that differ in one manner are one finding; another manner stands out."""
    pairs = [name for number in range(200) for name in (f"B{number}", f"b{number}")]
    column, slip = found(look_alike_ids, ids(*pairs, "Q-7", "Q7"))
    assert column == Finding(
        "look-alike-id",
        '200 groups of ids differ in capitals and nothing else, for instance "B0" (line 2) and '
        '"b0" (line 3); "B1" (line 4) and "b1" (line 5); "B2" (line 6) and "b2" (line 7).',
        "Nothing to do if animals are named in this way here; where two are one animal, use one "
        "spelling or merge them by a decision. Until then each id is an animal.",
        column="id",
    )
    assert slip.found == "Q7"


def test_ids_on_repeated_rows_are_no_look_alikes(reading):
    """Rows with one id are one animal, and a look-alike is still found behind them."""
    (finding,) = found(look_alike_ids, "id,sire,dam\nA7,,\nA7,,\nC,,\na7,,")
    assert (finding.id, finding.row) == ("a7", 5)


NAMES = st.text(st.sampled_from("aAbBoOlI0129- .ОВä"), min_size=1, max_size=6).map(
    lambda text: " ".join(text.split())
)


@given(st.lists(NAMES.filter(bool), unique=True, max_size=12), st.booleans())
def test_columns_and_cells_find_the_same_groups(names, as_written):
    """Compiled code over Arrow's buffers finds exactly the groups that plain Python does."""
    expected = {}
    for place, name in enumerate(names):
        fold = words_only(name) if as_written else essence(name)
        expected.setdefault(fold, []).append(place)
    groups = sorted(group for fold, group in expected.items() if fold and len(group) > 1)
    columns = ArrowText(pyarrow.array(names, "string"))
    coded = ArrowText(pyarrow.array(names, "string").dictionary_encode())
    for cells in (tuple(names), columns, coded):
        for distinct in (False, True):
            said = groups_alike(cells, distinct=distinct, as_written=as_written)
            assert sorted(said) == groups


@given(st.lists(st.text("A0129-", min_size=1, max_size=4), unique=True, min_size=1, max_size=12))
def test_ids_told_apart_at_a_glance_have_different_essences(names):
    """Where the quick look says that no two ids can be alike, none are."""
    cells = ArrowText(pyarrow.array(names, "string"))
    if surely_unlike(*cells.bytes_of()):
        assert len({essence(name) for name in names}) == len(names)


@pytest.mark.parametrize(
    ("names", "unlike"),
    [
        (("A01", "A02", "A10"), True),
        (("1", "20", "300"), True),
        (("1", "01"), False),
        (("A01", "B01"), False),
        (("A1", "A10"), False),
    ],
)
def test_even_ids_are_passed_over_quickly(names, unlike):
    """The quick look settles ids of one build, with many rows as with few."""
    for times in (1, 700):
        cells = ArrowText(pyarrow.array(names * times, "string"))
        assert surely_unlike(*cells.bytes_of()) is unlike


@given(NAMES, st.randoms(use_true_random=False))
def test_essence_leaves_out_what_is_easily_mistyped(name, random):
    """Case, signs at the ends and look-alike letters leave the essence as it is."""
    swapped = "".join(random.choice((letter.upper(), letter.lower())) for letter in name)
    assert essence(swapped) == essence(name)
    assert essence(f"-{name}. ") == essence(name)
    assert essence(name.replace("O", "0")) == essence(name.replace("O", "o"))


def test_numbers_that_are_divided_differently_have_different_breaks():
    """A sign between digits is remembered by its place in the essence."""
    assert essence("1-11") == essence("11-1") == "111"
    assert number_breaks("1-11") == {1}
    assert number_breaks("11 - 1") == {2}
    assert number_breaks("A-1-1-1.") == {2, 3}
    assert number_breaks("A-111") == frozenset()


@given(st.lists(st.integers(1, 400), unique=True, min_size=1, max_size=30))
def test_numbered_animals_are_no_look_alikes(numbers):
    """Ids that are a letter and a number, or year and number, are never a finding."""
    plain = ids(*(f"A{number}" for number in numbers))
    yearly = ids(*(f"{number % 30}-{number}" for number in numbers))
    assert found(look_alike_ids, plain) == found(look_alike_ids, yearly) == []


# What spreadsheets spoil


@pytest.mark.parametrize(
    ("name", "said"),
    [
        ("1E+05", "looks like an id that a spreadsheet turned into a number"),
        ("1.2e+11", "looks like an id that a spreadsheet turned into a number"),
        ("45123.0", "looks like an id that a spreadsheet turned into a number with decimals"),
        ("2019-05-31", "looks like an id that a spreadsheet turned into a date"),
        ("5/3/2019", "looks like an id that a spreadsheet turned into a date"),
        ("Mar-05", "looks like an id that a spreadsheet turned into a date"),
        ("05-Mar", "looks like an id that a spreadsheet turned into a date"),
        ("#N/A", "is a spreadsheet's word for an error and no id"),
        ("#REF!", "is a spreadsheet's word for an error and no id"),
        ("####", "is what a spreadsheet shows when a column is too narrow for a number"),
    ],
)
def test_spoilt_ids_are_found(reading, name, said):
    """An id that a spreadsheet has changed is named, with what to do."""
    (finding,) = found(spreadsheet_damage, ids("A1", name, "B2"))
    assert finding == Finding(
        "spreadsheet-damage",
        f'"{name}" {said}.',
        "Restore the id from the source, and format the column as text before typing.",
        id=name,
        row=3,
        column="id",
        found=name,
    )


def test_spoilt_parents_are_found_where_they_are_named(reading):
    """A parent without a row is reported on the row of its young, in the parent's column."""
    (finding,) = found(spreadsheet_damage, "id,sire,mother\nA1,,\nB2,A1,1E+05")
    assert (finding.id, finding.row, finding.column) == ("1E+05", 3, "mother")


@pytest.mark.parametrize(
    "names",
    [
        ("1E05", "E+05", "A.0", "#7", "+5", "12-Marsh", "Mar-1234"),
        ("2019-05-01", "2019-05-02", "B1"),
        ("12.0", "12.1", "13.0"),
        ("Mar-05", "Bess-12", "Tess-3"),
        ("Apr-05", "Mar-05", "May-07"),
    ],
)
def test_ids_that_are_meant_so_are_not_spoilt(reading, names):
    """Codes that are made like dates or decimals throughout are a way of naming animals."""
    assert found(spreadsheet_damage, ids(*names)) == []


def test_many_spoilt_ids_are_said_once(reading):
    """A whole column with decimals is one finding with examples."""
    (finding,) = found(spreadsheet_damage, ids(*(f"{number}.0" for number in range(1, 61))))
    assert finding.message == (
        "60 ids look like ids that a spreadsheet turned into numbers with decimals: "
        '"1.0", "2.0", "3.0" and 57 more.'
    )
    assert finding.id is None


def test_rounded_numbers_are_found(reading):
    """Long numbers whose digits past the fifteenth are gone are one finding."""
    rounded = [f"98511200000{number}000" for number in range(1000, 1005)]
    (finding,) = found(spreadsheet_damage, ids("A1", *rounded))
    assert finding.message == (
        "5 of 5 ids of more than 15 digits end in zeros after the 15th, as when a spreadsheet "
        'has rounded them: "985112000001000000", "985112000001001000", "985112000001002000".'
    )
    assert finding.row == 3


def test_long_numbers_with_all_their_digits_are_not_rounded(reading):
    """A tenth of all numbers end in a zero by chance."""
    long = [f"98511200000{number:05d}" for number in range(100)]
    assert found(spreadsheet_damage, ids(*long)) == []


# Marks


def test_a_mark_on_two_ids_is_found(reading):
    """Case, blanks and signs of a mark are left out of account."""
    text = "id,sire,dam,Ring\nA1,,,R-411\nA2,,,r 411\nA3,,,R-412"
    assert found(marks_on_several_ids, text) == [
        Finding(
            "mark-on-two-ids",
            'A1 (line 2) and A2 (line 3) carry one mark, "R-411".',
            "Read the mark on the animal again and correct it; if it is one animal, enter it once "
            "or merge the ids by a decision.",
            id="A2",
            row=3,
            column="Ring",
            found="r 411",
        )
    ]


def test_zeros_and_letters_of_marks_count():
    """Ring 07 is not ring 7, and O is not zero: rings are stamped, not typed."""
    assert found(marks_on_several_ids, "id,sire,dam,ring\nA,,,07\nB,,,7\nC,,,O7") == []


@pytest.mark.parametrize(
    ("cells", "said"),
    [
        ("A1,,,2001,,2009,,R\nA2,,,2011,,,,R", 'mark "R" of A1 (died 2009) is on A2 (born 2011)'),
        (
            "A2,,,2003,2011-05,,,R\nA1,,,2001,,,2009,R",
            'mark "R" of A1 (left 2009) is on A2 (entered 2011-05)',
        ),
    ],
)
def test_a_mark_given_again_after_death_or_departure_is_a_milder_finding(reading, cells, said):
    """Where the first bearer was surely gone, the mark was given again."""
    (finding,) = found(marks_on_several_ids, f"id,sire,dam,born,entered,died,left,mark\n{cells}")
    assert (finding.kind, finding.id) == ("mark-used-again", "A2")
    assert finding.message == f"{said} again."


@pytest.mark.parametrize("died", ["", "2011", "2009..", "[2005..2012]", "2010?/2011"])
def test_a_mark_that_may_have_been_borne_by_both_is_the_graver_finding(died):
    """Dates that leave a common day prove nothing."""
    text = f"id,sire,dam,born,died,mark\nA1,,,2001,{died},R\nA2,,,2011,,R"
    assert [each.kind for each in found(marks_on_several_ids, text)] == ["mark-on-two-ids"]


@pytest.mark.parametrize("word", ["none", "no ring", "No-Ring", "not read"])
def test_words_for_no_mark_are_one_note(reading, word):
    """A word that stands for no mark is said once, however many animals have it."""
    rows = "\n".join(f"A{number},,,{word}" for number in range(4))
    (finding,) = found(marks_on_several_ids, f"id,sire,dam,mark\n{rows}")
    assert finding.message == (
        f'"{word}" stands as the mark of 4 animals (A0 (line 2), A1 (line 3), A2 (line 4) and 1 '
        "more); it tells none of them apart."
    )
    assert finding.milder == "note"


def test_blank_marks_are_no_marks(reading):
    """Nothing recorded, and words for not known, are no mark."""
    text = "id,sire,dam,mark\nA,,,\nB,,,\nC,,,unknown\nD,,,Unknown\nE,,,?\nF,,,?"
    assert found(marks_on_several_ids, text) == []


def test_marks_that_are_given_every_year_are_said_once(reading):
    """Many shared marks are one finding for the column."""
    rows = [f"A{year}-{number},,,{number}" for year in (1, 2) for number in range(1, 61)]
    assert messages(marks_on_several_ids, "\n".join(["id,sire,dam,tattoo", *rows])) == [
        '60 marks stand for more than one animal each, for instance "1" of A1-1 (line 2) and '
        'A2-1 (line 62); "2" of A1-2 (line 3) and A2-2 (line 63); "3" of A1-3 (line 4) and '
        "A2-3 (line 64)."
    ]


@pytest.mark.parametrize("other", ["985 012 4", "985-0124", "98501-24"])
def test_a_mark_is_found_however_its_digits_are_grouped(reading, other):
    """Blanks and signs between digits do not make another mark."""
    text = f"id,sire,dam,chip\nA1,,,9850124\nA2,,,{other}\nA3,,,985124"
    assert [each.id for each in found(marks_on_several_ids, text)] == ["A2"]


# Animals entered twice

TWICE = "id,sire,dam,sex,born,name,local_id,holder\nS,,,m,,,,\nD,,,f,,,,\n"


@pytest.mark.parametrize(
    ("rows", "agreeing"),
    [
        ("B1,S,D,f,2019-05-02,Tarn,,\nB2,S,D,f,2019-05-02,TARN,,", "name"),
        ("B1,S,D,f,2019-05-02,,7,Quay\nB2,S,D,f,2019-05-02,,7,Quay", "local id and holder"),
    ],
)
def test_an_animal_entered_twice_is_a_candidate(reading, rows, agreeing):
    """Parents, day of birth, sex and a name or number in common make a candidate."""
    (finding,) = found(same_animals_twice, TWICE + rows)
    assert finding.message == (
        f"B1 (line 4) and B2 (line 5) agree in birth, parents, sex and {agreeing}."
    )
    assert (finding.kind, finding.id, finding.row) == ("same-animal-twice", "B2", 5)


@pytest.mark.parametrize(
    "rows",
    [
        "B1,S,D,f,2019-05-02,Tarn,,\nB2,S,D,f,2019-05-02,Fell,,",
        "B1,S,D,f,2019-05-02,,,\nB2,S,D,f,2019-05-02,,,",
        "B1,S,D,f,2019-05-02,(unnamed),,\nB2,S,D,f,2019-05-02,(unnamed),,",
        "B1,S,D,f,2019-05-02,Tarn,,\nB2,S,D,m,2019-05-02,Tarn,,",
        "B1,S,D,f,2019-05-02,Tarn,,\nB2,S,D,f,2019-05-03,Tarn,,",
        "B1,S,D,f,2019-05,Tarn,,\nB2,S,D,f,2019-05,Tarn,,",
        "B1,S,,f,2019-05-02,Tarn,,\nB2,S,,f,2019-05-02,Tarn,,",
        "B1,S,D,f,2019-05-02,,7,Quay\nB2,S,D,f,2019-05-02,,7,Fell",
    ],
)
def test_litter_mates_are_not_one_animal(reading, rows):
    """Without a name or number in common, two young of a litter are two animals."""
    assert found(same_animals_twice, TWICE + rows) == []


def test_a_word_on_many_litters_is_no_name(reading):
    """What stands twice in three families is rather a word for no name."""
    rows = [
        f"{day}{twin},S,D,f,2019-05-0{day},Whelp,," for day in range(1, 5) for twin in ("a", "b")
    ]
    assert found(same_animals_twice, TWICE + "\n".join(rows)) == []


# Holders


def holders(*names: str) -> str:
    """Records of unrelated animals kept by these holders."""
    rows = (f"A{number},,,{name}" for number, name in enumerate(names))
    return "\n".join(["id,sire,dam,Farm", *rows])


@pytest.mark.parametrize(
    ("usual", "other"),
    [
        ("North Quay", "north-quay"),
        ("St. Edda", "St Edda"),
        ("Saint Edda", "St Edda"),
        ("Tarn & Fell", "Tarn and Fell"),
        ("O'Hara", "OHara"),
        ("Mörby", "Morby"),
        ("Lanternbay", "Lantern Bay"),
        ("Lantern Bay", "Lanten Bay"),
        ("Lantern Bay", "Lantren Bay"),
        ("Fellmoor Farm", "Fellmoore Farm"),
    ],
)
def test_look_alike_holders_are_found(reading, usual, other):
    """Spelling variants of a holder are named, the rarer against the more frequent."""
    (finding,) = found(look_alike_holders, holders(usual, other, usual))
    assert finding == Finding(
        "look-alike-holder",
        f'holder "{other}" is spelled almost as "{usual}" (1 against 2 entries).',
        "If they are one, use one spelling; until then they count as two.",
        id="A1",
        row=3,
        column="Farm",
        found=other,
    )


@pytest.mark.parametrize(
    "names",
    [
        ("Tank 12", "Tank 13"),
        ("Barn house A", "Barn house B"),
        ("East Farm North", "West Farm North"),
        ("Room 1-12", "Room 11-2"),
        ("Northfield 1", "Northfield 2"),
        ("Aldershaw", "Eldershaw"),
        ("Mill", "Hill", "Will"),
        ("unknown", "Unknown", "?"),
    ],
)
def test_holders_told_apart_by_a_number_or_short_word_are_two(reading, names):
    """Numbers, short words and first letters tell rooms and farms apart."""
    assert found(look_alike_holders, holders(*names)) == []


def test_a_birth_place_is_compared_with_the_holders():
    """A place of birth spelled otherwise than the holder of that name is found."""
    text = "id,sire,dam,holder,born_at\nA1,,,North Quay,\nA2,,,,NorthQuay"
    assert messages(look_alike_holders, text) == [
        'born_at "NorthQuay" is spelled almost as "North Quay" (1 against 1 entry).'
    ]


def test_findings_name_the_holder_to_ask(reading):
    """A finding gets its animal's holder; for a parent without a row that of the young."""
    animals = animals_of(
        "id,sire,dam,holder\nA1,,,Quay\nA1,,,Quay\nB2,,,unknown\nC3,Stub,,Fell\n,A1,,Moor"
    )
    about = [
        Finding("a", "", "", id="A1", row=3),
        Finding("a", "", "", id="B2", row=4),
        Finding("a", "", "", id="Stub", row=5),
        Finding("a", "", "", id="Nobody", row=99),
        Finding("a", "", "", id="Nobody"),
        Finding("a", "", "", row=5),
        Finding("a", "", "", id="A1", holder="Tarn"),
    ]
    named = with_holders(about, animals)
    assert [each.holder for each in named] == ["Quay", None, "Fell", None, None, "Fell", "Tarn"]
    assert [each.id for each in named] == [each.id for each in about]


def test_without_holders_findings_stay_as_they_are():
    """Records without a holder, and no findings at all, are no trouble."""
    about = [Finding("a", "", "", id="A1", row=2)]
    assert with_holders(about, animals_of("id,sire,dam\nA1,,")) == about
    assert with_holders([], animals_of("id,sire,dam,holder\nA1,,,Quay")) == []


def test_a_merged_animal_is_asked_about_under_either_id():
    """A finding about an alias gets the holder of the animal it belongs to."""
    rules = RecordRules(decisions=(Decision("merge", "A1", also=("a1",)),))
    animals = animals_of("id,sire,dam,holder\nA1,,,Quay", rules)
    assert with_holders([Finding("a", "", "", id="a1")], animals)[0].holder == "Quay"


# All of them


@given(st.permutations(["A1,,,R1,Quay", "a1,,,R1,quay", "A01,,,R2,Quay", "B,,,R2,Fell"]))
def test_the_order_of_rows_changes_nothing_but_who_is_named_first(rows):
    """The same animals are found together, in whatever order the rows stand."""
    text = "\n".join(["id,sire,dam,mark,holder", *rows])
    (group,) = groups_alike([row.split(",")[0] for row in rows])
    assert {rows[place].split(",")[0] for place in group} == {"A1", "a1", "A01"}
    for check, number in ((look_alike_ids, 1), (marks_on_several_ids, 2), (look_alike_holders, 1)):
        assert len(found(check, text)) == number


@pytest.mark.parametrize("check", CHECKS)
def test_clean_records_are_clean(reading, check):
    """Animals numbered and marked in order, at two holders, give no finding."""
    rows = [
        f"XX{number:06d},,,{'mf'[number % 2]},2019-05-01,Name {number},{number % 9},R{number},"
        f"{'Quay' if number % 2 else 'Fell'}"
        for number in range(300)
    ]
    header = "id,sire,dam,sex,born,name,local_id,mark,holder"
    assert found(check, "\n".join([header, *rows])) == []


REAL = {
    "song-sparrow/Sparrows.csv": ("father=sire", "mother=dam"),
    "snow-vole/Pedigree.txt": ("ID_Individual=id",),
    "langhill-dairy/PedigreeRecoded.csv": (
        "animalRecoded=id",
        "sireRecoded=sire",
        "damRecoded=dam",
    ),
    "guppy-selection/pedigree.csv": (),
    "shark-bay-dolphin/life_history.csv": ("Dolphin.ID=id", "Mother.ID=dam", "Father.ID=sire"),
    "border-collie/OFA_Border_Collie.csv": (),
    "mouse-intercross-line/ped.csv": (),
    "wytham-great-tit/GTIT_pedigree_full.csv": (),
}
LOOK_ALIKES = {
    "wytham-great-tit/GTIT_pedigree_full.csv": [
        ("B068366", "BO68366"),
        ("EO66320", "E066320"),
        ("NO92600", "N092600"),
        ("B069608", "BO69608"),
        ("E066193", "EO66193"),
        ("EO66181", "E066181"),
    ]
}


@pytest.mark.parametrize("name", REAL)
def test_real_records_give_no_false_alarm(name):
    """In the open data only six rings with O for 0 are found, and nothing else is."""
    if not (DATA / name).exists():
        pytest.skip(f"open data {name} is absent")
    animals, _findings = read_animals(read_records(DATA / name, column_map=REAL[name]))
    said = [each for check in CHECKS for each in check(animals, RecordRules())]
    expected = LOOK_ALIKES.get(name, [])
    assert [each.kind for each in said] == ["look-alike-id"] * len(expected)
    assert {each.id for each in said} == {second for _first, second in expected}
