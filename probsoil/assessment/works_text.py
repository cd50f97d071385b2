"""What is built, in words: load, further loads and stages."""

from probsoil.ground.further_load import FurtherLoadForm
from probsoil.ground.site_model import SiteModel
from probsoil.scenario import Scenario
from probsoil.scenario.checks.common import years_text
from probsoil.scenario.distributions import Constant, Distribution
from probsoil.scenario.loads import EmbankmentLoad, Stage
from probsoil.scenario.quantities import Quantity


def load_text(scenario: Scenario, site: SiteModel) -> str:
    """Return the load in words.

    Parameters
    ----------
    scenario : Scenario
        As read.
    site : SiteModel
        As laid out, at the means.

    Returns
    -------
    text : str
        Shape and sides; what of them is uncertain and how.
    """
    return _shape_text(scenario, site) + uncertain_works(scenario, "load")


def uncertain_works(scenario: Scenario, address: str) -> str:
    """Return in words which numbers of a load are uncertain, and how.

    Parameters
    ----------
    scenario : Scenario
        As read.
    address : str
        First part of the load's addresses.

    Returns
    -------
    text : str
        Begins with a semicolon; empty where all are plain numbers.
    """
    found: list[Quantity] = [
        one for one in scenario.quantities() if one.of_works and one.address.rpartition(".")[0] == address
    ]
    parts = [
        f"{one.address.rpartition('.')[2].replace('_', ' ')} {one.distribution.describe(one.unit)}"
        for one in found
    ]
    return f"; these are means, of {' and of '.join(parts)}" if parts else ""


def _shape_text(scenario: Scenario, site: SiteModel) -> str:
    if isinstance(scenario.load, EmbankmentLoad) and site.embankment is not None:
        shape = site.embankment
        return (
            f"embankment, top {shape.crest_width:g} m wide at its greatest height, {shape.full_height:g} m, "
            f"side slopes {shape.side_slope:g} horizontal to 1 vertical, base {shape.base_width:g} m wide"
            + _beside(scenario.load)
            + _replaced(site)
            + _held(site)
        )
    return (
        "load over a wide area" + _replaced(site) + _held(site)
        if site.foundation is None
        else site.foundation.title
    )


def further_load_text(load: FurtherLoadForm) -> str:
    """Return a further load in words.

    Parameters
    ----------
    load : FurtherLoadForm
        Shape and place.

    Returns
    -------
    text : str
        Shape, sides and where its centre is.
    """
    if load.embankment is not None:
        shape, across = load.embankment, f"centreline {load.x:g} m across"
        return (
            f"embankment, top {shape.crest_width:g} m wide at its greatest height, {shape.full_height:g} m, "
            f"side slopes {shape.side_slope:g} horizontal to 1 vertical; {across}"
        )
    if load.foundation is None:
        return "load over a wide area"
    plan = load.foundation.title.partition(", rough")[0]
    if load.foundation.shape == "strip":
        return f"strip, {plan}; centreline {load.x:g} m across"
    return f"{load.foundation.shape}, {plan}; centre {load.x:g} m across and {load.y:g} m along"


def _replaced(site: SiteModel) -> str:
    """Return in words what ground is dug out below the load, where any is."""
    if site.foundation is not None or site.face == 0.0:
        return ""
    return f"; the ground below it is dug out {site.face:g} m deep, and its fill stands on the bottom"


def _held(site: SiteModel) -> str:
    """Return in words until when the level is held, where it is."""
    if site.hold_level_until is None:
        return ""
    until = years_text(site.hold_level_until)
    return f"; fill is added as the ground settles, to hold its level until {until}"


def _beside(load: EmbankmentLoad) -> str:
    """Return berms and traffic in words, where there are any."""
    text = ""
    if load.berm_width is not None:
        text += f", with a berm {load.berm_width:g} m wide and {load.berm_height:g} m high on each side"
    if load.traffic != Constant(value=0.0):
        text += f"; traffic on the top {load.traffic.describe('kPa')}"
    return text


def stage_change(stage: Stage) -> str:
    """Return in words what a stage changes.

    Parameters
    ----------
    stage : Stage
        As read.

    Returns
    -------
    text : str
        Such as ``1.2 m of fill laid``; with its distribution where the amount is uncertain.
    """
    change = []
    if stage.height is not None:
        change.append(_amount(stage.height, "m", "of fill ", ("laid", "taken away")))
    if stage.pressure is not None:
        change.append(_amount(stage.pressure, "kPa", "", ("added", "removed")))
    if stage.excavate is not None:
        change.append(f"{stage.excavate:g} m of soil dug out")
    return " and ".join(change) + ("" if stage.load is None else f" on {stage.load}")


def _amount(amount: Distribution, unit: str, what: str, done: tuple[str, str]) -> str:
    mean = amount.expectation
    text = f"{abs(mean):g} {unit} {what}{done[0] if mean > 0.0 else done[1]}"
    return text if isinstance(amount, Constant) else f"about {text} ({amount.describe(unit)})"


def stage_rows(scenario: Scenario, site: SiteModel) -> list[dict[str, object]]:
    """Return the stages of the load.

    Parameters
    ----------
    scenario : Scenario
        As read.
    site : SiteModel
        Its stages, at the means.

    Returns
    -------
    rows : list of dict
        Name, times, change in words, and fill and pressure of the load that is assessed after each stage.
    """
    rows: list[dict[str, object]] = []
    pressed = any(stage.pressure is not None for stage in scenario.stages if stage.load is None)
    for stage in scenario.stages:
        pressure = float(site.pressure(stage.end))
        rows.append(
            {
                "name": stage.name,
                "start": stage.start,
                "end": stage.end,
                "change_text": stage_change(stage),
                "height_after": round(float(site.fill_height(stage.end)), 9),
                "pressure_after": round(pressure, 9) if pressed else None,
            }
        )
    return rows
