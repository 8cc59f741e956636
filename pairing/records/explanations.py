"""What each kind of finding means for the work: a table of text, long because there are many.

`KINDS` says how grave a kind is; here stands why it matters and how to settle it. Examples
are invented.
"""

from __future__ import annotations

from dataclasses import dataclass

RECORDS = "the records"
FACTS = "the table of --facts"
EVENTS = "the table of --events"


@dataclass(frozen=True, slots=True)
class Explanation:
    """One kind of finding explained to a keeper.

    Attributes
    ----------
    why
        Why it matters for kinship or for the plan.
    treated
        How it is taken until it is settled.
    to_do
        What to do, in a few words for a table.
    settle
        How to settle it in the file.
    example
        Rows as CSV, the header first, that give such a finding.
    message
        What is said about the example, the end perhaps left out.
    decision
        The keys of a decision in the policy that settles the example, as TOML lines; empty
        where only the file can settle it.
    example_of
        The table that the example's rows stand in.
    """

    why: str
    treated: str
    to_do: str
    settle: str
    example: str
    message: str
    decision: tuple[str, ...] = ()
    example_of: str = RECORDS


def _accept(kind: str, animal: str) -> tuple[str, ...]:
    return ('decision = "accept"', f'id = "{animal}"', f'kind = "{kind}"')


def _set(animal: str, field: str, value: str) -> tuple[str, ...]:
    return ('decision = "set"', f'id = "{animal}"', f'field = "{field}"', f'value = "{value}"')


def _drop(animal: str, parent: str) -> tuple[str, ...]:
    return ('decision = "drop-link"', f'id = "{animal}"', f'parent = "{parent}"')


def _merge(animal: str, other: str) -> tuple[str, ...]:
    return ('decision = "merge"', f'id = "{animal}"', f'also = ["{other}"]')


def _use_row(animal: str, row: int) -> tuple[str, ...]:
    return ('decision = "use-row"', f'id = "{animal}"', f"row = {row}")


_IDENTITY = {
    "duplicate-id": Explanation(
        "An animal has one sire and one dam. Two rows that name different ones give two "
        "pedigrees, and every kinship below the animal depends on which is right.",
        "Rows that say the same count once. Of fields that differ none is believed; if a parent "
        "is among them, kinship is undefined and nothing but the audit goes on.",
        "keep the right row, or give one animal another id",
        "Keep the right row and delete the other, or, if they are two animals, give one of them "
        "an id of its own and correct its young.",
        "id,sire,dam\nA1,,\nA2,,\nB7,A1,\nB7,A2,",
        'B7 has rows on lines 4, 5 that differ: sire "A1" or "A2".',
        _use_row("B7", 4),
    ),
    "missing-id": Explanation(
        "Without an id nobody can name the animal as a parent or put it in a plan.",
        "The row is left out; its parents are not counted as having this young.",
        "give the animal an id, or delete the row",
        "Give the animal an id of its own, or delete the row.",
        "id,sire,dam\nA1,,\n,A1,",
        'the row has no id (sire "A1", dam "").',
    ),
    "id-means-unknown": Explanation(
        "An animal called by a word for an unknown parent cannot be told from no parent at all, "
        "so its young lose their parent.",
        "As an animal it is kept; where the word stands as a parent, the parent is unknown.",
        "give the animal another id",
        "Give the animal another id, in its own row and in those of its young.",
        "id,sire,dam\nNA,,\nB1,NA,",
        '"NA" is an animal\'s id and also a word for an unknown parent; as a parent it is read '
        "as unknown.",
    ),
    "look-alike-id": Explanation(
        "Ids that differ only in capitals, leading zeros or letters that look like digits are "
        "often one animal typed in two ways. Its young then seem unrelated to each other.",
        "The ids are kept apart: 007 is not 7.",
        "if they are one animal, use one spelling",
        "If they are one animal, use one spelling throughout.",
        "id,sire,dam\nB07,,\nb07,,\nC1,B07,",
        '"b07" (line 3) is spelled almost as "B07" (line 2).',
        _merge("B07", "b07"),
    ),
    "look-alike-holder": Explanation(
        "One holder under two names splits its animals: moves are planned between a place and "
        "itself, and places are counted twice.",
        "The names count as two holders.",
        "if they are one holder, use one name",
        "Use one spelling of the holder's name in every row.",
        "id,sire,dam,holder\nA1,,,North Quay\nA2,,,North Quay\nA3,,,north-quay",
        'holder "north-quay" is spelled almost as "North Quay".',
        _set("A3", "holder", "North Quay"),
    ),
    "mark-on-two-ids": Explanation(
        "A ring or chip is put on one animal. Two ids with one mark may be one animal entered "
        "twice, whose young then seem less related than they are.",
        "The ids are kept apart.",
        "see which mark is right, or merge the ids",
        "Read the mark on the animal again; correct it, or enter the animal once.",
        "id,sire,dam,mark\nA1,,,R-411\nA2,,,R-411",
        'A1 (line 2) and A2 (line 3) carry one mark, "R-411".',
        _merge("A1", "A2"),
    ),
    "mark-used-again": Explanation(
        "A mark given again after its bearer died is legal in some schemes, but a parent written "
        "by its mark may then mean either animal.",
        "Both animals keep the mark; parents are looked up by id, not by mark.",
        "see that young are with the right one of the two",
        "See that young written under this mark have the right parent.",
        "id,sire,dam,born,died,mark\nA1,,,2001,2009,R-12\nA2,,,2011,,R-12",
        'mark "R-12" of A1 (died 2009) is on A2 (born 2011) again.',
        _accept("mark-used-again", "A2"),
    ),
    "spreadsheet-damage": Explanation(
        "Spreadsheets turn ids such as 1E05 or 3-4 into numbers and dates. The id no longer "
        "matches the one that its young name as their parent.",
        "The text is kept as the file has it.",
        "restore the id; make the column text",
        "Restore the id from the source, and format the column as text before typing.",
        "id,sire,dam\n1E+05,,\nB1,100000,",
        '"1E+05" looks like an id that a spreadsheet turned into a number.',
        _merge("100000", "1E+05"),
    ),
    "same-animal-twice": Explanation(
        "Two rows with one birth date, one pair of parents, one sex and one name may be one "
        "animal that got a second number. It would count twice among the living.",
        "They count as two animals.",
        "if they are one animal, merge the ids",
        "If they are one animal, keep one row and use its id throughout.",
        "id,name,sire,dam,sex,born\nS,,,,m,2010\nD,,,,f,2010\n"
        "B1,Brin,S,D,f,2019-05-02\nB2,Brin,S,D,f,2019-05-02",
        "B1 (line 4) and B2 (line 5) agree in birth, parents, sex and name.",
        _merge("B1", "B2"),
    ),
}

