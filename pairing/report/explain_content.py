"""What `audit --explain` says: one kind of finding, why it matters, and how it is settled."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from pairing.errors import OptionError
from pairing.records.explanations import EXPLANATIONS
from pairing.records.findings import KINDS
from pairing.report.content import Answer, Section, Table
from pairing.spelling import did_you_mean

if TYPE_CHECKING:
    from collections.abc import Sequence


def explain_answer(kind: str, about: dict[str, Any]) -> Answer:
    """What one kind of finding means, why it matters, and how it is settled.

    Raises
    ------
    OptionError
        If there is no such kind; the remedy offers the nearest.
    """
    wanted = "-".join(kind.strip().casefold().replace("_", " ").replace("-", " ").split())
    if wanted not in KINDS:
        raise OptionError(
            f'--explain: there is no kind of finding "{kind}".',
            remedy=did_you_mean(wanted, KINDS) or f"Known: {', '.join(sorted(KINDS))}.",
        )
    meant, told = KINDS[wanted], EXPLANATIONS[wanted]
    decision = _decision_text(told.decision)
    fields = {
        "kind": wanted,
        "severity": meant.severity,
        "stops": meant.stops,
        "meaning": meant.meaning,
        "why": told.why,
        "treated": told.treated,
        "settle": told.settle,
        "decision": decision or None,
        "example": told.example,
        "message": told.message,
    }
    gravity = f"a {meant.severity}" if meant.severity != "error" else "an error"
    if meant.stops:
        gravity += " that leaves kinship undefined"
    return Answer(
        headline=(f"{wanted}: {meant.meaning}.", f"It is {gravity}."),
        sections=(
            Section("Why it matters", (told.why,)),
            Section("How it is treated until it is settled", (told.treated,)),
            _example_section(told.example, told.example_of, told.message),
            Section("How to settle it in the file", (told.settle,)),
            Section(
                "How to settle it by a decision in the policy",
                (decision,)
                if decision
                else ("No decision settles this kind; settle it as above.",),
            ),
        ),
        fields=fields,
        csv_columns=tuple(fields),
        csv_rows=(tuple(fields.values()),),
        about=about,
    )


def _decision_text(lines: Sequence[str]) -> str:
    if not lines:
        return ""
    return "\n".join(["[[records.decisions]]", *lines, 'why = "letter of the holder, 2024"'])


def _example_section(example: str, example_of: str, message: str) -> Section:
    lines = [line.split(",") for line in example.splitlines()]
    width = max(map(len, lines))
    header, *rows = [[*line, *("",) * (width - len(line))] for line in lines]
    numbered = [(str(number), *row) for number, row in enumerate(rows, start=2)]
    table = Table(("line", *header), tuple(numbered), numeric=(0,))
    return Section(f"An example, in {example_of}", (f"Said of it: {message}",), (table,))
