"""Every doubt about a set of records, all at once."""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass
from typing import TYPE_CHECKING

from pairing.errors import RecordsError
from pairing.records.animals import Animal, read_animals
from pairing.records.fields import FOUNDER_ORIGINS, MISSING_PARENT
from pairing.records.findings import SEVERITIES, Finding
from pairing.records.loops import loops_of_descent
from pairing.spelling import listed, nearest_names

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

    from pairing.records.table import Records

_LIKE_DIGITS = str.maketrans("oil", "011")
PARENT_SEX = {"sire": "male", "dam": "female"}


@dataclass(frozen=True, slots=True)
class Audit:
    """Records with their cleaned view and every finding.

    Attributes
    ----------
    records
        The rows as written.
    animals
        One entry an animal with a row of its own, in file order.
    roles
        For each id named as a parent: the roles (``sire``, ``dam``) it is *surely* named in.
    findings
        Gravest first, then by row.
    """

    records: Records
    animals: tuple[Animal, ...]
    roles: Mapping[str, frozenset[str]]
    findings: tuple[Finding, ...]

    @property
    def stopping(self) -> tuple[Finding, ...]:
        """The findings that leave kinship undefined."""
        return tuple(finding for finding in self.findings if finding.stops)

    def count(self, severity: str) -> int:
        """How many findings have this severity."""
        return sum(finding.severity == severity for finding in self.findings)

    def require_kinship(self) -> None:
        """Raise a `RecordsError` that names every fault leaving kinship undefined, if any."""
        if self.stopping:
            faults = len(self.stopping)
            raise RecordsError(
                f"{self.records.name}: {faults} fault{'s' if faults > 1 else ''} "
                f"leave{'s' if faults == 1 else ''} kinship undefined.",
                details=[finding.line(self.records.name) for finding in self.stopping],
                remedy="Mend the rows named above; `pairing audit` lists every doubt.",
            )


def audit_records(records: Records) -> Audit:
    """Check records and collect every finding; nothing is raised and no row is changed."""
    animals, findings = read_animals(records)
    findings = [*records.findings, *findings]
    by_id = {animal.id: animal for animal in animals}
    children = _children_by_parent(animals)
    column = records.columns
    findings += _own_parents(animals, column)
    findings += _same_parent_twice(animals, column)
    findings += _doubtful_names(animals, children, by_id, column)
    findings += _stubs(children, by_id, column)
    findings += _roles_and_sexes(children, by_id, column)
    findings += _date_order(animals, by_id, column)
    findings += _founders_in_doubt(animals, "origin" in records.fields)
    findings += loops_of_descent(animals, by_id)
    rank = {severity: place for place, severity in enumerate(SEVERITIES)}
    findings.sort(key=lambda finding: (rank[finding.severity], finding.kind, finding.row or 0))
    roles = {
        parent: frozenset(role for role, _child in named) for parent, named in children.items()
    }
    return Audit(records, tuple(animals), roles, tuple(findings))


def _children_by_parent(animals: Iterable[Animal]) -> dict[str, list[tuple[str, Animal]]]:
    children: dict[str, list[tuple[str, Animal]]] = defaultdict(list)
    for animal in animals:
        for role in ("sire", "dam"):
            for parent, _chance in getattr(animal, role):
                if parent != animal.id:
                    children[parent].append((role, animal))
    return dict(children)


def _own_parents(animals: Iterable[Animal], column: Mapping[str, str]) -> list[Finding]:
    return [
        Finding(
            "own-parent",
            f"{animal.id} is recorded as its own {role}.",
            f"Correct the {role} of {animal.id}, or leave it blank if it is not known.",
            id=animal.id,
            row=animal.row,
            column=column.get(role),
            found=animal.id,
        )
        for animal in animals
        for role in ("sire", "dam")
        if any(parent == animal.id for parent, _chance in getattr(animal, role))
    ]


