"""The literature behind every method and constant in `pairing`.

Code and docs point here by key; `docs/methods.md` lists what each is used for.
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Source:
    """One publication: who, when, what, where."""

    authors: str
    year: int
    title: str
    published_in: str
    used_for: str

    def __str__(self) -> str:
        return f"{self.authors} ({self.year}). {self.title}. {self.published_in}."


SOURCES: dict[str, Source] = {
    "WRIGHT_1922": Source(
        "Wright, S.",
        1922,
        "Coefficients of inbreeding and relationship",
        "American Naturalist 56:330-338",
        "the path method: kinship as a sum over chains of descent through common ancestors",
    ),
    "EMIK_TERRILL_1949": Source(
        "Emik, L. O. & Terrill, C. E.",
        1949,
        "Systematic procedures for calculating inbreeding coefficients",
        "Journal of Heredity 40:51-55",
        "the tabular method: kinship of every pair, parents before offspring",
    ),
    "HENDERSON_1976": Source(
        "Henderson, C. R.",
        1976,
        "A simple method for computing the inverse of a numerator relationship matrix used in "
        "prediction of breeding values",
        "Biometrics 32:69-83",
        "the factors T D T' of the relationship matrix, with Mendelian sampling variances D",
    ),
    "HENDERSON_1988": Source(
        "Henderson, C. R.",
        1988,
        "Use of an average numerator relationship matrix for multiple-sire joining",
        "Journal of Animal Science 66:1614-1621",
        "kinship when a parent is one of several with given chances",
    ),
    "COLLEAU_2002": Source(
        "Colleau, J.-J.",
        2002,
        "An indirect approach to the extensive calculation of relationship coefficients",
        "Genetics Selection Evolution 34:409-421",
        "products of the relationship matrix with a vector, without the matrix",
    ),
    "SARGOLZAEI_2005": Source(
        "Sargolzaei, M., Iwaisaki, H. & Colleau, J.-J.",
        2005,
        "A fast algorithm for computing inbreeding coefficients in large populations",
        "Journal of Animal Breeding and Genetics 122:325-331",
        "inbreeding of a large herdbook, one pass for all mates of a sire",
    ),
    "LACY_1989": Source(
        "Lacy, R. C.",
        1989,
        "Analysis of founder representation in pedigrees: founder equivalents and founder genome "
        "equivalents",
        "Zoo Biology 8:111-123",
        "founder equivalents",
    ),
    "LACY_1995": Source(
        "Lacy, R. C.",
        1995,
        "Clarification of genetic terms and their use in the management of captive populations",
        "Zoo Biology 14:565-577",
        "gene diversity, mean kinship and founder genome equivalents, self-kinship included",
    ),
    "BALLOU_LACY_1995": Source(
        "Ballou, J. D. & Lacy, R. C.",
        1995,
        "Identifying genetically important individuals for management of genetic variation in "
        "pedigreed populations",
        "in: Population Management for Survival and Recovery, Columbia University Press, 76-111",
        "choosing parents by mean kinship",
    ),
    "CABALLERO_TORO_2000": Source(
        "Caballero, A. & Toro, M. A.",
        2000,
        "Interrelations between effective population size and other pedigree tools for the "
        "management of conserved populations",
        "Genetical Research 75:331-343",
        "contributions decide next season's gene diversity, mates only its inbreeding",
    ),
    "FERNANDEZ_2001": Source(
        "Fernandez, J., Toro, M. A. & Caballero, A.",
        2001,
        "Practical implementation of optimal management strategies in conservation programmes: "
        "a mate selection method",
        "Animal Biodiversity and Conservation 24.2:17-24",
        "contributions and mates in one step when matings are limited",
    ),
    "MEUWISSEN_1997": Source(
        "Meuwissen, T. H. E.",
        1997,
        "Maximizing the response of selection with a predefined rate of inbreeding",
        "Journal of Animal Science 75:934-940",
        "weighing merit against kinship",
    ),
    "KELLEY_1960": Source(
        "Kelley, J. E.",
        1960,
        "The cutting-plane method for solving convex programs",
        "Journal of the Society for Industrial and Applied Mathematics 8:703-712",
        "a proven lower bound of the objective from tangents of its convex part",
    ),
    "MACCLUER_1983": Source(
        "MacCluer, J. W. et al.",
        1983,
        "Inbreeding and pedigree structure in Standardbred horses",
        "Journal of Heredity 74:394-399",
        "how complete a pedigree is",
    ),
}
