"""Make `lantern-bay-pipefish.csv`: short-lived aquarium fish whose males carry the brood."""

from __future__ import annotations

import math
from dataclasses import dataclass
from datetime import date, timedelta
from typing import TYPE_CHECKING

import numpy as np
from sample_table import AS_OF, Animal, KinshipTable, day_between, iso, write_table

if TYPE_CHECKING:
    from pathlib import Path

SEED = 39
CAPACITY = 400
TANKS = (
    "North Quay tank 1",
    "North Quay tank 2",
    "Gannet House tank 1",
    "Gannet House tank 2",
    "Saltings Aquarium tank 1",
    "Saltings Aquarium tank 2",
)
CATCHES = {2019: 8, 2020: 6, 2022: 4}
"""Wild-caught founders by year of arrival: eighteen in all."""
FIRST_BROOD_YEAR = 2019
BROODS_A_YEAR = 6
BROOD_SIZES = (2, 3, 4, 5, 6)
"""Young that reach thirty days, when they are first counted and get a row."""
GROUP_SPAWNING_SHARE = 0.2
BREEDING_DAYS = (244, 1460)
HIGHEST_KINSHIP = 0.08
YOUNG_DEATHS = 0.15
LIFESPAN_YEARS = (1.5, 3.2, 5.0)
"""Lowest, likeliest and highest age at death of fish that outlive their first half-year."""
SEXED_FROM_DAYS = 150
COLUMNS = (
    "id", "sex", "sire", "dam", "litter", "born", "entered", "died", "left", "end_cause",
    "status", "holder", "born_at", "origin", "length_mm",
)  # fmt: skip


@dataclass
class Pipefish(Animal):
    """A fish; `possible_sires` is what the keeper wrote where two males may have carried it."""

    possible_sires: str = ""
    litter: str = ""
    born_at: str = ""
    born_text: str = ""
    entered: date | None = None
    broods: int = 0


def make_lantern_bay_pipefish(path: Path) -> None:
    """Catch the founders, let broods be born in date order, then write the fish down."""
    school = _School(np.random.default_rng(SEED))
    for year in range(FIRST_BROOD_YEAR, AS_OF.year + 1):
        for number in range(CATCHES.get(year, 0)):
            school.catch_founder(year, "male" if number % 2 else "female")
        last = date(year, 10, 20)
        days = [day_between(school.random, date(year, 5, 1), last) for _ in range(BROODS_A_YEAR)]
        for day in sorted(days):
            school.spawn(day)
    write_table(path, COLUMNS, (school.row(fish) for fish in school.fish))