_PARENTS = {
    "own-parent": Explanation(
        "No animal is its own parent; mostly a number was typed one column too far. Kinship with "
        "such a link has no value.",
        "Kinship is undefined: nothing but the audit goes on.",
        "correct the parent, or leave it blank",
        "Correct the parent, or leave it blank if it is not known.",
        "id,sire,dam\nA1,,\nB1,B1,A1",
        "B1 is recorded as its own sire.",
        _drop("B1", "sire"),
    ),
    "loop": Explanation(
        "Going from child to parent must lead back in time. Where it comes round to the same "
        "animal, one of the links is wrong and kinship has no value.",
        "Kinship is undefined: nothing but the audit goes on. The message names every animal "
        "of the loop, in order.",
        "correct the one wrong parent",
        "Find the one link that cannot be, mostly by the dates of birth, and correct it or "
        "leave it blank.",
        "id,sire,dam\nA1,C1,\nB1,A1,\nC1,B1,",
        "A1 is a parent of B1 is a parent of C1 is a parent of A1: an animal cannot be its own "
        "ancestor.",
        _drop("A1", "sire"),
    ),
    "unreadable-parent": Explanation(
        "A list of possible parents stands for chances that kinship is weighed by. If it cannot "
        "be read, so cannot the descent.",
        "Kinship is undefined: nothing but the audit goes on.",
        "write S12|S15 or S12:0.7|S15:0.3",
        "Write S12|S15 for equal chances, or S12:0.7|S15:0.3 for chances that add up to at most 1.",
        "id,sire,dam\nS12,,\nS15,,\nB1,S12:0.9|S15:0.9,",
        '"S12:0.9|S15:0.9" cannot be read as a list of possible parents of B1.',
        _set("B1", "sire", "S12|S15"),
    ),
    "parent-without-row": Explanation(
        "Of a parent that is only named, the ancestors are unknown: its young may be related to "
        "more animals than the records show.",
        "It counts as an animal of unknown ancestry that is not living, and not as a founder.",
        "add a row if more is known; else nothing",
        "Add a row for it if more is known; say origin wild, foundation or imported if it is a "
        "founder. If the name is a misprint, correct it.",
        "id,sire,dam\nA1,,\nB1,A1,D9",
        'dam "D9" of B1 has no row of its own.',
        _accept("parent-without-row", "D9"),
    ),
    "sire-is-dam": Explanation(
        "One animal as both parents makes young as inbred as a selfed plant, F at least 0.5. In "
        "most animals it is a slip of the column.",
        "Both links are used as recorded.",
        "correct one parent, or allow selfing",
        "Correct one of the two. Where animals do fertilise themselves, say selfing = true in "
        "the table [records] of the policy.",
        "id,sire,dam\nA1,,\nB1,A1,A1",
        "B1 has A1 as its sire and as its dam.",
        _drop("B1", "dam"),
    ),
    "both-sexes": Explanation(
        "An animal that sires young here and bears them there is mostly two animals with one "
        "number, or a slip of the column. Kinship does not need the sex; pairing does.",
        "Both links are used. The animal is not paired until it is settled.",
        "correct one role, or say hermaphrodite",
        "Correct the one role that is wrong; if both are right, record the sex as hermaphrodite.",
        "id,sire,dam\nA1,,\nB1,A1,\nB2,,A1",
        "A1 is the sire of B1 (line 3) and the dam of B2 (line 4).",
        _set("A1", "sex", "hermaphrodite"),
    ),
    "sex-against-role": Explanation(
        "A male as a dam, or a female as a sire: either the sex or the parent is wrong. "
        "Kinship does not need the sex; pairing does.",
        "The link is used. The animal is not paired until it is settled; among several possible "
        "parents, one of the wrong sex is set aside.",
        "correct the sex or the parent",
        "Correct the sex of the animal or the parent of its young.",
        "id,sire,dam,sex\nA1,,,female\nB1,A1,,male",
        'sire "A1" of B1 is recorded as female (line 2).',
        _set("A1", "sex", "male"),
    ),
    "sex-not-recorded": Explanation(
        "An animal of unknown sex is counted and not paired, though its role as a parent tells "
        "its sex.",
        "The link is used. The animal is not paired until its sex is recorded.",
        "record the sex that the role tells",
        "Record the sex.",
        "id,sire,dam,sex\nA1,,,\nB1,A1,,male",
        "A1 is the sire of B1 (line 3), but its sex is not recorded.",
        _set("A1", "sex", "male"),
    ),
    "castrate-as-parent": Explanation(
        "A castrated animal with young is a wrong parent, or was castrated later than its young "
        "were got.",
        "The link is used; the animal may not breed from now on.",
        "correct the parent, or say it was entire then",
        "Correct the parent; if the animal was still entire, accept the finding.",
        "id,sire,dam,sex\nA1,,,wether\nB1,A1,,ewe",
        'sire "A1" of B1 is recorded as "wether" (line 2).',
        _accept("castrate-as-parent", "A1"),
    ),
    "recipient-dam": Explanation(
        "After a transfer of embryos the animal that gives birth is no kin of the young. If it "
        "stands as the dam, all kinships through it are wrong.",
        "The recorded dam is used, as nothing else is known.",
        "record the donor as genetic_dam",
        "Record the donor in a column genetic_dam, or unknown there if nobody knows her; the dam "
        "that gave birth may stay where it is.",
        "id,sire,dam,recipient\nD1,,,\nD2,,,\nB1,,D1,yes",
        'B1 has recipient "yes" and no genetic dam; its dam D1 may only have borne it.',
        _set("B1", "genetic_dam", "D2"),
    ),
    "possible-parent-impossible": Explanation(
        "Of several possible parents one cannot be: dead, not yet born, too young, or of the "
        "wrong sex. Its share of the chances belongs to the others.",
        "It is set aside before the chances are weighed, and kept in the record.",
        "take it from the list, or correct its dates",
        "Take it from the list, or correct the dates or the sex that rule it out.",
        "id,sire,dam,sex,born,died\nS1,,,m,2010,2014\nS2,,,m,2010,\nB1,S1|S2,,f,2020,",
        'possible sire "S1" of B1 died 2014, before B1 could be conceived; it is set aside.',
        _set("B1", "sire", "S2"),
    ),
    "clone-without-row": Explanation(
        "A clone is one genotype with its original; without the original it cannot be placed.",
        "The animal keeps the parents of its own row.",
        "add the original, or correct the id",
        "Add a row for the original, or correct the id in the column.",
        "id,sire,dam,clone_of\nA1,,,\nB1,A1,,X9",
        'B1 is a clone of "X9", which is not in the records.',
        _set("B1", "clone_of", ""),
    ),
    "clone-differs": Explanation(
        "A clone or identical twin has the parents, the sex and, for twins, the birth of its "
        "original. Where they differ it may be a litter-mate only, half as related.",
        "The two count as one genotype, with the parents of the original.",
        "correct the row, or clear clone_of",
        "Correct the row that is wrong, or clear clone_of if they are litter-mates.",
        "id,sire,dam,sex,clone_of\nA1,,,m,\nA2,,,m,\nB1,A1,,f,\nB2,A2,,f,B1",
        'B2 is a clone of B1, but its sire is "A2" and not "A1".',
        _set("B2", "clone_of", ""),
    ),
    "origin-with-one-parent": Explanation(
        "A founder comes from outside and has no recorded parents. One parent recorded and one "
        "blank with such an origin leaves open which is meant.",
        "The recorded parent is used; the other is unknown ancestry.",
        "correct the origin, or the parent",
        "Correct the origin if it was bred here; clear the parent if it came from outside.",
        "id,sire,dam,origin\nA1,,,wild\nB1,A1,,wild",
        "B1 has origin wild and one recorded parent, A1.",
        _set("B1", "origin", "captive"),
    ),
    "doubtful-founder": Explanation(
        "Founders count as unrelated to everybody. An animal born in the programme whose parents "
        "were not written down is mostly kin of others, and diversity is overrated.",
        "It counts as a founder, since no column says otherwise.",
        "add a column origin that tells founders",
        "Add a column origin: wild, foundation or imported for true founders, captive or unknown "
        "for the others.",
        "id,sire,dam,born\nA1,,,2001\nB1,A1,,2005\nC1,,,2009",
        "C1 (born 2009) counts as a founder only because both parents are blank.",
        _set("C1", "origin", "unknown"),
    ),
    "founder-with-parents": Explanation(
        "An animal from outside mostly has no recorded parents; either it was bred here, or its "
        "parents are known from elsewhere.",
        "The parents are used; it does not count as a founder.",
        "nothing, if the parents are right",
        "Nothing, if the parents are right; else clear them, or correct the origin.",
        "id,sire,dam,origin\nA1,,,wild\nA2,,,wild\nB1,A1,A2,imported",
        "B1 has origin imported and recorded parents; the parents are used.",
        _accept("founder-with-parents", "B1"),
    ),
}

