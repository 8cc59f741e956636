"""The fields of a record: what each means, how its column may be spelled, which words it takes."""

from __future__ import annotations

import re
import unicodedata
from dataclasses import dataclass

MISSING_PARENT = frozenset({"", "?", ".", "na", "null", "unknown", "unk", "wild"})
"""Cells that mean "no known parent", folded; `0` too, unless an animal has that id."""

WILD_PARENT = "wild"


@dataclass(frozen=True, slots=True)
class Field:
    """One field of a record."""

    name: str
    meaning: str
    spellings: tuple[str, ...]


def _field(name: str, meaning: str, *spellings: str) -> Field:
    return Field(name, meaning, (name, *spellings))


FIELDS: dict[str, Field] = {
    field.name: field
    for field in (
        _field(
            "id",
            "the animal, unique, kept as text",
            "animal",
            "animal id",
            "studbook number",
            "studbook no",
            "registration",
            "regno",
            "ear tag",
        ),
        _field("name", "call name, shown beside the id", "house name"),
        _field("local_id", "the holder's own number"),
        _field("mark", "ring, chip or tattoo", "ring", "band", "chip", "transponder", "tattoo"),
        _field("sire", "father's id", "father"),
        _field("dam", "mother's id", "mother"),
        _field("sex", "male, female, unknown or hermaphrodite"),
        _field("born", "day of birth or hatching", "birth", "birth date", "date of birth", "dob"),
        _field("died", "day of death", "death", "death date", "date of death", "dod"),
        _field("entered", "day it came into the programme"),
        _field("left", "day it left the programme"),
        _field("last_seen", "day it was last known to live"),
        _field(
            "end_cause",
            "natural, euthanised-ill, culled, slaughtered, used or unknown",
            "cause of death",
        ),
        _field("status", "living, dead, gone or lost"),
        _field(
            "holder",
            "who keeps it: institution, farm, room or tank",
            "institution",
            "location",
            "farm",
            "tank",
        ),
        _field("born_at", "where it was born", "birth place", "place of birth"),
        _field("origin", "wild, foundation, imported, captive or unknown", "source"),
        _field(
            "line", "variety, subspecies or strain kept apart", "variety", "subspecies", "strain"
        ),
        _field("may_breed", "yes or no", "available", "breeding"),
        _field("may_breed_note", "why it may not breed"),
        _field("merit", "selection index or breeding value, higher is better", "index", "ebv"),
        _field("clone_of", "id of an identical twin or clone", "identical twin of"),
        _field("litter", "litter or clutch id"),
        _field("group", "animals bred together and not told apart", "shoal", "harem"),
        _field("count", "how many animals the row stands for", "number"),
        _field(
            "number_born",
            "young born, where the row stands for a litter",
            "young born",
        ),
        _field("number_dead", "how many of them died before weaning", "young dead"),
        _field("number_weaned", "how many of them were weaned", "young weaned"),
        _field("genetic_dam", "the donor, where the recorded dam was a recipient", "donor"),
        _field("reared_by", "foster parent", "foster"),
    )
}

HOLDER_STAND_INS = ("herd", "cage")
"""Columns taken as the holder, in this order, when no column claims the place by name."""

ASKED_ABOUT = {
    "breed": "line",
    "breeds": "line",
    "twinof": "clone_of",
    "owner": "holder",
    "breeder": "holder",
    "keeper": "holder",
    "hatched": "born",
    "hatchdate": "born",
    "gender": "sex",
}
"""Columns whose meaning is asked about and never guessed, with the field each may be."""

HINTS = {
    "born": ("birth", "born", "hatch"),
    "died": ("death", "died"),
    "sex": ("sex", "gender"),
    "count": ("noof", "numberof", "headcount"),
}
"""Words in a column's name that make us ask whether it is the field, where no column is."""

_SEX_WORDS = {
    "male": "m male 1 ♂ bull ram stallion dog cock drake gander buck boar stag tom jack sire",
    "female": "f female 2 ♀ cow heifer ewe mare bitch hen duck goose doe sow hind queen jenny dam",
    "unknown": "u unknown 0 ? na n/a unk unsexed undetermined null .",
    "hermaphrodite": "h hermaphrodite 9",
}
_CASTRATE_WORDS = (
    "steer wether gelding neutered castrate castrated barrow bullock ox capon spayed desexed"
)
SEX_WORDS: dict[str, str] = (
    {word: sex for sex, words in _SEX_WORDS.items() for word in words.split()}
    | dict.fromkeys(_CASTRATE_WORDS.split(), "male")
    | {"spayed": "female", "neutered": "unknown", "desexed": "unknown"}
)
"""Words for sex, folded, with the sex each means."""
CASTRATE_WORDS = frozenset(_CASTRATE_WORDS.split())
"""Words for sex that also say the animal may not breed."""

STATUS_WORDS = {
    "living": "living",
    "alive": "living",
    "live": "living",
    "dead": "dead",
    "died": "dead",
    "deceased": "dead",
    "gone": "gone",
    "sold": "gone",
    "exported": "gone",
    "released": "gone",
    "left": "gone",
    "lost": "lost",
    "missing": "lost",
}
ORIGIN_WORDS = {
    "wild": "wild",
    "wild caught": "wild",
    "wild-caught": "wild",
    "wild born": "wild",
    "wild-born": "wild",
    "foundation": "foundation",
    "founder": "foundation",
    "imported": "imported",
    "import": "imported",
    "captive": "captive",
    "captive born": "captive",
    "captive-born": "captive",
    "unknown": "unknown",
    "?": "unknown",
    "unk": "unknown",
}
FOUNDER_ORIGINS = frozenset({"wild", "foundation", "imported"})
END_CAUSES = frozenset({"natural", "euthanised-ill", "culled", "slaughtered", "used", "unknown"})
PLANNED_ENDS = frozenset({"culled", "slaughtered", "used"})
YES_NO_WORDS = {
    "yes": True,
    "y": True,
    "true": True,
    "1": True,
    "no": False,
    "n": False,
    "false": False,
    "0": False,
}
DATE_FIELDS = ("born", "died", "entered", "left", "last_seen")

_PUNCTUATION = re.compile(r"[\s_\-.]+")


def folded(header: str) -> str:
    """A column header with case, blanks, ``_``, ``-`` and ``.`` left out of account."""
    return _PUNCTUATION.sub("", unicodedata.normalize("NFKC", header).casefold())


SPELLINGS: dict[str, str] = {
    folded(spelling): field.name for field in FIELDS.values() for spelling in field.spellings
}
"""Folded column spelling to field."""


def tidy(text: str) -> str:
    """Text of a cell as compared: NFKC, trimmed, inner blanks folded to one."""
    if not text.isascii():
        text = unicodedata.normalize("NFKC", text)
    return " ".join(text.split())
