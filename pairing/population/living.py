"""Who is alive, and on which day: rules stated, so that every figure can say its set."""

from __future__ import annotations

import datetime
import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from pairing.dates import iso
from pairing.policy.rules import LivingRule
from pairing.records.fields import PLANNED_ENDS
from pairing.spelling import listed

if TYPE_CHECKING:
    import numpy.typing as npt

    from pairing.dates import DateRange
    from pairing.pedigree.descent import Pedigree
    from pairing.records.animals import Animal

    PlaceArray = npt.NDArray[np.int64]

_YEAR = 365.25
_ABOUT_A_YEAR = 400
_FAR_AHEAD = 5


@dataclass(frozen=True, slots=True)
class Living:
    """The living animals on a date.

    Attributes
    ----------
    places
        Their places in the pedigree, in file order.
    as_of
        The day as an ordinal, or None when the records hold no dates.
    rule
        Who belongs to the set, in words.
    warnings
        Sentences on what makes the set doubtful.
    """

    places: PlaceArray
    as_of: int | None
    rule: str
    warnings: tuple[str, ...]


def date_of_records(pedigree: Pedigree) -> int | None:
    """The last day of the latest year found in the records, or None without dates."""
    years = [
        each.year
        for animal in pedigree.animals
        if animal is not None
        for each in animal.dates.values()
        if each.year < datetime.MAXYEAR
    ]
    return datetime.date(max(years), 12, 31).toordinal() if years else None


def living_on(
    pedigree: Pedigree, *, as_of: DateRange | None = None, rule: LivingRule | None = None
) -> Living:
    """The living animals by the rules of `rule`.

    An animal lives when it has a row of its own, its status is blank or living, it was not
    born after the date, and it has not certainly died or left by it: a date of reduced
    precision counts from its last possible day.

    Parameters
    ----------
    as_of
        The day; by default the last day of the latest year in the records, never today.
    """
    rule = rule or LivingRule()
    day = as_of.latest if as_of else date_of_records(pedigree)
    places = [
        place
        for place in pedigree.file_order.tolist()
        if _lives(pedigree.animals[place], day, rule)
    ]
    members, narrowed = _members(pedigree, places, day, rule)
    sentence = "animals with a row, not recorded as dead or gone"
    if day is not None:
        sentence += f", on {iso(day)}"
    if rule.presumed_dead_after is not None:
        sentence += f"; presumed dead after {rule.presumed_dead_after:g} years of age"
    warnings = _warnings(pedigree, members, day)
    if as_of is None:
        warnings += _far_ahead(pedigree)
    return Living(np.array(members, dtype=np.int64), day, sentence + narrowed, tuple(warnings))


def _lives(animal: Animal | None, day: int | None, rule: LivingRule) -> bool:
    if animal is None or animal.status not in ("", "living") or animal.count == 0:
        return False
    ends = _ends(animal)
    if day is None:
        return not ends
    if any(end.latest <= day for end in ends):
        return False
    born = animal.born
    if born is None:
        return True
    if born.earliest > day:
        return False
    age_limit = rule.presumed_dead_after
    seen = animal.dates.get("last_seen")
    if seen is not None and day - seen.latest <= _YEAR:
        return True
    return age_limit is None or day <= _birthday(born.latest, age_limit)


def _ends(animal: Animal) -> list[DateRange]:
    """When the animal died or left; a departure it surely came back from does not count."""
    dates = animal.dates
    ends = [dates["died"]] if "died" in dates else []
    back = dates.get("entered")
    if "left" in dates and not (back is not None and back.earliest > dates["left"].latest):
        ends.append(dates["left"])
    return ends


def _birthday(born: int, years: float) -> float:
    """The day, as an ordinal, on which an animal born on day `born` is so many years old."""
    whole = int(years)
    first = datetime.date.fromordinal(born)
    if first.year + whole > datetime.MAXYEAR:
        return math.inf
    day = first.day if (first.month, first.day) != (2, 29) else 28
    return first.replace(year=first.year + whole, day=day).toordinal() + (years - whole) * _YEAR


