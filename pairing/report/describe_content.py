"""What `describe` says: who there is, what diversity is kept, and how sure that is."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

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
    from pairing.policy.rules import Policy
    from pairing.population.diversity import Population
    from pairing.records.table import Records

_A_YEAR = 366


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
    pedigree = population.pedigree
    founders = population.founders
    known = population.mean_of(population.known_ancestry) if population.size else None
    depth = population.mean_of(population.equivalent_generations) if population.size else None
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
    pedigree = population.pedigree
    rows = pedigree.order[population.living]
    heard_of = np.zeros(len(rows), dtype=bool)
    for dates in pedigree.view.dates.values():
        recent = dates.known & (dates.earliest <= population.as_of)
        recent &= population.as_of - dates.latest.astype(np.int64) <= _A_YEAR
        heard_of |= recent[rows]
    return int(population.numbers[~heard_of].sum())
