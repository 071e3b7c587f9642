"""`photonfate audit`: independent checks of one stack."""

from pathlib import Path

import click


@click.command(short_help="Check a stack's answer by independent means.")
@click.argument("stack", type=click.Path(path_type=Path))
@click.option("--json", "as_json", is_flag=True, help="Print JSON, for machines.")
@click.option("--seed", type=click.IntRange(0), default=1, show_default=True, help="Of the rays followed by chance.")
def audit(stack: Path, as_json: bool, seed: int) -> None:
    """Check this stack's own answer: each line has a figure, a bound and a verdict. Exit status 1 when one fails.

    The result folder that `solve` wrote beside the stack file, if there is one, must hold the same averages.

    \b
    Example:
      photonfate start my-film
      photonfate audit my-film/stack.toml
    """
    import json

    from optics.errors import InputError
    from optics.output.audits import report
    from optics.output.result import averages_on_file, result_folder
    from optics.stackfile import read_stack
    from optics.study.audit import audit as audit_stack
    from optics.study.audit import of_tables, unreadable

    try:
        found = audit_stack(read_stack(stack), seed=seed, on_file=averages_on_file(result_folder(stack)))
    except InputError as error:
        if not of_tables(error):
            raise
        found = unreadable(str(stack), error)
    click.echo(json.dumps(found.plain(), indent=2) if as_json else report(found))
    if not found.passed:
        raise click.exceptions.Exit(1)
