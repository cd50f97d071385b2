"""`probsoil schema`: the JSON Schema of the scenario file."""


def schema() -> None:
    """Print the JSON Schema of the scenario file, for editors that complete from it."""
    from probsoil.cli._output import answering, print_json
    from probsoil.scenario import scenario_schema

    with answering():
        print_json(scenario_schema())
