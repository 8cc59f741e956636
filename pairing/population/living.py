"""Who is alive, and on which day: rules stated, so that every figure can say its set."""

from __future__ import annotations

import datetime
import math
from collections import Counter
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
    from pairing.records.animals import Animals

    PlaceArray = npt.NDArray[np.int64]
    BoolArray = npt.NDArray[np.bool_]

_YEAR = 365.25
_ABOUT_A_YEAR = 400
_FAR_AHEAD = 5
_NEVER = datetime.MAXYEAR + 1


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
    years = [each.year for each, _number in _events(pedigree) if each.year < datetime.MAXYEAR]
    return datetime.date(max(years), 12, 31).toordinal() if years else None


def _events(pedigree: Pedigree) -> list[tuple[DateRange, int]]:
    """Every distinct date in the records, with the number of animals that have it."""
    return [each for dates in pedigree.view.dates.values() for each in dates.distinct]


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
    alive = _alive(pedigree.view, day, rule)
    narrowed = _narrow(pedigree, alive, day, rule)
    sentence = "animals with a row, not recorded as dead or gone"
    if day is not None:
        sentence += f", on {iso(day)}"
    if rule.presumed_dead_after is not None:
        sentence += f"; presumed dead after {rule.presumed_dead_after:g} years of age"
    members = np.flatnonzero(alive)
    warnings = _warnings(pedigree, members, day)
    if as_of is None:
        warnings += _far_ahead(pedigree)
    places = pedigree.file_order[members].astype(np.int64)
    return Living(places, day, sentence + narrowed, tuple(warnings))


def _alive(view: Animals, day: int | None, rule: LivingRule) -> BoolArray:
    """Whether each animal of the view lives on a day."""
    alive = np.ones(len(view), dtype=bool)
    if "status" in view.values:
        alive &= view.values["status"].where(lambda value: value in ("", "living"))
    if "count" in view.values:
        alive &= view.values["count"].where(lambda value: value != 0)
    died, left = view.dates.get("died"), view.dates.get("left")
    if died is not None:
        alive &= ~died.known if day is None else died.latest > day
    if left is not None:
        gone = left.known if day is None else left.latest <= day
        alive &= ~(gone & ~_came_back(view))
    born = view.dates.get("born")
    if day is None or born is None:
        return alive
    alive &= born.earliest <= day
    if rule.presumed_dead_after is not None:
        limit = rule.presumed_dead_after
        last_days = [
            math.inf if each is None else _birthday(each.latest, limit)
            for each in born.reading.values
        ]
        too_old = np.array(last_days, dtype=np.float64)[born.reading.codes] < day
        seen = view.dates.get("last_seen")
        if seen is not None:
            too_old &= ~(seen.known & (day - seen.latest.astype(np.int64) <= _YEAR))
        alive &= ~too_old
    return alive


def _came_back(view: Animals) -> BoolArray:
    """Whether an animal surely entered again after it left."""
    left, entered = view.dates["left"], view.dates.get("entered")
    if entered is None:
        return np.zeros(len(view), dtype=bool)
    back: BoolArray = entered.known & left.known & (entered.earliest > left.latest)
    return back


def _birthday(born: int, years: float) -> float:
    """The day, as an ordinal, on which an animal born on day `born` is so many years old."""
    whole = int(years)
    first = datetime.date.fromordinal(born)
    if first.year + whole > datetime.MAXYEAR:
        return math.inf
    day = first.day if (first.month, first.day) != (2, 29) else 28
    return first.replace(year=first.year + whole, day=day).toordinal() + (years - whole) * _YEAR


def _narrow(pedigree: Pedigree, alive: BoolArray, day: int | None, rule: LivingRule) -> str:
    """Leave only the members that the rule wants, and say so."""
    view = pedigree.view
    born = view.dates.get("born")
    if rule.members == "born_since" and rule.value is not None:
        first = datetime.date(rule.value, 1, 1).toordinal()
        alive &= born.known & (born.latest >= first) if born is not None else False
        return f"; only those born since {rule.value}"
    if rule.members == "bred_within_years" and rule.value is not None and day is not None:
        bred = np.zeros(len(view.names) + 2, dtype=bool)
        if born is not None:
            since = day - rule.value * _YEAR
            recent = born.known & (born.latest >= since) & (born.earliest <= day)
            for parents in (view.sire, view.dam):
                bred[parents[recent & (parents >= 0)]] = True
            for (_role, child), parts in view.possible.items():
                if recent[child]:
                    bred[[view.names.find(name) for name, _chance in parts]] = True
        alive &= bred[: len(view)]
        return f"; only those that bred within {rule.value} years"
    return ""


