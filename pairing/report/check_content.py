"""What `check` says: the verdict first, then where the inbreeding would come from."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from pairing.plan.check import (
    BREAKS_LIMIT,
    CANNOT_BE_JUDGED,
    NO_LIMITS_SET,
    WITHIN_LIMITS,
)
from pairing.report.content import (
    CAUTION,
    Answer,
    Section,
    Table,
    assumptions,
    counted,
    described,
    kinship_shown,
)

if TYPE_CHECKING:
    from collections.abc import Sequence

    from pairing.plan.check import Break, MatingCheck, Partner
    from pairing.policy.rules import Policy
    from pairing.population.diversity import Population
    from pairing.records.table import Records

VERDICTS = {
    WITHIN_LIMITS: "keeps every limit of the policy",
    BREAKS_LIMIT: "breaks a limit",
    CANNOT_BE_JUDGED: "cannot be judged",
    NO_LIMITS_SET: "no limit on inbreeding is set, so there is nothing to break",
}
"""Every verdict in words."""

_CSV_COLUMNS = (
    "sire",
    "dam",
    "offspring_inbreeding",
    "highest_over_possible_parents",
    "same_as",
    "verdict",
    "known_ancestry_sire",
    "known_ancestry_dam",
    "population_mean_inbreeding",
    "other_paths",
    "gene_diversity_gain",
)
NOT_YET = "by_founder, survival_against_unrelated and conditions are not made by this version."


def check_answer(
    population: Population,
    checks: Sequence[MatingCheck],
    records: Records,
    policy: Policy,
    about: dict[str, Any],
) -> Answer:
    """The content of `check` for one mating or several."""
    broken = [each for each in checks if each.verdict == BREAKS_LIMIT]
    sections: list[Section] = []
    if len(checks) > 1:
        sections.append(_summary(population, checks))
    for each in checks[:10]:
        sections += _mating_sections(population, each, titled=len(checks) > 1)
    sections.append(assumptions(population, records, policy))
    fields = [mating_fields(population, each) for each in checks]
    notes = [NOT_YET, *population.warnings]
    if any(each["highest_over_possible_parents"] is None for each in fields):
        notes.append(
            "highest_over_possible_parents is empty where an ancestor is one of several: the "
            "inbreeding shown is the mean over them."
        )
    return Answer(
        headline=_headline(population, checks, broken),
        sections=tuple(sections),
        fields={"matings": fields},
        csv_columns=_CSV_COLUMNS,
        csv_rows=tuple(tuple(each[column] for column in _CSV_COLUMNS) for each in fields),
        about=about,
        notes=tuple(notes),
        cautions=(CAUTION,),
    )


def _headline(
    population: Population, checks: Sequence[MatingCheck], broken: Sequence[MatingCheck]
) -> tuple[str, ...]:
    if len(checks) > 1:
        return (
            f"{counted(len(checks), 'mating')} checked; {len(broken)} "
            f"{'breaks' if len(broken) == 1 else 'break'} a limit.",
        )
    check = checks[0]
    pedigree = population.pedigree
    pair = f"{pedigree.label(check.sire)} x {pedigree.label(check.dam)}"
    rules = list(dict.fromkeys(f"rule {each.rule} ({_rule_name(each)})" for each in check.breaks))
    verdict = f"breaks {' and '.join(rules)}" if rules else VERDICTS[check.verdict]
    if check.verdict == CANNOT_BE_JUDGED:
        verdict += f": {check.doubt}"
    return (
        f"{pair}: {verdict}.",
        _inbreeding_sentence(check),
    )


def _inbreeding_sentence(check: MatingCheck) -> str:
    if check.paths.inbreeding == 0:
        return "The parents are unrelated in these records: their young would not be inbred."
    return (
        f"Their young would be inbred to {kinship_shown(check.offspring_inbreeding)}: "
        f"{check.same_as}."
    )


def _rule_name(broken: Break) -> str:
    return broken.limit.replace("_", " ")


def _summary(population: Population, checks: Sequence[MatingCheck]) -> Section:
    pedigree = population.pedigree
    ordered = sorted(
        checks, key=lambda each: (-round(each.offspring_inbreeding, 4), each.sire, each.dam)
    )
    rows = [
        (
            pedigree.label(each.sire),
            pedigree.label(each.dam),
            kinship_shown(each.offspring_inbreeding),
            each.same_as,
            ", ".join(dict.fromkeys(f"breaks rule {item.rule}" for item in each.breaks))
            or VERDICTS[each.verdict],
        )
        for each in ordered
    ]
    table = Table(("male", "female", "inbreeding", "", "verdict"), described(rows), numeric=(2,))
    return Section("Every mating, most inbred first", (), (table,))


def _mating_sections(population: Population, check: MatingCheck, *, titled: bool) -> list[Section]:
    pedigree = population.pedigree
    prefix = f"{pedigree.label(check.sire)} x {pedigree.label(check.dam)}: " if titled else ""
    sections = []
    if check.breaks:
        rows = [
            (f"rule {each.rule}, {_rule_name(each)}", _shown(each.allowed), _shown(each.found))
            for each in check.breaks
        ]
        sections.append(
            Section(
                _title(prefix, "Limits broken"),
                (),
                (Table(("limit", "allowed", "found"), described(rows)),),
            )
        )
    sections.append(_paths_section(check, prefix))
    mean = population.mean_inbreeding
    sentences = [
        f"The living animals are inbred to {kinship_shown(mean)} on average.",
        *check.notes,
    ]
    if check.gene_diversity_gain is not None:
        sentences.insert(
            1,
            "One young would change the population's gene diversity by "
            f"{check.gene_diversity_gain:+.4f}.",
        )
    sections.append(Section(_title(prefix, "Beside the population"), tuple(sentences)))
    better = _better_rows(population, check)
    if better:
        table = Table(
            ("for", "partner", "inbreeding of young", "diversity gained"),
            described(better),
            numeric=(2, 3),
        )
        sections.append(Section(_title(prefix, "Better partners"), (), (table,)))
    return sections


def _title(prefix: str, title: str) -> str:
    return f"{prefix}{title[0].lower()}{title[1:]}" if prefix else title


def _shown(value: str | float) -> str:
    return value if isinstance(value, str) else kinship_shown(value)


def _paths_section(check: MatingCheck, prefix: str) -> Section:
    title = _title(prefix, "Where the inbreeding comes from")
    paths = check.paths
    if paths.inbreeding == 0:
        return Section(title, ("The parents share no ancestor in these records.",))
    rows = [
        (
            each.ancestor,
            kinship_shown(each.ancestor_inbreeding),
            " < ".join(each.through_sire),
            " < ".join(each.through_dam),
            f"{each.contribution:.6f}",
        )
        for each in paths.paths
    ]
    if paths.other_paths > 0:
        rows.append(("all other loops", "", "", "", f"{paths.other_paths:.6f}"))
    rows.append(("together", "", "", "", f"{paths.inbreeding:.6f}"))
    table = Table(
        ("shared ancestor", "its inbreeding", "from the sire up", "from the dam up", "adds"),
        described(rows),
        numeric=(1, 4),
    )
    return Section(
        title,
        (
            "Each line is one loop, from either parent up to a shared ancestor (< reads: child "
            "of). The loops add up to the inbreeding.",
        ),
        (table,),
    )


def _better_rows(population: Population, check: MatingCheck) -> list[tuple[object, ...]]:
    pedigree = population.pedigree
    return [
        (
            pedigree.label(place),
            pedigree.label(each.place),
            kinship_shown(each.offspring_inbreeding),
            f"{each.gene_diversity_gain:+.4f}",
        )
        for place, partners in (
            (check.dam, check.better_for_dam),
            (check.sire, check.better_for_sire),
        )
        for each in partners
    ]


def mating_fields(population: Population, check: MatingCheck) -> dict[str, Any]:
    """The machine-readable answer about one mating."""
    ids = population.pedigree.ids
    return {
        "sire": ids[check.sire],
        "dam": ids[check.dam],
        "offspring_inbreeding": check.offspring_inbreeding,
        "highest_over_possible_parents": None
        if _uncertain(population, check)
        else check.offspring_inbreeding,
        "same_as": check.same_as,
        "verdict": check.verdict,
        "breaks": [
            {"limit": each.limit, "allowed": each.allowed, "found": each.found}
            for each in check.breaks
        ],
        "known_ancestry_sire": float(population.known_ancestry[check.sire]),
        "known_ancestry_dam": float(population.known_ancestry[check.dam]),
        "population_mean_inbreeding": population.mean_inbreeding,
        "paths": [
            {
                "ancestor": each.ancestor,
                "ancestor_inbreeding": each.ancestor_inbreeding,
                "through_sire": list(each.through_sire),
                "through_dam": list(each.through_dam),
                "contribution": each.contribution,
            }
            for each in check.paths.paths
        ],
        "other_paths": check.paths.other_paths,
        "by_founder": [],
        "gene_diversity_gain": check.gene_diversity_gain,
        "survival_against_unrelated": None,
        "conditions": [],
        "better_for_dam": [_partner(population, each) for each in check.better_for_dam],
        "better_for_sire": [_partner(population, each) for each in check.better_for_sire],
    }


def _partner(population: Population, partner: Partner) -> dict[str, Any]:
    return {
        "id": population.pedigree.ids[partner.place],
        "offspring_inbreeding": partner.offspring_inbreeding,
        "gene_diversity_gain": partner.gene_diversity_gain,
    }


def _uncertain(population: Population, check: MatingCheck) -> bool:
    pedigree = population.pedigree
    if not pedigree.possible_sires and not pedigree.possible_dams:
        return False
    uncertain = pedigree.possible_sires.keys() | pedigree.possible_dams.keys()
    waiting, seen = [check.sire, check.dam], {check.sire, check.dam}
    while waiting:
        place = waiting.pop()
        if place in uncertain:
            return True
        new = pedigree.parents_of(place) - seen
        seen |= new
        waiting += new
    return False
