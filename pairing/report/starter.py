"""A policy to start from: what the records show, with every choice explained."""

from __future__ import annotations

import datetime
import json
import math
from dataclasses import fields
from pathlib import Path
from typing import TYPE_CHECKING

from pairing.plan.candidates import ages_at_breeding
from pairing.population.living import yearly_losses
from pairing.records.rules import RecordRules
from pairing.report.content import census

if TYPE_CHECKING:
    from collections.abc import Sequence

    from pairing.population.diversity import Population
    from pairing.records.table import Records


_MATES_OF_A_SHARED_MALE = 4
_A_SEASON = 367


def starter_policy(
    population: Population,
    records: Records,
    *,
    rules: RecordRules | None = None,
    column_map: Sequence[str] = (),
) -> str:
    """The text of a policy file for these records; every command accepts it as it stands.

    Parameters
    ----------
    rules
        What is settled about the records, decisions included; the policy keeps it.
    column_map
        What was said of the records' columns; the policy then says it for every command.
    """
    blocks = [
        _programme(population, records),
        _records(population, rules or RecordRules(), column_map),
        _breeding_age(population),
        _mating(population),
        _limits(population),
        _weights(),
        _decisions(population),
        _holders(population),
        _lines(population),
        _conditions(records),
    ]
    return "\n".join(block for block in blocks if block)


def _a_year_after(day: datetime.date) -> datetime.date:
    """The same day of the next year; the day before where there is none."""
    if (day.month, day.day) == (2, 29):
        return datetime.date(day.year + 1, 2, 28)
    return day.replace(year=day.year + 1)


def _text(value: str) -> str:
    """A TOML string: JSON's escapes are valid in it."""
    return json.dumps(value, ensure_ascii=False)


def _programme(population: Population, records: Records) -> str:
    name = Path(records.name).stem.replace("-", " ").replace("_", " ").strip() or "our programme"
    lines = [
        f"# Rules of the programme, written from {records.name}. Edit what is not yours.",
        f"# Living animals: {census(population)} (males.females.unknown).",
        "",
        "[programme]",
        f"name = {_text(name[0].upper() + name[1:])}",
    ]
    if population.as_of is not None:
        latest = datetime.date.max.toordinal() - _A_SEASON
        day = datetime.date.fromordinal(min(population.as_of, latest))
        season = day + datetime.timedelta(days=1)
        end = _a_year_after(season) - datetime.timedelta(days=1)
        lines += [
            f"season_start = {season.isoformat()}   # ages are judged on this day",
            f"season_end = {end.isoformat()}",
            f"as_of = {day.isoformat()}          # the population is counted on this day",
        ]
    return "\n".join([*lines, ""])


def _records(population: Population, rules: RecordRules, column_map: Sequence[str]) -> str:
    """What is settled about the records, kept; what may be, offered."""
    lines = [
        "[records]",
        'unknown_parents = "unrelated"   # parents not recorded share no genes with anybody',
    ]
    if column_map:
        entries = ", ".join(_text(each) for each in column_map)
        lines.append(f"map = [{entries}]   # what your columns mean")
    if population.pedigree.possible_sires:
        lines.append(
            "litter_shares_sire = true       # litter-mates with one list of possible "
            "sires have one sire"
        )
    settled = {
        "date_order": rules.date_order and _text(rules.date_order),
        "selfing": "true" if rules.selfing else None,
        "gestation": rules.gestation and _text(str(rules.gestation)),
        "sperm_storage": rules.sperm_storage and _text(str(rules.sperm_storage)),
        "largest_litter": rules.largest_litter and str(rules.largest_litter),
    }
    offered = (
        ("date_order", '"day-first"', "for dates such as 03/04/2019"),
        ("selfing", "true", "one animal may rightly be both parents of another"),
        ("gestation", '"63 days"', "from here on: what tells births that cannot be"),
        ("sperm_storage", '"2 years"', ""),
        ("largest_litter", "8", ""),
    )
    for key, example, note in offered:
        value = settled[key]
        text = f"{key} = {value}" if value else f"# {key} = {example}"
        lines.append(f"{text:<31}# {note}" if note else text)
    lines += [*_parent_ages(rules), *_record_decisions(rules)]
    return "\n".join([*lines, ""])


def _parent_ages(rules: RecordRules) -> list[str]:
    if not rules.parent_age:
        return [
            f'{"# [parent_age]":<31}# in years, or as "8 weeks": ages at which a birth is believed',
            "# male = [1, 20]",
            "# female = [1, 18]",
        ]
    lines = []
    for line in dict.fromkeys(line for line, _sex in rules.parent_age):
        lines += ["", f"[parent_age.{_text(line)}]" if line else "[parent_age]"]
        for (of_line, sex), window in rules.parent_age.items():
            if of_line == line:
                ages = ", ".join(_text(str(each)) for each in (window.youngest, window.oldest))
                lines.append(f"{sex} = [{ages}]")
    return lines


def _record_decisions(rules: RecordRules) -> list[str]:
    """The decisions about the records, as they were made."""
    lines = []
    for each in rules.decisions:
        lines += ["", "[[records.decisions]]"]
        for field in fields(each):
            value = getattr(each, field.name)
            needed = field.name == "value" and each.decision == "set"
            if value in ("", (), None) and not needed:
                continue
            if isinstance(value, tuple):
                shown = f"[{', '.join(map(_text, value))}]"
            elif field.name == "when":
                shown = _text(value.text)
            else:
                shown = str(value) if isinstance(value, int) else _text(value)
            lines.append(f"{field.name} = {shown}")
    return lines