def _same_parent_twice(animals: Iterable[Animal], column: Mapping[str, str]) -> list[Finding]:
    return [
        Finding(
            "sire-is-dam",
            f"{animal.id} has {animal.sire[0][0]} as its sire and as its dam.",
            "Right only where animals fertilise themselves; otherwise correct one of the two.",
            id=animal.id,
            row=animal.row,
            column=column.get("sire"),
            found=animal.sire[0][0],
        )
        for animal in animals
        if len(animal.sire) == 1 and animal.sire == animal.dam and animal.sire[0][0] != animal.id
    ]


def _doubtful_names(
    animals: Iterable[Animal],
    children: Mapping[str, list[tuple[str, Animal]]],
    by_id: Mapping[str, Animal],
    column: Mapping[str, str],
) -> list[Finding]:
    """Ids that read as "no parent", and clones of animals that nobody knows."""
    findings = []
    for animal in animals:
        if animal.id.casefold() in MISSING_PARENT:
            findings.append(
                Finding(
                    "id-means-unknown",
                    f'"{animal.id}" is an animal\'s id and also a word for an unknown parent; as '
                    "a parent it is read as unknown.",
                    "Give the animal another id.",
                    id=animal.id,
                    row=animal.row,
                    column=column.get("id"),
                    found=animal.id,
                )
            )
        copied = animal.text.get("clone_of")
        if copied is not None and copied not in by_id and copied not in children:
            findings.append(
                Finding(
                    "clone-without-row",
                    f'{animal.id} is a clone of "{copied}", which is not in the records.',
                    "Add a row for it, or correct the id; until then its own parents count.",
                    id=animal.id,
                    row=animal.row,
                    column=column.get("clone_of"),
                    found=copied,
                )
            )
    return findings


def _stubs(
    children: Mapping[str, list[tuple[str, Animal]]],
    by_id: Mapping[str, Animal],
    column: Mapping[str, str],
) -> list[Finding]:
    findings = []
    absent = [parent for parent in children if parent not in by_id]
    look_alike = _look_alikes(absent, by_id)
    for parent in absent:
        role, child = children[parent][0]
        named = listed((each.id for _role, each in children[parent]), most=4)
        hint = f' "{look_alike[parent]}" is spelled almost alike.' if parent in look_alike else ""
        findings.append(
            Finding(
                "parent-without-row",
                f'{role} "{parent}" of {named} has no row of its own.{hint}',
                "It counts as an animal of unknown ancestry; add a row if more is known.",
                id=parent,
                row=child.row,
                column=column.get(role),
                found=parent,
            )
        )
    return findings


def _look_alikes(absent: list[str], by_id: Mapping[str, Animal]) -> dict[str, str]:
    """Ids with a row that differ from an absent one in case, leading zeros or O for 0 at most."""

    def essence(name: str) -> str:
        return name.casefold().translate(_LIKE_DIGITS).lstrip("0")

    known = {essence(name): name for name in by_id}
    exact = {name: known[essence(name)] for name in absent if essence(name) in known}
    if len(absent) <= 20 and len(by_id) <= 5000:
        for name in absent:
            close = nearest_names(name, by_id) if name not in exact and len(name) > 4 else []
            if close and len(close[0]) == len(name):
                differing = sum(a != b for a, b in zip(close[0], name, strict=True))
                if differing == 1:
                    exact[name] = close[0]
    return exact


def _roles_and_sexes(
    children: Mapping[str, list[tuple[str, Animal]]],
    by_id: Mapping[str, Animal],
    column: Mapping[str, str],
) -> list[Finding]:
    findings = []
    for parent, named in children.items():
        roles = {role for role, _child in named}
        animal = by_id.get(parent)
        first = {role: next(child for each, child in named if each == role) for role in roles}
        sex = animal.sex if animal else "unknown"
        if len(roles) == 2 and sex != "hermaphrodite":
            findings.append(
                Finding(
                    "both-sexes",
                    f"{parent} is the sire of {first['sire'].id} (line {first['sire'].row}) and "
                    f"the dam of {first['dam'].id} (line {first['dam'].row}).",
                    "Correct one of the two; if both are right, record its sex as hermaphrodite.",
                    id=parent,
                    row=animal.row if animal else first["dam"].row,
                    column=column.get("sex"),
                    found=sex,
                )
            )
        elif animal is not None:
            role = next(iter(roles))
            findings += _one_role(animal, role, first[role], column)
    return findings