_PARENT_AGES = {
    "parent-younger": Explanation(
        "A parent is older than its young. One of the dates or the parent is wrong, and kinship "
        "follows the parent as recorded.",
        "The link is used; among several possible parents such a one is set aside.",
        "correct a date or the parent",
        "Correct the date of birth that is wrong, or the parent.",
        "id,sire,dam,born\nA1,,,2019\nB1,A1,,2015",
        "sire A1 of B1 was born 2019 (line 2), B1 itself 2015.",
        _drop("B1", "sire"),
    ),
    "parent-too-young": Explanation(
        "A parent below the age at which births are believed is mostly another animal with a "
        "like number, or has a wrong date.",
        "The link is used; among several possible parents such a one is set aside.",
        "correct a date or the parent, or accept the age",
        "Correct a date or the parent. The ages believed stand in [parent_age] of the policy; "
        "without that table no age is found too low or too high.",
        "id,sire,dam,sex,born\nA1,,,f,2019-03\nB1,,A1,m,2019-09",
        "dam A1 of B1 was at most 6 months old at its birth; births are believed from 2 years.",
        _accept("parent-too-young", "B1"),
    ),
    "parent-too-old": Explanation(
        "A parent above the age at which births are believed is mostly an older animal whose "
        "number was given again, or has a wrong date.",
        "The link is used.",
        "correct a date or the parent, or accept the age",
        "Correct a date or the parent. The ages believed stand in [parent_age] of the policy; "
        "without that table no age is found too low or too high.",
        "id,sire,dam,sex,born\nA1,,,f,1980\nB1,,A1,m,2019",
        "dam A1 of B1 was at least 38 years old at its birth; births are believed up to 20 years.",
        _accept("parent-too-old", "B1"),
    ),
    "parent-dead": Explanation(
        "A dam dead before the birth, or a sire dead before the conception, cannot be the "
        "parent, unless semen was stored or the female keeps it.",
        "The link is used; among several possible parents such a one is set aside.",
        "correct a date or the parent, or accept it",
        "Correct a date or the parent. Where females keep sperm, say sperm_storage in [records] "
        "of the policy; where semen is stored, list the sire under [[gametes]]. gestation in "
        "[records] tells how long before the birth a sire may have died; without it, 400 days "
        "are believed.",
        "id,sire,dam,sex,born,died\nA1,,,f,2010,2015-02-01\nB1,,A1,m,2016-04-01,",
        "dam A1 of B1 died 2015-02-01, before B1 was born on 2016-04-01.",
        _accept("parent-dead", "B1"),
    ),
    "parent-left": Explanation(
        "A parent that had left before the conception cannot have bred here; the parent, or the "
        "date it left, may be wrong.",
        "The link is used. One that came back, or was seen later, is not found.",
        "correct a date or the parent, or accept it",
        "Correct a date or the parent; if the young were got elsewhere, accept it.",
        "id,sire,dam,sex,born,left\nA1,,,m,2010,2014-05-01\nB1,A1,,f,2018-04-01,",
        "sire A1 of B1 left 2014-05-01, long before B1 was born on 2018-04-01.",
        _accept("parent-left", "B1"),
    ),
}