class _School:
    """All fish so far, in every tank."""

    def __init__(self, random: np.random.Generator) -> None:
        self.random = random
        self.fish: list[Pipefish] = []
        self.kinship = KinshipTable(CAPACITY)
        self.broods = 0
        self.group_spawnings = 0

    def _append(self, fish: Pipefish) -> None:
        self.kinship.add(fish.sire, fish.dam)
        self.fish.append(fish)

    def catch_founder(self, year: int, sex: str) -> None:
        """A grown fish from the bay; its age is a guess."""
        position = len(self.fish)
        born = day_between(self.random, date(year - 1, 5, 1), date(year - 1, 8, 31))
        founder = Pipefish(position, f"P{position + 1}", sex, None, None, born)
        founder.born_text = f"~{born.year}" if self.random.random() < 0.6 else ""
        founder.entered = day_between(self.random, date(year, 3, 10), date(year, 4, 20))
        founder.holder = TANKS[position % len(TANKS)]
        founder.died = born + timedelta(days=int(365 * (2.0 + 2.5 * self.random.random())))
        founder.end_cause = "natural"
        self._append(founder)

    def _breeders(self, sex: str, day: date) -> list[Pipefish]:
        youngest, oldest = BREEDING_DAYS
        return [
            fish
            for fish in self.fish
            if fish.sex == sex
            and youngest <= (day - fish.born).days <= oldest
            and fish.present_on(day)
        ]

    def _suitable_males(self, female: Pipefish, day: date) -> list[Pipefish]:
        return [
            male
            for male in self._breeders("male", day)
            if self.kinship.between(male.position, female.position) <= HIGHEST_KINSHIP
        ]

    def _least_used(self, fish: list[Pipefish]) -> list[Pipefish]:
        """A random half of the fish (at least two), those with the fewest broods first."""
        order = self.random.permutation(len(fish))[: max(2, len(fish) // 2)]
        return sorted((fish[int(number)] for number in order), key=lambda one: one.broods)

    def spawn(self, day: date) -> None:
        """One brood: from a pair, or from a female kept with two males."""
        female = self._least_used(self._breeders("female", day))[0]
        males = self._suitable_males(female, day)
        if not males:
            return
        chosen = self._least_used(males)[:2]
        if len(chosen) < 2 or self.random.random() >= GROUP_SPAWNING_SHARE:
            chosen = chosen[:1]
        for male in chosen:
            male.holder = female.holder
        self._release_brood(day, female, chosen)

    def _release_brood(self, day: date, female: Pipefish, males: list[Pipefish]) -> None:
        """Young of one pouch; with two males in the tank it is not known whose pouch."""
        true_sire, possible_sires = males[0], ""  # blank: the sire is known
        if len(males) == 2:
            first, second = sorted(males, key=lambda male: male.position)
            self.group_spawnings += 1
            weighted = self.group_spawnings % 2 == 0
            first_share = 0.7 if weighted else 0.5
            true_sire = first if self.random.random() < first_share else second
            possible_sires = f"{first.id}|{second.id}"
            if weighted:
                possible_sires = f"{first.id}:0.7|{second.id}:0.3"
        self.broods += 1
        true_sire.broods += 1
        female.broods += 1
        for _ in range(BROOD_SIZES[int(self.random.integers(0, len(BROOD_SIZES)))]):
            position = len(self.fish)
            sex = "male" if self.random.random() < 0.5 else "female"
            young = Pipefish(
                position, f"P{position + 1}", sex, true_sire.position, female.position, day
            )
            young.possible_sires = possible_sires
            young.litter = f"B{self.broods:02d}"
            young.born_text = iso(day)
            young.born_at = young.holder = female.holder
            self._plan_life(young)
            self._append(young)

    def _plan_life(self, young: Pipefish) -> None:
        """Draw when the fish will die or be given away, and which tank it grows up in."""
        if self.random.random() < YOUNG_DEATHS:
            young.died = young.born + timedelta(days=int(self.random.integers(31, 183)))
        else:
            years = float(self.random.triangular(*LIFESPAN_YEARS))
            young.died = young.born + timedelta(days=int(365.25 * years))
            if self.random.random() < 0.4:
                young.holder = TANKS[int(self.random.integers(0, len(TANKS)))]
        young.end_cause = "natural" if self.random.random() < 0.85 else "euthanised-ill"
        if self.random.random() < 0.04:
            young.left = young.born + timedelta(days=int(self.random.integers(200, 500)))

    def row(self, fish: Pipefish) -> dict[str, str]:
        """The fish as the aquaria wrote it down; what lies after the last day is not known yet."""
        dead = fish.died is not None and fish.died <= AS_OF
        gone = fish.left is not None and fish.left <= AS_OF
        if gone and dead and fish.left is not None and fish.died is not None:
            gone = fish.left < fish.died
        dead = dead and not gone
        last_day = fish.left if gone else fish.died if dead else AS_OF
        assert last_day is not None
        days = (last_day - fish.born).days
        sire = "" if fish.sire is None else self.fish[fish.sire].id
        length = "" if dead else f"{self._length(days):.0f}"
        return {
            "id": fish.id,
            "sex": fish.sex if days >= SEXED_FROM_DAYS else "unknown",
            "sire": fish.possible_sires or sire,
            "dam": "" if fish.dam is None else self.fish[fish.dam].id,
            "litter": fish.litter,
            "born": fish.born_text,
            "entered": iso(fish.entered),
            "died": iso(fish.died) if dead else "",
            "left": iso(fish.left) if gone else "",
            "end_cause": fish.end_cause if dead else "",
            "status": "gone" if gone else "dead" if dead else "living",
            "holder": fish.holder,
            "born_at": fish.born_at,
            "origin": "wild" if fish.dam is None else "captive",
            "length_mm": length,
        }

    def _length(self, days: int) -> float:
        """Body length in millimetres: fast growth in the first year, then hardly any."""
        return 180 * (1 - math.exp(-days / 160)) + 6 * float(self.random.normal())
