"""Make `tarn-crane.csv`: an invented crane in zoo collections, 1978 to 2026."""

from __future__ import annotations

import math
from dataclasses import dataclass
from datetime import date, timedelta
from typing import TYPE_CHECKING

import numpy as np
from sample_table import AS_OF, Animal, KinshipTable, day_between, iso, less_exact, write_table

if TYPE_CHECKING:
    from pathlib import Path

SEED = 2074
CAPACITY = 600
FIRST_YEAR = 1978
HOLDERS = (
    "Hazelwick Zoo",
    "Brackenholt Park",
    "Saltmere Bird Gardens",
    "Tharnley Wildlife Park",
    "Vennacher Aviaries",
    "Oxenlode Zoo",
    "Karrowmoor Park",
    "Reedmere Crane House",
    "Dunmarrow Zoo",
)
ARRIVALS = {1978: 4, 1980: 3, 1983: 3, 1988: 2, 1998: 2}
"""Wild-caught founders by year of arrival: fourteen in all."""
UNKNOWN_ARRIVALS = {1987: 2, 2003: 1}
"""Birds taken over from private keepers who kept no papers."""
OUTBREAK_YEAR = 1996
OUTBREAK_HOLDERS = frozenset(HOLDERS[3:])
OUTBREAK_DEATHS = 0.75
DOMINANT_PAIR = frozenset({0, 1})
"""Positions of the two founders that bred far more than the others."""
DOMINANT_WEIGHT = 5.0
BREEDING_YEARS = (3.0, 28.0)
CHICK_DEATHS = 0.42
USUAL_HIGHEST_KINSHIP = 0.07
CARELESS_SHARE = 0.10
CARELESS_HIGHEST_KINSHIP = 0.25
PARENT_LOST_SHARE = 0.065
COLUMNS = (
    "id", "name", "sex", "sire", "dam", "born", "entered", "died", "left", "last_seen",
    "end_cause", "status", "holder", "born_at", "origin",
)  # fmt: skip


@dataclass
class Crane(Animal):
    """A crane; `mate` is the position of the bird it is bonded to."""

    origin: str = "captive"
    born_at: str = ""
    born_text: str = ""
    name: str = ""
    status: str = "living"
    entered: date | None = None
    last_seen: date | None = None
    mate: int | None = None
    weight: float = 1.0


def make_tarn_crane(path: Path) -> None:
    """Live through the years one by one, then write the birds down."""
    flock = _Flock(np.random.default_rng(SEED))
    for year in range(FIRST_YEAR, AS_OF.year + 1):
        flock.live_through(year)
    flock.give_names()
    write_table(path, COLUMNS, (flock.row(bird) for bird in flock.birds))


def _wanted_living(year: int) -> int:
    """How many birds the programme tries to hold."""
    if year <= OUTBREAK_YEAR:
        return min(60, 14 + 4 * (year - FIRST_YEAR))
    return min(68, 24 + 3 * (year - OUTBREAK_YEAR))


def _yearly_death_rate(age: float) -> float:
    """Chance that a bird past its first summer dies in the coming year."""
    if age < 20:
        return 0.05
    if age < 28:
        return 0.1
    return 0.25 if age < 34 else 1.0