_DATES = {
    "death-before-birth": Explanation(
        "Ages and the living on a date come from these dates; one of them is wrong.",
        "Both dates are kept as recorded; the animal does not count as living.",
        "correct one of the two dates",
        "Correct one of the two dates.",
        "id,sire,dam,born,died\nA1,,,2019,2015",
        "A1 died 2015 but was born 2019.",
        _set("A1", "died", "2019"),
    ),
    "left-before-born": Explanation(
        "An animal cannot leave before it is born; who counts as living depends on both dates.",
        "Both dates are kept as recorded; the animal does not count as living.",
        "correct one of the two dates",
        "Correct one of the two dates.",
        "id,sire,dam,born,left\nA1,,,2019,2015",
        "A1 left 2015 but was born 2019.",
        _set("A1", "left", ""),
    ),
    "entered-before-born": Explanation(
        "An animal cannot come into the programme before it is born, unless it came as an egg or "
        "in its dam.",
        "Both dates are kept as recorded; kinship does not use them.",
        "correct one of the two dates, or accept it",
        "Correct one of the two dates; accept it where the animal came as an egg or in its dam.",
        "id,sire,dam,born,entered\nA1,,,2019,2015",
        "A1 entered 2015 but was born 2019.",
        _set("A1", "entered", "2019"),
    ),
    "event-after-death": Explanation(
        "A dead animal is not seen, does not come and does not leave. Either it is living, and "
        "could be paired, or it was mistaken for another, or a date is wrong.",
        "Both dates are kept as recorded; it counts as dead. To have left up to 31 days after "
        "the death is not found: books are often closed so.",
        "correct one of the two dates",
        "Correct the date of death or the later date.",
        "id,sire,dam,born,died,left\nA1,,,2010,2015,2018",
        "A1 died 2015 but left 2018.",
        _set("A1", "left", ""),
    ),
    "date-far-ahead": Explanation(
        "A date years after all others is mostly a misprint. Without --as-of the population is "
        "counted on the latest year found, so one such date ages everybody.",
        "It is kept as recorded.",
        "correct the date; or give --as-of",
        "Correct the date. Until then give the day with --as-of or as_of in the policy.",
        "id,sire,dam,born\nA1,,,2018\nA2,,,2019\nA3,,,2109",
        "A3: born 2109 lies 90 years after every other date.",
        _set("A3", "born", "2019"),
    ),
    "unreadable-date": Explanation(
        "Ages, the living on a date, and every check of order need the date.",
        "It counts as unknown.",
        "write 2019-05-31, 2019-05 or 2019",
        "Write the day as 2019-05-31, the month as 2019-05 or the year as 2019; ~2019 if it is "
        "about then.",
        "id,sire,dam,born\nA1,,,202-05-05",
        'A1: born "202-05-05" is not understood and counts as unknown.',
        _set("A1", "born", "2020-05-05"),
    ),
    "ambiguous-date": Explanation(
        "03/04/2019 is in April or in March, and no date of the column settles which. Ages may "
        "be wrong by months and the order of births with them.",
        "It counts as some day between the two readings.",
        "say date_order in the policy, or write ISO dates",
        'Say date_order = "day-first" or "month-first" in the table [records] of the policy, or '
        "write dates as 2019-04-03.",
        "id,sire,dam,born\nA1,,,03/04/2019\nA2,,,05/06/2019",
        'A1: born "03/04/2019" may be 2019-03-04 or 2019-04-03.',
        _set("A1", "born", "2019-04-03"),
    ),
    "two-digit-year": Explanation(
        "The century is missing: 19 may be 1919 or 2019, which turns parents and young round.",
        "A century is assumed, the one that the message names.",
        "write the year with four digits",
        "Write the year with four digits.",
        "id,sire,dam,born\nA1,,,31/05/19",
        'A1: born "31/05/19" has a year of two digits and counts as 2019-05-31.',
        _set("A1", "born", "2019-05-31"),
    ),
    "serial-date": Explanation(
        "Spreadsheets keep dates as numbers of days, and some programs write these out. Which "
        "day is meant depends on the program that wrote it.",
        "It is read as the day it stands for in most spreadsheets.",
        "format the column as dates and save again",
        "Format the column as dates in the spreadsheet, save again, and see that they are right.",
        "id,sire,dam,born\nA1,,,43616",
        'A1: born "43616" is a spreadsheet\'s number of a day and counts as 2019-05-31.',
        _set("A1", "born", "2019-05-31"),
    ),
    "status-against-dates": Explanation(
        "The status says living and a date says dead or gone. Who may be paired depends on it.",
        "The animal does not count as living. To have left is a note only: it may live elsewhere.",
        "correct the status or the date",
        "Correct the status or the date.",
        "id,sire,dam,born,died,status\nA1,,,2010,2015,living",
        "A1 has status living and died 2015.",
        _set("A1", "status", "dead"),
    ),
}

