"""``pairing describe``: how is the population doing?"""

from pairing.cli.options import (
    AsOfOption,
    Call,
    FormatOption,
    MapOption,
    OutOption,
    PolicyOption,
    QuietOption,
    RecordsArgument,
    SeedOption,
    UnknownParentsOption,
)


def describe(
    records: RecordsArgument,
    policy: PolicyOption = None,
    as_of: AsOfOption = None,
    column_map: MapOption = None,
    unknown_parents: UnknownParentsOption = None,
    output_format: FormatOption = None,
    out: OutOption = None,
    seed: SeedOption = 1,
    quiet: QuietOption = False,
) -> None:
    """How is the population doing?"""
    call = Call(
        records,
        policy,
        as_of,
        tuple(column_map or ()),
        unknown_parents,
        output_format,
        out,
        seed,
        quiet,
    )
    rules = call.read_policy()
    audit = call.audited()
    population = call.population(audit, rules)
    from pairing.report.describe_content import describe_answer

    call.give(
        describe_answer(
            population, audit.records, rules, call.about(audit.records, rules, population)
        )
    )