def _one_role(animal: Animal, role: str, child: Animal, column: Mapping[str, str]) -> list[Finding]:
    wanted = PARENT_SEX[role]
    if animal.sex in (wanted, "hermaphrodite"):
        return []
    if animal.sex == "unknown":
        return [
            Finding(
                "sex-not-recorded",
                f"{animal.id} is the {role} of {child.id} (line {child.row}), but its sex is not "
                "recorded.",
                f"Record it as {wanted} if that is right; until then it is not paired.",
                id=animal.id,
                row=animal.row,
                column=column.get("sex"),
                found="unknown",
            )
        ]
    return [
        Finding(
            "sex-against-role",
            f'{role} "{animal.id}" of {child.id} is recorded as {animal.sex} (line {animal.row}).',
            f"A {role} must be {wanted}. Correct the sex of {animal.id} or the {role} of "
            f"{child.id}.",
            id=animal.id,
            row=child.row,
            column=column.get(role),
            found=animal.sex,
        )
    ]


def _date_order(
    animals: Iterable[Animal], by_id: Mapping[str, Animal], column: Mapping[str, str]
) -> list[Finding]:
    findings = []
    for animal in animals:
        born, died = animal.born, animal.dates.get("died")
        if born and died and died.latest < born.earliest:
            findings.append(
                Finding(
                    "death-before-birth",
                    f"{animal.id} died {died.text} but was born {born.text}.",
                    "Correct one of the two dates.",
                    id=animal.id,
                    row=animal.row,
                    column=column.get("died"),
                    found=died.text,
                )
            )
        for role in ("sire", "dam") if born else ():
            for parent, _chance in getattr(animal, role):
                theirs = by_id[parent].born if parent in by_id else None
                if born and theirs and parent != animal.id and theirs.earliest >= born.latest:
                    same_day = theirs.earliest == born.latest
                    if same_day and not (theirs.exact and born.exact):
                        continue
                    findings.append(
                        Finding(
                            "parent-younger",
                            f"{role} {parent} of {animal.id} was born {theirs.text} "
                            f"(line {by_id[parent].row}), {animal.id} itself {born.text}.",
                            f"A parent is older than its young. Correct a date or the {role}.",
                            id=animal.id,
                            row=animal.row,
                            column=column.get(role),
                            found=parent,
                        )
                    )
    return findings


def _founders_in_doubt(animals: list[Animal], has_origin: bool) -> list[Finding]:
    findings = [
        Finding(
            "founder-with-parents",
            f"{animal.id} has origin {animal.origin} and recorded parents; the parents are used.",
            "Nothing to do if the parents are right.",
            id=animal.id,
            row=animal.row,
            found=animal.origin,
        )
        for animal in animals
        if animal.origin in FOUNDER_ORIGINS and (animal.sire or animal.dam)
    ]
    births = [
        animal.born.earliest for animal in animals if animal.born and (animal.sire or animal.dam)
    ]
    if has_origin or not births:
        return findings
    first_birth = min(births)
    return findings + [
        Finding(
            "doubtful-founder",
            f"{animal.id} (born {animal.born.text}) counts as a founder only because both "
            "parents are blank.",
            "Add a column origin (wild, foundation, imported, captive, unknown) to settle it.",
            id=animal.id,
            row=animal.row,
        )
        for animal in animals
        if not (animal.sire or animal.dam or animal.origin)
        and animal.born
        and animal.born.earliest > first_birth
    ]