_LITTERS = {
    "litter-dates-differ": Explanation(
        "Litter-mates are born within about three days. If they were not, they may not share a "
        "sire either.",
        "They stay litter-mates; where sires are shared in a litter, they share theirs.",
        "correct a date or the litter",
        "Correct the date, or give one of them another litter.",
        "id,sire,dam,litter,born\nD,,,,2015\nB1,,D,L1,2019-05-01\nB2,,D,L1,2019-08-01",
        "litter L1 was born on days from 2019-05-01 to 2019-08-01.",
        _set("B2", "litter", ""),
    ),
    "litter-too-large": Explanation(
        "More young than a litter can have: two litters under one name, or a misread number. "
        "Sires shared in the litter would be shared by too many.",
        "It is kept as one litter. It is looked for only where the policy says largest_litter.",
        "split the litter, or raise largest_litter",
        "Give the young of the other litter another name; the largest believed stands in the "
        "policy as largest_litter in [records].",
        "id,sire,dam,litter\nD,,,\nB1,,D,L1\nB2,,D,L1\nB3,,D,L1",
        "litter L1 has 3 young; at most 2 are believed.",
        _accept("litter-too-large", "B1"),
    ),
    "parent-perhaps-another": Explanation(
        "A parent that no row has may be one that is written otherwise: without its zeros, with "
        "the letter O, by one of two registrations that its row holds together, or as one of "
        "several in words. Its descent is lost then.",
        "It counts as an animal of unknown ancestry.",
        "write the parent as its row does, or merge",
        "Write the id as its row has it; of several possible parents write A|B.",
        "id,sire,dam\n0012,,\nB1,12,",
        'sire "12" of B1 has no row of its own. "0012" is spelled almost alike.',
        ('decision = "merge"', 'id = "0012"', 'also = "12"'),
    ),
    "nothing-but-an-id": Explanation(
        "A heading such as 1990s, or a total below the table, becomes an animal when the table is "
        "read; it would count as a living founder with the rarest genes.",
        "It counts as an animal.",
        "delete the row if it is no animal",
        "Delete the row, or fill in what is known of the animal.",
        "id,sire,dam,sex,born\nA1,,,m,2015\nTotal 1,,,,",
        "Total 1 has an id and nothing else in its row, and is nobody's parent.",
        _accept("nothing-but-an-id", "Total 1"),
    ),
    "litter-numbers-disagree": Explanation(
        "A row that stands for a litter counts for so many animals as were weaned, or were born "
        "and did not die. Numbers that cannot be right together give a wrong size of population.",
        "The number weaned counts, else those born less those dead.",
        "correct the numbers",
        "Correct the number born, dead or weaned.",
        "id,sire,dam,young born,young dead,young weaned\nL1,,,4,3,2",
        "L1: of 4 born, 3 died and 2 were weaned.",
        _accept("litter-numbers-disagree", "L1"),
    ),
    "litters-too-close": Explanation(
        "A dam cannot bear again before a gestation has passed: one of the litters, or its date, "
        "is another's.",
        "Both links are used. It is looked for only where the policy says gestation in [records].",
        "correct a date or a dam, or accept it",
        "Correct a date or the dam. If she may carry two litters at once, accept it.",
        "id,sire,dam,litter,born\nD,,,,2015\nB1,,D,L1,2019-05-01\nB2,,D,L2,2019-05-20",
        "dam D bore B1 on 2019-05-01 and B2 on 2019-05-20, less than a gestation apart.",
        _accept("litters-too-close", "B2"),
    ),
    "litter-dams-differ": Explanation(
        "Young of one litter have one dam. Two dams mean a fostered young, or one name for two "
        "litters.",
        "Each keeps the dam of its own row; they are not taken for litter-mates.",
        "correct a dam or the litter",
        "Correct the dam (a foster dam belongs in reared_by), or give one of them another litter.",
        "id,sire,dam,litter\nD1,,,\nD2,,,\nB1,,D1,L1\nB2,,D2,L1",
        'litter L1 has young of the dams "D1" and "D2".',
        _set("B2", "litter", ""),
    ),
    "line-broken": Explanation(
        "A brother-sister line is as inbred as its generations tell only if each pair are full "
        "sibs. One other mating starts the count again.",
        "The parents are used as recorded. A line is taken for such a one after three "
        "generations, with at least four of five matings between full sibs.",
        "correct a parent, or note the break",
        "Correct the parent; if the mating was made, accept it, and the line counts from there.",
        "id,sire,dam,line\nA1,,,k\nA2,,,k\nB1,A1,A2,k\nB2,A1,A2,k\nC1,B1,B2,k\nC2,B1,B2,k\n"
        "D1,C1,C2,k\nD2,C1,C2,k\nE1,D1,D2,k\nE2,D1,D2,k\nF1,E1,E2,k\nF2,E1,D2,k",
        "parents E1 and D2 of F2 are not full sibs, as line k has them before: D2 is the dam of "
        "E1.",
        _accept("line-broken", "F2"),
    ),
    "line-differs": Explanation(
        "Lines are kept apart; an animal with a parent of another line is a cross, or its line "
        "or its parent is wrong.",
        "The parents are used; the animal is planned in the line of its own row.",
        "correct the line or the parent",
        "Correct the line or the parent; a permitted cross is accepted.",
        "id,sire,dam,line\nA1,,,hill\nA2,,,dale\nB1,A1,A2,hill",
        "B1 is of line hill, its dam A2 of line dale.",
        _accept("line-differs", "B1"),
    ),
    "group-row": Explanation(
        "A row for a shoal or a batch stands for animals that are not told apart: its kinship is "
        "a mean, and none of them can be named in a pair.",
        "Each of its animals counts among the living; kinship is that of one drawn at random. "
        "The group is not paired.",
        "see that the count is right",
        "Nothing, if the number is right; give an animal that is told apart a row of its own.",
        "id,sire,dam,count\nA1,,,1\nT4,,A1,40",
        "T4 stands for 40 animals.",
        _accept("group-row", "T4"),
    ),
    "count-unreadable": Explanation(
        "How many animals a row stands for is needed to count the living.",
        "The row counts as one animal.",
        "write a whole number, or 12.15.3",
        "Write a whole number of animals, or males.females.unknown such as 12.15.3.",
        "id,sire,dam,count\nT4,,,about 40",
        'T4: count "about 40" is not understood and counts as 1.',
        _set("T4", "count", "40"),
    ),
}

