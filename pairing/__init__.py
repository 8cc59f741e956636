"""Who should breed with whom next season in a managed population, and why.

The public names below load when they are first used, so that the command line starts fast.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING

__version__ = "0.1.0"

_WHERE = {
    "read_records": "pairing.records.readers",
    "Records": "pairing.records.table",
    "audit_records": "pairing.records.audit",
    "Audit": "pairing.records.audit",
    "Finding": "pairing.records.findings",
    "read_policy": "pairing.policy.reading",
    "Policy": "pairing.policy.rules",
    "build_pedigree": "pairing.pedigree.descent",
    "Pedigree": "pairing.pedigree.descent",
    "Kinship": "pairing.kinship.engine",
    "inbreeding_paths": "pairing.kinship.paths",
    "same_as": "pairing.kinship.named",
    "living_population": "pairing.population.diversity",
    "Population": "pairing.population.diversity",
    "propose_plan": "pairing.plan.plan",
    "Plan": "pairing.plan.plan",
    "check_mating": "pairing.plan.check",
    "MatingCheck": "pairing.plan.check",
    "animal_table": "pairing.report.tables",
    "kinship_table": "pairing.report.tables",
    "pair_table": "pairing.report.tables",
    "PairingError": "pairing.errors",
    "NoPlanError": "pairing.errors",
    "RecordsError": "pairing.errors",
    "PolicyError": "pairing.errors",
    "UnknownAnimalError": "pairing.errors",
}

__all__ = ["__version__", "kinship", *sorted(_WHERE)]

if TYPE_CHECKING:
    from pairing.kinship.engine import Kinship as Kinship
    from pairing.kinship.paths import inbreeding_paths as inbreeding_paths
    from pairing.pedigree.descent import Pedigree as Pedigree
    from pairing.pedigree.descent import build_pedigree as build_pedigree
    from pairing.plan.plan import Plan as Plan
    from pairing.plan.plan import propose_plan as propose_plan
    from pairing.policy.reading import read_policy as read_policy
    from pairing.policy.rules import Policy as Policy
    from pairing.population.diversity import Population as Population
    from pairing.population.diversity import living_population as living_population
    from pairing.records.audit import Audit as Audit
    from pairing.records.audit import audit_records as audit_records
    from pairing.records.readers import read_records as read_records
    from pairing.records.table import Records as Records


def __getattr__(name: str) -> object:
    if name == "kinship":
        return import_module("pairing.kinship")
    if name not in _WHERE:
        raise AttributeError(f"module 'pairing' has no attribute {name!r}")
    return getattr(import_module(_WHERE[name]), name)


def __dir__() -> list[str]:
    return sorted(__all__)
