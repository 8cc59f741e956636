"""Make `colony-k-voles.csv`: a laboratory colony whose true cost of inbreeding is known."""

from __future__ import annotations

import math
from dataclasses import dataclass
from datetime import date, timedelta
from typing import TYPE_CHECKING

import numpy as np
from sample_table import AS_OF, Animal, KinshipTable, day_between, iso, write_table

if TYPE_CHECKING:
    from pathlib import Path

SEED = 33
CAPACITY = 2500
CATCHES = {date(2021, 2, 15): 20, date(2024, 2, 12): 10, date(2025, 2, 10): 6}
"""Wild-caught founders by day of arrival: thirty-six in all."""
CARRIER_FOUNDERS = (2, 7)
FIRST_DAY = date(2021, 3, 1)
STEP_DAYS = 28
"""The colony is looked at every four weeks."""

DEATHS_WITHOUT_INBREEDING = 0.15
HAPLOID_LETHAL_EQUIVALENTS = 2.0
"""A pup lives to be weaned with chance exp(-0.15 - 2.0 F)."""
WEANED_AT_DAYS = 21
SEXED_FROM_DAYS = 8
LITTER_SIZES = (3, 4, 4, 5, 5, 6)

BREEDING_PAIRS = 12
LITTER_CHANCE = 0.40
LITTER_GAP_DAYS = 24
PAIR_ENDS = 0.15
OLDEST_SIRE_DAYS = 540
OLDEST_DAM_DAYS = 360
YOUNGEST_PARENT_DAYS = 60
KEPT_FOR_BREEDING = 0.45

CLOSE_MATING_ENDS = date(2023, 12, 31)
FULL_SIB_SHARE = 0.3
HALF_SIB_SHARE = 0.3
TESTS_BEGIN = date(2023, 1, 1)
TESTED_SHARE = 0.5
SEEN_SHARE = 0.9
COLUMNS = (
    "id", "sex", "sire", "dam", "litter", "born", "entered", "died", "end_cause", "status",
    "holder", "origin", "survived", "amberfoot_test", "amberfoot_test_on", "amberfoot_seen",
)  # fmt: skip
GENOTYPES = ("free", "carrier", "affected")
CAGES = 80


@dataclass
class Vole(Animal):
    """A vole; `amber_alleles` counts its true copies (0, 1 or 2) of the amberfoot allele."""

    litter: str = ""
    weaned: bool = True
    amber_alleles: int = 0
    entered: date | None = None
    last_litter: date = date(2021, 1, 1)


@dataclass
class Couple:
    """A male and a female that share a cage."""

    male: Vole
    female: Vole


def make_colony_k_voles(path: Path) -> None:
    """Breed the colony in steps of four weeks, then write the voles down."""
    colony = _Colony(np.random.default_rng(SEED))
    arrivals = dict(CATCHES)
    day = FIRST_DAY
    while day + timedelta(days=STEP_DAYS) <= AS_OF:
        for arrival in [arrival for arrival in arrivals if arrival <= day]:
            colony.catch_founders(arrival, arrivals.pop(arrival))
        colony.breed_until(day, day + timedelta(days=STEP_DAYS))
        day += timedelta(days=STEP_DAYS)
    write_table(path, COLUMNS, (colony.row(vole) for vole in colony.voles))


