"""Make `fellmoor-sheep.csv`: twenty-five years of a breed society's herdbook."""

from __future__ import annotations

import math
from dataclasses import dataclass
from datetime import date, timedelta
from typing import TYPE_CHECKING

import numpy as np
from sample_table import AS_OF, Animal, day_between, iso, write_table

if TYPE_CHECKING:
    from pathlib import Path

SEED = 2005
FIRST_YEAR = 2001
LINES = ("hill", "dale")
FOUNDATION_EWES = {"hill": 520, "dale": 110}
FOUNDATION_RAMS = {"hill": 34, "dale": 18}
NEW_RAMS = {"hill": 15, "dale": 6}
"""Ram lambs kept for breeding each year."""
MOST_SONS_KEPT = 2
RAM_LEAVES_AT_AGE = (0.3, 0.45, 0.6, 0.8, 1.0)
EWE_LEAVES_AT_AGE = (0.05, 0.05, 0.05, 0.06, 0.07, 0.12, 0.25, 0.40, 0.60, 0.80)
"""Chance to be culled or sold in the autumn of age 1, 2, … years; the last one holds on."""
FLOCKS_OF_LINE = {"hill": 51, "dale": 9}
FIRST_MATED, LAST_MATED = 500, 625
"""Ewes whose lambs are registered, in the first autumn and from the tenth on."""
TWIN_SHARE = 0.33
LAMB_DEATHS = 0.06
EWE_LAMBS_KEPT = 0.68
RAM_LAMBS_CASTRATED = 0.45
SIRE_LOST_SHARE = 0.05

HERITABILITY = 0.3
"""Of the index trait, whose phenotypic variance is 1 at the start."""
OWN_RECORD_WEIGHT = 0.25
"""How far an animal's own weight moves its index away from its parents' mean."""
INDEX_MEAN, INDEX_UNIT = 100.0, 20.0
COLUMNS = (
    "id", "sex", "sire", "dam", "born", "died", "left", "end_cause", "status", "holder",
    "origin", "line", "may_breed", "may_breed_note", "merit",
)  # fmt: skip


@dataclass
class Sheep(Animal):
    """A sheep; `breeding_value` is its true additive merit, `index` the society's estimate."""

    line: str = "hill"
    origin: str = ""
    born_text: str = ""
    breeding_value: float = 0.0
    index: float | None = None
    chosen_ram: bool = False
    sire_recorded: bool = True
    may_breed_note: str = ""


def make_fellmoor_sheep(path: Path) -> None:
    """Mate every autumn, lamb every spring, then write the herdbook."""
    herdbook = _Herdbook(np.random.default_rng(SEED))
    herdbook.found()
    for year in range(FIRST_YEAR + 1, AS_OF.year + 1):
        herdbook.lambing(year)
    write_table(path, COLUMNS, (herdbook.row(sheep) for sheep in herdbook.sheep))