class _Flock:
    """All birds so far, and what happens to them in a year."""

    def __init__(self, random: np.random.Generator) -> None:
        self.random = random
        self.birds: list[Crane] = []
        self.kinship = KinshipTable(CAPACITY)

    def live_through(self, year: int) -> None:
        """Arrivals, deaths, departures, new pairs, chicks; in this order."""
        for number in range(ARRIVALS.get(year, 0)):
            self._arrive(year, "wild", sex="male" if number % 2 == 0 else "female")
        for number in range(UNKNOWN_ARRIVALS.get(year, 0)):
            self._arrive(year, "unknown", sex="female" if number % 2 == 0 else "male")
        self._end_lives(year)
        self._form_pairs(date(year, 3, 1))
        self._raise_chicks(year)
        if year == OUTBREAK_YEAR:
            self._outbreak()

    def _append(self, bird: Crane) -> Crane:
        self.birds.append(bird)
        self.kinship.add(bird.sire, bird.dam)
        return bird

    def _next_id(self) -> str:
        return f"T{len(self.birds) + 1:03d}"

    def _arrive(self, year: int, origin: str, *, sex: str) -> None:
        """Take in a grown bird whose parents nobody knows."""
        born = day_between(self.random, date(year - 4, 5, 1), date(year - 2, 7, 31))
        ways_to_write = (f"~{born.year}", f"~{born.year}", f"{born.year}", "")
        born_text = ways_to_write[int(4 * self.random.random())]
        bird = Crane(
            len(self.birds), self._next_id(), sex, None, None, born,
            origin=origin, born_text=born_text,
        )  # fmt: skip
        bird.entered = day_between(self.random, date(year, 1, 10), date(year, 2, 25))
        bird.holder = HOLDERS[int(self.random.integers(0, 6))] if year > FIRST_YEAR else HOLDERS[0]
        self._append(bird)

    def _end_lives(self, year: int) -> None:
        """Let some birds die, leave or disappear on a day of this year."""
        last_day = min(date(year, 12, 28), AS_OF - timedelta(days=20))
        for bird in self.birds:
            if not bird.present_on(date(year, 1, 1)):
                continue
            day = day_between(self.random, date(year, 2, 26), last_day)
            settled = bird.origin == "captive" or year - bird.born.year > 14
            if settled and self.random.random() < _yearly_death_rate(bird.age_on(day)):
                self._die(bird, day)
            elif bird.mate is None and self.random.random() < 0.006 and bird.age_on(day) > 1:
                bird.left = day
                bird.status = "gone" if self.random.random() < 0.6 else "lost"
                if bird.status == "lost":
                    bird.last_seen = day

    def _die(self, bird: Crane, day: date) -> None:
        bird.died = day
        bird.status = "dead"
        draw = self.random.random()
        bird.end_cause = "natural" if draw < 0.7 else "euthanised-ill" if draw < 0.85 else "unknown"
        if bird.mate is not None:
            self.birds[bird.mate].mate = None

    def _outbreak(self) -> None:
        """One bad autumn: a lung disease goes through six of the nine collections."""
        for bird in self.birds:
            exposed = bird.present_on(date(OUTBREAK_YEAR, 12, 31))
            exposed = exposed and bird.holder in OUTBREAK_HOLDERS
            if exposed and self.random.random() < OUTBREAK_DEATHS:
                first, last = date(OUTBREAK_YEAR, 10, 1), date(OUTBREAK_YEAR, 12, 20)
                self._die(bird, day_between(self.random, first, last))
                bird.end_cause = "natural"

    def _unpaired(self, sex: str, day: date) -> list[Crane]:
        """Birds of this sex in their breeding years, without a mate, that outlive the year."""
        youngest, oldest = BREEDING_YEARS
        return [
            bird
            for bird in self.birds
            if bird.sex == sex
            and bird.mate is None
            and bird.present_on(date(day.year, 12, 31))
            and youngest <= bird.age_on(day) <= oldest - 2
        ]

    def _form_pairs(self, day: date) -> None:
        """Give each single male a mate that is not too close kin; she moves to him."""
        males = self._unpaired("male", day)
        for number in self.random.permutation(len(males)):
            male = males[int(number)]
            careless = self.random.random() < CARELESS_SHARE
            limit = CARELESS_HIGHEST_KINSHIP if careless else USUAL_HIGHEST_KINSHIP
            females = [
                female
                for female in self._unpaired("female", day)
                if self.kinship.between(male.position, female.position) <= limit
            ]
            if not females or self.random.random() < 0.25:
                continue
            female = females[int(self.random.integers(0, len(females)))]
            male.mate, female.mate = female.position, male.position
            female.holder = male.holder
            couple = {male.position, female.position}
            dominant = bool(couple & DOMINANT_PAIR)
            male.weight = DOMINANT_WEIGHT if dominant else float(self.random.random()) ** 2 + 0.1

    def _raise_chicks(self, year: int) -> None:
        """Let as many pairs breed as the number of places asks for, the good pairs first."""
        living = sum(bird.present_on(date(year, 4, 1)) for bird in self.birds)
        clutches = int(np.clip(round((_wanted_living(year) - living) / 1.5) + 2, 2, 8))
        pairs = [bird for bird in self.birds if bird.sex == "male" and self._can_breed(bird, year)]
        if not pairs:
            return
        haste = [-math.log(self.random.random()) / male.weight for male in pairs]
        for number in np.argsort(haste, kind="stable")[:clutches]:
            self._hatch_clutch(pairs[int(number)], year)

    def _can_breed(self, male: Crane, year: int) -> bool:
        day = date(year, 7, 15)
        if male.mate is None:
            return False
        female = self.birds[male.mate]
        return all(
            bird.present_on(day) and bird.age_on(day) <= BREEDING_YEARS[1]
            for bird in (male, female)
        )

    def _hatch_clutch(self, male: Crane, year: int) -> None:
        """One or two chicks; now and then nobody wrote down who the parents were."""
        assert male.mate is not None
        hatched = day_between(self.random, date(year, 5, 5), date(year, 7, 10))
        sire: int | None = male.position
        dam: int | None = male.mate
        if year < 2020 and self.random.random() < PARENT_LOST_SHARE:
            which = self.random.random()
            sire, dam = (None if which < 0.7 else sire), (None if which > 0.4 else dam)
        for egg in range(2 if self.random.random() < 0.45 else 1):
            born = hatched + timedelta(days=2 * egg)
            sex = "male" if self.random.random() < 0.5 else "female"
            chick = Crane(len(self.birds), self._next_id(), sex, sire, dam, born)
            chick.holder = chick.born_at = male.holder
            chick.born_text = less_exact(
                born, self.random.random(), month_only=0.06, year_only=0.03
            )
            self._append(chick)
            self._first_summer(chick)

    def _first_summer(self, chick: Crane) -> None:
        """A chick dies, or grows up and is sent to one of the nine holders."""
        if self.random.random() < CHICK_DEATHS:
            self._die(chick, chick.born + timedelta(days=int(self.random.integers(1, 91))))
            if self.random.random() < 0.5:
                chick.sex = "unknown"
        elif chick.born.year == AS_OF.year:
            if self.random.random() < 0.6:
                chick.sex = "unknown"
        elif self.random.random() < 0.6:
            chick.holder = HOLDERS[int(self.random.integers(0, len(HOLDERS)))]

    def give_names(self) -> None:
        """Name most birds that outlived their first summer; no name is used twice."""
        names = [first + last for first in _NAME_STARTS for last in _NAME_ENDS]
        order = iter(self.random.permutation(len(names)))
        for bird in self.birds:
            grown = bird.died is None or bird.age_on(bird.died) > 0.5
            if grown and bird.sex != "unknown" and self.random.random() < 0.8:
                bird.name = names[int(next(order))]
            if bird.status == "living":
                bird.last_seen = day_between(self.random, date(2026, 9, 15), date(2026, 11, 20))

    def row(self, bird: Crane) -> dict[str, str]:
        """The bird as the programme wrote it down."""
        died = ""
        if bird.died is not None:
            died = less_exact(bird.died, self.random.random(), month_only=0.06, year_only=0.04)
        return {
            "id": bird.id,
            "name": bird.name,
            "sex": bird.sex,
            "sire": self._parent_text(bird, bird.sire),
            "dam": self._parent_text(bird, bird.dam),
            "born": bird.born_text,
            "entered": iso(bird.entered),
            "died": died,
            "left": iso(bird.left) if bird.status == "gone" else "",
            "last_seen": iso(bird.last_seen),
            "end_cause": bird.end_cause,
            "status": bird.status,
            "holder": bird.holder,
            "born_at": bird.born_at,
            "origin": bird.origin,
        }

    def _parent_text(self, bird: Crane, parent: int | None) -> str:
        if parent is not None:
            return self.birds[parent].id
        return "?" if bird.origin == "captive" and bird.position % 3 else ""


_NAME_STARTS = (
    "Al", "Bre", "Cor", "Dun", "Es", "Fen", "Gar", "Hol", "Ist", "Jor", "Kel", "Lor",
    "Mar", "Nev", "Or", "Pel", "Quil", "Ros", "Sil", "Tam", "Ul", "Ves", "Wen", "Yar",
)  # fmt: skip
_NAME_ENDS = ("a", "da", "en", "i", "lo", "mir", "na", "o", "ric", "ska", "ta", "vin", "wyn")