def _breeding_age(population: Population) -> str:
    ages = ages_at_breeding(population.pedigree)
    if not ages:
        return (
            '# [breeding_age]               # in years, or as "8 weeks", "18 months"\n'
            "# male = [2, 15]\n# female = [2, 12]\n"
        )
    lines = ["[breeding_age]                 # as in these records: change to what is right"]
    for sex in ("male", "female"):
        if sex in ages:
            youngest, oldest = ages[sex]
            lines.append(f"{sex} = [{_age(youngest)}, {_age(oldest, up=True)}]")
    return "\n".join([*lines, ""])


def _age(years: float, *, up: bool = False) -> str:
    if years >= 2:
        return str(math.ceil(years) if up else math.floor(years))
    months = max(1, math.ceil(years * 12) if up else math.floor(years * 12))
    return f'"{months} month{"" if months == 1 else "s"}"'


def _mating(population: Population) -> str:
    shared = _several_females_a_male(population)
    system = (
        ("one-male-several-females", "pairs") if shared else ("pairs", "one-male-several-females")
    )
    return (
        "[mating]\n"
        f"system = {_text(system[0])}   # or {_text(system[1])}\n"
        "allow_closest = false          # parent x offspring and full sibs stay out\n"
    )


def _several_females_a_male(population: Population) -> bool:
    """Whether sires of these records had young with clearly more females than one each."""
    pedigree = population.pedigree
    pairs = {
        (sire, dam)
        for sire, dam in zip(pedigree.sire.tolist(), pedigree.dam.tolist(), strict=True)
        if sire >= 0 and dam >= 0
    }
    sires = {sire for sire, _dam in pairs}
    return len(pairs) >= _MATES_OF_A_SHARED_MALE * len(sires) > 0


def _limits(population: Population) -> str:
    losses = yearly_losses(population.pedigree, population.as_of)
    young = max(1, math.floor((losses or 0) + 0.5)) if losses else 12
    why = "a year's deaths and departures" if losses else "for instance"
    alone = "# " if _several_females_a_male(population) else ""
    lines = (
        ("offspring_inbreeding = 0.0625", "as between first cousins; meeting it is allowed"),
        (f"# young = {young}", f"{why}; without it, what replaces losses, as limits allow"),
        ("young_per_litter = 1", ""),
        (f"{alone}litters_per_male = 1", ""),
        ("litters_per_female = 1", ""),
        ("# share_per_male = 0.05", "one male's largest share of the young"),
        ("# moves = 6", "transfers between holders at most"),
    )
    text = [f"{key:<31}# {note}" if note else key for key, note in lines]
    return "\n".join(["[limits]", *text, ""])


def _weights() -> str:
    return (
        "[weights]                      # what counts, and how much\n"
        "inbreeding = 1.0               # low inbreeding of the young\n"
        "diversity = 1.0                # gene diversity of the population\n"
        "travel = 0.0                   # short moves\n"
        "merit = 0.0                    # a high index of the parents\n"
    )


def _decisions(population: Population) -> str:
    pedigree, living = population.pedigree, population.living.tolist()
    by_sex = {
        sex: next((pedigree.ids[each] for each in living if pedigree.sexes[each] == sex), "A1")
        for sex in ("male", "female")
    }
    return (
        "# Standing decisions: take the # away and fill in.\n"
        "# [[pairs]]\n"
        f"# sire = {_text(by_sex['male'])}\n"
        f"# dam = {_text(by_sex['female'])}\n"
        '# decision = "together"        # together, together-no-young, must-breed or never\n'
        '# reason = "bonded pair"\n'
        "# [[animals]]\n"
        f"# id = {_text(by_sex['female'])}\n"
        '# decision = "rest"            # rest, must-breed, or at-most with litters = 1\n'
        '# reason = "hip injury"\n'
        "# Decisions about doubtful records, which themselves never change.\n"
        "# [[records.decisions]]\n"
        '# decision = "set"             # use-row, merge, drop-link, set or accept\n'
        f"# id = {_text(by_sex['female'])}\n"
        '# field = "born"\n'
        '# value = "2019-05"\n'
        '# who = "studbook keeper"\n'
        '# why = "the birth book says so"\n'
    )


def _holders(population: Population) -> str:
    names = sorted(
        {population.pedigree.fact(each, "holder") for each in population.living.tolist()} - {""}
    )
    if not names:
        return ""
    head = ["# Where holders are, for distances: take the # away and fill in."]
    for name in names[:40]:
        head += [
            "# [[holders]]",
            f"# name = {_text(name)}",
            "# latitude = 0.0    # degrees north",
            "# longitude = 0.0   # degrees east",
        ]
    return "\n".join([*head, ""])


def _lines(population: Population) -> str:
    names = sorted(
        {population.pedigree.fact(each, "line") for each in population.living.tolist()} - {""}
    )
    if len(names) < 2:
        return ""
    text = ["# Lines are kept apart unless they may cross."]
    for name in names:
        text += ["[[lines]]", f"name = {_text(name)}", "may_cross = []"]
    return "\n".join([*text, ""])


def _conditions(records: Records) -> str:
    names = sorted(
        {
            column[: -len(ending)]
            for column in records.carried
            for ending in ("_test", "_seen")
            if column.endswith(ending) and len(column) > len(ending)
        }
    )
    if not names:
        return ""
    text = ["# Heritable conditions found in the records."]
    for name in names:
        text += ["[[conditions]]", f"name = {_text(name)}", 'inheritance = "recessive"']
    return "\n".join([*text, ""])