class _Colony:
    """All voles so far and the couples now together."""

    def __init__(self, random: np.random.Generator) -> None:
        self.random = random
        self.voles: list[Vole] = []
        self.kinship = KinshipTable(CAPACITY)
        self.couples: list[Couple] = []
        self.litters = 0

    def catch_founders(self, arrival: date, number: int) -> None:
        """Young voles trapped in the autumn before, of unknown birthday."""
        for _ in range(number):
            self._catch_founder(arrival)

    def _catch_founder(self, arrival: date) -> None:
        position = len(self.voles)
        born = arrival - timedelta(days=int(self.random.integers(95, 160)))
        sex = "male" if position % 2 == 0 else "female"
        founder = Vole(position, f"K{position + 1:04d}", sex, None, None, born)
        founder.amber_alleles = int(position in CARRIER_FOUNDERS)
        founder.entered = arrival
        founder.died = born + timedelta(days=int(self.random.integers(380, 560)))
        founder.end_cause = "culled"
        founder.holder = f"cage {position // 2 + 1:02d}"
        self._append(founder)

    def _append(self, vole: Vole) -> float:
        self.voles.append(vole)
        return self.kinship.add(vole.sire, vole.dam)

    def breed_until(self, day: date, end: date) -> None:
        """Part old couples, form new ones, and let couples have their litters of these weeks."""
        self.couples = [
            couple
            for couple in self.couples
            if self._fit(couple.male, end)
            and self._fit(couple.female, end)
            and self.random.random() >= PAIR_ENDS
        ]
        while len(self.couples) < BREEDING_PAIRS:
            couple = self._new_couple(day, end)
            if couple is None:
                break
            couple.male.holder = couple.female.holder
            self.couples.append(couple)
        for couple in self.couples:
            born = day_between(self.random, day + timedelta(days=1), end)
            rested = (born - couple.female.last_litter).days >= LITTER_GAP_DAYS
            if rested and self.random.random() < LITTER_CHANCE:
                self._bear_litter(couple, born)

    def _fit(self, vole: Vole, end: date) -> bool:
        """Young enough, and will live to see a litter of these weeks weaned."""
        oldest = OLDEST_SIRE_DAYS if vole.sex == "male" else OLDEST_DAM_DAYS
        weaned = end + timedelta(days=WEANED_AT_DAYS)
        return vole.present_on(weaned) and (end - vole.born).days <= oldest

    def _singles(self, sex: str, day: date, end: date) -> list[Vole]:
        taken = {vole.position for couple in self.couples for vole in (couple.male, couple.female)}
        return [
            vole
            for vole in self.voles
            if vole.sex == sex
            and vole.weaned
            and vole.position not in taken
            and (day - vole.born).days >= YOUNGEST_PARENT_DAYS + WEANED_AT_DAYS
            and self._fit(vole, end)
        ]

    def _new_couple(self, day: date, end: date) -> Couple | None:
        """Early on often brother and sister or half-sibs; later the least related of a few."""
        males, females = self._singles("male", day, end), self._singles("female", day, end)
        if not males or not females:
            return None
        female = self._pick_female(females, day)
        wish = self.random.random()
        if day <= CLOSE_MATING_ENDS and wish < FULL_SIB_SHARE + HALF_SIB_SHARE:
            shared = 2 if wish < FULL_SIB_SHARE else 1
            kin = [male for male in males if _parents_shared(male, female) == shared]
            if kin:
                return Couple(kin[int(self.random.integers(0, len(kin)))], female)
        some = [males[int(number)] for number in self.random.permutation(len(males))[:8]]
        male = min(some, key=lambda one: self.kinship.between(one.position, female.position))
        return Couple(male, female)

    def _pick_female(self, females: list[Vole], day: date) -> Vole:
        """Early on any female; later, of a few, the one least related to the colony."""
        order = self.random.permutation(len(females))
        if day <= CLOSE_MATING_ENDS:
            return females[int(order[0])]
        living = [vole.position for vole in self.voles if vole.weaned and vole.present_on(day)]
        return min(
            (females[int(number)] for number in order[:6]),
            key=lambda one: (round(self.kinship.mean_with(one.position, living), 9), one.position),
        )

    def _bear_litter(self, couple: Couple, born: date) -> None:
        self.litters += 1
        couple.female.last_litter = born
        pups = []
        for _ in range(LITTER_SIZES[int(self.random.integers(0, len(LITTER_SIZES)))]):
            position = len(self.voles)
            sex = "male" if self.random.random() < 0.5 else "female"
            pup = Vole(
                position, f"K{position + 1:04d}", sex,
                couple.male.position, couple.female.position, born,
            )  # fmt: skip
            pup.litter = f"L{self.litters:03d}"
            pup.holder = couple.female.holder
            pup.amber_alleles = self._passed_on(couple.male) + self._passed_on(couple.female)
            self._plan_life(pup, inbreeding=self._append(pup))
            pups.append(pup)
        self._share_cages(pups)

    def _passed_on(self, parent: Vole) -> int:
        """One allele of the parent, drawn at random: 1 for amberfoot."""
        return int(self.random.random() < parent.amber_alleles / 2)

    def _plan_life(self, pup: Vole, *, inbreeding: float) -> None:
        """Draw whether the pup is weaned, and when and why it will die."""
        survival = math.exp(-DEATHS_WITHOUT_INBREEDING - HAPLOID_LETHAL_EQUIVALENTS * inbreeding)
        pup.weaned = bool(self.random.random() < survival)
        if not pup.weaned:
            days = int(self.random.integers(0, WEANED_AT_DAYS))
            pup.end_cause = "natural"
        elif self.random.random() < KEPT_FOR_BREEDING:
            days = int(self.random.integers(330, 560))
            pup.end_cause = "culled" if self.random.random() < 0.7 else "natural"
        else:
            days = int(self.random.integers(45, 170))
            pup.end_cause = "used" if self.random.random() < 0.7 else "culled"
        if pup.weaned and self.random.random() < 0.05:
            days = int(self.random.integers(22, 330))
            pup.end_cause = "euthanised-ill"
        pup.died = pup.born + timedelta(days=days)

    def _share_cages(self, pups: list[Vole]) -> None:
        """Weaned brothers go to one cage, sisters to another; pups not yet weaned stay."""
        for sex in ("male", "female"):
            cage = f"cage {int(self.random.integers(1, CAGES + 1)):02d}"
            for pup in pups:
                old_enough = (AS_OF - pup.born).days >= WEANED_AT_DAYS
                if pup.sex == sex and pup.weaned and old_enough:
                    pup.holder = cage

    def row(self, vole: Vole) -> dict[str, str]:
        """The vole as the laboratory wrote it down; what lies after the last day is not known."""
        dead = vole.died is not None and vole.died <= AS_OF
        pup = vole.dam is not None
        watched = pup and (dead or (AS_OF - vole.born).days >= WEANED_AT_DAYS)
        last_day = vole.died if dead and vole.died is not None else AS_OF
        sexed = (last_day - vole.born).days >= SEXED_FROM_DAYS
        test, tested_on = self._test(vole)
        seen = ""
        if watched and vole.weaned and self.random.random() < SEEN_SHARE:
            seen = "affected" if vole.amber_alleles == 2 else "unaffected"
        return {
            "id": vole.id,
            "sex": vole.sex if sexed else "unknown",
            "sire": "" if vole.sire is None else self.voles[vole.sire].id,
            "dam": "" if vole.dam is None else self.voles[vole.dam].id,
            "litter": vole.litter,
            "born": iso(vole.born) if pup else f"~{vole.born.year}",
            "entered": iso(vole.entered),
            "died": iso(vole.died) if dead else "",
            "end_cause": vole.end_cause if dead else "",
            "status": "dead" if dead else "living",
            "holder": vole.holder,
            "origin": "captive" if pup else "wild",
            "survived": str(int(vole.weaned)) if watched else "",
            "amberfoot_test": test,
            "amberfoot_test_on": tested_on,
            "amberfoot_seen": seen,
        }

    def _test(self, vole: Vole) -> tuple[str, str]:
        """Result and day of the gene test, blank for the many voles never tested."""
        day = vole.born + timedelta(days=int(self.random.integers(25, 45)))
        wanted = self.random.random() < TESTED_SHARE
        if not wanted or not vole.weaned or day < TESTS_BEGIN or not vole.present_on(day):
            return "", ""
        return (GENOTYPES[vole.amber_alleles], iso(day)) if day <= AS_OF else ("", "")


def _parents_shared(first: Vole, second: Vole) -> int:
    """How many recorded parents two voles have in common: 2 for full sibs."""
    return sum(
        parent is not None and parent == other
        for parent, other in ((first.sire, second.sire), (first.dam, second.dam))
    )