def _members(
    pedigree: Pedigree, places: list[int], day: int | None, rule: LivingRule
) -> tuple[list[int], str]:
    if rule.members == "born_since" and rule.value is not None:
        first = datetime.date(rule.value, 1, 1).toordinal()
        kept = [
            place
            for place in places
            if (born := pedigree.born(place)) is not None and born.latest >= first
        ]
        return kept, f"; only those born since {rule.value}"
    if rule.members == "bred_within_years" and rule.value is not None and day is not None:
        since = day - rule.value * _YEAR
        bred: set[int] = set()
        for child in range(len(pedigree)):
            born = pedigree.born(child)
            if born is not None and since <= born.latest and born.earliest <= day:
                bred |= pedigree.parents_of(child)
        kept = [place for place in places if place in bred]
        return kept, f"; only those that bred within {rule.value} years"
    return places, ""


def _warnings(pedigree: Pedigree, members: list[int], day: int | None) -> list[str]:
    events = [
        each for animal in pedigree.animals if animal is not None for each in animal.dates.values()
    ]
    if day is None or not events:
        return [
            "The records hold no dates: every animal not recorded as dead or gone counts as living."
        ]
    past = [min(each.latest, day) for each in events if each.earliest <= day]
    warnings = []
    if past and day - max(past) > _YEAR:
        warnings.append(
            f"The newest event in the records ({iso(max(past))}) lies more than a year before "
            f"{iso(day)}: deaths since then are not known."
        )
    if any(each.earliest > day for each in events) and any(
        animal is not None and animal.status for animal in pedigree.animals
    ):
        warnings.append(
            f"The records hold events after {iso(day)}, and their status is believed as written: "
            "animals that died or left since then do not count as living on that day."
        )
    oldest = _oldest_age_at_death(pedigree)
    if oldest is not None:
        warnings += _older_than_any(pedigree, members, day, oldest)
    return warnings


def _far_ahead(pedigree: Pedigree) -> list[str]:
    """A warning when the date of the records rests on few events, far after all others."""
    events = sorted(
        (each.year, animal.id, each.text)
        for animal in pedigree.animals
        if animal is not None
        for each in animal.dates.values()
        if each.year < datetime.MAXYEAR
    )
    last = [each for each in events if events and each[0] == events[-1][0]]
    before = events[-len(last) - 1][0] if len(last) < len(events) else None
    if before is None or len(last) > 2 or last[-1][0] - before < _FAR_AHEAD:
        return []
    said = listed(f"{animal} ({text})" for _year, animal, text in last)
    return [
        f"The date of the population, the end of {last[-1][0]}, rests on {said} alone, long after "
        f"all other events ({before} and before). If that is a slip, correct it or give --as-of."
    ]


def _older_than_any(pedigree: Pedigree, members: list[int], day: int, oldest: float) -> list[str]:
    old = [
        pedigree.label(place)
        for place in members
        if (born := pedigree.born(place)) is not None and (day - born.latest) / _YEAR > oldest
    ]
    if not old:
        return []
    one = len(old) == 1
    return [
        f"{listed(old)} {'is' if one else 'are'} older than any recorded age at death "
        f"({oldest:.1f} years) and count{'s' if one else ''} as living. Check, or set "
        "presumed_dead_after in the policy."
    ]


def _oldest_age_at_death(pedigree: Pedigree) -> float | None:
    """The highest age in years at a recorded death, dates known to about a year."""
    ages = []
    for animal in pedigree.animals:
        if animal is None or "died" not in animal.dates or "born" not in animal.dates:
            continue
        born, died = animal.dates["born"], animal.dates["died"]
        if all(each.latest - each.earliest < _ABOUT_A_YEAR for each in (born, died)):
            ages.append((died.latest - born.earliest) / _YEAR)
    return max(ages) if ages else None


def yearly_losses(pedigree: Pedigree, day: int | None) -> float | None:
    """Deaths and departures a year: the mean of the last five years with records.

    Planned ends (culled, slaughtered, used) are left out. None when nothing is dated.
    """
    if day is None:
        return None
    last = datetime.date.fromordinal(day).year
    recorded: set[int] = set()
    lost: dict[int, int] = {}
    for animal in pedigree.animals:
        if animal is None:
            continue
        recorded |= {each.year for each in animal.dates.values() if each.year <= last}
        ends = [end for end in _ends(animal) if end.earliest <= day]
        if ends and animal.end_cause not in PLANNED_ENDS:
            year = min(end.year for end in ends)
            lost[year] = lost.get(year, 0) + 1
    years = sorted(recorded)[-5:]
    return sum(lost.get(year, 0) for year in years) / len(years) if years and lost else None