class _Herdbook:
    """All sheep so far; `ewes` and `rams` are those still breeding."""

    def __init__(self, random: np.random.Generator) -> None:
        self.random = random
        self.sheep: list[Sheep] = []
        self.ewes: list[Sheep] = []
        self.rams: list[Sheep] = []
        self.registered: dict[int, int] = {}
        places = [f"{start} {end}" for start in _FLOCK_STARTS for end in _FLOCK_ENDS]
        places = [places[int(number)] for number in random.permutation(len(places))]
        self.flocks = {
            "hill": places[: FLOCKS_OF_LINE["hill"]],
            "dale": places[FLOCKS_OF_LINE["hill"] :],
        }

    def _next_id(self, year: int) -> str:
        self.registered[year] = self.registered.get(year, 0) + 1
        return f"F{year % 100:02d}-{self.registered[year]:05d}"

    def found(self) -> None:
        """Enter the foundation ewes and rams of both lines in the autumn of the first year."""
        for line in LINES:
            for sex, count in (("ewe", FOUNDATION_EWES[line]), ("ram", FOUNDATION_RAMS[line])):
                for _ in range(count):
                    self._enter_foundation(line, sex)

    def _enter_foundation(self, line: str, sex: str) -> None:
        age = 1 + int(self.random.integers(0, 5 if sex == "ewe" else 3))
        year = FIRST_YEAR - age
        born = day_between(self.random, date(year, 3, 20), date(year, 5, 5))
        sheep = Sheep(
            len(self.sheep), self._next_id(FIRST_YEAR), sex, None, None, born,
            line=line, origin="foundation",
        )  # fmt: skip
        sheep.born_text = iso(born) if self.random.random() < 0.3 else f"{born.year}"
        sheep.breeding_value = math.sqrt(HERITABILITY) * float(self.random.normal())
        sheep.index = HERITABILITY * (sheep.breeding_value + self._environment())
        sheep.holder = self._draw_flock(line)
        self.sheep.append(sheep)
        (self.ewes if sex == "ewe" else self.rams).append(sheep)

    def _environment(self) -> float:
        """What weather, milk and luck add to an animal's own weight."""
        return math.sqrt(1 - HERITABILITY) * float(self.random.normal())

    def _draw_flock(self, line: str) -> str:
        """One of the line's flocks; the first ones of the list are the large ones."""
        count = FLOCKS_OF_LINE[line]
        return self.flocks[line][int(count * float(self.random.random()) ** 1.7)]

    def lambing(self, year: int) -> None:
        """From the mating of the autumn before to the culling of this one."""
        mean_of_rams = float(np.mean([ram.index for ram in self.rams if ram.index is not None]))
        lambs = [
            lamb
            for ewe, ram in self._mate(year - 1)
            for lamb in self._lambs_of(ewe, ram, year)
        ]  # fmt: skip
        self._judge(lambs, mean_of_rams)
        self._end_lives(year)
        for line in LINES:
            self._choose_rams([one for one in lambs if one.line == line], NEW_RAMS[line])
            self._choose_ewes([one for one in lambs if one.line == line and one.sex == "ewe"])
        self._fate_of_other_males(lambs)

    def _mate(self, year: int) -> list[tuple[Sheep, Sheep]]:
        """Ewes with rams of their line; a few rams get most ewes, near kin is avoided."""
        grown = [ewe for ewe in self.ewes if ewe.born.year < year and not ewe.may_breed_note]
        wanted = FIRST_MATED + (LAST_MATED - FIRST_MATED) * min(year - FIRST_YEAR, 10) // 10
        shares = {line: self._shares_of_rams(line, year) for line in LINES}
        matings = []
        for number in self.random.permutation(len(grown))[:wanted]:
            ewe = grown[int(number)]
            rams, running_share = shares[ewe.line]
            for _ in range(20):
                place = int(np.searchsorted(running_share, self.random.random()))
                ram = rams[min(place, len(rams) - 1)]
                if not self._near_kin(ewe, ram):
                    matings.append((ewe, ram))
                    break
        return matings

    def _shares_of_rams(self, line: str, year: int) -> tuple[list[Sheep], np.ndarray]:
        """The line's grown rams and their running shares, 1/(rank + 4) by index and fashion."""
        rams = [ram for ram in self.rams if ram.line == line and ram.born.year < year]
        fashion = {ram.position: (ram.index or 0.0) + self.random.normal() * 0.2 for ram in rams}
        rams.sort(key=lambda ram: -fashion[ram.position])
        shares = 1 / (np.arange(len(rams)) + 5.0)
        for ram in rams:
            ram.holder = self._draw_flock(line)
        return rams, np.cumsum(shares / shares.sum())

    def _near_kin(self, ewe: Sheep, ram: Sheep) -> bool:
        """Parent and offspring, full or half sibs, or an animal with its grandparent."""
        of_ewe = self._family(ewe)
        of_ram = self._family(ram)
        return bool(of_ewe[0] & of_ram[0]) or ewe.position in of_ram[1] or ram.position in of_ewe[1]

    def _family(self, sheep: Sheep) -> tuple[set[int], set[int]]:
        """The animal with its parents, and its grandparents."""
        parents = {parent for parent in (sheep.sire, sheep.dam) if parent is not None}
        grandparents = {
            grandparent
            for parent in parents
            for grandparent in (self.sheep[parent].sire, self.sheep[parent].dam)
            if grandparent is not None
        }
        return parents | {sheep.position}, grandparents

    def _lambs_of(self, ewe: Sheep, ram: Sheep, year: int) -> list[Sheep]:
        born = day_between(self.random, date(year, 3, 20), date(year, 5, 5))
        recorded = bool(self.random.random() >= SIRE_LOST_SHARE)
        lambs = []
        for _ in range(2 if self.random.random() < TWIN_SHARE else 1):
            sex = "ram" if self.random.random() < 0.5 else "ewe"
            lamb = Sheep(
                len(self.sheep), self._next_id(year), sex, ram.position, ewe.position, born,
                line=ewe.line, born_text=iso(born), holder=ewe.holder, sire_recorded=recorded,
            )  # fmt: skip
            mean_value = (ewe.breeding_value + ram.breeding_value) / 2
            luck = math.sqrt(HERITABILITY / 2) * float(self.random.normal())
            lamb.breeding_value = mean_value + luck
            if self.random.random() < LAMB_DEATHS:
                lamb.died = born + timedelta(days=int(self.random.integers(0, 40)))
                lamb.end_cause = "natural" if self.random.random() < 0.6 else "unknown"
            self.sheep.append(lamb)
            lambs.append(lamb)
        return lambs

    def _judge(self, lambs: list[Sheep], mean_of_rams: float) -> None:
        """Give each weaned lamb its index: its parents' mean, corrected by its own weight."""
        weaned = [lamb for lamb in lambs if lamb.died is None]
        expected, weights = [], []
        for lamb in weaned:
            assert lamb.sire is not None
            assert lamb.dam is not None
            of_sire = self.sheep[lamb.sire].index if lamb.sire_recorded else mean_of_rams
            expected.append(((of_sire or 0.0) + (self.sheep[lamb.dam].index or 0.0)) / 2)
            weights.append(lamb.breeding_value + self._environment())
        surprise = np.array(weights) - np.mean(weights) - (np.array(expected) - np.mean(expected))
        for lamb, parents_mean, more in zip(weaned, expected, surprise, strict=True):
            lamb.index = parents_mean + OWN_RECORD_WEIGHT * float(more)

    def _end_lives(self, year: int) -> None:
        """Cull, sell and lose grown sheep after the lambs are weaned."""
        first, last = date(year, 8, 20), date(year, 11, 10)
        for animal in [*self.ewes, *self.rams]:
            day = day_between(self.random, first, last)
            age = year - animal.born.year
            draw = self.random.random()
            leaving = RAM_LEAVES_AT_AGE if animal.sex == "ram" else EWE_LEAVES_AT_AGE
            if draw < leaving[min(age, len(leaving)) - 1]:
                sold = self.random.random() < 0.15
                if sold:
                    animal.left = day
                else:
                    animal.died, animal.end_cause = day, "culled"
            elif draw > 0.975:
                animal.died, animal.end_cause = day, "natural"
            elif animal.sex == "ewe" and draw > 0.965 and not animal.may_breed_note:
                animal.may_breed_note = "udder" if draw > 0.97 else "lambing trouble"
        self.ewes = [one for one in self.ewes if one.died is None and one.left is None]
        self.rams = [one for one in self.rams if one.died is None and one.left is None]

    def _choose_rams(self, lambs: list[Sheep], wanted: int) -> None:
        """Keep the ram lambs of highest index, few sons of any one sire."""
        sons_kept: dict[int, int] = {}
        candidates = [lamb for lamb in lambs if lamb.sex == "ram" and lamb.sire_recorded]
        candidates = [lamb for lamb in candidates if lamb.index is not None]
        candidates.sort(key=lambda lamb: -(lamb.index or 0.0))
        for lamb in candidates:
            assert lamb.sire is not None
            if wanted and sons_kept.get(lamb.sire, 0) < MOST_SONS_KEPT:
                sons_kept[lamb.sire] = sons_kept.get(lamb.sire, 0) + 1
                lamb.chosen_ram = True
                lamb.holder = self._draw_flock(lamb.line)
                self.rams.append(lamb)
                wanted -= 1

    def _choose_ewes(self, lambs: list[Sheep]) -> None:
        """Keep about two ewe lambs in three, by index and by eye; the others go for meat."""
        weaned = [lamb for lamb in lambs if lamb.died is None]
        by_eye = {lamb.position: self.random.normal() * 0.15 for lamb in weaned}
        weaned.sort(key=lambda lamb: -((lamb.index or 0.0) + by_eye[lamb.position]))
        kept = round(EWE_LAMBS_KEPT * len(weaned))
        self.ewes.extend(weaned[:kept])
        for lamb in weaned[kept:]:
            self._slaughter(lamb, 150, 330)

    def _fate_of_other_males(self, lambs: list[Sheep]) -> None:
        """Wethers graze on for their wool, the other ram lambs go for meat."""
        for lamb in lambs:
            if lamb.sex != "ram" or lamb.chosen_ram or lamb.died is not None:
                continue
            if self.random.random() < RAM_LAMBS_CASTRATED:
                lamb.sex = "wether"
                self._slaughter(lamb, 500, 2600)
            else:
                self._slaughter(lamb, 150, 330)

    def _slaughter(self, lamb: Sheep, youngest: int, oldest: int) -> None:
        lamb.died = lamb.born + timedelta(days=int(self.random.integers(youngest, oldest)))
        lamb.end_cause = "slaughtered"

    def row(self, sheep: Sheep) -> dict[str, str]:
        """The sheep as entered; a slaughter still to come shows only as a note."""
        dead = sheep.died is not None and sheep.died <= AS_OF
        gone = sheep.left is not None
        note = sheep.may_breed_note
        if sheep.died is not None and sheep.sex in ("ram", "ewe"):
            note = "not selected, for meat"
        living = not dead and not gone
        sire = sheep.sire if sheep.sire_recorded else None
        index = "" if sheep.index is None else f"{INDEX_MEAN + INDEX_UNIT * sheep.index:.1f}"
        return {
            "id": sheep.id,
            "sex": sheep.sex,
            "sire": "" if sire is None else self.sheep[sire].id,
            "dam": "" if sheep.dam is None else self.sheep[sheep.dam].id,
            "born": sheep.born_text,
            "died": iso(sheep.died) if dead else "",
            "left": iso(sheep.left),
            "end_cause": sheep.end_cause if dead else "",
            "status": "living" if living else "gone" if gone else "dead",
            "holder": sheep.holder,
            "origin": sheep.origin,
            "line": sheep.line,
            "may_breed": "no" if living and note else "",
            "may_breed_note": note if living else "",
            "merit": index,
        }


_FLOCK_STARTS = (
    "Brannick", "Corvel", "Dunnish", "Eskarn", "Gorsel",
    "Hethrin", "Ickerlow", "Jossen", "Kaldrin", "Morvel",
)  # fmt: skip
_FLOCK_ENDS = ("Garth", "Fold", "Steading", "Rigg", "Beck", "Knott")
