"""``pairing animals``: how valuable is each animal to the gene pool?"""

from pairing.cli.options import Call


def animals(call: Call) -> None:
    """How valuable is each animal to the gene pool?"""
    rules = call.read_policy()
    audit = call.usable(rules)
    population = call.population(audit, rules)
    from pairing.report.population_content import animals_answer

    call.give(
        animals_answer(
            population, audit.records, rules, call.about(audit.records, rules, population)
        ),
        audit,
    )
