"""What was understood of a scenario, in a terminal."""

from typing import TYPE_CHECKING

from probsoil.cli._evidence import print_evidence
from probsoil.cli._output import counted, print_table
from probsoil.report.text import event_text, percent_text, plain_percent

if TYPE_CHECKING:
    from rich.console import Console

    from probsoil.parameters import ParameterSpace
    from probsoil.scenario import Scenario, Stage
    from probsoil.scenario.limits import Limit

LEAST_CUT_SHOWN = 1e-6  # smaller shares are in the results, and only clutter here
LIMIT_UNITS = {
    "settlement": "m",
    "differential_settlement": "m",
    "time_to_consolidation": "years",
    "added_fill": "m3/m",
}


def print_scenario(console: "Console", scenario: "Scenario", space: "ParameterSpace") -> None:
    """Print layers, load, stages, parameters, correlations and limits.

    Parameters
    ----------
    console : Console
        Where to.
    scenario : Scenario
        What was read.
    space : ParameterSpace
        Its parameters.
    """
    console.print(
        f"{scenario.title}: {counted(scenario.realisations, 'realisation')} ({scenario.draws}), "
        f"seed {scenario.seed}, to {counted(scenario.horizon, 'year')}\n"
    )
    _print_layers(console, scenario, space)
    _print_stages(console, scenario)
    if scenario.drains is not None:
        text = scenario.drains.describe()
        console.print(f"{text[0].upper()}{text[1:]}\n")
    _print_stations(console, scenario)
    _print_parameters(console, scenario, space)
    _print_dependence(console, scenario)
    print_evidence(console, scenario, space)
    _print_limits(console, scenario)


def _print_layers(console: "Console", scenario: "Scenario", space: "ParameterSpace") -> None:
    mean, rows, top = space.at("mean"), [], 0.0
    for layer in scenario.layers:
        bottom = top + mean[f"{layer.name}.thickness"]
        rows.append((layer.name, layer.soil, f"{top:.2f}", f"{bottom:.2f}"))
        top = bottom
    print_table(console, "Layers, at mean thicknesses", ("layer", "soil", "top [m]", "bottom [m]"), rows)
    water = mean["site.water_table"]
    base = "" if "site.base_head" not in mean else f", water there at {mean['site.base_head']:.2f} m (mean)"
    console.print(f"Water table at {water:.2f} m (mean); {scenario.site.base} below the last layer{base}\n")


def _print_stages(console: "Console", scenario: "Scenario") -> None:
    from probsoil.assessment.works_text import uncertain_works
    from probsoil.ground.foundation import foundation_of
    from probsoil.scenario.amounts import text_of

    load = scenario.load
    if load.shape == "embankment":
        console.print(
            f"Load: embankment, crest {text_of(load.crest_width, 'm', what='wide')}, side slopes 1 on "
            f"{text_of(load.side_slope)}\n"
        )
    else:
        foundation = foundation_of(load)
        text = "over a wide area" if foundation is None else f"{load.shape}, {foundation.title}"
        console.print(f"Load: {text}{uncertain_works(scenario, 'load')}\n")
        if foundation is not None and not scenario.all_stations:
            console.print(f"Settlement is that of the {foundation.station}\n")
    _print_further_loads(console, scenario)
    print_table(
        console,
        "Stages",
        ("stage", "change", "start [years]", "end [years]"),
        ((stage.name, _change(stage), f"{stage.start:.3f}", f"{stage.end:.3f}") for stage in scenario.stages),
    )


def _print_further_loads(console: "Console", scenario: "Scenario") -> None:
    from probsoil.assessment.works_text import further_load_text, uncertain_works
    from probsoil.ground.site_forms import stage_forms
    from probsoil.ground.site_layout import further_load_forms

    for one in further_load_forms(scenario, stage_forms(scenario)):
        text = further_load_text(one) + uncertain_works(scenario, one.address)
        console.print(f"Further load {one.name}: {text}\n")


def _change(stage: "Stage") -> str:
    from probsoil.scenario.amounts import text_of

    on = "" if stage.load is None else f" on {stage.load}"
    if stage.excavate is not None:
        return f"{stage.excavate:g} m of soil dug out"
    if stage.height is not None:
        return f"{text_of(stage.height, 'm', what='of fill', signed=True)}{on}"
    return "" if stage.pressure is None else f"{text_of(stage.pressure, 'kPa', signed=True)}{on}"


def _print_stations(console: "Console", scenario: "Scenario") -> None:
    stations = scenario.all_stations
    if not stations:
        return
    rows = [
        (
            one.name,
            f"{one.x:g}",
            f"{one.y:g}",
            ", ".join(f"{name} {thickness:g} m" for name, thickness in one.thickness) or "-",
        )
        for one in stations
    ]
    headings = ("station", "x [m]", "y [m]", "mean thickness here")
    print_table(console, "Stations; limits look at the first unless they say otherwise", headings, rows)


def _print_parameters(console: "Console", scenario: "Scenario", space: "ParameterSpace") -> None:
    cut = {row.name: row.cut_share for row in space.summary() if row.cut_share >= LEAST_CUT_SHOWN}
    rows = []
    for quantity in scenario.quantities():
        text = quantity.distribution.describe(quantity.unit)
        if quantity.address in cut:
            text += f"; {percent_text(cut[quantity.address])} cut at its physical bounds"
        rows.append((quantity.address, text, quantity.meaning))
    print_table(console, "Parameters", ("parameter", "value", "meaning"), rows)


def _print_dependence(console: "Console", scenario: "Scenario") -> None:
    if scenario.dependence:
        print_table(
            console,
            "Correlations",
            ("between", "and", "rank correlation [-]"),
            ((*rule.between, f"{rule.rank_correlation:g}") for rule in scenario.dependence),
        )


def _print_limits(console: "Console", scenario: "Scenario") -> None:
    print_table(
        console,
        "Limits",
        ("limit", "exceeded when", "target chance"),
        (
            (
                limit.name,
                _event(scenario, limit),
                "-" if limit.target_probability is None else plain_percent(limit.target_probability),
            )
            for limit in scenario.limits
        ),
    )


def _event(scenario: "Scenario", limit: "Limit") -> str:
    """Return what exceeding a limit means, in the words the results use."""
    from probsoil.assessment.stations import place_text

    named = {key: getattr(limit, key, None) for key in ("at", "between", "degree")}
    time = {key: value for key, value in named.items() if value is not None}
    return event_text(
        {
            "quantity": limit.quantity,
            "time": time,
            "place_text": place_text(scenario, limit),
            "sense": limit.sense,
            "threshold": limit.threshold,
            "unit": LIMIT_UNITS.get(limit.quantity, "-"),
        }
    )