_TABLES = {
    "extra-cells": Explanation(
        "With a cell too many, the cells of the row may stand under the wrong headings, parents "
        "too.",
        "Kinship is undefined: nothing but the audit goes on.",
        "quote the cell that holds the delimiter",
        "Put quotes around a cell that holds the delimiter, or take out the cell too many.",
        "id,sire,dam\nA1,,\nB1,A1,,brown, small",
        "the row has 5 cells, the header 3.",
    ),
    "unreadable-sex": Explanation(
        "An animal of unknown sex is counted and not paired.",
        "It counts as of unknown sex.",
        "write male, female, hermaphrodite or unknown",
        "Write male, female, hermaphrodite or unknown.",
        "id,sire,dam,sex\nA1,,,boy",
        'A1: sex "boy" is not understood and counts as unknown.',
        _set("A1", "sex", "male"),
    ),
    "unreadable-value": Explanation(
        "A cell that says something in words the program does not know says nothing to it: a "
        "status may keep a dead animal among the living.",
        "It counts as blank.",
        "use a word that is understood",
        "Use one of the words that the message or the documentation of the column names.",
        "id,sire,dam,status\nA1,,,asleep",
        'A1: status "asleep" is not understood and counts as unknown.',
        _set("A1", "status", "living"),
    ),
    "test-unreadable": Explanation(
        "A test result tells who may carry a condition. One that is not understood leaves the "
        "animal as untested.",
        "The animal counts as not tested.",
        "write free, carrier or affected",
        "Write free, carrier or affected.",
        "id,sire,dam,greycoat_test\nA1,,,positive-ish",
        'A1: greycoat_test "positive-ish" is not understood; A1 counts as not tested.',
        _accept("test-unreadable", "A1"),
    ),
    "asked-about": Explanation(
        "A heading may mean several things: a breed may be a line, a breeder is not always a "
        "holder, a twin is mostly a litter-mate. A wrong guess would change the plan.",
        "The column is carried along and not used.",
        "say what the column is with --map",
        "Say --map 'breed=line' if it is the line, --map 'breed=' if it is not; or write the same "
        "under map in [records] of the policy.",
        "id,sire,dam,breed\nA1,,,hill",
        '"breed" might be line (variety, subspecies or strain kept apart); it is carried along '
        "and not used.",
    ),
    "column-passed-over": Explanation(
        "Two columns claim one field and only one can be it. The wrong one gives wrong holders, "
        "dates or names.",
        "The one named in the message is used; the other is carried along.",
        "if the other is right, say so with --map",
        "If the other column is the right one, say --map 'location=holder', or write the same "
        "under map in [records] of the policy.",
        "id,sire,dam,holder,location\nA1,,,North Quay,tank 2",
        '"location" could also be holder; "holder" is used.',
    ),
    "facts-disagree": Explanation(
        "The second table says something else than the records. Which one is right decides on "
        "parents, dates or sex.",
        "The records are used.",
        "correct the table that is wrong",
        "Correct the one that is wrong. To use what the second table says, a decision may set "
        "it; to keep what the records say, one accepts the finding.",
        "id,born\nA1,2018",
        'A1: born is "2018" in facts.csv (line 2); the records\' own "2019" is used.',
        _accept("facts-disagree", "A1"),
        FACTS,
    ),
    "fact-without-animal": Explanation(
        "A fact or an event about an id that the records do not have is lost, mostly for a "
        "spelling; an animal that died or moved then stays where it was.",
        "It is not used.",
        "correct the id, or add the animal",
        "Correct the id in one of the tables, or add a row for the animal.",
        "id,born\nA01,2018",
        "facts.csv has rows about 1 id without a row in the records: A01 (perhaps A1) (line 2).",
        example_of=FACTS,
    ),
    "event-unreadable": Explanation(
        "An event without a date or a word that is understood is lost: an animal that died or "
        "moved stays where it was.",
        "It is not used.",
        "correct the date or the word",
        "Correct the date, or the word for what happened.",
        "id,date,event,from,to\nA1,2018-05-01,sulked,North Quay,",
        'events.csv: the event "sulked" is not known; 1 such row is not used (line 2).',
        example_of=EVENTS,
    ),
    "events-disagree": Explanation(
        "Events that contradict each other or the records leave open where an animal is, or "
        "whether it lives.",
        "Of births and deaths the date in the records is used, and of several events the first; "
        "of holders the one that the latest event names.",
        "correct the event or the records",
        "Correct the event, or the date in the records.",
        "id,date,event,from,to\nA1,2018-05-01,moved,,North Quay\n"
        "A1,2019-05-01,moved,East Pier,South Mole",
        "A1: by events.csv (line 3) it left East Pier on 2019-05-01, but it was at North Quay "
        "until then.",
        _accept("events-disagree", "A1"),
        EVENTS,
    ),
    "decision-without-effect": Explanation(
        "A decision in the policy that meets nothing may name an animal by a wrong id, or the "
        "records have been mended since.",
        "Nothing is changed by it, and it is not counted among those that were applied.",
        "correct the decision, or take it out",
        "Correct the id or the line in the decision, or take it out of the policy.",
        "id,sire,dam\nA1,,\nB1,A1,",
        'decision 1 (drop-link B9) changes nothing: there is no row with the id "B9".',
    ),
}

EXPLANATIONS: dict[str, Explanation] = {
    **_IDENTITY,
    **_PARENTS,
    **_PARENT_AGES,
    **_DATES,
    **_LITTERS,
    **_TABLES,
}
"""Every kind of finding explained; the same keys as `KINDS`."""
