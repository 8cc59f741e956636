"""``pairing describe``: how is the population doing?"""

from pairing.cli.options import Call


def describe(call: Call) -> None:
    """How is the population doing?"""
    rules = call.read_policy()
    audit = call.usable(rules)
    population = call.population(audit, rules)
    from pairing.report.describe_content import describe_answer

    call.give(
        describe_answer(
            population, audit.records, rules, call.about(audit.records, rules, population)
        ),
        audit,
    )
