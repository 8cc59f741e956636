"""What `animals` and `kinship` say about the population."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from pairing.errors import KinshipError
from pairing.plan.candidates import find_candidates
from pairing.records.plain_dates import standard_date
from pairing.report.content import (
    Answer,
    Section,
    Table,
    assumptions,
    census,
    counted,
    described,
    kinship_shown,
    share_shown,
)

if TYPE_CHECKING:
    import numpy.typing as npt

    from pairing.policy.rules import Policy
    from pairing.population.diversity import Population
    from pairing.records.table import Records

ANIMAL_COLUMNS = (
    "id",
    "name",
    "sex",
    "born",
    "living",
    "holder",
    "sire",
    "dam",
    "known_ancestry",
    "inbreeding",
    "mean_kinship",
    "kinship_value",
    "genome_uniqueness",
    "genome_uniqueness_se",
    "equivalent_generations",
    "offspring",
    "living_offspring",
    "may_breed",
    "may_breed_note",
)
NOT_YET = {
    "kinship_value": "kinship_value needs a life table, which this version does not make.",
    "genome_uniqueness": "genome_uniqueness needs a gene drop, which this version does not make.",
}
LARGEST_SQUARE = 5_000
_SHOWN_SQUARE = 8
_SHOWN_ANIMALS = 60


def animal_fields(population: Population, policy: Policy) -> list[dict[str, Any]]:
    """One entry an animal, in file order, parents without a row last."""
    pedigree = population.pedigree
    candidates = find_candidates(population, policy)
    may_breed = {*candidates.males.tolist(), *candidates.females.tolist()}
    living = set(population.living.tolist())
    offspring, alive = np.zeros(len(pedigree), dtype=int), np.zeros(len(pedigree), dtype=int)
    for child in range(len(pedigree)):
        for parent in {int(pedigree.sire[child]), int(pedigree.dam[child])}:
            if parent >= 0:
                offspring[parent] += 1
                alive[parent] += child in living
    has_living = population.size > 0
    entries = []
    for place in pedigree.file_order.tolist():
        animal = pedigree.animals[place]
        born = pedigree.born(place)
        entries.append(
            {
                "id": pedigree.ids[place],
                "name": pedigree.fact(place, "name") or None,
                "sex": pedigree.sexes[place],
                "born": standard_date(born) if born else None,
                "living": place in living,
                "holder": pedigree.fact(place, "holder") or None,
                "sire": _parent(population, place, "sire"),
                "dam": _parent(population, place, "dam"),
                "known_ancestry": float(population.known_ancestry[place]),
                "inbreeding": float(population.kinship.inbreeding[place]),
                "mean_kinship": float(population.mean_kinship[place]) if has_living else None,
                "kinship_value": None,
                "genome_uniqueness": None,
                "genome_uniqueness_se": None,
                "equivalent_generations": float(population.equivalent_generations[place]),
                "offspring": int(offspring[place]),
                "living_offspring": int(alive[place]),
                "may_breed": place in may_breed,
                "may_breed_note": candidates.refused.get(place)
                or (None if place in may_breed or animal is None else "not living")
                or (None if animal is not None else "no row of its own"),
            }
        )
    return entries


def _parent(population: Population, place: int, role: str) -> str | None:
    pedigree = population.pedigree
    parent = int(getattr(pedigree, role)[place])
    if parent >= 0:
        return pedigree.ids[parent]
    possible = getattr(pedigree, f"possible_{role}s").get(place)
    if possible is None:
        return None
    return "|".join(f"{pedigree.ids[each]}:{chance:g}" for each, chance in possible.parents)


def animals_answer(
    population: Population, records: Records, policy: Policy, about: dict[str, Any]
) -> Answer:
    """The content of `animals`: every animal's worth to the gene pool."""
    entries = animal_fields(population, policy)
    ranked = sorted(
        (entry for entry in entries if entry["living"]),
        key=lambda entry: (round(entry["mean_kinship"], 4), entry["id"]),
    )
    rows = [
        (
            " ".join(part for part in (entry["id"], entry["name"]) if part),
            entry["sex"],
            entry["born"],
            kinship_shown(entry["mean_kinship"]),
            kinship_shown(entry["inbreeding"]),
            share_shown(entry["known_ancestry"]),
            entry["living_offspring"],
            entry["may_breed_note"] or "may breed",
        )
        for entry in ranked[:_SHOWN_ANIMALS]
    ]
    table = Table(
        (
            "animal",
            "sex",
            "born",
            "mean kinship",
            "inbreeding",
            "ancestry known",
            "living young",
            "this season",
        ),
        described(rows),
        numeric=(3, 4, 5, 6),
    )
    sentences = [
        "The lower its mean kinship with the living, the rarer an animal's genes. Read it beside "
        "the share of ancestry that is known: unknown ancestors make genes look rarer than they "
        "are."
    ]
    if len(ranked) > _SHOWN_ANIMALS:
        sentences.append(f"The first {_SHOWN_ANIMALS} of {len(ranked):,}; --format csv has all.")
    return Answer(
        headline=(
            f"{counted(population.size, 'living animal')} ({census(population)}) among "
            f"{counted(len(entries), 'animal')} in the records.",
        ),
        sections=(
            Section("Living animals, rarest genes first", tuple(sentences), (table,)),
            assumptions(population, records, policy),
        ),
        fields={"animals": entries},
        csv_columns=ANIMAL_COLUMNS,
        csv_rows=tuple(tuple(entry[column] for column in ANIMAL_COLUMNS) for entry in entries),
        about=about,
        notes=(*NOT_YET.values(), *population.warnings),
    )