def _warnings(pedigree: Pedigree, members: PlaceArray, day: int | None) -> list[str]:
    events = [each for each, _number in _events(pedigree)]
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
    status = pedigree.view.values.get("status")
    if (
        any(each.earliest > day for each in events)
        and status is not None
        and status.where(lambda value: value != "").any()
    ):
        warnings.append(
            f"The records hold events after {iso(day)}, and their status is believed as written: "
            "animals that died or left since then do not count as living on that day."
        )
    oldest = _oldest_age_at_death(pedigree.view)
    if oldest is not None:
        warnings += _older_than_any(pedigree, members, day, oldest)
    return warnings


def _far_ahead(pedigree: Pedigree) -> list[str]:
    """A warning when the date of the records rests on few events, far after all others."""
    numbers = Counter[int]()
    for each, number in _events(pedigree):
        if each.year < datetime.MAXYEAR:
            numbers[each.year] += number
    years = sorted(numbers)
    if len(years) < 2 or numbers[years[-1]] > 2 or years[-1] - years[-2] < _FAR_AHEAD:
        return []
    last, before = years[-1], years[-2]
    view = pedigree.view
    found = sorted(
        (view.names[animal], date.text)
        for dates in view.dates.values()
        for animal in dates.reading.places(lambda value: value is not None and value.year == last)
        if (date := dates.reading[animal]) is not None
    )
    said = listed(f"{animal} ({text})" for animal, text in found)
    return [
        f"The date of the population, the end of {last}, rests on {said} alone, long after "
        f"all other events ({before} and before). If that is a slip, correct it or give --as-of."
    ]


def _older_than_any(pedigree: Pedigree, members: PlaceArray, day: int, oldest: float) -> list[str]:
    born = pedigree.view.dates["born"]
    age = (day - born.latest[members].astype(np.int64)) / _YEAR
    old = [
        pedigree.label(int(pedigree.file_order[animal]))
        for animal in members[born.known[members] & (age > oldest)].tolist()
    ]
    if not old:
        return []
    one = len(old) == 1
    return [
        f"{listed(old)} {'is' if one else 'are'} older than any recorded age at death "
        f"({oldest:.1f} years) and count{'s' if one else ''} as living. Check, or set "
        "presumed_dead_after in the policy."
    ]


def _oldest_age_at_death(view: Animals) -> float | None:
    """The highest age in years at a recorded death, dates known to about a year."""
    born, died = view.dates.get("born"), view.dates.get("died")
    if born is None or died is None:
        return None
    precise = born.known & died.known
    for each in (born, died):
        width = each.latest.astype(np.int64) - each.earliest
        precise &= width < _ABOUT_A_YEAR
    if not precise.any():
        return None
    return float((died.latest[precise] - born.earliest[precise]).max() / _YEAR)


def yearly_losses(pedigree: Pedigree, day: int | None) -> float | None:
    """Deaths and departures a year: the mean of the last five years with records.

    Planned ends (culled, slaughtered, used) are left out. None when nothing is dated.
    """
    if day is None:
        return None
    view = pedigree.view
    last = datetime.date.fromordinal(day).year
    recorded = sorted({each.year for each, _number in _events(pedigree) if each.year <= last})
    years = recorded[-5:]
    ended = _ends_by(view, day)
    unplanned = np.ones(len(view), dtype=bool)
    if "end_cause" in view.values:
        unplanned = view.values["end_cause"].where(lambda value: value not in PLANNED_ENDS)
    lost = Counter(ended[unplanned & (ended < _NEVER)].tolist())
    return sum(lost.get(year, 0) for year in years) / len(years) if years and lost else None


def _ends_by(view: Animals, day: int) -> npt.NDArray[np.int64]:
    """The year in which each animal died or left, if that may have been by a day."""
    ended = np.full(len(view), _NEVER, dtype=np.int64)
    for field in ("died", "left"):
        dates = view.dates.get(field)
        if dates is None:
            continue
        years = [_NEVER if each is None else each.year for each in dates.reading.values]
        year = np.array(years, dtype=np.int64)[dates.reading.codes]
        counts = dates.known & (dates.earliest <= day)
        if field == "left":
            counts &= ~_came_back(view)
        ended = np.where(counts, np.minimum(ended, year), ended)
    return ended
