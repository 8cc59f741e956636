"""What `animals`, `kinship` and `describe` say about the population."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from pairing.errors import KinshipError
from pairing.plan.candidates import find_candidates
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
        for parent in (pedigree.sire[child], pedigree.dam[child]):
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
                "born": born.text if born else None,
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


def describe_answer(
    population: Population, records: Records, policy: Policy, about: dict[str, Any]
) -> Answer:
    """The content of `describe`: how the population is doing."""
    fields, notes = describe_fields(population)
    now = kinship_shown(fields["gene_diversity"])
    headline = (
        f"{counted(population.size, 'living animal')} ({census(population)}) hold {now} of the "
        "gene diversity of the population their founders came from."
        if population.size
        else "No animal counts as living, so there is no diversity to describe."
    )
    counts = [
        ("living animals", f"{fields['living']:,}"),
        ("males, females, unknown sex", census(population)),
        ("animals in the records", f"{fields['animals']:,}"),
        ("founders", f"{fields['founders']:,}"),
        ("founders with living descendants", f"{fields['founders_represented']:,}"),
    ]
    kept = [
        ("gene diversity", now),
        ("mean kinship", kinship_shown(fields["mean_kinship"])),
        ("mean inbreeding", kinship_shown(fields["mean_inbreeding"])),
        ("founder equivalents", _decimal(fields["founder_equivalents"])),
        ("founder genome equivalents", _decimal(fields["founder_genome_equivalents"])),
    ]
    sure = [
        (
            "ancestry known",
            "-" if fields["known_ancestry"] is None else share_shown(fields["known_ancestry"]),
        ),
        ("equivalent complete generations", _decimal(fields["equivalent_generations"])),
    ]
    sections = [
        Section("Who", (), (Table(("", ""), described(counts), numeric=(1,)),)),
        Section(
            "What is kept",
            (
                "Gene diversity is 1 less the mean kinship. Founder genome equivalents: so many "
                "founders, equally used and without loss, would hold the same.",
            ),
            (Table(("", ""), described(kept), numeric=(1,)),),
        ),
        _founder_section(population),
        Section("How sure", (), (Table(("", ""), described(sure), numeric=(1,)),)),
    ]
    if notes:
        sections.append(Section("Notes", notes))
    sections.append(assumptions(population, records, policy))
    flat = {key: value for key, value in fields.items() if not isinstance(value, list | dict)}
    return Answer(
        headline=(headline,),
        sections=tuple(sections),
        fields=fields,
        csv_columns=tuple(flat),
        csv_rows=(tuple(flat.values()),),
        about=about,
        notes=(*notes, *population.warnings),
    )


def _decimal(value: float | None) -> str:
    return "-" if value is None else f"{value:.2f}"


def _founder_section(population: Population) -> Section:
    founders = population.founders
    order = np.argsort(-founders.contributions, kind="stable")[:20]
    rows = [
        (
            population.pedigree.label(int(founders.places[each])),
            f"{founders.contributions[each]:.1%}",
        )
        for each in order.tolist()
    ]
    sentence = "Share of the living animals' genes expected to come from each founder."
    if len(founders.places) > len(rows):
        sentence += f" The {len(rows)} largest of {len(founders.places)}."
    table = Table(("founder", "share of genes"), described(rows), numeric=(1,))
    return Section("What the founders left", (sentence,), (table,))


def describe_fields(population: Population) -> tuple[dict[str, Any], tuple[str, ...]]:
    """The machine-readable description, and why some of its figures are missing."""
    pedigree, living = population.pedigree, population.living
    founders = population.founders
    known = float(population.known_ancestry[living].mean()) if len(living) else None
    depth = float(population.equivalent_generations[living].mean()) if len(living) else None
    presumed_living = _presumed_living(population)
    pathways = ("sire_son", "sire_daughter", "dam_son", "dam_daughter", "overall")
    routes = ("sex_ratio", "family_size", "inbreeding_rate", "kinship_rate")
    fields = {
        "animals": len(pedigree),
        "living": population.size,
        "males": population.count_of_sex("male"),
        "females": population.count_of_sex("female"),
        "sex_unknown": population.count_of_sex("unknown"),
        "presumed_living": presumed_living,
        "founders": founders.founders,
        "founders_represented": len(founders.places),
        "gene_diversity": population.gene_diversity,
        "mean_kinship": population.population_mean_kinship,
        "mean_inbreeding": population.mean_inbreeding,
        "founder_equivalents": founders.founder_equivalents,
        "ancestor_equivalents": None,
        "founder_genome_equivalents": population.founder_genome_equivalents,
        "founder_alleles": 2 * len(founders.places),
        "founder_alleles_kept": None,
        "gene_diversity_ceiling": None,
        "known_ancestry": known,
        "equivalent_generations": depth,
        "generation_interval": dict.fromkeys(pathways),
        "effective_size": dict.fromkeys(routes),
        "founder_table": [
            {"id": pedigree.ids[int(place)], "contribution": float(share), "retention": None}
            for place, share in zip(founders.places, founders.contributions, strict=True)
        ],
        "trend": [],
    }
    notes: tuple[str, ...] = (
        "Not made by this version: ancestor_equivalents, founder_alleles_kept, "
        "gene_diversity_ceiling, retention (they need a gene drop), generation_interval, "
        "effective_size and trend.",
    )
    if known is not None and known < 0.995:
        notes = (
            *notes,
            f"{1 - known:.0%} of the living animals' ancestry is unknown: founder "
            "equivalents are of the known part, and mean kinship is a lower bound.",
        )
    return fields, notes


def _presumed_living(population: Population) -> int:
    """Living animals whose last dated event lies more than a year back: nothing says they live."""
    if population.as_of is None:
        return population.size
    count = 0
    for place in population.living.tolist():
        animal = population.pedigree.animals[place]
        dates = (
            []
            if animal is None
            else [
                each.latest for each in animal.dates.values() if each.earliest <= population.as_of
            ]
        )
        if not dates or population.as_of - max(dates) > 366:
            count += 1
    return count