def kinship_answer(
    population: Population,
    records: Records,
    policy: Policy,
    about: dict[str, Any],
    *,
    places: npt.NDArray[np.int64],
    among: str,
    long: bool,
) -> Answer:
    """The content of `kinship`: the kinship of every pair among `places`.

    Raises
    ------
    KinshipError
        If the square would have more than 5,000 animals a side.
    """
    if len(places) > LARGEST_SQUARE:
        raise KinshipError(
            f"{len(places):,} animals would make a table of {len(places) ** 2:,} kinships.",
            remedy=f"Name fewer with --among (at most {LARGEST_SQUARE:,}).",
        )
    ids = [population.pedigree.ids[place] for place in places.tolist()]
    square = population.kinship.block(places, places)
    if long:
        columns: tuple[str, ...] = ("first", "second", "kinship")
        rows: list[tuple[Any, ...]] = [
            (ids[a], ids[b], float(square[a, b]))
            for a in range(len(ids))
            for b in range(a, len(ids))
        ]
    else:
        columns = ("", *ids)
        rows = [
            (name, *(float(value) for value in row)) for name, row in zip(ids, square, strict=True)
        ]
    sections = [
        *_square_sections(population, places, square),
        assumptions(population, records, policy),
    ]
    return Answer(
        headline=(f"Kinship of {counted(len(ids), 'animal')} ({among}).",),
        sections=tuple(sections),
        fields={"ids": ids, "kinship": [[float(value) for value in row] for row in square]},
        csv_columns=columns,
        csv_rows=tuple(rows),
        about=about,
        notes=population.warnings,
    )


def _square_sections(
    population: Population, places: npt.NDArray[np.int64], square: npt.NDArray[np.float64]
) -> list[Section]:
    labels = [population.pedigree.label(place) for place in places.tolist()]
    explained = (
        "Kinship is the chance that a gene of one animal and a gene of the other are copies of "
        "one ancestral gene: the inbreeding their young would have, and half the relationship."
    )
    if 0 < len(labels) <= _SHOWN_SQUARE:
        rows = [
            (label, *(kinship_shown(value) for value in row))
            for label, row in zip(labels, square.tolist(), strict=True)
        ]
        table = Table(("", *labels), described(rows), numeric=tuple(range(1, len(labels) + 1)))
        return [Section("Every pair", (explained,), (table,))]
    upper = np.triu_indices(len(labels), k=1)
    order = np.argsort(-square[upper], kind="stable")[:20]
    rows = [
        (labels[upper[0][each]], labels[upper[1][each]], kinship_shown(float(square[upper][each])))
        for each in order.tolist()
    ]
    table = Table(("first", "second", "kinship"), described(rows), numeric=(2,))
    return [
        Section(
            "The most related pairs",
            (explained, "The whole table is in the answer of --format csv."),
            (table,),
        )
    ]
